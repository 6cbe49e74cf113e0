"""A live pose as it is told: nested, flat, in a line, as an event; and the refusals of each.

Left out: how it is found (service/operations/live.py), what is asked with (live_query.py).
"""

from collections.abc import Mapping
from datetime import UTC, datetime, timedelta
from typing import Any, NamedTuple

from service.live.samples import Standing
from service.live.seen import Seen
from service.problems import Problem
from service.wire import fixed_text, flat
from service.wire.answers import json_bytes
from service.wire.controller import Format
from service.wire.one_answer import Content, Stamp, on_one_level, refused_on_one_level
from service.wire.single import SingleAnswer, SingleQuestion
from service.wire.stored import time_of
from service.wire.whole_numbers import scaled

OLDEST_MS = 9_999_999
"""The age that a flat answer shows at most, and where there is no pose."""

WIDTHS: Mapping[str, int] = {**fixed_text.WIDTHS, "age_ms": 7, "quality": 9}
_EPOCH = datetime(1970, 1, 1, tzinfo=UTC)


class LiveAnswer(NamedTuple):
    """A live pose.

    Attributes
    ----------
    single : the pose with the codes that live values add.
    joints : in the units asked for; speeds : of joints and tool, None where they are not known.
    """

    single: SingleAnswer
    seen: Seen
    joints: list[float]
    speeds: dict[str, object] | None


def nested(answer: LiveAnswer, stamp: Mapping[str, object], scale: int | None) -> dict[str, Any]:
    """Return a live pose as a body's answer, with what belongs to a live one beside it."""
    single, seen = answer.single, answer.seen
    told: dict[str, Any] = {
        "ok": True,
        "code": single.item["code"],
        **stamp,
        "quality": seen.quality,
        "reason": seen.reason,
        "say": seen.say,
        "age_ms": age_ms(seen),
        "simulated": seen.simulated,
        "change": seen.change,
    }
    of_posture: dict[str, Any] = {
        **single.head,
        "poses": [single.item],
        "joints": answer.joints,
        "speeds": answer.speeds,
    }
    told |= of_posture if scale is None else scaled(of_posture, scale)
    told["input"] = None if seen.sample is None else _input(seen)
    told["at"] = None if seen.sample is not None else _past(seen)
    return told


def one_level(answer: LiveAnswer, asked: SingleQuestion, stamp: Stamp) -> dict[str, object]:
    """Return a live pose as a flat answer."""
    told = flat.flat_pose(answer.single, form=asked.form, **stamp)
    return _with_quality(told, age_ms(answer.seen), answer.seen.quality)


def content(answer: LiveAnswer, asked: SingleQuestion, wanted: Format, stamp: Stamp) -> Content:
    """Return a live pose in the format asked for.

    Raises
    ------
    NumberDoesNotFit : a number is wider than its field.
    """
    if wanted == "json":
        return Content(json_bytes(nested(answer, stamp, asked.scale)), "application/json")
    return on_one_level(one_level(answer, asked, stamp), wanted, asked.scale, WIDTHS)


def flat_event(answer: LiveAnswer, asked: SingleQuestion, stamp: Stamp, arm: str | None) -> bytes:
    """Return a live pose on one level as an event's data, with the arm's name if there is one."""
    told = one_level(answer, asked, stamp)
    if arm is not None:
        told["arm"] = arm
    return on_one_level(told, "flat", asked.scale).body


def nested_refusal(
    problem: Problem, arm: Mapping[str, object], standing: Standing
) -> dict[str, object]:
    """Return one arm among others that cannot be told, and why."""
    return {
        "ok": False,
        "code": problem.number,
        "quality": standing.quality,
        "reason": standing.reason,
        "say": standing.say,
        "change": standing.change,
        "arm": arm,
        "problem": problem.errors[0].problem_of_item(),
    }


def refused(problem: Problem, wanted: Format, stamp: Stamp) -> Content:
    """Return a flat live pose without its numbers."""
    told = flat.flat_pose_refusal(problem.number, **stamp)
    return refused_on_one_level(_with_quality(told, OLDEST_MS, "bad"), wanted, WIDTHS)


def age_ms(seen: Seen) -> int:
    """Return the age in whole milliseconds."""
    return min(round(seen.age_s * 1000.0), OLDEST_MS)


def time_at(unix_ms: float) -> str:
    """Return Unix milliseconds as RFC 3339.

    Examples
    --------
    >>> time_at(1_767_322_800_250.0)
    '2026-01-02T03:00:00.250Z'
    """
    return time_of(_EPOCH + timedelta(milliseconds=round(unix_ms)))


def _with_quality(told: Mapping[str, object], age: int, quality: str) -> dict[str, object]:
    """Return a flat answer with age and quality before the revision."""
    found: dict[str, object] = {}
    for key, value in told.items():
        if key == "revision":
            found["age_ms"], found["quality"] = age, quality
        found[key] = value
    return found


def _input(seen: Seen) -> dict[str, object]:
    sample = seen.sample
    assert sample is not None
    return {
        "source": sample.source,
        "tag": sample.tag,
        "sequence": sample.sequence,
        "sampled_at": None if sample.sampled_ms is None else time_at(sample.sampled_ms),
        "received_at": time_at(sample.received_ms),
        "happened_at": time_at(seen.happened_ms),
        "late_ms": round(sample.delay_s * 1000.0, 3),
        "clock_offset_ms": None if seen.offset_ms is None else round(seen.offset_ms, 3),
        "period_ms": None if seen.period_s is None else round(seen.period_s * 1000.0, 3),
        "counts": seen.counts,
    }


def _past(seen: Seen) -> dict[str, object]:
    between = seen.between_ms
    return {
        "time": time_at(seen.happened_ms),
        "interpolated": between is not None,
        "between": None if between is None else [time_at(one) for one in between],
    }
