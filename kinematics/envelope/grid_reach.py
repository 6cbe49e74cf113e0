"""Which places of a grid a point reaches, each with a posture that brings it there.

Idea: low-discrepancy postures tell where the reach is; from the nearest of them each place of the
grid is searched. From every place reached its neighbours are searched with its posture, which
differs little from theirs, until nothing changes; where reached and not reached meet, more postures
of other branches are tried before a no is believed. So a yes has a witness, and a no is what was
searched for.

Source: region growing from seeds (Adams and Bischof 1994), on searches instead of pixels. Not
covered: reach narrower than the grid, and proof of a no.
"""

from dataclasses import dataclass, field
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import NDArray

from kinematics.envelope.descents import Seeker
from kinematics.envelope.tolerances import NEAREST_TRIED, OTHERS_TRIED
from kinematics.number_checks import FloatArray

PIECE = 4096
"""Places searched at a time: their arrays stay within a processor's fast memory."""

Index = NDArray[np.intp]
"""Columns, rows and so on of places of a grid, (count, coordinates)."""


@dataclass(frozen=True)
class Samples:
    """Postures spread over travel, (count, joints), and their places in the view, (count, 2)."""

    joint_values: FloatArray
    places: FloatArray

    @cached_property
    def tree(self) -> Any:
        """What tells the nearest of the places."""
        # Imported where it is needed: it takes as long as all else of the core.
        from scipy.spatial import cKDTree

        return cKDTree(self.places)

    def with_those_of(self, grid: "Grid") -> "Samples":
        """Return these and the places that a grid reaches, with its postures."""
        index = np.argwhere(grid.reached)
        return Samples(
            np.concatenate([self.joint_values, grid.joint_values[tuple(index.T)]]),
            np.concatenate([self.places, grid.places(index)]),
        )


@dataclass
class Grid:
    """Places a step apart in a view of any number of coordinates, and what was found of each.

    Attributes
    ----------
    origin : (coordinates,), of the first place of the whole grid; step : m.
    shape : places along each coordinate; first : the index in the whole grid of the first of them.
    shifts : by how much each place is off the grid, (*shape, coordinates), in steps; None for none.
    reached : (*shape,); joint_values : (*shape, joints), of those reached the posture that gets
        there, of the others the one that came nearest; off : (*shape,), m, how near.
    settled : (*shape,), places that are asked no more.
    """

    origin: FloatArray
    step: float
    shape: tuple[int, ...]
    joints: int
    shifts: FloatArray | None = None
    first: tuple[int, ...] = ()
    reached: NDArray[np.bool_] = field(init=False)
    joint_values: FloatArray = field(init=False)
    off: FloatArray = field(init=False)
    settled: NDArray[np.bool_] = field(init=False)

    def __post_init__(self) -> None:
        self.first = self.first or (0,) * len(self.shape)
        self.settled = np.zeros(self.shape, dtype=bool)
        self.reached = np.zeros(self.shape, dtype=bool)
        self.joint_values = np.zeros((*self.shape, self.joints))
        self.off = np.full(self.shape, np.inf)

    def places(self, index: Index) -> FloatArray:
        """Return the coordinates of grid places, (count, coordinates)."""
        shares = (index + np.array(self.first)).astype(np.float64)
        if self.shifts is not None:
            shares += self.shifts[tuple(index.T)]
        places: FloatArray = self.origin + self.step * shares
        return places

    def search(self, seeker: Seeker, index: Index, starts: FloatArray) -> NDArray[np.bool_]:
        """Search places from one start each and keep what is better; return which are reached."""
        reached = np.zeros(len(index), dtype=bool)
        for first in range(0, len(index), PIECE):
            part = slice(first, first + PIECE)
            at_once = index[part]
            found = seeker.to(self.places(at_once), starts[part])
            better = found.off < self.off[tuple(at_once.T)]
            at = tuple(at_once[better].T)
            self.joint_values[at], self.off[at] = found.joint_values[better], found.off[better]
            reached[part] = found.off <= seeker.near
        self.reached[tuple(index[reached].T)] = True
        return reached


