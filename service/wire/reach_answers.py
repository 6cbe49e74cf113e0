"""What is answered about reach, as models for the document.

Left out: how the answers are made (operations).
"""

from typing import Any, Literal

from pydantic import RootModel

from service.wire.answer_models import (
    AnsweredPose,
    ArmIdentity,
    Finding,
    ItemProblem,
    Open,
    Singularity,
)
from service.wire.controller_answers import InlineRefusal
from service.wire.models import UnitsName
from service.wire.travel_answers import AnsweredApproach


class Reason(Open):
    """Why a target cannot be reached as asked: at which stage, by how much, the nearest pose."""

    code: str
    say: str
    stage: str
    shortfall: float
    unit: str
    nearest: AnsweredPose | None


class SolutionFinding(Finding):
    """What is to be known of a solution; `excess` is by how much a limit is exceeded."""

    excess: float | None = None


class Solution(Open):
    """Joint values that bring the tool to the target, and how well.

    `margin` is the smallest share of travel left, null without travel limits. `approach` stands
    where one was asked for and looked at: beyond the first that succeeds with `solutions` `all`.
    """

    joints: list[float]
    margin: float | None
    branch: str
    singularity: Singularity | None
    position_error: float
    angle_error: float
    findings: list[SolutionFinding]
    approach: AnsweredApproach | None = None


class Witness(Open):
    """One posture of a family."""

    joints: list[float]


class Family(Open):
    """Postures that can be passed through without the tool leaving the target.

    `interval` is of the first free joint, in `unit`.
    """

    free_joints: list[int]
    interval: list[list[float]]
    unit: str
    witness: Witness
    relation: str | None = None


class ReachResult(Open):
    """One target: verdict, what it rests on, and solutions, the best first.

    `ok` says that the first solution can be used; `found` how many there are, told or not.
    """

    name: str | None
    ok: bool
    code: int
    verdict: Literal["reachable", "outside-travel", "unreachable", "not-found"] | None
    proof: str | None
    reason: Reason | None
    solutions: list[Solution]
    families: list[Family]
    found: int
    findings: list[Finding]
    problem: ItemProblem | None = None


class Method(Open):
    """How answers are found, in words, and what a no rests on."""

    proof: str
    say: str


class Summary(Open):
    """How many targets there are of each verdict."""

    targets: int
    reachable: int
    outside_travel: int
    unreachable: int
    not_found: int
    refused: int


class _Answers(Open):
    """What answers about one target and about many share."""

    arm: ArmIdentity
    units: UnitsName
    frame: str
    tool: Any
    method: Method
    results: list[ReachResult]


class ReachAnswers(_Answers):
    """Targets in the order asked, and how many there are of each verdict."""

    summary: Summary


class SingleReach(_Answers):
    """The nested answer about one target, and what tells it from a late one."""

    ok: bool
    code: int
    seq: int
    tag: int
    t_ms: int


class FlatReach(Open):
    """The answer on one level: `q1` ... `qn` stand between `solutions` and `margin`.

    `ok` 0 is a refusal or a no, without numbers.
    """

    ok: Literal[0, 1]
    code: int
    flags: int
    seq: int
    tag: int
    t_ms: int
    verdict: Literal["reachable", "outside-travel", "unreachable", "not-found", ""]
    solutions: int
    margin: float
    state: Literal["regular", "near", "singular", "none", ""]
    units: str
    revision: int
    digest: str


class ReachReply(RootModel[SingleReach | FlatReach | InlineRefusal]):
    """Whether one target can be reached, nested or flat, or a refusal with status 200."""
