"""Area of what two joints reach in a plane, and the volume it sweeps about an axis.

Idea: on each level line the reached stretches are known to the last bit, so their length, or the
integral of a density over them, is; what is left is one integral over the height. It is smooth
between the heights at which a curve turns back or ends, where it begins like a root, which equal
steps of an angle take away; where two curves cross it has a corner, found by halving until both
halves together agree with the whole.

Source: Gauss-Legendre rule, halving as in Gander and Gautschi 2000. The bound is the sum of the
last disagreements, each of which is far above what is left after it. Not covered: volumes of arms
that do not turn all the way about axis 1 and reach behind it.
"""

from collections.abc import Callable
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.envelope.pair_region import PairRegion
from kinematics.envelope.tolerances import AREA_AGREES, MOST_AREA_HALVINGS
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
    """Return the volume a region sweeps as it turns about the line ``x = 0``.

    Parameters
    ----------
    region : on one side of that line, unless the turn is a whole one: then what it reaches behind
        the line is counted with what it reaches before it, once.
    angle : of the turn, rad, at most a whole one.
    """

    def of_lines(heights: FloatArray) -> FloatArray:
        stretches = region.stretches(heights)
        return _radial(stretches.places, stretches.counts > 0)

    found = _over_heights(region, of_lines)
    return Measure(found.value * angle, found.error_bound * angle)


def _itself(places: FloatArray) -> FloatArray:
    return places


def _radial(places: FloatArray, inside: NDArray[np.bool_]) -> FloatArray:
    """Return the integral of radius over the radii reached before or behind the axis, (lines,)."""
    finite = np.where(np.isfinite(places), places, 0.0)
    begin, end, kept = finite[:, :-1], finite[:, 1:], inside[:, :-1]
    before = np.stack([np.maximum(begin, 0.0), np.maximum(end, 0.0)], axis=-1)
    behind = np.stack([np.maximum(-end, 0.0), np.maximum(-begin, 0.0)], axis=-1)
    both = np.where(
        np.concatenate([kept, kept], 1)[..., None], np.concatenate([before, behind], 1), 0.0
    )
    # Stretches in the order of their beginnings: each adds what reaches beyond those before it.
    order = np.argsort(both[..., 0], axis=1)
    both = np.take_along_axis(both, order[..., None], axis=1)
    farthest = np.maximum.accumulate(both[..., 1], axis=1)
    already = np.concatenate([np.zeros((len(both), 1)), farthest[:, :-1]], axis=1)
    low = np.minimum(np.maximum(both[..., 0], already), both[..., 1])
    total: FloatArray = 0.5 * (both[..., 1] ** 2 - low**2).sum(axis=1)
    return total


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
        done = (off <= AREA_AGREES * scale) | (level == MOST_AREA_HALVINGS - 1)
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
