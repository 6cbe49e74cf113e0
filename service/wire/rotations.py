"""Rotations as they are asked about and answered, as models: turns, and many orientations at once.

Left out: query strings (rotation_query.py), flat answers (rotation_flat.py), the answering.
"""

from typing import Annotated, Any, Literal

from pydantic import Discriminator, Field, RootModel, Tag
from pydantic.json_schema import WithJsonSchema

from kinematics.orientation_forms import FORMS
from service.wire.answer_models import Finding, ItemProblem, Open
from service.wire.controller_answers import InlineRefusal
from service.wire.models import FormName, Number, Orientation, Strict, Triple, UnitsName

OrientationRows = Annotated[
    list[Any],
    WithJsonSchema(
        {
            "type": "array",
            "description": "each as `from` has it: 3 or 4 numbers, or 3 rows of 3 for `matrix`",
            "items": {"type": "array", "items": {"anyOf": [{"type": "number"}, {"type": "array"}]}},
        }
    ),
]


def _axis_kind(value: object) -> str:
    return "list" if isinstance(value, list) else "str"


AnyAxis = Annotated[
    Annotated[Literal["x", "y", "z"], Tag("str")] | Annotated[Triple, Tag("list")],
    Discriminator(_axis_kind),
]


class TurnStep(Strict):
    """One turn: about x, y, z or a direction of any length, of the fixed or the current axes."""

    axis: AnyAxis
    angle: Number
    about: Literal["fixed", "current"]


class RotationsRequest(Strict):
    """An orientation to start from, turns to make, an orientation to compare with."""

    start: Orientation | None = None
    goal: Orientation | None = None
    steps: list[TurnStep] = Field(default_factory=list)
    forms: Annotated[list[FormName], Field(min_length=1, max_length=len(FORMS))] | None = None
    units: UnitsName


class ConversionsRequest(Strict):
    """Orientations in one form that are wanted in another."""

    from_: Annotated[FormName, Field(alias="from")]
    to: FormName | None = None
    values: OrientationRows
    units: UnitsName


class PlacedFinding(Finding):
    """A finding with the place it is about: of the answer (`at`), or of the request."""

    at: str | None = None
    pointer: str | None = None


class AnsweredStep(Open):
    """One turn as answered; the axis is named, or a unit vector."""

    axis: Literal["x", "y", "z"] | list[float]
    angle: float
    about: Literal["fixed", "current"]


class AnsweredSteps(Open):
    """The same turns: neighbours made one, all about fixed axes, all about current axes."""

    merged: list[AnsweredStep]
    all_fixed: list[AnsweredStep]
    all_current: list[AnsweredStep]


class TurnBetween(Open):
    """One turn from an orientation to another; no axis where nothing turns."""

    axis: list[float] | None
    angle: float
    about: Literal["fixed", "current"]
    orientation: dict[str, Any]


class BothTurns(Open):
    """The same turn about the axes that stand still, and about those that move along."""

    fixed: TurnBetween
    current: TurnBetween


class RotationsAnswer(Open):
    """Where the turns lead, in each form asked for, and the turns in other words.

    `between` is the turn from `start` to `goal`, `left` the one from where the steps end.
    """

    ok: bool
    code: int
    units: UnitsName
    orientation: dict[str, Any]
    steps: AnsweredSteps
    between: BothTurns | None = None
    left: BothTurns | None = None
    findings: list[PlacedFinding]


class ConvertedItem(Open):
    """One orientation in the form asked for."""

    ok: bool
    code: int
    values: list[Any] | None
    findings: list[Finding]
    problem: ItemProblem | None = None


class ConversionsAnswer(Open):
    """Orientations in the form asked for, in the order asked."""

    units: UnitsName
    from_: Annotated[str, Field(alias="from")]
    to: str
    orientations: list[ConvertedItem]


class SingleConversion(Open):
    """One orientation by query string, nested."""

    ok: bool
    code: int
    seq: int
    tag: int
    t_ms: int
    units: UnitsName
    orientation: dict[str, Any]
    findings: list[Finding]


class FlatConversion(Open):
    """One orientation on one level, `r1` ... `r3`, `r4` or `r9` between `t_ms` and `form`."""

    ok: Literal[0, 1]
    code: int
    flags: int
    seq: int
    tag: int
    t_ms: int
    form: str
    units: str


class ConversionReply(RootModel[SingleConversion | FlatConversion | InlineRefusal]):
    """One orientation, nested or flat, or a refusal with status 200."""
