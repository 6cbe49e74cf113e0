"""Flat answers about one target: one level, fixed order, every key always there.

Left out: answers about many (reach_lines.py), and what is answered (operations).
"""

import math
from collections.abc import Mapping
from typing import Any, NamedTuple

from service.problems import Problem
from service.wire import one_answer
from service.wire.answers import json_bytes
from service.wire.controller import Format
from service.wire.fixed_text import WIDTHS as POSE_WIDTHS
from service.wire.flat import FLAGS, NO_LIMITS_MARGIN, NO_NUMBER
from service.wire.formats import JSON
from service.wire.one_answer import Content, Stamp
from service.wire.reach_lines import joint_keys
from service.wire.whole_numbers import scaled

WIDTHS: Mapping[str, int] = {**POSE_WIDTHS, "verdict": 14, "solutions": 4}
"""Characters of each field of a line; a joint value has NUMBER_WIDTH."""

BEGIN = ("ok", "code", "flags", "seq", "tag", "t_ms", "verdict", "solutions")
END = ("margin", "state", "units", "revision", "digest")
"""The keys around the joint values, in their order."""

MOST_SOLUTIONS = 9999
"""Counted in a line of text; more are possible where joints turn many times."""


class ReachAnswer(NamedTuple):
    """The answer about one target.

    Attributes
    ----------
    item : as in the answer to a body; None where a flat answer is all that is wanted.
    joints : in the user's units; None where nothing leads there. joint_count : of the arm.
    margin : of these joint values, infinite without travel limits.
    codes : of all that is to be known; code : the highest, or that of a no.
    """

    head: Mapping[str, object]
    item: Mapping[str, object] | None
    code: int
    verdict: str
    found: int
    joints: list[float] | None
    joint_count: int
    margin: float
    state: str
    codes: frozenset[int]


def nested_reach(answer: ReachAnswer, stamp: Stamp, scale: int | None) -> Content:
    """Return the answer as a body's, with one result."""
    head, item = dict(answer.head), answer.item
    told = {
        "ok": answer.joints is not None,
        "code": answer.code,
        **stamp,
        **(head if scale is None else scaled(head, scale)),
        "results": [item if scale is None else scaled(item, scale)],
    }
    return Content(json_bytes(told), JSON)


def flat_reach(answer: ReachAnswer, wanted: Format, stamp: Stamp, scale: int | None) -> Content:
    """Return the answer on one level; without joint values its numbers are those of a refusal.

    Raises
    ------
    NumberDoesNotFit : a joint value is wider than its field.
    """
    arm: Any = answer.head["arm"]
    there = answer.joints is not None
    margin = NO_LIMITS_MARGIN if math.isinf(answer.margin) else answer.margin
    told: dict[str, object] = {
        "ok": int(there),
        "code": answer.code,
        "flags": sum([FLAGS[code] for code in answer.codes if code in FLAGS]),
        **stamp,
        "verdict": answer.verdict,
        "solutions": min(answer.found, MOST_SOLUTIONS),
        **_numbers(answer.joint_count, answer.joints),
        "margin": margin if there else NO_NUMBER,
        "state": answer.state if there else "",
        "units": answer.head["units"],
        "revision": arm["revision"],
        "digest": arm["digest"],
    }
    if there:
        return one_answer.on_one_level(told, wanted, scale, WIDTHS)
    # What stands for no number is no number to be scaled.
    return one_answer.refused_on_one_level(told, wanted, WIDTHS)


def refused_reach(problem: Problem, wanted: Format, stamp: Stamp, joints: int) -> Content:
    """Return a refusal with the keys of an answer about an arm of so many joints."""
    told = {
        "ok": 0,
        "code": problem.number,
        "flags": 0,
        **stamp,
        "verdict": "",
        "solutions": 0,
        **_numbers(joints, None),
        "margin": NO_NUMBER,
        "state": "",
        "units": "",
        "revision": 0,
        "digest": "",
    }
    return one_answer.refused_on_one_level(told, wanted, WIDTHS)


def _numbers(count: int, joints: list[float] | None) -> dict[str, object]:
    keys = joint_keys(count)
    return dict(zip(keys, joints, strict=True)) if joints else dict.fromkeys(keys, NO_NUMBER)
