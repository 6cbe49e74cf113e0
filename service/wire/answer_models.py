"""The bodies that are answered, as models for the OpenAPI document; answers may grow.

Left out: what is asked with (models.py), and answers of one posture, stored arms and problems.
"""

from typing import Annotated, Any, Literal

from pydantic import BaseModel, ConfigDict, Field

from service.wire.models import Arm, UnitsName


class Open(BaseModel):
    """Base of answers, which may grow."""

    model_config = ConfigDict(extra="allow")


class Finding(Open):
    """What the caller should know about an answer."""

    code: int
    name: str
    say: str
    measure: float
    threshold: float
    unit: str
    joint: int | None = None
    row: int | None = None


class AnsweredOrientation(Open):
    """An orientation as answered."""

    form: str
    values: list[Any]


class AnsweredPose(Open):
    """A pose as answered."""

    position: list[float]
    orientation: AnsweredOrientation


class LostMotion(Open):
    """A unit twist, in metres and radians, that no joint motion can produce, in the frame asked."""

    linear: list[float]
    angular: list[float]
    say: str


class TravelTo(Open):
    """The joint that reaches the singular place first, and how far it has to go."""

    joint: int
    value: float
    unit: str


class ToolSpeed(Open):
    """Largest tool speed along the weakest direction at full joint speeds."""

    linear: float
    angular: float


class Singularity(Open):
    """How near a posture is to losing a direction of motion."""

    state: Literal["regular", "near", "singular"]
    kinds: list[str]
    joints: list[int]
    task: Any
    smallest_singular_value: float
    condition_number: float | None
    manipulability: float
    characteristic_length: float
    lost_motion: list[LostMotion]
    travel_to: TravelTo | None
    tool_speed: ToolSpeed | None


class ItemProblem(Open):
    """Why one item could not be answered."""

    code: str
    pointer: str
    say: str
    value: Any = None
    way_out: str


class OutlineAxis(Open):
    """One row's axis: the line comes to it at `from` and leaves it at `to`."""

    row: int
    joint: int | None
    slides: bool
    from_: Annotated[list[float], Field(alias="from")]
    to: list[float]
    direction: list[float]


class TravelUsed(Open):
    """How much of a travel is used; `share` is 0 at its lower stop and 1 at its upper."""

    of: str
    joint: int | None
    row: int | None
    value: float
    unit: str
    travel: list[float] | None
    working_travel: list[float] | None
    share: float | None


class Outline(Open):
    """What a drawing of the arm needs, in the frame and units asked for; matrices are 4 x 4."""

    axes: list[OutlineAxis]
    line: list[list[float]]
    base: list[list[float]]
    flange: list[list[float]]
    tool: list[list[float]]
    travel: list[TravelUsed]


class Nearest(Open):
    """The named frame nearest to the tool point, which is at `position` in it."""

    frame: str
    distance: float
    position: list[float]
    say: str


class PoseItem(Open):
    """The tool pose of one joint vector."""

    ok: bool
    code: int
    position: list[float] | None
    orientation: AnsweredOrientation | None
    findings: list[Finding]
    singularity: Singularity | None = None
    links: list[AnsweredPose] | None = None
    outline: Outline | None = None
    nearest: Nearest | None = None
    problem: ItemProblem | None = None


class JacobianItem(Open):
    """The Jacobian of one joint vector."""

    ok: bool
    code: int
    matrix: list[list[float]] | None
    singular_values: list[float] | None
    singularity: Singularity | None = None
    findings: list[Finding]
    twists: list[float] | None = None
    speeds: list[float] | None = None
    efforts: list[float] | None = None
    problem: ItemProblem | None = None


class ArmIdentity(Open):
    """Which exact numbers an answer came from."""

    name: str
    revision: int | None
    digest: str
    table_digest: str
    setup_digest: str


class PosesAnswer(Open):
    """Tool poses, one for each joint vector, in the order asked."""

    arm: ArmIdentity
    units: UnitsName
    frame: str
    tool: Any
    poses: list[PoseItem]


class JacobiansAnswer(Open):
    """Jacobians, one for each joint vector, in the order asked."""

    arm: ArmIdentity
    units: UnitsName
    frame: str
    tool: Any
    jacobians: list[JacobianItem]


class ConversionAnswer(Open):
    """The same arm in the convention asked for."""

    arm: Arm
    findings: list[Finding]
    units: UnitsName
