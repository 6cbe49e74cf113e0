"""One arm as its input shows it: the newest good posture, whether it can be relied on, and why not.

Idea: each sample is weighed before it stands. Older and repeated ones are dropped; what no arm of
this table could do, or what a clock cannot have shown, makes the quality uncertain and leaves the
last good posture where it is. An input that stops is told by a timer. Nothing here asks which time
it is of the wall: order and ages are those of the steady clock.
Left out: whether the arm can be where a sample says (weighing.py), observers and timers
(live_arms.py), poses (service/operations/live.py).
"""

from collections import Counter, deque
from collections.abc import Callable
from dataclasses import dataclass, field, replace
from math import isfinite

from kinematics.sampled_motion import joint_rates
from service.live.clocks import Clock
from service.live.history import History
from service.live.order import Order
from service.live.period import Period
from service.live.samples import (
    IN_FUTURE,
    JOINTS_CHANGED,
    NOT_FINITE,
    STALE,
    SUPERSEDED,
    TOO_OLD,
    Quality,
    Sample,
    Standing,
    Taken,
)
from service.live.source_clock import SourceClock
from service.live.weighing import Weighing, elapsed_s
from service.operations.arms import StoredArm
from service.wire.arms import ReadArm

_MOST_SOURCES = 8
"""Sources of one arm that are told apart; there should be one."""

_TAKING_TURNS_S = 5.0
"""Sources that sent something within this time are at it together."""

_RATES_OVER_S = 0.1
_RATES_FROM = 64
"""Rates are the slope over this time, of so many samples at most: of two samples a millisecond
apart an encoder's last digit would be all."""

_SAY = {
    STALE: "joint values have stopped: stale after {} s without any",
    NOT_FINITE: "the last joint values are not all finite numbers",
    IN_FUTURE: "the last joint values are from the future by the clock of their source",
    TOO_OLD: "the last joint values are old by the clock of their source, or it was set",
    JOINTS_CHANGED: "the arm has another count of joints since its last revision",
}


@dataclass(slots=True)
class Source:
    """One sender of joint values: its order, its clock and when it was last heard."""

    name: str
    order: Order = field(default_factory=Order)
    clock: SourceClock = field(default_factory=SourceClock)
    heard_s: float = 0.0


