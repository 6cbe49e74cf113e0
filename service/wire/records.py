"""Records of poses as asked for and answered.

Left out: the pose itself (operations), how records are kept (storage), and CSV (record_lines.py).
"""

from collections.abc import Mapping, Sequence
from math import isfinite
from typing import Annotated, Any, Literal, get_args

from pydantic import AfterValidator, Field, StringConstraints
from pydantic.json_schema import WithJsonSchema
from pydantic_core import PydanticCustomError, PydanticKnownError

from service.errors import UnusableValue
from service.records.ports import Filter
from service.wire.answer_models import AnsweredOrientation, ArmIdentity, Finding, Open, Singularity
from service.wire.models import AnyTool, FormName, Strict, UnitsName
from service.wire.query import whole_number
from service.wire.times import time_in

LONGEST_SERIAL = 100
MOST_FIELDS = 32
LONGEST_TEXT = 500
_LARGEST_WHOLE = 2**53
"""Beyond it a reader that takes every number for a double would read another number."""

Quality = Literal["good", "uncertain", "bad"]


def _printable(text: str) -> str:
    if not text.isprintable():
        raise PydanticCustomError("not_printable", "must be one line of printable characters")
    return text


def _exact(number: int) -> int:
    if abs(number) > _LARGEST_WHOLE:
        raise PydanticCustomError("not_exact", "must be a whole number up to 2^53")
    return number


def _plain(value: object) -> object:
    """Return a value of a free field: one line of text, a number, true, false or null."""
    if isinstance(value, str):
        if len(value) > LONGEST_TEXT:
            raise PydanticKnownError("string_too_long", {"max_length": LONGEST_TEXT})
        return _printable(value)
    if isinstance(value, int) and not isinstance(value, bool):
        return _exact(value)
    if isinstance(value, float) and not isfinite(value):
        raise PydanticKnownError("finite_number")
    if value is None or isinstance(value, bool | float):
        return value
    raise PydanticCustomError("not_plain", "must be a text, a number, true, false or null")


_Whole = Annotated[
    int,
    Field(json_schema_extra={"minimum": -_LARGEST_WHOLE, "maximum": _LARGEST_WHOLE}),
    AfterValidator(_exact),
]
_PLAIN: dict[str, Any] = {
    "anyOf": [
        {"type": "string", "maxLength": LONGEST_TEXT},
        *({"type": kind} for kind in ("number", "boolean", "null")),
    ]
}
Serial = Annotated[str, Field(min_length=1, max_length=LONGEST_SERIAL), AfterValidator(_printable)]
FieldName = Annotated[
    str,
    StringConstraints(pattern=r"^[A-Za-z_][A-Za-z0-9_.-]{0,47}$"),
    Field(description="a letter or _, then letters, digits and _ . -, at most 48"),
]
FieldValue = Annotated[Any, AfterValidator(_plain), WithJsonSchema(_PLAIN)]


class RecordRequest(Strict):
    """What is to be kept of a pose.

    Without `joints` the pose is that of the live value of the arm; with them, of these joint
    values, sampled at `sampled_at` (the time of the request, if left out). `serial` and `fields`
    come back as they were sent.
    """

    joints: list[Any] | None = None
    sampled_at: str | None = None
    tool: AnyTool | None = None
    frame: str | None = None
    form: FormName | None = None
    units: UnitsName | None = None
    revision: Annotated[int, Field(ge=1)] | None = None
    expect: Annotated[str, Field(description="Digest the arm must have.")] | None = None
    serial: Serial | None = None
    tag: _Whole | None = None
    fields: Annotated[dict[FieldName, FieldValue], Field(max_length=MOST_FIELDS)] = Field(
        default_factory=dict
    )


class RecordAnswer(Open):
    """A record: the pose, what leads back to it, and whether it can be trusted.

    `source` is `live` or `given` (with the request). `sampled_at` is when the joint values were
    so, `received_at` when they came, `computed_at` when the pose was made of them.
    """

    id: str
    arm: ArmIdentity
    units: UnitsName
    frame: str
    tool: Any
    source: Literal["live", "given"]
    quality: Quality
    reason: str | None
    code: int
    flags: int
    joints: list[float]
    position: list[float]
    orientation: AnsweredOrientation
    margin: float | None
    singularity: Singularity | None
    findings: list[Finding]
    sampled_at: str
    received_at: str
    computed_at: str
    serial: str | None
    tag: int | None
    fields: dict[str, Any]
    software: str


class RecordListAnswer(Open):
    """Records, the newest first; `next_page_token` asks for those that follow."""

    records: list[RecordAnswer]
    next_page_token: str | None


FILTER_PARAMETERS = {
    "arm": "Name of the arm.",
    "serial": "Serial number of the part.",
    "tag": "Tag of the record.",
    "quality": "`good`, `uncertain` or `bad`.",
    "from": "Sampled at this time or later, such as 2026-12-01T06:00:00Z.",
    "to": "Sampled before this time.",
}


def filter_of(parameters: Mapping[str, str], arm: str | None = None) -> Filter:
    """Return which records a query means; ``arm`` where the address says it.

    Raises
    ------
    ServiceError : a parameter cannot be used.

    Examples
    --------
    >>> filter_of({"tag": "7"}, "press-arm")
    Filter(arm='press-arm', serial=None, tag=7, quality=None, since=None, before=None)
    """
    quality = parameters.get("quality")
    if quality is not None and quality not in get_args(Quality):
        raise UnusableValue(
            f"there is no quality {quality[:60]!r}",
            where=("quality",),
            location="query",
            value=quality,
            way_out=f"one of: {', '.join(get_args(Quality))}",
        )
    serial = parameters.get("serial")
    if serial is not None and not serial.isprintable():
        raise UnusableValue(
            "serial has characters that no serial number has",
            where=("serial",),
            location="query",
            value=serial,
            way_out="leave out line breaks and control characters",
        )
    times = {
        name: time_in(parameters[name], (name,), "query")
        for name in ("from", "to")
        if name in parameters
    }
    return Filter(
        arm=parameters.get("arm", arm),
        serial=serial,
        tag=whole_number(parameters["tag"], "tag") if "tag" in parameters else None,
        quality=quality,
        since=times.get("from"),
        before=times.get("to"),
    )


def record_list_answer(
    documents: Sequence[Mapping[str, object]], next_token: str | None
) -> dict[str, object]:
    """Return records as listed."""
    return {"records": list(documents), "next_page_token": next_token}
