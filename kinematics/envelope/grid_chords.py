"""Chords of the boundary of what is reached, in the squares of a grid or of a part of it.

Idea: between a place reached and a neighbour that is not, the boundary crosses; it is found there
by halving. In each square of four places the crossings are joined so that the reach is on the left.
Then each chord is bent: its middle is moved to the boundary across it. What that changes in area is
many times what is left after it wherever the boundary is smooth, and still more than what is left
at a corner, and so bounds it. A chord is known by the edges of the whole grid that it joins, so
that chords of several parts close to curves.

Source: marching squares (Lorensen and Cline 1987 in the plane); the last change as a bound as in
Simpson's rule. Not covered: closing them (grid_outlines.py).
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from kinematics.envelope.crossings import Crossings, crossings_of, reach_either
from kinematics.envelope.descents import Seeker
from kinematics.envelope.grid_reach import Grid, Index
from kinematics.envelope.measures import Measure
from kinematics.envelope.tolerances import CROSSING_HALVINGS, SAME_PLACE
from kinematics.number_checks import FloatArray


@dataclass(frozen=True)
class Chords:
    """Chords of the boundary, and what they add up to.

    Attributes
    ----------
    begin, end : (count,), edges of the whole grid that they begin and end at.
    places, bends : (count, 2), where they begin, and the boundary beside their middles.
    area, moment : what they enclose, summed along them: m^2, and m^3 of the first coordinate.
    unseen : squares in which something is reached though none of their corners is.
    """

    begin: NDArray[np.int64]
    end: NDArray[np.int64]
    places: FloatArray
    bends: FloatArray
    area: Measure
    moment: Measure
    unseen: int


def chords_of(
    grid: Grid, seeker: Seeker, shown: FloatArray, sides: tuple[bool, bool] = (True, True)
) -> Chords:
    """Return the chords in the squares of a grid.

    Parameters
    ----------
    grid : filled; part of a larger one or whole.
    shown : (count, 2), places known to be reached, whether the grid shows them or not.
    sides : whether the larger grid ends at the first column, and at the last.

    Examples
    --------
    The corner of a table of two slides of 1 m.

    >>> from kinematics.envelope.descents import InView
    >>> from kinematics.reach.travel_region import TravelRegion
    >>> one = np.ones((1, 2, 2)) * np.eye(2)
    >>> box = TravelRegion(np.zeros(2), np.ones(2), np.empty((0, 2)), np.empty(0), np.empty(0))
    >>> slides = InView(lambda q: (q, np.repeat(one, len(q), 0)), box, np.ones(2), 1e-9)
    >>> from kinematics.envelope.grid_reach import Samples, fill
    >>> grid, inside = Grid(np.full(2, 0.75), 0.5, (2, 2), 2), np.array([[0.7, 0.7]])
    >>> fill(grid, slides, Samples(inside, inside))
    >>> chords_of(grid, slides, inside, (False, False)).places.round(2).tolist()[1]
    [1.0, 0.75]
    """
    edges = _edges_of(grid, sides)
    found = _on_boundary(grid, seeker, edges)
    begin, end = _chords(grid, seeker, edges)
    bends = _bends(grid, seeker, found, begin, end)
    area, moment = _measured(grid, found.places[begin], bends[begin], found.places[end])
    return Chords(
        edges.names[begin],
        edges.names[end],
        found.places[begin],
        bends[begin],
        area,
        moment,
        _unseen(grid, edges, shown),
    )


@dataclass(frozen=True)
class _Edges:
    """Ways between neighbouring places of which one is reached.

    Attributes
    ----------
    inside, outside : (count, 2), columns and rows; outside may be beside the grid.
    rightward, upward : numbers of the edges on the way right and up from each place of ``marks``;
        -1 for none. names : (count,), of the edges in the whole grid.
    marks : places reached, padded where the whole grid ends; corner : the index of the first.
    """

    inside: NDArray[np.intp]
    outside: NDArray[np.intp]
    rightward: NDArray[np.intp]
    upward: NDArray[np.intp]
    names: NDArray[np.int64]
    marks: NDArray[np.bool_]
    corner: Index


def _edges_of(grid: Grid, sides: tuple[bool, bool]) -> _Edges:
    marks = np.pad(grid.reached, ((int(sides[0]), int(sides[1])), (1, 1)))
    corner = np.array([-int(sides[0]), -1])
    inside, outside, names = [], [], []
    numbers: list[NDArray[np.intp]] = []
    count = 0
    for column, row in ((1, 0), (0, 1)):
        here = marks[: marks.shape[0] - column, : marks.shape[1] - row]
        there = marks[column:, row:]
        at = np.argwhere(here != there)
        starts_in = here[tuple(at.T)][:, None]
        onward = at + np.array([column, row])
        inside.append(np.where(starts_in, at, onward) + corner)
        outside.append(np.where(starts_in, onward, at) + corner)
        in_whole = at + corner + np.array(grid.first) + 1
        names.append((in_whole[:, 0] * _LONGEST + in_whole[:, 1]) * 2 + column)
        number = np.full(marks.shape, -1, dtype=np.intp)
        number[tuple(at.T)] = np.arange(count, count + len(at))
        numbers.append(number)
        count += len(at)
    rightward, upward = numbers
    return _Edges(
        np.concatenate(inside),
        np.concatenate(outside),
        rightward,
        upward,
        np.concatenate(names).astype(np.int64),
        marks,
        corner,
    )


_LONGEST = 2**24
"""More places than a column ever has."""


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
    marks = edges.marks
    corners = np.stack([marks[:-1, :-1], marks[1:, :-1], marks[1:, 1:], marks[:-1, 1:]], axis=-1)
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
    joined[crossed_twice] = _centres_reached(grid, seeker, mixed[crossed_twice] + edges.corner)
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
    # Chords along axis 1, where the grid begins, are straight: beyond it is nothing.
    beyond = (first[:, 0] > grid.origin[0]) | (last[:, 0] > grid.origin[0])
    bent = (length > SAME_PLACE * grid.step) & beyond
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


def _unseen(grid: Grid, edges: _Edges, shown: FloatArray) -> int:
    """Return the number of squares of which places are reached, and no corner is."""
    marks = edges.marks
    squares = np.unique(np.floor((shown - grid.origin) / grid.step).astype(np.intp), axis=0)
    squares = squares - np.array(grid.first) - edges.corner
    here = ((squares >= 0) & (squares < np.array(marks.shape) - 1)).all(axis=1)
    columns, rows = squares[here].T
    seen = (
        marks[columns, rows]
        | marks[columns + 1, rows]
        | marks[columns, rows + 1]
        | marks[columns + 1, rows + 1]
    )
    return int(np.count_nonzero(~seen))
