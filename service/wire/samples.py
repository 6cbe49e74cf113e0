"""What is asked and told about samples of reach, as models, and the columns of their tables.

Left out: how samples are drawn (the core) and how an answer is sent (bulk).
"""

from collections.abc import Sequence
from typing import Annotated, Any, Literal

from pydantic import Field

from kinematics.reach.samples import MOST_SEED
from service.wire.answer_models import ArmIdentity, Open
from service.wire.models import AnyArm, AnyTool, FormName, Strict, UnitsName

MOST_SAMPLES = 1_000_000
"""In one request; surveys of more are long work."""

MOST_LISTED = 100_000
"""In a JSON answer, which tells some 60 to 300 bytes of each; tables have room for all."""

TRAVEL, WORKING_TRAVEL = "travel", "working-travel"


class SamplesRequest(Strict):
    """How many postures to draw, from which travel, and what to tell of each.

    The same seed gives the same samples. With `positions`, `orientations` and `joints` all false
    the answer is the summary alone.
    """

    arm: AnyArm
    count: Annotated[int, Field(json_schema_extra={"minimum": 1, "maximum": MOST_SAMPLES})]
    seed: Annotated[
        int,
        Field(
            json_schema_extra={"minimum": 0, "maximum": MOST_SEED},
            description="another one, other samples",
        ),
    ] = 1
    within: Literal["travel", "working-travel"] = "travel"
    positions: bool = True
    orientations: bool = False
    joints: bool = False
    tool: AnyTool | None = None
    frame: str | None = None
    form: FormName | None = None
    units: UnitsName | None = None


class FarthestSample(Open):
    """The sample that gets farthest one way: value, its number from 0, its joint values."""

    value: float
    sample: int
    joints: list[float]


class BothWays(Open):
    """The least and the greatest of one measure."""

    least: FarthestSample
    greatest: FarthestSample


class Extremes(Open):
    """How far the tool gets: x, y, z in the frame asked for; radius and height about axis 1.

    Height is along axis 1 from the base's origin; both are null where axis 1 slides.
    """

    x: BothWays
    y: BothWays
    z: BothWays
    radius: BothWays | None
    height: BothWays | None


class SingularShare(Open):
    """How many of the first samples are near singular or singular, as shares of those judged."""

    judged: int
    near: float
    singular: float
    task: Any


class SamplesSummary(Open):
    """What all samples say together."""

    extremes: Extremes
    singularity: SingularShare


class Sample(Open):
    """One sample, with what was asked for of it."""

    position: list[float] | None = None
    orientation: list[Any] | None = None
    joints: list[float] | None = None


class SamplesAnswer(Open):
    """Samples in their order, and what they say together."""

    arm: ArmIdentity
    units: UnitsName
    frame: str
    tool: Any
    form: str | None
    count: int
    seed: int
    within: Literal["travel", "working-travel"]
    summary: SamplesSummary
    samples: list[Sample]


def column_names(*, positions: bool, orientation: Sequence[str], joints: int) -> list[str]:
    """Return the names of a table's columns, the keys of a flat answer.

    Parameters
    ----------
    orientation : names of its values, none where it is not told; joints : how many are told.

    Examples
    --------
    >>> column_names(positions=True, orientation=(), joints=2)
    ['x', 'y', 'z', 'q1', 'q2']
    """
    places = ["x", "y", "z"] if positions else []
    return [*places, *orientation, *(f"q{joint}" for joint in range(1, joints + 1))]
