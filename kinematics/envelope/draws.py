"""Volume of a reach that is no section turned, by places drawn in it.

Idea: space around the reach is cut into cubes and in each one place is drawn at random and searched
for. The volume is that of the cubes whose place is reached. A cube wholly inside or outside always
tells the truth, so only those at the boundary add to the error, and their number is known: a cube
whose neighbours say otherwise. Each errs by at most half a cube in the mean square.

Source: stratified sampling (Haber 1966). Bound: four standard deviations. Not covered: reach far
narrower than a cube.
"""

from collections.abc import Sequence
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from kinematics.envelope.descents import Seeker
from kinematics.envelope.grid_reach import Grid, Samples, fill, shifted
from kinematics.envelope.measures import Measure
from kinematics.envelope.tolerances import DRAWN_BOUND, MOST_CUBES, PLACES_DRAWN, SHORT_OF

Marks = NDArray[np.bool_]


class AskedVolume:
    """A volume that is drawn, in pieces that do not depend on each other.

    As of ``AskedView``, with slabs of space in place of stripes; no two of them share places.

    Parameters
    ----------
    seeker, samples : in a view of three coordinates, (count, 3) places.
    count : of places drawn in the box around what is reached.

    Attributes
    ----------
    pieces : how many slabs there are; places : in all, as far as samples tell.

    Examples
    --------
    Three slides of 1 m.

    >>> from kinematics.envelope.descents import InView
    >>> from kinematics.reach.travel_region import TravelRegion
    >>> one = np.ones((1, 3, 3)) * np.eye(3)
    >>> box = TravelRegion(np.zeros(3), np.ones(3), np.empty((0, 3)), np.empty(0), np.empty(0))
    >>> slides = InView(lambda q: (q, np.repeat(one, len(q), 0)), box, np.ones(3), 1e-9)
    >>> corners = np.array([[0.0, 0.0, 0.0], [1.0, 1.0, 1.0]])
    >>> asked = AskedVolume(slides, Samples(corners, corners), 1728)
    >>> volume = asked.told([asked.piece(number) for number in range(asked.pieces)])
    >>> bool(abs(volume.value - 1.0) < volume.error_bound < 0.1)
    True
    """

    def __init__(self, seeker: Seeker, samples: Samples, count: int) -> None:
        self._seeker, self._samples = seeker, samples
        least, most = samples.places.min(axis=0), samples.places.max(axis=0)
        self._least, self._sides = least, most - least
        self.step = self._step(count)
        self._first_step = max(self.step, self._step(PLACES_DRAWN))
        self._thin = bool(self._sides.min() < 2.0 * self.step)
        shape = np.ceil(self._sides / self.step) + 2.0
        self._is_finer = self.step < self._first_step and not self._thin
        slabs = np.ceil(shape.prod() / _SLAB)
        self.pieces = int(min(slabs, shape[0])) if self._is_finer else 1
        self.places = int(shape.prod())

    def _step(self, count: int) -> float:
        cube = float((self._sides.prod() / count) ** (1.0 / 3.0))
        return max(cube, float(self._sides.max()) / MOST_CUBES)

    @cached_property
    def _first(self) -> Grid:
        """The grid of the usual fineness, filled; its rim is not reached."""
        step, margin = self._first_step, 2
        while True:
            shape = tuple((np.ceil(self._sides / step).astype(int) + 2 * margin).tolist())
            shifts = np.random.default_rng(_SEED).random((*shape, 3))
            joints = self._samples.joint_values.shape[1]
            grid = Grid(self._least - margin * step, step, shape, joints, shifts)
            fill(grid, self._seeker, self._samples)
            inner = grid.reached[1:-1, 1:-1, 1:-1]
            if int(inner.sum()) == int(grid.reached.sum()):
                return grid
            margin *= 2  # samples fell that short of the extremes

    @cached_property
    def _seeds(self) -> Samples:
        return self._samples.with_those_of(self._first)

    def piece(self, number: int) -> Marks:
        """Return which places of a slab are reached, (planes, rows, columns)."""
        if self._thin:
            return np.zeros((0, 0, 0), dtype=bool)
        first = self._first
        if not self._is_finer:
            return first.reached
        planes, *others = (
            np.ceil(first.step / self.step * np.array(first.shape)).astype(int).tolist()
        )
        begin, end = (part * planes // self.pieces for part in (number, number + 1))
        shape = (end - begin, *others)
        shifts = np.random.default_rng([_SEED, number]).random((*shape, 3))
        joints = self._samples.joint_values.shape[1]
        slab = Grid(first.origin, self.step, shape, joints, shifts, (begin, 0, 0))
        fill(slab, self._seeker, self._seeds, self._first_step)
        return slab.reached

    def told(self, pieces: Sequence[Marks]) -> Measure:
        """Return the volume that all pieces make, in their order."""
        if self._thin:
            return self.unasked()
        reached = np.concatenate(pieces)
        doubtful = np.zeros(reached.shape, dtype=bool)
        for axis in range(3):
            for by in (-1, 1):
                way = np.zeros(3, dtype=np.intp)
                way[axis] = by
                doubtful |= shifted(reached, way) != reached
        cube = self.step**3
        spread = 0.5 * float(np.sqrt(np.count_nonzero(doubtful)))
        return Measure(int(reached.sum()) * cube, DRAWN_BOUND * spread * cube)

    def unasked(self) -> Measure:
        """Return what is known without asking, and all that is told of what is too thin for cubes:
        something between nothing and a box that samples fall short of."""
        half = 0.5 * float((SHORT_OF * self._sides).prod())
        return Measure(half, half)


_SLAB = 12000
"""Places in a slab: half a second's work."""


def between(drawn: Measure, least: float, most: float) -> Measure:
    """Return a drawn volume that is also known to lie between two values.

    Examples
    --------
    >>> between(Measure(3.0, 1.0), 3.5, 9.0)
    Measure(value=3.75, error_bound=0.25)
    """
    low = max(least, drawn.value - drawn.error_bound)
    high = min(most, drawn.value + drawn.error_bound)
    if high < low:
        return drawn
    return Measure(0.5 * (low + high), 0.5 * (high - low))


_SEED = 20260
"""Of the places drawn: the same in each answer."""
