"""Tells when events of one arm begin and end, from what is seen of it one moment after the other.

Idea: of each kind there is one event open at most. What is measured (how near singular, how far
within working travel) begins an event below one value and ends it from another one on; the lowest
value between is its peak. Silence begins with one word and ends after several values in a row.
Moments are of a steady clock, so that nothing ends before it began whatever is done to the wall's.
What happens between two values is not seen: an arm may pass a singular place from one to the next.
Left out: clocks, poses, and who is told (watch.py).
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import Any

from service.events.kinds import FRESH_TO_END, TOLD_AGAIN_S, Kind, Threshold


@dataclass(slots=True)
class Happening:
    """One event as it is watched; moments in seconds of a steady clock.

    Attributes
    ----------
    began_s, seen_s, ended_s : when it began, was last seen to be so, and ended; None while open.
    peak : the worst value between; of a silence how long it was, of sources how often they changed.
    told : what else belongs to its kind. told_s : when somebody was told of it last.
    """

    kind: Kind
    began_s: float
    seen_s: float
    peak: float | None = None
    threshold: Threshold | None = None
    told: dict[str, Any] = field(default_factory=dict)
    ended_s: float | None = None
    told_s: float = float("-inf")


class Detector:
    """Watches one arm; ``changed`` is told of each event that begins or ends."""

    def __init__(self, changed: Callable[[Happening], None]) -> None:
        self._changed = changed
        self._open: dict[Kind, Happening] = {}
        self._fresh = 0
        self._silent_since = 0.0
        self._source: str | None = None

    @property
    def open(self) -> list[Happening]:
        """What is so at present."""
        return list(self._open.values())

    def measured(
        self, at_s: float, values: Mapping[Kind, float], thresholds: Mapping[Kind, Threshold]
    ) -> None:
        """Take in what was measured of a posture; the lower a value, the worse."""
        for kind, value in values.items():
            threshold, happening = thresholds[kind], self._open.get(kind)
            if happening is None:
                if threshold.begun(value):
                    self._begin(Happening(kind, at_s, at_s, value, threshold))
                continue
            if value >= threshold.ends:
                self._end(happening, at_s)
                continue
            happening.peak = value if happening.peak is None else min(happening.peak, value)
            self._goes_on(happening, at_s)

    def heard(self, at_s: float, source: str, together: tuple[str, ...]) -> None:
        """Take in that a value came, from whom, and who else sends at the time."""
        self._end_silence(at_s)
        before, self._source = self._source, source
        happening = self._open.get("source-changed")
        if before is not None and source != before:
            if happening is None:
                told = {"from": before, "to": source}
                happening = Happening("source-changed", at_s, at_s, 1.0, None, told)
                self._begin(happening)
            else:
                happening.peak = (happening.peak or 0.0) + 1.0
                happening.told["to"] = source
        if happening is None:
            return
        if len(together) > 1:
            self._goes_on(happening, at_s)
        else:
            self._end(happening, at_s)

    def doubted(self, at_s: float) -> None:
        """Take in that a value came that could not be relied on: it is no silence."""
        self._end_silence(at_s)

    def silent(self, at_s: float, since_s: float) -> None:
        """Take in that values have stopped; the last was heard at ``since_s``."""
        self._fresh, self._silent_since = 0, since_s
        silence = self._open.get("stale")
        if silence is None:
            self._begin(Happening("stale", at_s, at_s, max(at_s - since_s, 0.0)))
        sources = self._open.get("source-changed")
        if sources is not None:
            self._end(sources, at_s)

    def revised(self, at_s: float, before: int, after: int) -> None:
        """Take in that the arm is another revision now: an event of a moment."""
        told = {"from": before, "to": after}
        happening = Happening("revision-changed", at_s, at_s, None, None, told)
        self._begin(happening)
        self._end(happening, at_s)

    def _end_silence(self, at_s: float) -> None:
        silence = self._open.get("stale")
        if silence is None:
            return
        if self._fresh == 0:
            silence.peak = max(silence.peak or 0.0, at_s - self._silent_since)
            silence.seen_s = max(silence.seen_s, at_s)
        self._fresh += 1
        if self._fresh >= FRESH_TO_END:
            self._fresh = 0
            self._end(silence, at_s)

    def _begin(self, happening: Happening) -> None:
        self._open[happening.kind] = happening
        happening.told_s = happening.began_s
        self._changed(happening)

    def _goes_on(self, happening: Happening, at_s: float) -> None:
        happening.seen_s = max(happening.seen_s, at_s)
        if happening.seen_s - happening.told_s >= TOLD_AGAIN_S:
            happening.told_s = happening.seen_s
            self._changed(happening)

    def _end(self, happening: Happening, at_s: float) -> None:
        happening.seen_s = happening.ended_s = max(happening.seen_s, at_s)
        del self._open[happening.kind]
        self._changed(happening)
