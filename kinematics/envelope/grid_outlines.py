"""Closed curves around the places of a grid that are reached, drawn where the boundary is.

Idea: between a place reached and a neighbour that is not, the boundary crosses; it is found there
by halving. In each square of four places the crossings are joined so that the reach is on the left,
which closes all curves. Then each chord is bent: its middle is moved to the boundary across it.
What that changes in area is many times what is left after it wherever the boundary is smooth, and
still more than what is left at a corner, and so bounds it.

Source: marching squares (Lorensen and Cline 1987 in the plane); the last change as a bound as in
Simpson's rule. Not covered: reach or gaps narrower than the grid, of which one as long as it can be
is allowed for in the bound, and every square that samples show.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from kinematics.envelope.crossings import Crossings, crossings_of, reach_either
from kinematics.envelope.descents import Seeker
from kinematics.envelope.grid_reach import Grid
from kinematics.envelope.measures import Measure
from kinematics.envelope.outlines import clean
from kinematics.envelope.shapes import Curve
from kinematics.envelope.tolerances import CROSSING_HALVINGS, SAME_PLACE
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
    edges = _edges_of(grid.reached)
    found = _on_boundary(grid, seeker, edges)
    begin, end = _chords(grid, seeker, edges)
    bends = _bends(grid, seeker, found, begin, end)
    curves, size = [], grid.step * max(grid.shape)
    for loop in _loops(begin, end):
        # Each chord is known by where it begins.
        points = np.stack([found.places[loop], bends[loop]], axis=1).reshape(-1, 2)
        points = clean(points, SAME_PLACE * size)
        if len(points) >= 3:
            within = Curve(points, outer=True).signed_area
            curves.append((within, Curve(points, outer=within > 0.0)))
    curves.sort(key=lambda one: (not one[1].outer, -abs(one[0])))
    area, moment = _measured(grid, found.places[begin], bends[begin], found.places[end])
    unseen = _unseen(grid, shown)
    return Outlines(
        tuple(curve for _, curve in curves),
        Measure(area.value, area.error_bound + unseen),
        Measure(moment.value, moment.error_bound + unseen * grid.step * grid.shape[0]),
    )


@dataclass(frozen=True)
class _Edges:
    """Ways between neighbouring places of which one is reached.

    Attributes
    ----------
    inside, outside : (count, 2), columns and rows; outside may be beside the grid.
    rightward, upward : numbers of the edges on the way right and up from each place, counted from
        the one left of and below the first; -1 for none.
    """

    inside: NDArray[np.intp]
    outside: NDArray[np.intp]
    rightward: NDArray[np.intp]
    upward: NDArray[np.intp]
    padded: NDArray[np.bool_]


def _edges_of(reached: NDArray[np.bool_]) -> _Edges:
    padded = np.pad(reached, 1)
    inside, outside = [], []
    numbers: list[NDArray[np.intp]] = []
    count = 0
    for column, row in ((1, 0), (0, 1)):
        here = padded[: padded.shape[0] - column, : padded.shape[1] - row]
        there = padded[column:, row:]
        at = np.argwhere(here != there)
        starts_in = here[tuple(at.T)][:, None]
        onward = at + np.array([column, row])
        inside.append(np.where(starts_in, at, onward) - 1)
        outside.append(np.where(starts_in, onward, at) - 1)
        number = np.full(padded.shape, -1, dtype=np.intp)
        number[tuple(at.T)] = np.arange(count, count + len(at))
        numbers.append(number)
        count += len(at)
    rightward, upward = numbers
    return _Edges(np.concatenate(inside), np.concatenate(outside), rightward, upward, padded)


def _on_boundary(grid: Grid, seeker: Seeker, edges: _Edges) -> Crossings:
    """Return where each edge crosses the boundary."""
    inside, outside = edges.inside, edges.outside
    places, joint_values = grid.places(inside), grid.joint_values[tuple(inside.T)]
    # Beyond the first column is beyond axis 1: there the boundary is the column itself.
    within = (outside >= 0).all(axis=1) & (outside < grid.shape).all(axis=1)
    asked = outside[within]
    found = crossings_of(
        seeker,
        places[within],
        grid.places(asked),
        joint_values[within],
        grid.joint_values[tuple(asked.T)],
    )
    places[within], joint_values[within] = found.places, found.joint_values
    return Crossings(places, joint_values)


def _chords(grid: Grid, seeker: Seeker, edges: _Edges) -> tuple[NDArray[np.intp], NDArray[np.intp]]:
    """Return which crossings are joined in the squares of the grid, the reach on the left."""
    padded = edges.padded
    corners = np.stack(
        [padded[:-1, :-1], padded[1:, :-1], padded[1:, 1:], padded[:-1, 1:]], axis=-1
    )
    sides = np.stack(
        [
            edges.rightward[:-1, :-1],
            edges.upward[1:, :-1],
            edges.rightward[:-1, 1:],
            edges.upward[:-1, :-1],
        ],
        axis=-1,
    )
    mixed = np.argwhere(corners.any(axis=-1) & ~corners.all(axis=-1))
    corners, sides = corners[tuple(mixed.T)], sides[tuple(mixed.T)]
    leaves = corners & ~np.roll(corners, -1, axis=1)
    crossed_twice = leaves.sum(axis=1) == 2
    joined = np.zeros(len(mixed), dtype=bool)
    joined[crossed_twice] = _centres_reached(grid, seeker, mixed[crossed_twice] - 1)
    begin, end = [], []
    for of_square, leaving, across in zip(
        sides.tolist(), leaves.tolist(), joined.tolist(), strict=True
    ):
        # Around the square: from where the reach is left to where it is entered again, before
        # that (around the corner reached) or after it (around the corner not reached).
        way = 1 if across else -1
        for side in range(4):
            if leaving[side]:
                other = (side + way) % 4
                while of_square[other] < 0 or leaving[other]:
                    other = (other + way) % 4
                begin.append(of_square[side])
                end.append(of_square[other])
    return np.array(begin, dtype=np.intp), np.array(end, dtype=np.intp)


def _centres_reached(grid: Grid, seeker: Seeker, squares: NDArray[np.intp]) -> NDArray[np.bool_]:
    """Return whether the middle of squares (count, 2) is reached."""
    reached = np.zeros(len(squares), dtype=bool)
    for column, row in ((0, 0), (1, 0), (1, 1), (0, 1)):
        corner = np.clip(squares + np.array([column, row]), 0, np.array(grid.shape) - 1)
        middles = grid.places(squares) + 0.5 * grid.step
        reached |= seeker.to(middles, grid.joint_values[tuple(corner.T)]).off <= seeker.near
    return reached


def _bends(
    grid: Grid,
    seeker: Seeker,
    found: Crossings,
    begin: NDArray[np.intp],
    end: NDArray[np.intp],
) -> FloatArray:
    """Return the places on the boundary beside the middles of chords, by where chords begin."""
    first, last = found.places[begin], found.places[end]
    step = last - first
    length = np.hypot(*step.T)
    outward = np.stack([step[:, 1], -step[:, 0]], axis=1)  # as long as the chord
    middles = 0.5 * (first + last)
    bends = np.empty_like(found.places)
    bends[begin] = middles
    # Chords along axis 1 are straight, and beyond it is nothing.
    bent = (length > SAME_PLACE * grid.step) & ((first[:, 0] > 0.0) | (last[:, 0] > 0.0))
    begin, middles, outward = begin[bent], middles[bent], outward[bent]
    one, other = found.joint_values[begin], found.joint_values[end[bent]]
    at_middle, reached = reach_either(seeker, middles, one, other)
    near, near_reached = reach_either(seeker, middles - outward, one, other)
    inside = np.where(reached[:, None], middles, middles - outward)
    joint_values = np.where(reached[:, None], at_middle, near)
    outside = np.where(reached[:, None], middles + outward, middles)
    known = np.asarray(reached | near_reached)
    crossed = crossings_of(seeker, inside[known], outside[known], joint_values[known], other[known])
    bends[begin[known]] = crossed.places
    return bends


def _loops(begin: NDArray[np.intp], end: NDArray[np.intp]) -> list[NDArray[np.intp]]:
    """Return the closed ways of chords, each as the crossings they begin at."""
    follows = dict(zip(begin.tolist(), end.tolist(), strict=True))
    loops = []
    while follows:
        start, place = follows.popitem()
        loop = [start]
        while place != start:
            loop.append(place)
            place = follows.pop(place)
        loops.append(np.array(loop, dtype=np.intp))
    return loops


def _measured(
    grid: Grid, first: FloatArray, bends: FloatArray, last: FloatArray
) -> tuple[Measure, Measure]:
    """Return area and first moment within chords and what their bends add."""
    x, y = first.T
    next_x, next_y = last.T
    area = 0.5 * float((x * next_y - next_x * y).sum())
    moment = float(((x * x + x * next_x + next_x * next_x) * (next_y - y)).sum()) / 6.0
    # A triangle of each chord and its bend: three quarters of what a parabola encloses.
    turned = bends - first
    along = last - first
    triangles = 0.5 * (turned[:, 0] * along[:, 1] - turned[:, 1] * along[:, 0])
    radii = (x + next_x + bends[:, 0]) / 3.0
    slack = grid.step * 0.5**CROSSING_HALVINGS * np.hypot(*along.T)
    return (
        Measure(
            area + 4.0 / 3.0 * float(triangles.sum()), float((np.abs(triangles) + slack).sum())
        ),
        Measure(
            moment + 4.0 / 3.0 * float((triangles * radii).sum()),
            float(((np.abs(triangles) + slack) * np.abs(radii)).sum()),
        ),
    )


def _unseen(grid: Grid, shown: FloatArray) -> float:
    """Return the area of what the grid may have missed."""
    squares = np.unique(np.floor((shown - grid.origin) / grid.step).astype(np.intp), axis=0)
    padded = np.pad(grid.reached, 1)
    columns, rows = np.clip(squares + 1, 0, np.array(padded.shape) - 2).T
    seen = (
        padded[columns, rows]
        | padded[columns + 1, rows]
        | padded[columns, rows + 1]
        | padded[columns + 1, rows + 1]
    )
    size = grid.step * max(grid.shape)
    # Between two curves of the region's size that touch, what is narrower than a step is so long.
    gap = grid.step * float(np.sqrt(grid.step * size))
    return float(np.count_nonzero(~seen)) * grid.step**2 + gap
