"""Whether a sample is newer than what its source sent before: by its count, else by its time.

Idea: a count says it without any clock. A lower one is an older sample, unless the source has begun
to count anew: then its time is later, or several come in a row that rise.
Left out: times that cannot be right (source_clock.py).
"""

from service.live.samples import OUT_OF_ORDER, REPEATED

_ANEW = 3
"""So many lower ones in a row that rise are a count begun anew, and no stragglers: of those a
network has rarely more than one."""


class Order:
    """The order of one source's samples.

    Examples
    --------
    >>> order = Order()
    >>> [order.dropped(sequence, None) for sequence in (5, 6, 6, 4, 7)]
    ['', '', 'repeated', 'out-of-order', '']
    >>> [order.dropped(None, time) for time in (1.0, 1.0, 0.5, 2.0)]
    ['', 'repeated', 'out-of-order', '']
    """

    def __init__(self) -> None:
        self._sequence: int | None = None
        self._sampled_s: float | None = None
        self._lower: list[float] = []
        self._is_anew = False

    def dropped(self, sequence: int | None, sampled_s: float | None) -> str:
        """Return why a sample is left out, "" where it is newer; it then is the newest."""
        why = self._why(sequence, sampled_s)
        if why:
            return why
        if self._is_anew:
            self._sequence = self._sampled_s = None
            self._is_anew = False
        self._lower.clear()
        if sequence is not None:
            self._sequence = sequence
        if sampled_s is not None:
            self._sampled_s = sampled_s
        return ""

    def begin_anew(self) -> None:
        """Take what comes next as the newest: the input had stopped, or its clock was set.

        The same once more as before is still no news.
        """
        self._is_anew = True

    def _why(self, sequence: int | None, sampled_s: float | None) -> str:
        if self._is_anew:
            said = (sequence, sampled_s)
            same = said != (None, None) and said == (self._sequence, self._sampled_s)
            return REPEATED if same else ""
        before = self._sampled_s
        later = None if sampled_s is None or before is None else sampled_s - before
        if sequence is None or self._sequence is None:
            if later is None or later > 0.0:
                return ""
            return REPEATED if later == 0.0 else OUT_OF_ORDER
        if sequence > self._sequence:
            return ""
        if later is not None and later > 0.0:
            return ""
        if sequence == self._sequence:
            return REPEATED
        return "" if self._begun_anew(sequence) else OUT_OF_ORDER

    def _begun_anew(self, sequence: int) -> bool:
        if self._lower and sequence <= self._lower[-1]:
            self._lower.clear()
        self._lower.append(sequence)
        return len(self._lower) >= _ANEW
