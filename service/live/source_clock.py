"""How a source's clock stands to ours, from what it sends; which of its times cannot be right.

Idea: the time from measuring to receiving is never less than none, so of the differences between
the two clocks that samples of late show, the smallest is nearest to how the clocks differ; what a
sample's difference exceeds it by is how late that sample came. A time that does not fit is doubted
until the source has kept to it for a while: then its clock was set, or never was right.
Source: the clock filter of RFC 5905, section 10 (minimum delay), one way only: half of the delay
cannot be told from the offset, so the fastest transfer counts as none.
Left out: the rate of the source's clock; it is followed, as old differences are forgotten.
"""

from collections import deque
from dataclasses import dataclass

from service.live.samples import IN_FUTURE, TOO_OLD

_AHEAD_S = 2.0
"""A sample may be from so much later than the fastest before it: clocks that are stepped by a time
service move by less, and nothing is a second faster than the fastest of a whole minute."""

_BEHIND_S = 10.0
"""A sample may come so late: a network that stalls, a sender that was held up. What is older was
kept and is sent after the fact, or its clock was set back."""

_KEPT_TO_S = 1.0
"""So long must a source keep to a doubted time before it is believed; what is sent after the fact
comes in less, or not at the pace at which it was measured."""

_KEPT_TO_COUNT = 3
_PACE_S = 0.25
"""So much may the two clocks differ over that while: what a busy network makes of it."""

_BIN_S = 5.0
_BINS = 12
"""The smallest of a minute, in bins: clocks drift by less than a millisecond in that time."""


@dataclass(slots=True)
class _Doubted:
    """The first of the samples in a row whose time does not fit, and how many there were."""

    received_s: float
    sampled_s: float
    last_s: float
    count: int


class SourceClock:
    """The clock of one source against our steady one.

    Differences are received minus sampled, seconds. Before anything came, the source's clock is
    taken to show the same time as our wall clock.

    Attributes
    ----------
    times_set : how often a doubted time was believed in the end.

    Examples
    --------
    >>> clock = SourceClock()
    >>> clock.heard(received_s=100.0, sampled_s=40.0, wall_difference_s=60.0)
    >>> clock.delay(100.0, 40.0), clock.delay(101.0, 40.5)
    (0.0, 0.5)
    >>> clock.doubt(received_s=102.0, sampled_s=3642.0, wall_difference_s=60.0)
    'time-in-future'
    """

    def __init__(self) -> None:
        self._bins: deque[tuple[float, float]] = deque(maxlen=_BINS)
        self._doubted: _Doubted | None = None
        self.times_set = 0

    @property
    def difference_s(self) -> float | None:
        """The smallest difference of late; None before the first sample with a time."""
        return min(smallest for _, smallest in self._bins) if self._bins else None

    def heard(self, received_s: float, sampled_s: float, wall_difference_s: float) -> None:
        """Learn from an arrival: of several samples that came together, from the newest.

        Parameters
        ----------
        wall_difference_s : our steady clock minus our wall clock, for a source not known yet.
        """
        if not self.doubt(received_s, sampled_s, wall_difference_s):
            self._doubted = None
        elif self._kept_to(received_s, sampled_s):
            self._bins.clear()
            self._doubted = None
            self.times_set += 1
        else:
            return
        difference = received_s - sampled_s
        if not self._bins or received_s - self._bins[-1][0] >= _BIN_S:
            self._bins.append((received_s, difference))
        elif difference < self._bins[-1][1]:
            self._bins[-1] = (self._bins[-1][0], difference)

    def doubt(self, received_s: float, sampled_s: float, wall_difference_s: float) -> str:
        """Return why the time of a sample cannot be right, "" where it can."""
        expected = self.difference_s
        if expected is None:
            expected = wall_difference_s
        over = received_s - sampled_s - expected
        if -_AHEAD_S <= over <= _BEHIND_S:
            return ""
        return IN_FUTURE if over < 0.0 else TOO_OLD

    def delay(self, received_s: float, sampled_s: float) -> float:
        """Return how late a sample came, seconds; of the fastest of late this is none."""
        smallest = self.difference_s
        return 0.0 if smallest is None else max(received_s - sampled_s - smallest, 0.0)

    def _kept_to(self, received_s: float, sampled_s: float) -> bool:
        """Return whether the source has kept to its doubted time for long enough."""
        before = self._doubted
        if before is None or sampled_s <= before.last_s or not self._at_pace(received_s, sampled_s):
            self._doubted = _Doubted(received_s, sampled_s, sampled_s, 1)
            return False
        before.count += 1
        before.last_s = sampled_s
        return before.count >= _KEPT_TO_COUNT and received_s - before.received_s >= _KEPT_TO_S

    def _at_pace(self, received_s: float, sampled_s: float) -> bool:
        first = self._doubted
        assert first is not None
        elapsed = received_s - first.received_s
        return abs(elapsed - (sampled_s - first.sampled_s)) <= _PACE_S
