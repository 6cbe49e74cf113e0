"""How fast a survey goes on, and how long it will still take.

The pace is that of the last while, not since the beginning: a machine that others use changes its
pace, and a start counts no work. Left out: telling it (routes/surveys.py).
"""

from collections import deque
from collections.abc import Callable
from time import monotonic

_WHILE_S = 20.0
_LEAST_S = 1.0
"""Before that nothing is said: a first chunk tells of the start more than of the work."""


class Pace:
    """What was done when, of one survey, in this process.

    Examples
    --------
    >>> clock = iter([0.0, 1.0, 3.0, 4.0])
    >>> pace = Pace("20260101-1", 100, now=lambda: next(clock))
    >>> pace.went_on(100)
    >>> pace.went_on(200)
    >>> pace.remaining_s(1000)
    5.0
    """

    def __init__(self, survey: str, done: int, now: Callable[[], float] = monotonic) -> None:
        self.survey, self._now = survey, now
        self._done = done
        self._began = now()
        self._known: deque[tuple[float, int]] = deque()

    def went_on(self, size: int) -> None:
        """Note that so much more is done."""
        at = self._now()
        self._done += size
        self._known.append((at, self._done))
        while len(self._known) > 2 and at - self._known[0][0] > _WHILE_S:
            self._known.popleft()

    def remaining_s(self, total: int) -> float | None:
        """Return the seconds that what is left of ``total`` takes at this pace, None before any."""
        if len(self._known) < 2:
            return None
        (first, before), (last, done) = self._known[0], self._known[-1]
        if last - first < _LEAST_S:
            return None
        waited = self._now() - last
        return max((total - done) * (last - first) / (done - before) - waited, 0.0)
