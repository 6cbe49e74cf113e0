"""The plane region that two joints bring a point to, cut by straight lines.

Idea: each point of the region has as many postures as the curves around it say. The travel of two
joints is a polygon; where the point's motion loses a direction (stretched, folded) the polygon is
cut in two, so that in each part the map is one to one near every posture. Walking along a line
through the plane, a posture comes or goes exactly where the line crosses the image of an edge, and
which of the two follows from the Jacobian. So counting crossings from outside tells the reached
stretches of the line, overlapping branches and limits included, without any inverse.

Source: degree of a plane map by counting oriented crossings (Milnor 1965, Topology from the
differentiable viewpoint); boundary as images of limits and singular curves: Litvin 1980, Kumar and
Waldron 1981. Not covered: more than two joints, and singular places that are no level line of the
second joint's variable.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.number_checks import FloatArray

PlaneMap = Callable[[FloatArray], tuple[FloatArray, FloatArray]]
"""Places (count, 2) and Jacobians (count, 2, 2) for postures (count, 2)."""

Slope = Callable[[FloatArray], FloatArray]
"""How something changes along an edge, at shares of it."""

_LOOKS = 257
"""Looks along an edge for where it turns back: a joint of one turn is looked at every 1.4 deg."""

_HALVINGS = 56
"""Halvings of a bracket: down to the last bit of a double."""


class Piece(NamedTuple):
    """Part of an edge along which the height rises or falls all the way.

    Attributes
    ----------
    begin, end : (2,), postures.
    inward : (2,), normal of the edge into its part of the polygon; sign : of the determinant there.
    """

    begin: FloatArray
    end: FloatArray
    inward: FloatArray
    sign: float


@dataclass(frozen=True)
class Stretches:
    """Crossings of some level lines with all pieces, sorted from left to right.

    Attributes
    ----------
    places : (lines, crossings), infinite where a line has fewer.
    counts : (lines, crossings), postures of the points right of each crossing.
    """

    places: FloatArray
    counts: NDArray[np.int64]

    def measured(self, primitive: Callable[[FloatArray], FloatArray]) -> FloatArray:
        """Return the integral of a density over the reached stretches, (lines,)."""
        values = primitive(np.where(np.isfinite(self.places), self.places, 0.0))
        inside = self.counts[:, :-1] > 0
        steps = np.where(inside, values[:, 1:] - values[:, :-1], 0.0)
        total: FloatArray = steps.sum(axis=1)
        return total


class PairRegion:
    """The region that a polygon of two joint values is mapped to.

    Parameters
    ----------
    place_of : the map; its second coordinate is the height that level lines keep.
    polygon : (corners, 2), postures, convex, counter-clockwise.
    level : (2,), weights of the joint values of which singular places are level lines.

    Examples
    --------
    Two links of 2 and 1 m without limits: on the level line through the middle, from -3 to -1 and
    from 1 to 3.

    >>> def place_of(q):
    ...     a, b = q[:, 0], q[:, 0] + q[:, 1]
    ...     upper = np.stack([-2 * np.sin(a), 2 * np.cos(a)], axis=1)
    ...     fore = np.stack([-np.sin(b), np.cos(b)], axis=1)
    ...     places = np.stack([2 * np.cos(a) + np.cos(b), 2 * np.sin(a) + np.sin(b)], axis=1)
    ...     return places, np.stack([upper + fore, fore], axis=2)
    >>> turn = np.pi * np.array([[-1.0, -1.0], [1.0, -1.0], [1.0, 1.0], [-1.0, 1.0]])
    >>> region = PairRegion(place_of, turn, np.array([0.0, 1.0]))
    >>> region.stretches(np.array([0.1])).measured(lambda x: x).round(2)
    array([4.01])
    """

    def __init__(self, place_of: PlaneMap, polygon: FloatArray, level: FloatArray) -> None:
        self.place_of = place_of
        self.parts = _cut_at_folds(place_of, polygon, level)
        self.pieces = _pieces(place_of, self.parts)
        begins = np.array([piece.begin for piece in self.pieces])
        ends = np.array([piece.end for piece in self.pieces])
        heights = np.stack([place_of(begins)[0][:, 1], place_of(ends)[0][:, 1]], axis=1)
        falling = heights[:, 0] > heights[:, 1]
        self._low = np.where(falling[:, None], ends, begins)
        self._high = np.where(falling[:, None], begins, ends)
        self._heights = np.sort(heights, axis=1)
        self._inward = np.array([piece.inward for piece in self.pieces])
        self._sign = np.array([piece.sign for piece in self.pieces])

    @property
    def corners(self) -> FloatArray:
        """Heights between which the stretches change smoothly, but for crossing curves; sorted."""
        return np.unique(self._heights)

    def stretches(self, heights: FloatArray) -> Stretches:
        """Return where level lines (lines,) cross the images of all edges."""
        meets = (self._heights[:, 0] <= heights[:, None]) & (heights[:, None] < self._heights[:, 1])
        lines, pieces = np.nonzero(meets)
        postures = self._crossing(pieces, heights[lines])
        places, jacobians = self.place_of(postures)
        # A step to the right, as joint motion but for the determinant's size: adj(J) (1, 0).
        step = (
            np.stack([jacobians[:, 1, 1], -jacobians[:, 1, 0]], axis=1) * self._sign[pieces, None]
        )
        comes = np.sign((step * self._inward[pieces]).sum(axis=1)).astype(np.int64)
        most = int(meets.sum(axis=1).max(initial=0))
        found = np.full((len(heights), most), np.inf)
        changes = np.zeros((len(heights), most), np.int64)
        column = np.arange(len(lines)) - np.searchsorted(lines, lines)
        found[lines, column], changes[lines, column] = places[:, 0], comes
        order = np.argsort(found, axis=1, kind="stable")
        found = np.take_along_axis(found, order, axis=1)
        counts = np.cumsum(np.take_along_axis(changes, order, axis=1), axis=1)
        return Stretches(found, counts)

    def extent(self) -> FloatArray:
        """Return the least and the greatest first coordinate that is reached, (2,)."""
        places: FloatArray = self.place_of(self.ends()[0])[0][:, 0]
        return places

    def ends(self) -> FloatArray:
        """Return the postures of the least and the greatest of both coordinates, (2, 2, 2).

        Within a part the map is one to one near every posture, so all are on images of edges.
        """
        found = []
        for coordinate in (0, 1):
            postures = np.concatenate(
                [
                    begin + _stops(_slope(self.place_of, begin, along, coordinate))[:, None] * along
                    for part, _ in self.parts
                    for begin, along in _edges(part)
                ]
            )
            values = self.place_of(postures)[0][:, coordinate]
            found.append(postures[[int(values.argmin()), int(values.argmax())]])
        return np.stack(found)

    def _crossing(self, pieces: NDArray[np.intp], heights: FloatArray) -> FloatArray:
        """Return the postures on pieces at which the heights are met, (count, 2)."""
        low, high = self._low[pieces].copy(), self._high[pieces].copy()
        for _ in range(_HALVINGS):
            middle = 0.5 * (low + high)
            above = self.place_of(middle)[0][:, 1] > heights
            high[above], low[~above] = middle[above], middle[~above]
        crossing: FloatArray = 0.5 * (low + high)
        return crossing


def _determinants(place_of: PlaneMap, postures: FloatArray) -> FloatArray:
    jacobians = place_of(postures)[1]
    found: FloatArray = (
        jacobians[:, 0, 0] * jacobians[:, 1, 1] - jacobians[:, 0, 1] * jacobians[:, 1, 0]
    )
    return found


def _cut_at_folds(
    place_of: PlaneMap, polygon: FloatArray, level: FloatArray
) -> list[tuple[FloatArray, float]]:
    """Return parts of the polygon in which the determinant keeps its sign, and that sign."""
    values = polygon @ level
    low, high = polygon[values.argmin()], polygon[values.argmax()]

    def at(share: FloatArray) -> FloatArray:
        return _determinants(place_of, low + share[:, None] * (high - low))

    shares = np.linspace(0.0, 1.0, 4 * _LOOKS)
    found = at(shares)
    cuts = []
    for place in np.nonzero(found[:-1] * found[1:] <= 0.0)[0].tolist():
        begin, end = shares[place], shares[place + 1]
        for _ in range(_HALVINGS):
            middle = 0.5 * (begin + end)
            if (at(np.array([middle]))[0] > 0.0) == (found[place + 1] > 0.0):
                end = middle
            else:
                begin = middle
        cuts.append(values.min() + 0.5 * (begin + end) * np.ptp(values))
    ends = [-np.inf, *cuts, np.inf]
    parts = []
    for lower, upper in pairwise(ends):
        part = clipped(clipped(polygon, level, upper), -level, -lower)
        if len(part) >= 3:
            (determinant,) = _determinants(place_of, part.mean(axis=0)[None])
            if determinant:
                parts.append((part, float(np.sign(determinant))))
    return parts


def clipped(polygon: FloatArray, weights: FloatArray, most: float) -> FloatArray:
    """Return the part of a convex polygon (corners, 2) where ``weights . q <= most``.

    Source: Sutherland and Hodgman 1974.

    Examples
    --------
    >>> square = np.array([[0.0, 0.0], [1.0, 0.0], [1.0, 1.0], [0.0, 1.0]])
    >>> clipped(square, np.array([1.0, 0.0]), 0.5)[:, 0].max()
    np.float64(0.5)
    """
    if most == np.inf:
        return polygon
    kept: list[FloatArray] = []
    over = polygon @ weights - most
    for here, there, a, b in zip(
        polygon, np.roll(polygon, -1, 0), over, np.roll(over, -1), strict=True
    ):
        if a <= 0.0:
            kept.append(here)
        if (a < 0.0 < b) or (b < 0.0 < a):
            kept.append(here + a / (a - b) * (there - here))
    return np.array(kept).reshape(len(kept), 2)


def _pieces(place_of: PlaneMap, parts: Sequence[tuple[FloatArray, float]]) -> list[Piece]:
    pieces: list[Piece] = []
    for part, sign in parts:
        for begin, along in _edges(part):
            inward = np.array([-along[1], along[0]])
            stops = _stops(_slope(place_of, begin, along, 1))
            for first, last in pairwise(stops):
                pieces.append(Piece(begin + first * along, begin + last * along, inward, sign))
    return pieces


def _edges(part: FloatArray) -> list[tuple[FloatArray, FloatArray]]:
    """Return where the edges of a polygon begin, and how they go on."""
    steps = np.roll(part, -1, 0) - part
    return [(begin, along) for begin, along in zip(part, steps, strict=True) if along.any()]


def _slope(place_of: PlaneMap, begin: FloatArray, along: FloatArray, coordinate: int) -> Slope:
    """Return how a coordinate changes along an edge."""

    def slope(shares: FloatArray) -> FloatArray:
        jacobians = place_of(begin + shares[:, None] * along)[1]
        found: FloatArray = jacobians[:, coordinate, :] @ along
        return found

    return slope


def _stops(slope: Slope) -> FloatArray:
    """Return the shares of an edge between which something only rises or only falls."""
    shares = np.linspace(0.0, 1.0, _LOOKS)
    slopes = slope(shares)
    places = np.nonzero(slopes[:-1] * slopes[1:] < 0.0)[0]
    low, high = shares[places], shares[places + 1]
    for _ in range(_HALVINGS):
        middle = 0.5 * (low + high)
        same = slope(middle) * slopes[places] > 0.0
        low, high = np.where(same, middle, low), np.where(same, high, middle)
    # Symmetric arms turn back exactly where it is looked.
    still = shares[1:-1][(slopes[1:-1] == 0.0) & slopes.any()]
    return np.array([0.0, *np.sort(np.concatenate([0.5 * (low + high), still])), 1.0])
