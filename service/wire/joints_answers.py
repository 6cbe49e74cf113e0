"""What a sender of joint values is told: nested, flat or in a line, and by a socket.

Left out: what became of the values (service/live).
"""

from collections.abc import Mapping, Sequence
from typing import Literal

from pydantic import RootModel

from kinematics.findings import OUTSIDE_TRAVEL as OUTSIDE_TRAVEL_CODE
from service.live.live_arm import LiveArm
from service.live.samples import OUTSIDE_TRAVEL, STALE, Taken
from service.problems import SIMULATED_CODE, STALE_CODE, Problem
from service.wire import fixed_text
from service.wire.answer_models import ArmIdentity, Open
from service.wire.answers import json_bytes
from service.wire.controller import Format
from service.wire.controller_answers import InlineRefusal
from service.wire.flat import FLAGS
from service.wire.one_answer import Content, Stamp, on_one_level, refused_on_one_level

WIDTHS: Mapping[str, int] = {
    **fixed_text.WIDTHS,
    "accepted": 1,
    "quality": 9,
    "reason": 14,
}
_CODES = {OUTSIDE_TRAVEL: OUTSIDE_TRAVEL_CODE, STALE: STALE_CODE}


class JointsTaken(Open):
    """What became of joint values."""

    ok: bool
    code: int
    seq: int
    tag: int
    t_ms: int
    accepted: bool
    quality: Literal["good", "uncertain", "bad"]
    reason: str
    say: str
    good: int
    doubted: int
    dropped: int
    change: int
    period_ms: float | None
    clock_offset_ms: float | None
    arm: ArmIdentity


class FlatJointsTaken(Open):
    """The same on one level; `accepted` 0 is a value that was dropped or is doubted."""

    ok: Literal[0, 1]
    code: int
    flags: int
    seq: int
    tag: int
    t_ms: int
    accepted: Literal[0, 1]
    quality: Literal["good", "uncertain", "bad"]
    reason: str
    revision: int
    digest: str


class JointsReply(RootModel[JointsTaken | FlatJointsTaken | InlineRefusal]):
    """What became of joint values, nested or flat, or a refusal with status 200."""


def taken_answer(
    live: LiveArm,
    taken: Sequence[Taken],
    identity: Mapping[str, object],
    wanted: Format,
    stamp: Stamp,
) -> Content:
    """Return what became of samples that came together; of the last where there is room for one.

    ``identity`` is that of the arm's newest revision.
    """
    last, standing = taken[-1], live.standing
    reason = last.dropped or standing.reason
    codes = {_CODES.get(standing.reason, 0)}
    if standing.sample is not None and standing.sample.simulated:
        codes.add(SIMULATED_CODE)
    code = max(codes)
    if wanted == "json":
        return Content(
            json_bytes(
                {
                    "ok": True,
                    "code": code,
                    **stamp,
                    "accepted": last.accepted,
                    "quality": standing.quality,
                    "reason": reason,
                    "say": last.say or standing.say,
                    **counts_of(taken),
                    "change": standing.change,
                    **input_of(live),
                    "arm": identity,
                }
            ),
            "application/json",
        )
    told = {
        "ok": 1,
        "code": code,
        "flags": sum(FLAGS.get(one, 0) for one in codes),
        **stamp,
        "accepted": int(last.accepted),
        "quality": standing.quality,
        "reason": reason,
        "revision": identity["revision"],
        "digest": identity["digest"],
    }
    return on_one_level(told, wanted, None, WIDTHS)


def refused_joints(problem: Problem, wanted: Format, stamp: Stamp) -> Content:
    """Return a flat refusal of joint values."""
    told = {
        "ok": 0,
        "code": problem.number,
        "flags": 0,
        **stamp,
        "accepted": 0,
        "quality": "bad",
        "reason": "",
        "revision": 0,
        "digest": "",
    }
    return refused_on_one_level(told, wanted, WIDTHS)


def counts_of(taken: Sequence[Taken]) -> dict[str, int]:
    """Return how many samples stood, are doubted and were dropped."""
    return {
        "good": sum(one.accepted for one in taken),
        "doubted": sum(bool(one.doubted) for one in taken),
        "dropped": sum(bool(one.dropped) for one in taken),
    }


def input_of(live: LiveArm) -> dict[str, float | None]:
    """Return what has been found out about an input."""
    seconds, offset = live.period.seconds, live.offset_ms()
    return {
        "period_ms": None if seconds is None else round(seconds * 1000.0, 3),
        "clock_offset_ms": None if offset is None else round(offset, 3),
    }
