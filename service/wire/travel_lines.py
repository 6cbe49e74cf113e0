"""Answers about travels as CSV (RFC 4180): one line for each leg of each way that is told.

A travel without any way has one line. Cells of what is not known are empty. Left out: JSON, and
joint values along a leg.
"""

from collections.abc import Iterator, Mapping, Sequence
from typing import Any, NamedTuple

import orjson

from service.wire.csv_rows import NAME
from service.wire.csv_text import FIRST, quoted
from service.wire.flat import FLAGS
from service.wire.reach_lines import SameInAll, joint_keys

BEFORE_JOINTS = ("verdict", "way", "leg", "part")
NUMBERS = (
    *("length", "gone", "margin", "singular_value", "share_of_top_speed", "top_speed"),
    *("duration_s", "shortest_s"),
)
AFTER_JOINTS = (*NUMBERS, "units", "revision", "digest", "branch", "reason", NAME)
"""What a line has after the joint values at the end of its leg, or where it breaks."""

_END = "\r\n"
_OF_NUMBERS = {"singular_value": "smallest_singular_value"}
"""Names of an answer that are shorter at the head of a column."""


class _Leg(NamedTuple):
    """What one line tells: a leg as far as it went, the code of it, why the way breaks on it."""

    way: int
    leg: int
    told: Mapping[str, Any] | None
    code: int
    reason: str


def travel_head(joints: int) -> bytes:
    """Return the first line.

    Examples
    --------
    >>> travel_head(1)[:58]
    b'ok,code,flags,seq,tag,t_ms,verdict,way,leg,part,q1,length,'
    """
    keys = (*FIRST, *BEFORE_JOINTS, *joint_keys(joints), *AFTER_JOINTS)
    return (",".join(keys) + _END).encode("ascii")


def travel_lines(items: Sequence[Mapping[str, Any]], joints: int, same: SameInAll) -> bytes:
    """Return the lines of travels as they are answered in JSON."""
    lines = [line for item in items for line in _lines_of(item, joints, same)]
    return "".join(f"{line}{_END}" for line in lines).encode("utf-8")


def _lines_of(item: Mapping[str, Any], joints: int, same: SameInAll) -> Iterator[str]:
    stamp = f"{same.seq},{same.tag},{same.t_ms},{item['verdict'] or ''}"
    tail = f"{same.units},{same.revision},{same.digest}"
    name = quoted(item["name"] or "")
    for way, number, told, code, reason in _legs_of(item):
        if told is None:
            flags, part, branch = 0, "", ""
            cells: list[float | None] = [None] * (joints + len(NUMBERS))
        else:
            codes = {finding["code"] for finding in told["findings"]}
            flags = sum(FLAGS[code] for code in codes if code in FLAGS)
            part, branch = told["part"], quoted(told["end"]["branch"])
            cells = [*told["end"]["joints"], *(_number(told, key) for key in NUMBERS)]
        numbers = ",".join("" if cell is None else orjson.dumps(cell).decode() for cell in cells)
        yield (
            f"{int(not reason)},{code},{flags},{stamp},{way},{number},{part},{numbers},{tail},"
            f"{branch},{quoted(reason)},{name}"
        )


def _legs_of(item: Mapping[str, Any]) -> Iterator[_Leg]:
    """Yield what the lines of one travel tell, at least one."""
    if not item["ways"]:
        why = item["breaks"] or item["problem"]
        yield _Leg(0, 0, None, item["code"], why["say"])
    for way, told in enumerate(item["ways"], start=1):
        breaks, legs = told["breaks"], told["legs"]
        broken = 0 if breaks is None else breaks["leg"]
        for number, leg in enumerate(legs, start=1):
            if number == broken:
                yield _Leg(way, number, leg, told["code"], breaks["say"])
            else:
                code = max((finding["code"] for finding in leg["findings"]), default=0)
                yield _Leg(way, number, leg, code, "")
        if broken > len(legs):
            yield _Leg(way, broken, None, told["code"], breaks["say"])


def _number(leg: Mapping[str, Any], key: str) -> float | None:
    told = leg[_OF_NUMBERS.get(key, key)]
    number: float | None = told["value"] if isinstance(told, dict) else told
    return number
