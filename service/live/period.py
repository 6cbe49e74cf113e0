"""How often an input comes, found from what comes, and from when on it has stopped.

Idea: the median of the last intervals between arrivals; one pause among them, or a burst, moves it
little. Values that come together are one arrival. Left out: telling anybody (live_arms.py).
"""

from collections import deque
from statistics import median

_INTERVALS = 9
_PERIODS_TO_STALE = 3
_FIRST_S = 1.0
"""Before a second arrival the period is not known: a screen must not call a source of one value a
second stale before the second value."""

_SHORTEST_TO_STALE_S = 0.05
"""Where the period is found from what comes: a sender on a busy computer that means to send every
10 ms is held up for 30 to 50 ms several times a minute, and would be called stale each time."""

_SHORTEST_DECLARED_S = 0.01
"""Who says how often values come means to keep to it; less than this no timer here tells apart."""


class Period:
    """The period of one arm's input.

    Examples
    --------
    >>> period = Period()
    >>> period.stale_after_s
    3.0
    >>> for at in (10.0, 10.2, 10.4, 10.6):
    ...     period.arrived(at)
    >>> round(period.seconds, 3), round(period.stale_after_s, 3)
    (0.2, 0.6)
    """

    def __init__(self) -> None:
        self._intervals: deque[float] = deque(maxlen=_INTERVALS)
        self._last: float | None = None
        self._declared: float | None = None
        self._median: float | None = None

    def arrived(self, at_s: float, declared_s: float | None = None) -> None:
        """Note an arrival, and how often its source says that it sends."""
        if self._last is not None and at_s > self._last:
            self._intervals.append(at_s - self._last)
            self._median = None
        self._last = at_s
        self._declared = declared_s

    @property
    def seconds(self) -> float | None:
        """The period; None before it is known."""
        if self._declared is not None:
            return self._declared
        if self._median is None and self._intervals:
            self._median = median(self._intervals)
        return self._median

    @property
    def stale_after_s(self) -> float:
        """How long after the last arrival the input counts as stopped."""
        if self._declared is not None:
            return max(_PERIODS_TO_STALE * self._declared, _SHORTEST_DECLARED_S)
        seconds = self.seconds
        known = _FIRST_S if seconds is None else seconds
        return max(_PERIODS_TO_STALE * known, _SHORTEST_TO_STALE_S)
