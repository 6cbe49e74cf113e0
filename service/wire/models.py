"""The bodies that are asked with, as models; what is answered is in answer_models.py.

Shapes and types only; whether an arm makes sense is the core's word (wire/arms.py asks it).
"""

import marshal
from typing import Annotated, Any, Literal

from pydantic import (
    BaseModel,
    ConfigDict,
    Discriminator,
    Field,
    ModelWrapValidatorHandler,
    PrivateAttr,
    StringConstraints,
    Tag,
    WrapValidator,
)
from pydantic.json_schema import WithJsonSchema

from kinematics.orientation_forms import FORMS
from service.wire.kept_by_words import KeptByWords

WHOLE_ARMS_KEPT = 64
"""Arms that came whole in a request and are kept checked: a system that has no other place for its
arm sends it again with each question. Some 20 kB each."""

MOST_WORDS_KEPT = 2**16
"""Bytes of such an arm's words; some 2 kB are usual. Read, they take thirty times the place: one
with more tools and frames than that holds is checked anew each time."""

UnitsName = Literal["mm-deg", "m-rad", "in-deg"]
Number = Annotated[float, Field(allow_inf_nan=False)]
Name = Annotated[
    str,
    StringConstraints(pattern=r"^[a-z0-9][a-z0-9-]{0,47}$"),
    Field(description="a-z, 0-9 and -, at most 48, not starting with -"),
]
Pair = Annotated[list[Number], Field(min_length=2, max_length=2)]
Triple = Annotated[list[Number], Field(min_length=3, max_length=3)]
Row4 = Annotated[list[Number], Field(min_length=4, max_length=4)]
FormName = Annotated[str, Field(json_schema_extra={"enum": list(FORMS)})]
Values = Annotated[
    list[Any],
    WithJsonSchema(
        {
            "type": "array",
            "description": "3 or 4 numbers, or 3 rows of 3 for `matrix`",
            "items": {"anyOf": [{"type": "number"}, {"type": "array"}]},
        }
    ),
]


class Strict(BaseModel):
    """Text is never taken for a number, and no unknown field is passed over."""

    model_config = ConfigDict(strict=True, extra="forbid")


class Orientation(Strict):
    """An orientation in one of the 28 forms."""

    form: FormName
    values: Values


class Pose(Strict):
    """A pose: position and orientation, or a rigid 4 x 4 matrix."""

    model_config = ConfigDict(
        json_schema_extra={
            "oneOf": [{"required": ["position", "orientation"]}, {"required": ["matrix"]}]
        }
    )
    position: Triple | None = None
    orientation: Orientation | None = None
    matrix: Annotated[list[Row4], Field(min_length=4, max_length=4)] | None = None


class Tool(Pose):
    """A tool: its pose in the flange, and the number a controller knows it by."""

    number: Annotated[int, Field(ge=1, le=999)] | None = None


class Frame(Pose):
    """A frame: its pose in the world, in the base or in another frame."""

    in_: Annotated[str, Field(alias="in")] = "world"
    number: Annotated[int, Field(ge=1, le=999)] | None = None


class Coupling(Strict):
    """Another row's joint value that moves this row too."""

    axis: int
    ratio: Number


class Row(Strict):
    """One row of the table: in a modified one a(i-1), alpha(i-1), d(i), theta(i)."""

    joint: Literal["revolute", "prismatic"]
    a: Number
    alpha: Number
    d: Number
    theta: Number
    direction: Literal[1, -1] = 1
    travel: Pair | None = None
    working_travel: Pair | None = None
    working_reason: Annotated[str, Field(max_length=200)] | None = None
    top_speed: Number | None = None
    couplings: list[Coupling] = Field(default_factory=list)
    passive: bool = False


class CombinedTravel(Strict):
    """Bounds of a sum of joint values; keys are row numbers."""

    ratios: dict[Annotated[str, StringConstraints(pattern=r"^[1-9][0-9]?$")], Number]
    travel: Pair


class Thresholds(Strict):
    """Pure numbers the smallest scaled singular value is held against."""

    near: Number | None = None
    singular: Number | None = None


class Arm(Strict):
    """An arm: its table in a stated convention and units, and how it stands in its cell."""

    name: Name
    title: Annotated[str, Field(max_length=200)] | None = None
    convention: Literal["standard", "modified"]
    units: UnitsName
    rows: list[Row]
    combined_travel: list[CombinedTravel] = Field(default_factory=list)
    base: Pose | None = None
    tools: dict[Name, Tool] = Field(default_factory=dict)
    default_tool: str | None = None
    frames: dict[Name, Frame] = Field(default_factory=dict)
    cell: str | None = None
    joint_uncertainty: list[Number] = Field(default_factory=list)
    characteristic_length: Number | None = None
    singularity_thresholds: Thresholds | None = None
    status: Literal["draft", "measured", "approved", "retired"] | None = None
    notes: Annotated[str, Field(max_length=10_000)] | None = None
    _is_kept: bool = PrivateAttr(default=False)

    @property
    def is_kept(self) -> bool:
        """Whether the same words will be this very model again."""
        return self._is_kept


