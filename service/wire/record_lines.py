"""Records as CSV (RFC 4180), one line each, for spreadsheets.

A spreadsheet takes a cell that begins with ``=``, ``+``, ``-`` or ``@`` for a formula and may run
it. What senders wrote gets an apostrophe before such a beginning, which a spreadsheet does not
show; JSON has it as it came. Left out: which records.

Source: OWASP, "CSV Injection" (mitigation by a leading single quote).
"""

from collections.abc import Mapping, Sequence
from itertools import chain
from typing import Any

import orjson

from service.records.ports import Widths
from service.wire.csv_text import quoted

MEDIA_TYPE = "text/csv; charset=utf-8; header=present"
_FORMULA = ("=", "+", "-", "@", "\t", "\r")
_FIRST = (
    *("id", "arm", "revision", "digest", "table_digest", "setup_digest", "serial", "tag"),
    *("source", "quality", "reason", "code", "flags", "sampled_at", "received_at", "computed_at"),
    *("units", "tool", "frame", "state", "condition", "margin", "form", "x", "y", "z"),
)
_LAST = ("fields", "software")


def lines_head(widths: Widths) -> bytes:
    """Return the first line: so many joint values and numbers of an orientation.

    Examples
    --------
    >>> lines_head(Widths(1, 2)).decode().split(",")[-6:]
    ['z', 'r1', 'r2', 'q1', 'fields', 'software\\r\\n']
    """
    turned = [f"r{number}" for number in range(1, widths.orientation + 1)]
    joints = [f"q{number}" for number in range(1, widths.joints + 1)]
    return (",".join([*_FIRST, *turned, *joints, *_LAST]) + "\r\n").encode("ascii")


def lines_of(documents: Sequence[Mapping[str, Any]], widths: Widths) -> bytes:
    """Return one line for each record."""
    return "".join(_line(document, widths) + "\r\n" for document in documents).encode("utf-8")


def _line(record: Mapping[str, Any], widths: Widths) -> str:
    arm, orientation = record["arm"], record["orientation"]
    judged = record["singularity"] or {}
    tool = record["tool"]
    told = {
        **record,
        **arm,
        "arm": arm["name"],
        "state": judged.get("state"),
        "condition": judged.get("condition_number"),
        "form": orientation["form"],
        # A tool that was given by its pose has no name.
        "tool": tool if isinstance(tool, str) else _json(tool),
        **dict(zip("xyz", record["position"], strict=True)),
    }
    turned = _filled(numbers_of(orientation["values"]), widths.orientation)
    joints = _filled(record["joints"], widths.joints)
    last = (_json(record["fields"]), record["software"])
    return ",".join(map(_cell, [*(told[name] for name in _FIRST), *turned, *joints, *last]))


def numbers_of(values: Sequence[Any]) -> list[Any]:
    """Return the numbers of an orientation one after the other, a matrix by its rows.

    Examples
    --------
    >>> numbers_of([[1, 2], [3, 4]]), numbers_of([5, 6])
    ([1, 2, 3, 4], [5, 6])
    """
    if values and isinstance(values[0], list):
        return list(chain.from_iterable(values))
    return list(values)


def _filled(numbers: Sequence[object], width: int) -> list[object]:
    return [*numbers, *[None] * (width - len(numbers))]


def _cell(value: object) -> str:
    """Return a value as a cell; a text that a spreadsheet would run is made one it shows."""
    if value is None:
        return ""
    if not isinstance(value, str):
        return _json(value)
    return quoted("'" + value if value.startswith(_FORMULA) else value)


def _json(value: object) -> str:
    return orjson.dumps(value).decode()
