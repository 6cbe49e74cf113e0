"""What is asked with about live poses: by query string, for one answer or for a stream of them.

Left out: joint values that come in (joint_samples.py), and the answers (live_told.py).
"""

from collections.abc import Mapping
from datetime import UTC, datetime
from typing import Any, NamedTuple

from kinematics.tolerances import MOST_ROWS
from service.errors import UnusableValue
from service.web.document import parameter
from service.wire.controller import PARAMETERS, Format, single_question, wanted_format
from service.wire.query import number, unusable, whole_number
from service.wire.question_parameters import NEAREST, OUTLINE, QUESTION_PARAMETERS, one_of
from service.wire.single import SingleQuestion
from service.wire.times import time_in

LONGEST_WAIT_S = 30.0
"""Proxies and controllers give up on an answer that takes much longer."""

MOST_RATE_HZ = 200.0
_NOT_OF_A_POSE = frozenset({"q", *(f"q{joint}" for joint in range(1, MOST_ROWS + 1)), "revision"})
_OF_THE_MOMENT = frozenset({"at", "wait", "after", "rate", "limit", "seconds"})
_POSE = PARAMETERS - _NOT_OF_A_POSE
PARAMETERS_OF_LIVE = _POSE | {"at", "wait", "after", "outline", "nearest"}
_OF_ANY = frozenset({"tool", "frame", "form", "units", "scale", "nearest"})
PARAMETERS_OF_ALL = _OF_ANY | {"wait", "after"}
PARAMETERS_OF_ALL_STREAM = _OF_ANY | {"format", "rate", "after"}
PARAMETERS_OF_STREAM = (_POSE - {"tag", "errors"}) | {"rate", "after", "outline", "nearest"}

_SHOWN = (*(known for known in QUESTION_PARAMETERS if known["name"] in _POSE), OUTLINE, NEAREST)
_AFTER = parameter(
    "after",
    "Number of a change (`change`) that is known already, where `If-None-Match` or "
    "`Last-Event-ID` cannot be sent.",
    {"type": "integer", "minimum": 0},
)
LIVE_SHOWN: tuple[dict[str, Any], ...] = (
    *_SHOWN,
    parameter(
        "at",
        "A time of the last ten minutes, RFC 3339 or Unix milliseconds. Between two fresh samples "
        "the joint values are interpolated, and the answer says so; else it is refused.",
    ),
    parameter(
        "wait",
        "Seconds to wait for something newer than what is known already, or than now.",
        {"type": "number", "exclusiveMinimum": 0, "maximum": LONGEST_WAIT_S},
    ),
    _AFTER,
)
STREAM_SHOWN: tuple[dict[str, Any], ...] = (
    *(known for known in _SHOWN if known["name"] not in ("tag", "errors", "format")),
    parameter("format", "Shape of each event's data.", one_of("json", "flat")),
    parameter(
        "rate",
        "Events a second at most; in between, the newest wins.",
        {"type": "number", "exclusiveMinimum": 0, "maximum": MOST_RATE_HZ},
    ),
    _AFTER,
)
ALL_SHOWN = tuple(known for known in LIVE_SHOWN if known["name"] in PARAMETERS_OF_ALL)
ALL_STREAM_SHOWN = tuple(
    known for known in STREAM_SHOWN if known["name"] in PARAMETERS_OF_ALL_STREAM
)


class LiveQuestion(NamedTuple):
    """What is asked about a live pose.

    Attributes
    ----------
    at_ms : the time asked about, Unix milliseconds; None for now.
    wait_s : how long to wait for a change; after : the change that is known, None if none is.
    """

    pose: SingleQuestion
    at_ms: float | None
    wait_s: float | None
    after: int | None


class StreamQuestion(NamedTuple):
    """What is asked of a stream; ``gap_s`` is the least time between two events."""

    pose: SingleQuestion
    wanted: Format
    gap_s: float
    after: int | None


def live_question(arm: str, said: Mapping[str, str], wanted: Format) -> LiveQuestion:
    """Return the question of a query string.

    Raises
    ------
    ServiceError, KinematicsError : a parameter that cannot be used.
    """
    pose = single_question(arm, _of_pose(said), wanted)
    at_ms = moment_in(said["at"], "at") if "at" in said else None
    wait_s = None if "wait" not in said else _within(said["wait"], "wait", LONGEST_WAIT_S)
    if at_ms is not None and (wait_s is not None or "after" in said):
        raise UnusableValue(
            "the past does not change any more",
            where=("at",),
            location="query",
            value=said["at"],
            way_out="leave out wait and after, or at",
        )
    return LiveQuestion(pose, at_ms, wait_s, _after(said))


def stream_question(arm: str, said: Mapping[str, str]) -> StreamQuestion:
    """Return the question of a stream's query string.

    Raises
    ------
    ServiceError, KinematicsError : a parameter that cannot be used.
    """
    wanted = wanted_format(said)
    if wanted not in ("json", "flat"):
        raise UnusableValue(
            f"events are not told as {wanted}",
            where=("format",),
            location="query",
            value=wanted,
            way_out="format=json or format=flat",
        )
    gap_s = 1.0 / _within(said["rate"], "rate", MOST_RATE_HZ) if "rate" in said else 0.0
    return StreamQuestion(single_question(arm, _of_pose(said), wanted), wanted, gap_s, _after(said))


def _of_pose(said: Mapping[str, str]) -> dict[str, str]:
    """Return what is of the pose: questions are kept by these words."""
    return {name: text for name, text in said.items() if name not in _OF_THE_MOMENT}


def _after(said: Mapping[str, str]) -> int | None:
    if "after" not in said:
        return None
    after = whole_number(said["after"], "after")
    if after < 0:
        raise UnusableValue(
            "changes are counted from 0",
            where=("after",),
            location="query",
            value=said["after"],
            way_out="give the change of the last answer",
        )
    return after


def _within(text: str, name: str, most: float) -> float:
    value = number(text, name)
    if 0.0 < value <= most:
        return value
    raise unusable(name, text, f"give a number above 0 and up to {most:g}")


def moment_in(text: str, name: str) -> float:
    """Return Unix milliseconds of a time that is RFC 3339 or a number of them.

    Raises
    ------
    ServiceError : neither.

    Examples
    --------
    >>> moment_in("1767322800250", "at"), moment_in("2026-01-02T03:00:00.250Z", "at")
    (1767322800250.0, 1767322800250.0)
    """
    if "-" not in text[1:] and ":" not in text:
        return number(text, name)
    return unix_ms(time_in(text, (name,), "query"))


def unix_ms(at: datetime) -> float:
    """Return Unix milliseconds of a UTC time."""
    return (at - datetime(1970, 1, 1, tzinfo=UTC)).total_seconds() * 1000.0