class Placement(Pose):
    """Where something is: its pose, in `pose` or beside `in`, in what it stands in."""

    model_config = ConfigDict(
        json_schema_extra={
            "oneOf": [
                {"required": ["pose"]},
                {"required": ["position", "orientation"]},
                {"required": ["matrix"]},
            ]
        }
    )
    in_: Annotated[
        str,
        Field(
            alias="in",
            description="`world`, a frame of the cell, `<arm>.base` or `<arm>.flange`",
        ),
    ] = "world"
    pose: Pose | None = None


class PlacedFrame(Placement):
    """A frame of a cell, and the number a controller knows it by."""

    number: Annotated[int, Field(ge=1, le=999)] | None = None


class Cell(Strict):
    """What several arms share: where they stand, and frames in the world, in others, on arms."""

    name: Name
    title: Annotated[str, Field(max_length=200)] | None = None
    units: UnitsName
    arms: dict[Name, Placement] = Field(default_factory=dict)
    frames: dict[Name, PlacedFrame] = Field(default_factory=dict)
    notes: Annotated[str, Field(max_length=10_000)] | None = None


class ArmRevision(Strict):
    """A stored arm, at a stated revision."""

    name: str
    revision: Annotated[int, Field(ge=1)]


# A tag becomes a step of a complaint's path. It is spelt so that it cannot be taken for a field.
def _arm_kind(value: object) -> str:
    if not isinstance(value, dict):
        return "str"
    return "ArmRevision" if "revision" in value and "rows" not in value else "Arm"


def _tool_kind(value: object) -> str:
    return "Pose" if isinstance(value, dict) else "str"


_known_arms: KeptByWords[Arm] = KeptByWords(WHOLE_ARMS_KEPT)


def _in_the_same_words(said: object, check: ModelWrapValidatorHandler[Arm]) -> Arm:
    """Return the very same model for an arm that comes in the same few words again."""
    try:
        # Version 2 writes the same bytes for the same values; NaN, 1, 1.0 and true all differ.
        words = marshal.dumps(said, 2)  # type: ignore[arg-type]  # refuses what it cannot
    except ValueError:  # nested too deeply, or a value that no JSON holds
        return check(said)
    if len(words) > MOST_WORDS_KEPT:
        return check(said)
    known = _known_arms.get(words)
    if known is not None:
        return known
    arm = check(said)
    arm._is_kept = True
    return _known_arms.keep(words, arm)


AnyArm = Annotated[
    Annotated[str, Tag("str")]
    | Annotated[ArmRevision, Tag("ArmRevision")]
    | Annotated[Arm, WrapValidator(_in_the_same_words), Tag("Arm")],
    Discriminator(_arm_kind),
]
AnyTool = Annotated[
    Annotated[str, Tag("str")] | Annotated[Pose, Tag("Pose")], Discriminator(_tool_kind)
]


def _task_kind(value: object) -> str:
    return "list" if isinstance(value, list) else "str"


AnyTask = Annotated[
    Annotated[Literal["pose", "position", "orientation"], Tag("str")]
    | Annotated[
        list[Literal["vx", "vy", "vz", "wx", "wy", "wz"]],
        Tag("list"),
        Field(min_length=1, max_length=6),
    ],
    Discriminator(_task_kind),
]
NumberRows = Annotated[
    list[Any],
    WithJsonSchema({"type": "array", "items": {"type": "array", "items": {"type": "number"}}}),
]


class PosesRequest(Strict):
    """Joint vectors of one arm whose tool poses are asked for."""

    arm: AnyArm
    joints: NumberRows
    tool: AnyTool | None = None
    frame: str | None = None
    form: FormName | None = None
    units: UnitsName | None = None
    links: bool = False
    singularity: bool = True
    task: AnyTask | None = None


class JacobiansRequest(PosesRequest):
    """The same question for Jacobians, with speeds, twists and loads one per joint vector."""

    speeds: NumberRows | None = None
    twists: NumberRows | None = None
    loads: NumberRows | None = None


class ConversionRequest(Strict):
    """An arm whose table is wanted in the other convention."""

    arm: AnyArm
    to: Literal["standard", "modified"]