class LiveArm:
    """The live state of one arm.

    Parameters
    ----------
    stored : the arm as it is stored now.
    next_change : counts changes, of all arms together.

    Attributes
    ----------
    standing : how it stands now.
    period, history, counts : of its input; ``counts`` says how many samples were taken (``good``),
        doubted and dropped, by reason.
    looked_at_s : when somebody last asked how it stands, by the steady clock.
    heard_s, heard_from : when something new came last, and from which source, good or doubted.
    """

    def __init__(
        self, stored: StoredArm[ReadArm], clock: Clock, next_change: Callable[[], int]
    ) -> None:
        self._clock, self._next_change = clock, next_change
        self.name = stored.read.arm.name
        self.period = Period()
        self.history = History(stored.read.arm.joint_count)
        self.counts: Counter[str] = Counter()
        self.looked_at_s = float("-inf")
        self.heard_s = float("-inf")
        self.heard_from: str | None = None
        self._sources: dict[str, Source] = {}
        self._recent: deque[Sample] = deque(maxlen=_RATES_FROM)
        self._is_real = False
        self._weighing = Weighing(stored.read)
        at_s, at_ms = clock.steady_s(), clock.wall_ms()
        self.standing = Standing(self.name, stored, None, "bad", STALE, "", 0, at_s, at_ms)

    def hear(self, sample: Sample) -> None:
        """Note who sends, before it is taken in: of samples that came together, the newest."""
        if sample.simulated and self._is_real:
            return
        if not sample.simulated and not self._is_real:
            self._only_real()
        source = self._source(sample.source, sample.received_s)
        if sample.sampled_ms is None or not isfinite(sample.sampled_ms):
            return
        times_set = source.clock.times_set
        source.clock.heard(sample.received_s, sample.sampled_ms / 1000.0, self._wall_difference())
        if source.clock.times_set > times_set:
            # Its clock was set and is believed now: its times begin anew.
            source.order.begin_anew()
            self._recent.clear()

    def came(self, sample: Sample) -> None:
        """Note that something new came: what comes twice or late does not show that an arm lives.

        A gateway whose controller has stopped may well repeat its last values for ever.
        """
        self.heard_s, self.heard_from = sample.received_s, sample.source
        self.period.arrived(sample.received_s, sample.period_s)

    def take(self, sample: Sample) -> Taken:
        """Weigh a sample that was heard and, if it is good, let it stand."""
        if sample.simulated and self._is_real:
            return self._dropped(SUPERSEDED)
        source = self._source(sample.source, sample.received_s)
        why = self._doubted_alone(sample, source)
        if why:
            return self._doubted(why, _SAY[why])
        sampled_s = None if sample.sampled_ms is None else sample.sampled_ms / 1000.0
        dropped = source.order.dropped(sample.sequence, sampled_s)
        if dropped:
            return self._dropped(dropped)
        why, say = self._weighing.doubt(self.standing.sample, sample)
        if why:
            return self._doubted(why, say)
        if sampled_s is not None:
            sample = replace(sample, delay_s=source.clock.delay(sample.received_s, sampled_s))
        self._recent.append(sample)
        self.counts["good"] += 1
        self.history.add(sample.happened_s, sample.sequence, sample.simulated, sample.joints)
        self._stand("good", "", "", sample)
        return Taken(self.standing)

    def became_stale(self, at_s: float) -> bool:
        """Say that the input has stopped, if it has; return whether that is new."""
        since = at_s - self.heard_s
        if self.standing.reason == STALE or since < self.period.stale_after_s:
            return False
        for source in self._sources.values():
            # Whoever begins again may count anew.
            source.order.begin_anew()
        self._recent.clear()
        self._stand("bad", STALE, _SAY[STALE].format(_seconds(self.period.stale_after_s)))
        return True

    def revised(self, stored: StoredArm[ReadArm]) -> bool:
        """Take the arm as it is stored now; return whether it is another revision."""
        before = self.standing.stored
        if stored is before or stored.record.revision < before.record.revision:
            # An older one was looked up before the newest was stored, and took longer.
            return False
        same = stored.record.revision == before.record.revision
        self.standing = replace(self.standing, stored=stored)
        if same:
            return False
        self._weighing = Weighing(stored.read)
        joints = stored.read.arm.joint_count
        if joints != self.history.joints:
            # Nothing that came before is a posture of this arm.
            self.history = History(joints)
            self._recent.clear()
            self.standing = replace(self.standing, sample=None)
            self._stand("bad", JOINTS_CHANGED, _SAY[JOINTS_CHANGED])
        else:
            self._stand(self.standing.quality, self.standing.reason, self.standing.say)
        return True

    def age_s(self, now_s: float) -> float:
        """Return how long ago the newest good sample was so, infinite where there is none."""
        sample = self.standing.sample
        return float("inf") if sample is None else max(now_s - sample.happened_s, 0.0)

    def rates(self) -> tuple[float, ...] | None:
        """Return the joint speeds that the last samples show, SI; None where they are too few."""
        if len(self._recent) < 2:
            return None
        last = self._recent[-1]
        first = self._recent[-2]
        for sample in reversed(self._recent):
            if last.happened_s - sample.happened_s > _RATES_OVER_S:
                break
            if sample is not last:
                first = sample
        elapsed = elapsed_s(first, last)
        return joint_rates(first.joints, last.joints, elapsed) if elapsed > 0.0 else None

    def offset_ms(self) -> float | None:
        """Return the source's clock minus our wall clock, milliseconds; None if it says no times.

        The time that the fastest sample took is in it, as if it were part of the difference.
        """
        sample = self.standing.sample
        source = None if sample is None else self._sources.get(sample.source)
        difference_s = None if source is None else source.clock.difference_s
        if difference_s is None:
            return None
        return (self._wall_difference() - difference_s) * 1000.0

    def sources(self, now_s: float) -> tuple[str, ...]:
        """Return who sent something within the last seconds."""
        heard = self._sources.values()
        return tuple(one.name for one in heard if now_s - one.heard_s <= _TAKING_TURNS_S)

    def _only_real(self) -> None:
        """Forget what was simulated: a real input has come, and stays."""
        self._is_real = True
        self.counts.clear()
        if self.standing.sample is not None:
            self._sources.clear()
            self._recent.clear()
            self.period = Period()
            self.standing = replace(self.standing, sample=None)

    def _source(self, name: str, now_s: float) -> Source:
        source = self._sources.pop(name, None)
        if source is None:
            if len(self._sources) == _MOST_SOURCES:
                del self._sources[next(iter(self._sources))]
            source = Source(name)
        # The last heard stands last, so that the longest silent gives way.
        self._sources[name] = source
        source.heard_s = now_s
        return source

    def _doubted_alone(self, sample: Sample, source: Source) -> str:
        """Return why the numbers or the time of a sample cannot be right, "" where they can."""
        if not all(map(isfinite, sample.joints)):
            return NOT_FINITE
        if sample.sampled_ms is None:
            return ""
        at_s = sample.sampled_ms / 1000.0
        return source.clock.doubt(sample.received_s, at_s, self._wall_difference())

    def _wall_difference(self) -> float:
        """Return our steady clock minus our wall clock, seconds."""
        return self._clock.steady_s() - self._clock.wall_ms() / 1000.0

    def _stand(self, quality: Quality, reason: str, say: str, sample: Sample | None = None) -> None:
        self.standing = Standing(
            self.name,
            self.standing.stored,
            self.standing.sample if sample is None else sample,
            quality,
            reason,
            say,
            self._next_change(),
            self._clock.steady_s(),
            self._clock.wall_ms(),
        )

    def _doubted(self, why: str, say: str) -> Taken:
        self.counts[why] += 1
        self._stand("uncertain", why, say)
        return Taken(self.standing, doubted=why, say=say)

    def _dropped(self, why: str) -> Taken:
        self.counts[why] += 1
        return Taken(self.standing, dropped=why)


def _seconds(duration: float) -> str:
    """Return seconds as a person says them.

    Examples
    --------
    >>> _seconds(0.0547), _seconds(0.3), _seconds(2.04), _seconds(1234.5)
    ('0.055', '0.3', '2', '1234')
    """
    return f"{duration:.2g}" if duration < 10.0 else f"{duration:.0f}"
