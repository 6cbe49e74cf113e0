"""A flat answer as one line of text, each field at the same place in every line (``format=txt``).

Left out: which fields there are and in which order (flat.py).
"""

from collections.abc import Iterable, Mapping
from typing import NamedTuple

from service.errors import NumberDoesNotFit
from service.wire.flat import LARGEST_CONDITION, NO_LIMITS_MARGIN, NO_NUMBER, POSE_KEYS

MEDIA_TYPE = "text/plain; charset=us-ascii"
SEPARATOR = ";"
END = "\r\n"
LARGEST = 999999.9999
"""Largest number of a pose or a Jacobian that has a place in its field."""

NUMBER_WIDTH = 12
DECIMALS = 4
WIDTHS: Mapping[str, int] = {
    "ok": 1, "code": 3, "flags": 5, "seq": 10, "tag": 10, "t_ms": 13,
    **dict.fromkeys(POSE_KEYS, NUMBER_WIDTH),
    "form": 11, "units": 6, "tool_no": 3, "frame_no": 3, "state": 8, "condition": 9, "margin": 7,
    "revision": 6, "digest": 8,
}  # fmt: skip
"""Characters of each field; an entry of a Jacobian, j11 or whichever, has NUMBER_WIDTH."""

_DECIMALS = {"condition": 1, "margin": 4}
# What has a largest value by its nature is cut there; the line is no less true for it.
_CUT = {"condition": LARGEST_CONDITION, "margin": NO_LIMITS_MARGIN}


class Place(NamedTuple):
    """Where a field stands: its first character, counted from 1, and how many there are."""

    first: int
    width: int


def places(keys: Iterable[str], widths: Mapping[str, int] = WIDTHS) -> dict[str, Place]:
    """Return where each field of a line with these keys stands.

    Examples
    --------
    >>> places(["ok", "code"])
    {'ok': Place(first=1, width=1), 'code': Place(first=3, width=3)}
    """
    found: dict[str, Place] = {}
    first = 1
    for key in keys:
        width = widths.get(key, NUMBER_WIDTH)
        found[key] = Place(first, width)
        first += width + len(SEPARATOR)
    return found


def text_line(
    told: Mapping[str, object],
    scale: int | None = None,
    *,
    widths: Mapping[str, int] = WIDTHS,
    decimals: int = DECIMALS,
) -> bytes:
    """Return a flat answer as a line.

    Parameters
    ----------
    told : of ``flat.py``, before any scale.
    scale : numbers are multiplied by it and printed as integers; None prints decimals.
    widths : characters of the fields; those not named have NUMBER_WIDTH.
    decimals : of a number in NUMBER_WIDTH characters.

    Raises
    ------
    NumberDoesNotFit : a number is wider than its field.

    Examples
    --------
    >>> text_line({"ok": 1, "code": 3, "x": -914.57007, "condition": 12.16, "state": "near"})
    b'1;3  ;-000914.5701;12.2     ;near    \\r\\n'
    >>> text_line({"ok": 1, "code": 3, "x": -914.57007, "margin": 0.25}, 100)
    b'1;3  ;-00000091457;+000025\\r\\n'
    """
    fields = [
        _field(key, value, scale, widths.get(key, NUMBER_WIDTH), decimals)
        for key, value in told.items()
    ]
    return (SEPARATOR.join(fields) + END).encode("ascii")


def text_refusal(told: Mapping[str, object], widths: Mapping[str, int] = WIDTHS) -> bytes:
    """Return a flat refusal as a line of the same length, with NO_NUMBER for every number.

    Condition and margin have less room: there the smallest number that fits stands.

    Examples
    --------
    >>> text_refusal({"ok": 0, "code": 104, "tag": 10**17, "x": NO_NUMBER, "margin": NO_NUMBER})
    b'0;104;0         ;-999999.9999;-9.9999\\r\\n'
    """
    fields = {key: NO_NUMBER if isinstance(value, float) else value for key, value in told.items()}
    if len(str(fields["tag"])) > WIDTHS["tag"]:
        fields["tag"] = 0
    return text_line(fields, widths=widths)


def _field(key: str, value: object, scale: int | None, width: int, decimals: int) -> str:
    if isinstance(value, float):
        text = (
            _decimal(key, value, width, decimals)
            if scale is None
            else _whole(key, value * scale, width)
        )
    else:
        text = str(value).ljust(width)
    if len(text) > width:
        raise NumberDoesNotFit(
            f"{key} does not fit into {width} characters: {value}",
            where=("tag" if key == "tag" else "format",),
            location="query",
            value=value,
            way_out=_WAYS_OUT.get(key, "use format=flat, larger units or a smaller scale"),
        )
    return text


_WAYS_OUT = {"tag": f"send a tag of at most {WIDTHS['tag']} characters"}


def _decimal(key: str, value: float, width: int, decimals: int) -> str:
    # Zero is added so that what rounds to zero bears no minus sign.
    if key in _CUT:
        decimals = _DECIMALS[key]
        return f"{round(_cut(value, _CUT[key]), decimals) + 0.0:.{decimals}f}".ljust(width)
    return f"{round(value, decimals) + 0.0:+0{width}.{decimals}f}"


def _whole(key: str, value: float, width: int) -> str:
    if key in _CUT:
        value = _cut(value, 10.0 ** (width - 1) - 1)
    return f"{round(value):+0{width}d}"


def _cut(value: float, largest: float) -> float:
    return min(max(value, -largest), largest)
