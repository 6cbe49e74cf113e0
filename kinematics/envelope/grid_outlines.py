"""Closed curves around the places of a grid that are reached, of its chords.

Idea: chords that begin where others end are curves; the shoelace formula along them tells the area.
The chords may come of one grid, or part by part of a larger one: summed in their order they are the
same to the last bit.

Source: as grid_chords.py. Not covered: reach or gaps narrower than the grid, of which one as long
as it can be is allowed for in the bound, and every square that samples show.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from kinematics.envelope.descents import Seeker
from kinematics.envelope.grid_chords import Chords, chords_of
from kinematics.envelope.grid_reach import Grid
from kinematics.envelope.measures import Measure
from kinematics.envelope.outlines import clean
from kinematics.envelope.shapes import Curve
from kinematics.envelope.tolerances import SAME_PLACE
from kinematics.number_checks import FloatArray


@dataclass(frozen=True)
class Outlines:
    """Curves of a sampled view with what they enclose.

    Attributes
    ----------
    area : of the reach; moment : the integral of the first coordinate over it, m^3.
    """

    curves: tuple[Curve, ...]
    area: Measure
    moment: Measure


def outlines_of_grid(grid: Grid, seeker: Seeker, shown: FloatArray) -> Outlines:
    """Return the curves around what is reached.

    Parameters
    ----------
    shown : (count, 2), places known to be reached, whether the grid shows them or not.

    Examples
    --------
    A table of two slides of 1 m.

    >>> from kinematics.envelope.descents import InView
    >>> from kinematics.reach.travel_region import TravelRegion
    >>> one = np.ones((1, 2, 2)) * np.eye(2)
    >>> box = TravelRegion(np.zeros(2), np.ones(2), np.empty((0, 2)), np.empty(0), np.empty(0))
    >>> slides = InView(lambda q: (q, np.repeat(one, len(q), 0)), box, np.ones(2), 1e-9)
    >>> from kinematics.envelope.grid_reach import Samples, fill
    >>> grid = Grid(np.array([-0.5, -0.5]), 0.3, (7, 7), 2)
    >>> inside = np.array([[0.4, 0.4]])
    >>> fill(grid, slides, Samples(inside, inside))
    >>> found = outlines_of_grid(grid, slides, inside)
    >>> bool(abs(found.area.value - 1.0) < found.area.error_bound), len(found.curves)
    (True, 1)
    """
    return joined_outlines([chords_of(grid, seeker, shown)], grid.step, grid.shape)


def joined_outlines(parts: Sequence[Chords], step: float, shape: tuple[int, ...]) -> Outlines:
    """Return the curves that chords of all parts of a grid make.

    Parameters
    ----------
    step : m; shape : places of the whole grid.

    Examples
    --------
    A diamond of four chords, each bent outwards.

    >>> corners = np.array([[1.0, 0.0], [0.0, 1.0], [-1.0, 0.0], [0.0, -1.0]])
    >>> bends = 0.6 * (corners + np.roll(corners, -1, axis=0))
    >>> names = np.arange(4)
    >>> sums = Measure(2.0, 0.1), Measure(0.0, 0.1)
    >>> chords = Chords(names, np.roll(names, -1), corners, bends, *sums, 0)
    >>> found = joined_outlines([chords], 0.5, (6, 6))
    >>> len(found.curves[0].points), round(found.curves[0].signed_area, 9), found.area.value
    (8, 2.4, 2.0)
    """
    begin, end = (np.concatenate([getattr(one, name) for one in parts]) for name in _ENDS)
    places = np.concatenate([one.places for one in parts])
    bends = np.concatenate([one.bends for one in parts])
    curves, size = [], step * max(shape)
    for loop in _loops(begin, end):
        points = np.stack([places[loop], bends[loop]], axis=1).reshape(-1, 2)
        points = clean(points, SAME_PLACE * size)
        if len(points) >= 3:
            within = Curve(points, outer=True).signed_area
            curves.append((within, Curve(points, outer=within > 0.0)))
    curves.sort(key=lambda one: (not one[1].outer, -abs(one[0])))
    # Between two curves of the region's size that touch, what is narrower than a step is so long.
    gap = step * float(np.sqrt(step * size))
    unseen = float(sum(one.unseen for one in parts)) * step**2 + gap
    area, moment = (
        Measure(sum(one.value for one in sums), sum(one.error_bound for one in sums))
        for sums in ([one.area for one in parts], [one.moment for one in parts])
    )
    return Outlines(
        tuple(curve for _, curve in curves),
        Measure(area.value, area.error_bound + unseen),
        Measure(moment.value, moment.error_bound + unseen * step * shape[0]),
    )


_ENDS = ("begin", "end")


def _loops(begin: NDArray[np.int64], end: NDArray[np.int64]) -> list[NDArray[np.intp]]:
    """Return the closed ways of chords, each as their numbers in order."""
    numbers = dict(zip(begin.tolist(), range(len(begin)), strict=True))
    onward: list[int] = [numbers[one] for one in end.tolist()]
    left = dict(zip(range(len(begin)), onward, strict=True))
    loops = []
    while left:
        start, place = left.popitem()
        loop = [start]
        while place != start:
            loop.append(place)
            place = left.pop(place)
        loops.append(np.array(loop, dtype=np.intp))
    return loops
