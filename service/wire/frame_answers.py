"""What is answered about frames, as models for the document.

Left out: how the answers are made (operations).
"""

from typing import Annotated

from pydantic import Field, RootModel

from service.wire.answer_models import AnsweredPose, ArmIdentity, Finding, Open
from service.wire.controller_answers import FlatPose, InlineRefusal
from service.wire.models import UnitsName

_Path = Annotated[list[str], Field(description="the frames on the way, from `in` to `of`")]


class CellIdentity(Open):
    """Which state of a cell an answer came from."""

    name: str
    revision: int
    digest: str


class FoundPose(Open):
    """The pose of one frame in another, by the fewest relations.

    `say` is the product of poses that it is; `(a in b)^-1` is taken backwards.
    """

    of: str
    in_: Annotated[str, Field(alias="in")]
    pose: AnsweredPose
    path: _Path
    say: str
    findings: list[Finding]


class Closure(Open):
    """What a loop is off by, walked around from the frame `at`."""

    position: float
    angle: float
    at: str


class Loop(Open):
    """A loop of relations: its frames, the first one again at the end."""

    frames: list[str]
    closure: Closure
    closes: bool


class NamedRelation(Open):
    """A relation, with its place in the request; null where an arm or the cell told it."""

    of: str
    in_: Annotated[str, Field(alias="in")]
    relation: int | None


class Residual(NamedRelation):
    """What a relation is off by from the estimate.

    `normalised` is the root of what the weighted sum of squares loses without it, `redundancy`
    the share, 0 to 1, of a mistake in it that would show.
    """

    position: float
    angle: float
    normalised: float
    redundancy: float


class Suspect(NamedRelation):
    """The relation that most likely is wrong, and those that nothing tells from it."""

    normalised: float
    threshold: float
    beyond_chance: bool
    alike: list[NamedRelation]
    say: str


class EstimatedPose(Open):
    """The pose of one frame in another that fits all relations best."""

    of: str
    in_: Annotated[str, Field(alias="in")]
    pose: AnsweredPose


class EstimateAnswer(Open):
    """Weighted least squares over all relations.

    `misfit` is 1 where relations are off by as much as their standard deviations say, and null
    where none is more than needed.
    """

    converged: bool
    iterations: int
    degrees_of_freedom: int
    misfit: float | None
    answers: list[EstimatedPose]
    residuals: list[Residual]
    redundancies_exact: bool
    suspect: Suspect | None


class FramesAnswer(Open):
    """Pairs asked for, in their order, every independent loop, and the estimate if asked for."""

    units: UnitsName
    arms: list[ArmIdentity] | None = None
    cell: CellIdentity | None = None
    answers: list[FoundPose]
    loops: list[Loop]
    findings: list[Finding]
    estimate: EstimateAnswer | None = None


class SingleRelation(Open):
    """The nested answer to one relation: of several codes the highest, and what tells it apart."""

    ok: bool
    code: int
    seq: int
    tag: int
    t_ms: int
    arm: ArmIdentity
    cell: CellIdentity | None = None
    units: UnitsName
    answers: list[FoundPose]


class RelationReply(RootModel[SingleRelation | FlatPose | InlineRefusal]):
    """A relation, nested or flat, or a refusal with status 200."""
