"""The good samples of the last ten minutes, in a bounded piece of memory.

Idea: a ring of plain doubles, a row for each sample. What comes faster than 50 Hz is thinned, so
that a row of six joints takes 80 bytes and an arm at most 2.4 MB. Left out: poses; they follow.
"""

from array import array
from bisect import bisect_left, bisect_right
from collections.abc import Sequence
from typing import NamedTuple

import numpy as np

from kinematics.table import FloatArray

KEPT_S = 600.0
_FINEST_S = 0.0199
"""A little less than the 0.02 s meant, as clocks are not that even."""

WIDEST_S = 0.05
"""What comes without a pause is kept at least so close, also where 50 Hz are no multiple of it."""

_MOST_ROWS = 30_000
_FIRST_ROWS = 512
_BESIDE = 3
"""Columns beside the joints: when it happened, its sequence (-1 for none), simulated (1 or 0)."""


class Kept(NamedTuple):
    """One sample of the past; ``happened_s`` by our steady clock, joints SI."""

    happened_s: float
    sequence: int | None
    simulated: bool
    joints: tuple[float, ...]


class History:
    """Samples of one arm, the oldest first; what is older than ten minutes is forgotten.

    Examples
    --------
    >>> history = History(joints=1)
    >>> for number in range(4):
    ...     history.add(10.0 + number / 100, number, False, (0.5,))
    >>> history.table(0.0)[:, 1].tolist(), len(history)
    ([0.0, 2.0, 3.0], 3)
    """

    def __init__(self, joints: int) -> None:
        self.joints = joints
        self._width = joints + _BESIDE
        self._rows = array("d")
        self._room = 0
        self._first = self._count = 0

    def __len__(self) -> int:
        """Return how many samples are kept."""
        return self._count

    def add(
        self, happened_s: float, sequence: int | None, simulated: bool, joints: Sequence[float]
    ) -> None:
        """Keep a sample that is newer than all before; one just before it makes place for it."""
        if self._count:
            # How late a sample came is an estimate: their order is not.
            happened_s = max(happened_s, self._happened(self._count - 1))
        self._forget(happened_s - KEPT_S)
        row = array("d", (happened_s, -1 if sequence is None else sequence, simulated, *joints))
        # The last row is always the newest; too close to the one before, it gives way to the next.
        last = self._count - 1
        if last > 0 and self._happened(last) - self._happened(last - 1) < _FINEST_S:
            self._put(last, row)
            return
        if self._count == self._room:
            self._grow()
        self._count += 1
        self._put(self._count - 1, row)

    def table(self, from_s: float, to_s: float = float("inf")) -> FloatArray:
        """Return the samples from one moment to another, the oldest first: a copy.

        Returns
        -------
        (samples, 3 + joints): when it happened, sequence (-1: none), simulated, joint values SI.
        """
        begin = bisect_left(range(self._count), from_s, key=self._happened)
        end = bisect_right(range(self._count), to_s, key=self._happened)
        if begin >= end:
            return np.empty((0, self._width))
        ring = np.frombuffer(self._rows).reshape(self._room, self._width)
        first, last = (self._first + begin) % self._room, (self._first + end - 1) % self._room
        if first <= last:
            return ring[first : last + 1].copy()
        return np.concatenate([ring[first:], ring[: last + 1]])

    def around(self, at_s: float) -> tuple[Kept, Kept] | None:
        """Return the samples just before and after a moment (twice the same if it is that one's).

        None where the moment is before the first or after the last.
        """
        place = bisect_left(range(self._count), at_s, key=self._happened)
        if place == self._count:
            return None
        after = self._at(place)
        if after.happened_s == at_s:
            return after, after
        return None if place == 0 else (self._at(place - 1), after)

    def _forget(self, before_s: float) -> None:
        while self._count and self._happened(0) < before_s:
            self._first = (self._first + 1) % self._room
            self._count -= 1

    def _grow(self) -> None:
        if self._room == _MOST_ROWS:
            self._first = (self._first + 1) % self._room
            self._count -= 1
            return
        room = min(max(2 * self._room, _FIRST_ROWS), _MOST_ROWS)
        cut = self._first * self._width
        in_order = self._rows[cut:] + self._rows[:cut]
        self._rows = in_order + array("d", bytes(8 * self._width * (room - self._room)))
        self._room, self._first = room, 0

    def _begin(self, place: int) -> int:
        return (self._first + place) % self._room * self._width

    def _happened(self, place: int) -> float:
        return self._rows[self._begin(place)]

    def _put(self, place: int, row: "array[float]") -> None:
        begin = self._begin(place)
        self._rows[begin : begin + self._width] = row

    def _at(self, place: int) -> Kept:
        begin = self._begin(place)
        happened, sequence, simulated, *joints = self._rows[begin : begin + self._width]
        return Kept(
            happened, None if sequence < 0 else int(sequence), bool(simulated), tuple(joints)
        )
