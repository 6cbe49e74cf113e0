"""Area of what two joints reach in a plane, and the volume it sweeps about an axis.

Idea: on each level line the reached stretches are known to the last bit, so their length, or the
integral of a density over them, is; what is left is one integral over the height. It is smooth
between the heights at which a curve turns back or ends, where it begins like a root, which equal
steps of an angle take away; where two curves cross it has a corner, found by halving until both
halves together agree with the whole.

Source: Gauss-Legendre rule, halving as in Gander and Gautschi 2000. The bound is the sum of the
last disagreements, each of which is far above what is left after it. Not covered: volumes of arms
set off from the plane through axis 1 that reach behind it and do not turn all the way.
"""

from collections.abc import Callable
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.envelope.pair_region import PairRegion
from kinematics.envelope.tolerances import AREA_AGREES, MOST_AREA_HALVINGS, MOST_STRIPS
from kinematics.number_checks import FloatArray

_NODES, _WEIGHTS = np.polynomial.legendre.leggauss(12)


class Measure(NamedTuple):
    """A number and how far off it may be."""

    value: float
    error_bound: float


def area_of(region: PairRegion) -> Measure:
    """Return the area of a region, each place counted once.

    Examples
    --------
    A slide of 2 m carries a slide of 3 m across it.

    >>> still = np.broadcast_to(np.eye(2), (1, 2, 2))
    >>> box = np.array([[0.0, 0.0], [2.0, 0.0], [2.0, 3.0], [0.0, 3.0]])
    >>> region = PairRegion(lambda q: (q, np.repeat(still, len(q), 0)), box, np.array([0.0, 1.0]))
    >>> round(area_of(region).value, 12)
    6.0
    """
    return _over_heights(region, lambda heights: region.stretches(heights).measured(_itself))


def swept_volume_of(region: PairRegion, angle: float) -> Measure:
    """Return the volume a region sweeps as it turns about the line ``x = 0``, each place once.

    What it reaches behind that line is half a turn ahead: the same place is reached from before
    and from behind where the turn is more than a half one.

    Parameters
    ----------
    angle : of the turn, rad, at most a whole one.

    Examples
    --------
    A slide across the axis, 1 m to both sides, on one of 1 m along it, over three quarters.

    >>> still = np.broadcast_to(np.eye(2), (1, 2, 2))
    >>> box = np.array([[-1.0, 0.0], [1.0, 0.0], [1.0, 1.0], [-1.0, 1.0]])
    >>> region = PairRegion(lambda q: (q, np.repeat(still, len(q), 0)), box, np.array([0.0, 1.0]))
    >>> round(swept_volume_of(region, 1.5 * np.pi).value / np.pi, 12)
    1.0
    """
    # Bearings that are faced both ways, and those that are faced one way, of either side.
    twice = 2.0 * max(angle - np.pi, 0.0)
    once = angle - twice

    def of_lines(heights: FloatArray) -> FloatArray:
        stretches = region.stretches(heights)
        whole = _square_sums(without_overlap(*both_sides(stretches.places, stretches.counts > 0)))
        each = _square_sums(_sides(stretches.places, stretches.counts > 0))
        return 0.5 * (twice * whole + once * each)

    return _over_heights(region, of_lines)


def folded_area_of(region: PairRegion, aside: float) -> Measure:
    """Return the area of distances from the axis and heights, each place counted once.

    Parameters
    ----------
    aside : distance of the plane of the region from the line ``x = 0`` it is turned about.

    Examples
    --------
    A box of 3 m by 1 m in a plane that passes the axis by 4 m: radii from 4 to 5.

    >>> still = np.broadcast_to(np.eye(2), (1, 2, 2))
    >>> box = np.array([[0.0, 0.0], [3.0, 0.0], [3.0, 1.0], [0.0, 1.0]])
    >>> region = PairRegion(lambda q: (q, np.repeat(still, len(q), 0)), box, np.array([0.0, 1.0]))
    >>> round(folded_area_of(region, 4.0).value, 12)
    1.0
    """

    def of_lines(heights: FloatArray) -> FloatArray:
        stretches = region.stretches(heights)
        sides = without_overlap(*both_sides(stretches.places, stretches.counts > 0))
        begin, end = (np.hypot(ends, aside) for ends in sides)
        total: FloatArray = (end - begin).sum(axis=1)
        return total

    return _over_heights(region, of_lines)


