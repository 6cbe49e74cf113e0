"""Watches live arms: what their values mean is measured, and what happens is put into the log.

Called on the event loop with each change, so it measures some fifty times a second at most and
writes nothing itself. Left out: when an event begins and ends (detector.py), and the log.
"""

from collections.abc import Callable
from datetime import datetime
from functools import partial
from typing import Any

import numpy as np

from kinematics.errors import KinematicsError
from kinematics.kernels.judgement import SMALLEST
from kinematics.travel_limits import working_margin
from service.errors import ServiceError
from service.events.detector import Detector, Happening
from service.events.kinds import Kind, Threshold, thresholds_of
from service.events.ports import ENDED, OPEN, UNKNOWN, Event
from service.events.sentences import sentence
from service.live.clocks import Clock, wall_at
from service.live.samples import Notice, Standing
from service.operations.arms import StoredArm
from service.operations.questions import Question
from service.operations.single import question_about
from service.sorted_ids import new_id
from service.wire.arms import ReadArm
from service.wire.single import SingleQuestion
from service.wire.times import utc_at

_EVERY_S = 0.019
"""A little less than the 0.02 s meant, as clocks are not that even."""

_FORM = "quaternion-wxyz"


class EventWatch:
    """The events of all live arms of one service; an observer of ``LiveArms``.

    Parameters
    ----------
    put : takes an event that began, ended or goes on.
    """

    def __init__(self, put: Callable[[Event], None], clock: Clock) -> None:
        self._put, self._clock = put, clock
        self._arms: dict[str, _WatchedArm] = {}

    def __call__(self, notice: Notice) -> None:
        """Take in a change of an arm."""
        name = notice.standing.arm
        if notice.kind == "gone":
            watched = self._arms.pop(name, None)
            if watched is not None:
                watched.leave()
            return
        watched = self._arms.get(name)
        if watched is None:
            watched = self._arms[name] = _WatchedArm(name, self._put, self._clock)
        watched.see(notice)

    def leave(self) -> None:
        """Watch no more: nobody will know when what is open ends."""
        for watched in self._arms.values():
            watched.leave()
        self._arms.clear()


class _WatchedArm:
    """One arm: its detector, and the events that are open by their kinds."""

    def __init__(self, name: str, put: Callable[[Event], None], clock: Clock) -> None:
        self._name, self._put, self._clock = name, put, clock
        self._detector = Detector(self._changed)
        self._begun: dict[Kind, tuple[str, float]] = {}
        self._revision: int | None = None
        self._simulated = False
        self._measured_s = float("-inf")
        self._of: StoredArm[ReadArm] | None = None
        self._question: Question | None = None
        self._thresholds: dict[Kind, Threshold] = {}

    def see(self, notice: Notice) -> None:
        """Take in a change."""
        standing, sample = notice.standing, notice.standing.sample
        revision = standing.stored.record.revision
        before, self._revision = self._revision, revision
        if before is not None and before != revision:
            self._detector.revised(standing.at_s, before, revision)
        if notice.kind == "stale":
            since = standing.at_s if sample is None else sample.received_s
            self._detector.silent(standing.at_s, since)
        elif notice.kind == "good" and sample is not None:
            self._simulated = sample.simulated
            self._detector.heard(standing.at_s, sample.source, notice.sources)
            if standing.at_s - self._measured_s >= _EVERY_S:
                self._measured_s = standing.at_s
                self._measure(standing, sample.joints)
        elif notice.kind == "uncertain":
            self._detector.doubted(standing.at_s)

    def leave(self) -> None:
        """Watch no more."""
        for happening in self._detector.open:
            self._put(self._event(happening, UNKNOWN))

    def _measure(self, standing: Standing, joints: tuple[float, ...]) -> None:
        if self._of is not standing.stored:
            self._of, self._question = standing.stored, _question(standing.stored)
            self._thresholds = _thresholds(standing.stored, self._question)
        arm = standing.stored.read.arm
        margin = float(working_margin(arm, np.array(joints)))
        values: dict[Kind, float] = {"outside-working-travel": margin}
        if self._question is not None and self._question.prepared is not None:
            smallest = self._question.reader.read(joints).readings[SMALLEST]
            values |= {"near-singular": smallest, "singular": smallest}
        self._detector.measured(standing.at_s, values, self._thresholds)

    def _changed(self, happening: Happening) -> None:
        if happening.kind not in self._begun:
            began_ms = wall_at(self._clock, happening.began_s)
            self._begun[happening.kind] = (new_id(utc_at(began_ms)), began_ms)
        state = OPEN if happening.ended_s is None else ENDED
        self._put(self._event(happening, state))
        if state == ENDED:
            del self._begun[happening.kind]

    def _event(self, happening: Happening, state: str) -> Event:
        name, began_ms = self._begun[happening.kind]
        # Counted on from the beginning by the steady clock, whatever the wall's was set to.
        later = partial(_later, began_ms, happening.began_s)
        return Event(
            id=name,
            arm=self._name,
            kind=happening.kind,
            state=state,
            began_at=utc_at(began_ms),
            seen_at=later(happening.seen_s),
            ended_at=None if happening.ended_s is None else later(happening.ended_s),
            document=self._told(happening),
            simulated=self._simulated,
        )

    def _told(self, happening: Happening) -> dict[str, Any]:
        threshold = happening.threshold
        return {
            "say": sentence(happening),
            "peak": happening.peak,
            "begins_at": None if threshold is None else threshold.begins,
            "ends_at": None if threshold is None else threshold.ends,
            "from": happening.told.get("from"),
            "to": happening.told.get("to"),
            "revision": self._revision,
        }


def _question(stored: StoredArm[ReadArm]) -> Question | None:
    """Return what singularity is judged by: the default tool, the flange where there is none."""
    arm = stored.read.arm
    tool = None if arm.default_tool is not None or not arm.tools else "flange"
    try:
        return question_about(stored, SingleQuestion(arm.name, _FORM, tool=tool))
    except (ServiceError, KinematicsError):
        return None


def _thresholds(stored: StoredArm[ReadArm], question: Question | None) -> dict[Kind, Threshold]:
    singular = stored.read.arm.thresholds.singular
    prepared = None if question is None else question.prepared
    return thresholds_of(singular if prepared is None else prepared[0].near, singular)


def _later(began_ms: float, began_s: float, at_s: float) -> datetime:
    return utc_at(began_ms + (at_s - began_s) * 1000.0)