def fill(grid: Grid, seeker: Seeker, samples: Samples, within: float | None = None) -> None:
    """Find out which places of a grid are reached.

    Parameters
    ----------
    within : m, how far from a sample places are asked that no neighbour leads to; left out, two
        steps.

    Examples
    --------
    A table of two slides of 1 m, on a grid of half a metre.

    >>> from kinematics.envelope.descents import InView
    >>> from kinematics.reach.travel_region import TravelRegion
    >>> one = np.ones((1, 2, 2)) * np.eye(2)
    >>> box = TravelRegion(np.zeros(2), np.ones(2), np.empty((0, 2)), np.empty(0), np.empty(0))
    >>> slides = InView(lambda q: (q, np.repeat(one, len(q), 0)), box, np.ones(2), 1e-9)
    >>> grid = Grid(np.array([-0.5, -0.5]), 0.5, (5, 5), 2)
    >>> fill(grid, slides, Samples(np.full((1, 2), 0.4), np.full((1, 2), 0.4)))
    >>> int(grid.reached.sum())
    9
    """
    tree = samples.tree

    def nearest(index: Index, rank: int) -> FloatArray:
        _, found = tree.query(grid.places(index), k=[rank + 1])
        starts: FloatArray = samples.joint_values[found[:, 0]]
        return starts

    index = np.argwhere(~grid.settled)
    away, _ = tree.query(grid.places(index), k=1)
    index = index[away <= (2.0 * grid.step if within is None else within)]
    ranks = [rank for rank in (0, *NEAREST_TRIED) if rank < len(samples.places)]
    for rank in ranks:
        index = index[~grid.reached[tuple(index.T)]]
        if len(index):
            grid.search(seeker, index, nearest(index, rank))
    ways = _ways(len(grid.shape))
    tried = np.zeros((*grid.shape, len(ways)), dtype=bool)
    _spread(grid, seeker, ways, tried)
    ranks = [rank for rank in OTHERS_TRIED if rank < len(samples.places)]
    asked = np.zeros((*grid.shape, len(ranks)), dtype=bool)
    again = True
    while again:
        again = False
        for number, rank in enumerate(ranks):
            index = np.argwhere(_beside(grid.reached, ways) & ~asked[..., number] & ~grid.settled)
            if len(index):
                asked[(*index.T, number)] = True
                again |= bool(grid.search(seeker, index, nearest(index, rank)).any())
        _spread(grid, seeker, ways, tried)


def _ways(dimensions: int) -> Index:
    """Return the steps to the places around one; in space to those beside its faces only."""
    ways = np.stack(np.unravel_index(np.arange(3**dimensions), (3,) * dimensions), axis=1) - 1
    size = np.abs(ways).sum(axis=1)
    order = np.argsort(size, kind="stable")
    most = 2 if dimensions <= 2 else 1
    kept: Index = ways[order[(size[order] > 0) & (size[order] <= most)]]
    return kept


def _spread(grid: Grid, seeker: Seeker, ways: Index, tried: NDArray[np.bool_]) -> None:
    """Search from all places reached to those around them until nothing new is reached."""
    spread = True
    while spread:
        spread = False
        for number, way in enumerate(ways):
            from_there = shifted(grid.reached, way)
            index = np.argwhere(from_there & ~grid.reached & ~tried[..., number] & ~grid.settled)
            if len(index):
                tried[(*index.T, number)] = True
                grid.search(seeker, index, grid.joint_values[tuple((index + way).T)])
                spread = True


def _beside(reached: NDArray[np.bool_], ways: Index) -> NDArray[np.bool_]:
    """Return which places are not reached but have a neighbour that is."""
    around = np.zeros_like(reached)
    for way in ways:
        around |= shifted(reached, way)
    return np.asarray(around & ~reached)


def shifted(marks: NDArray[np.bool_], way: NDArray[np.intp]) -> NDArray[np.bool_]:
    """Return for each place the mark of the one a step on; none beyond.

    Examples
    --------
    >>> shifted(np.array([True, False, False]), np.array([-1]))
    array([False,  True, False])
    """
    padded = np.pad(marks, 1)
    part = tuple(
        slice(1 + by, 1 + by + size) for by, size in zip(way.tolist(), marks.shape, strict=True)
    )
    return np.asarray(padded[part])