def both_sides(places: FloatArray, inside: NDArray[np.bool_]) -> tuple[FloatArray, FloatArray]:
    """Return the distances from ``x = 0`` at which stretches begin and end, (lines, stretches).

    Those behind the line are told as those before it; what is none begins and ends at 0. Sorted
    by their beginnings.

    Examples
    --------
    >>> both_sides(np.array([[-2.0, 1.0]]), np.array([[True, False]]))
    (array([[0., 0.]]), array([[1., 2.]]))
    """
    begin, end = _sides(places, inside)
    order = np.argsort(begin, axis=1, kind="stable")
    return np.take_along_axis(begin, order, axis=1), np.take_along_axis(end, order, axis=1)


def _sides(places: FloatArray, inside: NDArray[np.bool_]) -> tuple[FloatArray, FloatArray]:
    finite = np.where(np.isfinite(places), places, 0.0)
    kept = inside[:, :-1]
    begin, end = np.where(kept, finite[:, :-1], 0.0), np.where(kept, finite[:, 1:], 0.0)
    behind = np.maximum(-end, 0.0), np.maximum(-begin, 0.0)
    return (
        np.concatenate([np.maximum(begin, 0.0), behind[0]], axis=1),
        np.concatenate([np.maximum(end, 0.0), behind[1]], axis=1),
    )


def without_overlap(begin: FloatArray, end: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return sorted stretches (lines, stretches) of which each tells what those before it leave.

    Examples
    --------
    >>> begin, end = without_overlap(np.array([[0.0, 1.0]]), np.array([[2.0, 3.0]]))
    >>> begin, end
    (array([[0., 2.]]), array([[2., 3.]]))
    """
    farthest = np.maximum.accumulate(end, axis=1)
    already = np.concatenate([np.zeros((len(end), 1)), farthest[:, :-1]], axis=1)
    return np.minimum(np.maximum(begin, already), end), end


def _square_sums(stretches: tuple[FloatArray, FloatArray]) -> FloatArray:
    """Return the sum over stretches of what the squares of their ends differ by, (lines,)."""
    begin, end = stretches
    total: FloatArray = (end * end - begin * begin).sum(axis=1)
    return total


def _itself(places: FloatArray) -> FloatArray:
    return places


def _over_heights(region: PairRegion, of_lines: Callable[[FloatArray], FloatArray]) -> Measure:
    """Return the integral over all heights, with a bound of its error."""
    corners = region.corners
    spans = np.stack([corners[:-1], corners[1:]], axis=1)
    # Shares of the angle that goes once from the lower to the upper end of a span.
    shares = np.tile([0.0, 1.0], (len(spans), 1))
    wholes = _integrals(spans, shares, of_lines)
    total, bound, scale = 0.0, 0.0, max(float(np.abs(wholes).sum()), 1e-300)
    for level in range(MOST_AREA_HALVINGS):
        middles = shares.mean(axis=1)
        lower = np.stack([shares[:, 0], middles], axis=1)
        upper = np.stack([middles, shares[:, 1]], axis=1)
        halves = _integrals(
            np.concatenate([spans, spans]), np.concatenate([lower, upper]), of_lines
        )
        low, high = np.split(halves, 2)
        off = np.abs(low + high - wholes)
        # Far from 0 angles lose digits, and no halves agree so well: what is left is the bound.
        last = level == MOST_AREA_HALVINGS - 1 or len(spans) > MOST_STRIPS
        done = (off <= AREA_AGREES * scale) | last
        total += float((low + high)[done].sum())
        bound += float(off[done].sum())
        left = ~done
        if not left.any():
            break
        spans = np.concatenate([spans[left], spans[left]])
        shares = np.concatenate([lower[left], upper[left]])
        wholes = np.concatenate([low[left], high[left]])
    # And what rounding leaves of sums of so many terms.
    return Measure(total, bound + 1e-12 * scale)


def _integrals(
    spans: FloatArray, shares: FloatArray, of_lines: Callable[[FloatArray], FloatArray]
) -> FloatArray:
    """Return the integrals over parts of spans of heights, (parts,)."""
    half = 0.5 * (shares[:, 1] - shares[:, 0])
    angle = np.pi * (0.5 * (shares[:, 0] + shares[:, 1])[:, None] + half[:, None] * _NODES)
    size = 0.5 * (spans[:, 1] - spans[:, 0])
    heights = spans.mean(axis=1)[:, None] - size[:, None] * np.cos(angle)
    weights = np.pi * half[:, None] * _WEIGHTS * size[:, None] * np.sin(angle)
    found = of_lines(heights.ravel()).reshape(heights.shape)
    integrals: FloatArray = (weights * found).sum(axis=1)
    return integrals
