"""The live state of all arms: who is told of changes, and the timers that tell of silence.

Everything here happens on one event loop, one thing after the other; whoever is told must return at
once. Left out: poses, and the addresses.
"""

import logging
from collections.abc import Callable, Iterable
from functools import partial
from typing import Protocol

from service.live.clocks import Clock
from service.live.live_arm import LiveArm
from service.live.samples import STALE, Kind, Notice, Sample, Standing, Taken
from service.operations.arms import StoredArm
from service.wire.arms import ReadArm

_LOG = logging.getLogger(__name__)
_SOONER_S = 0.001
"""A timer that is to go off sooner than it was set by less than this stays as it is."""

_HELD_UP_S = 0.01
_TO_READ_S = 0.02
"""A timer that goes off so late was held up, and with it all that came: what is there already is
read before an input is called silent."""


class Timer(Protocol):
    """What ``later`` returns."""

    def cancel(self) -> None:
        """Do not call any more."""

    def when(self) -> float:
        """Return when it will be called, by its own clock."""


Later = Callable[[float, Callable[[], None]], Timer]
Follower = Callable[[str, Standing | None], None]
"""Told of each change of an arm, and None when it is stored no more."""


class LiveArms:
    """Arms by name, once something was asked or came of them.

    Parameters
    ----------
    later : calls a function after so many seconds, on the loop everything else is called on.

    Attributes
    ----------
    observers : told of each change; must return at once.
    change : the number of the last change. Numbers begin at the milliseconds of the start, so that
        those of a former process are lower.
    """

    def __init__(self, clock: Clock, later: Later) -> None:
        self.clock = clock
        self.observers: list[Callable[[Notice], None]] = []
        self.change = int(clock.wall_ms())
        self._later = later
        self._arms: dict[str, LiveArm] = {}
        self._timers: dict[str, tuple[float, Timer]] = {}
        self._followers: dict[str, list[Follower]] = {}
        self._followers_of_all: list[Follower] = []

    def names(self) -> list[str]:
        """Return the arms of which something came, in the order of their names."""
        return sorted(self._arms)

    def get(self, name: str) -> LiveArm | None:
        """Return one arm; None where nothing came of it."""
        return self._arms.get(name)

    def newest(self, name: str) -> Standing | None:
        """Return how an arm stands; None where nothing ever came."""
        arm = self._arms.get(name)
        return None if arm is None else arm.standing

    def feed(self, stored: StoredArm[ReadArm], samples: Iterable[Sample]) -> list[Taken]:
        """Take in samples of an arm that came together, the oldest first.

        Only what the last of them made of it is told to followers: newest wins.
        """
        given = list(samples)
        if not given:
            return []
        arm = self.of(stored)
        before = arm.standing
        arm.hear(given[-1])
        taken = [arm.take(sample) for sample in given]
        if all(one.dropped for one in taken):
            return taken
        arm.came(given[-1])
        self._watch_for_silence(arm)
        if arm.standing is not before:
            self._tell("good" if arm.standing.quality == "good" else "uncertain", arm)
        return taken

    def of(self, stored: StoredArm[ReadArm]) -> LiveArm:
        """Return the live arm of a stored one, which is the newest revision."""
        name = stored.read.arm.name
        arm = self._arms.get(name)
        if arm is None:
            arm = self._arms[name] = LiveArm(stored, self.clock, self._next_change)
        elif arm.revised(stored):
            self._tell("revision", arm)
        return arm

    def newer(self, stored: StoredArm[ReadArm]) -> StoredArm[ReadArm]:
        """Return the newer of a stored arm and what is known of it here.

        Who looked it up may have waited for that, and have the revision before.
        """
        arm = self._arms.get(stored.read.arm.name)
        known = stored if arm is None else arm.standing.stored
        return max(stored, known, key=lambda one: one.record.revision)

    def forget(self, name: str) -> None:
        """Forget an arm that is stored no more."""
        arm = self._arms.pop(name, None)
        if arm is None:
            return
        timer = self._timers.pop(name, None)
        if timer is not None:
            timer[1].cancel()
        # Who knows what all arms were like knows no more what they are like now.
        self._next_change()
        for follower in (*self._followers.get(name, ()), *self._followers_of_all):
            follower(name, None)
        for observer in self.observers:
            observer(Notice("gone", arm.standing, ()))

    def look_at(self, name: str) -> None:
        """Note that somebody wants to know how an arm stands."""
        arm = self._arms.get(name)
        if arm is not None:
            arm.looked_at_s = self.clock.steady_s()

    def is_looked_at(self, name: str, within_s: float = 10.0) -> bool:
        """Return whether anybody follows an arm, or asked about it a short while ago."""
        if self._followers_of_all or self._followers.get(name):
            return True
        arm = self._arms.get(name)
        return arm is not None and self.clock.steady_s() - arm.looked_at_s <= within_s

    def follow(self, name: str | None, follower: Follower) -> Callable[[], None]:
        """Tell of each change of an arm (None: of all); return what ends it."""
        followers = self._followers_of_all if name is None else self._followers.setdefault(name, [])
        followers.append(follower)

        def leave() -> None:
            followers.remove(follower)
            if name is not None and not followers:
                self._followers.pop(name, None)

        return leave

    def stop(self) -> None:
        """End all timers."""
        for _, timer in self._timers.values():
            timer.cancel()
        self._timers.clear()

    def _next_change(self) -> int:
        self.change += 1
        return self.change

    def _tell(self, kind: Kind, arm: LiveArm) -> None:
        standing = arm.standing
        for follower in (*self._followers.get(arm.name, ()), *self._followers_of_all):
            follower(arm.name, standing)
        if self.observers:
            notice = Notice(kind, standing, arm.sources(self.clock.steady_s()))
            for observer in self.observers:
                try:
                    observer(notice)
                except Exception:
                    # Whoever looks on must not keep a value from standing.
                    _LOG.exception("an observer of %s failed", arm.name)

    def _watch_for_silence(self, arm: LiveArm) -> None:
        """Have the arm looked at when its input will have been silent for too long."""
        now = self.clock.steady_s()
        due = now + arm.period.stale_after_s
        waiting = self._timers.get(arm.name)
        if waiting is not None:
            # One that goes off early looks again: to set it anew with each sample would cost more.
            if waiting[0] <= due + _SOONER_S:
                return
            waiting[1].cancel()
        self._set_timer(arm.name, due, now)

    def _set_timer(self, name: str, due: float, now: float, *, again: bool = False) -> None:
        look = partial(self._perhaps_silent, name, due, again)
        self._timers[name] = (due, self._later(max(due - now, _SOONER_S), look))

    def _perhaps_silent(self, name: str, due: float, again: bool) -> None:
        self._timers.pop(name, None)
        arm = self._arms.get(name)
        if arm is None:
            return
        now = self.clock.steady_s()
        if now - due > _HELD_UP_S and not again:
            self._set_timer(name, now + _TO_READ_S, now, again=True)
        elif arm.became_stale(now):
            self._tell("stale", arm)
        elif arm.standing.reason != STALE:
            self._set_timer(name, arm.heard_s + arm.period.stale_after_s, now)
