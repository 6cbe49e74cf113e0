"""Which solutions of six rows have lost a motion, nearly or altogether.

Such a solution may be a point of a continuum (two axes in line), or a place where two ways meet; a
closed form returns some point of it and cannot tell. Most solutions are nowhere near: the smallest
singular value is at least the determinant over what the five others can be together at most; where
that is small, at least one over the root of the sum of the inverse's squares; and only where that
is small too are singular values worked out.

Source: none; the determinant is the product of the singular values, their squares' sum that of all
squared entries, and a product of given sum is largest where all are the same. Of the inverse, whose
singular values are one over them, the sum is at least the largest square.
Not covered: what the lost motion is (families.py).
"""

import math

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.landing import columns_of, land
from kinematics.inverse.screws import Screws
from kinematics.kernels.compiler import compiled, for_kernel
from kinematics.table import FloatArray
from kinematics.tolerances import LOST_RANK


class LostRank:
    """Tells for one arm of six rows which motions lead to a Jacobian of less than full rank.

    ``within`` so much of it, in lengths over the arm's and radians.

    Examples
    --------
    >>> axes, points = np.eye(3)[[2, 1, 1, 2, 1, 2]], np.zeros((6, 3))
    >>> points[2, 2], points[3:, 2], points[3:, 0] = 0.5, 0.9, 0.1
    >>> lost_rank = LostRank(Screws(axes, points, np.zeros(6, dtype=bool), np.eye(4), 1.0))
    >>> lost_rank.of(np.array([[0.0, 0.4, 0.7, 0, 0, 0], [0.0, 0.4, 0.7, 0, 0.5, 0]]))
    array([ True, False])
    """

    def __init__(self, screws: Screws, within: float = LOST_RANK) -> None:
        self._within = within
        self._scale = np.where(screws.prismatic, 1.0 / screws.length, 1.0)
        lines = for_kernel(screws.axis), for_kernel(screws.point), screws.prismatic
        self._of_kernel = (*lines, for_kernel(screws.tool_at_zero))

    def of(self, motions: FloatArray) -> NDArray[np.bool_] | None:
        """Return which motions (k, 6), rad and metres, have lost rank, (k,); None for none."""
        at_least, jacobians = np.empty(len(motions)), np.empty((len(motions), 6, 6))
        moved = motions * self._scale
        least = bound_smallest(*self._of_kernel, moved, self._within, jacobians, at_least)
        if least >= self._within:
            return None
        lost: NDArray[np.bool_] = at_least < self._within
        lost[lost] = np.linalg.svd(jacobians[lost], compute_uv=False)[:, -1] < self._within
        return lost if lost.any() else None


@compiled
def bound_smallest(
    axis: FloatArray,
    point: FloatArray,
    prismatic: NDArray[np.bool_],
    tool_at_zero: FloatArray,
    motions: FloatArray,
    within: float,
    jacobians: FloatArray,
    at_least: FloatArray,
) -> float:
    """Write Jacobians (k, 6, 6) of motions (k, 6), and what their singular values exceed, (k,).

    Returns the least of it, 1 for no motions. What is below ``within`` is looked at more closely.
    """
    least = 1.0
    axis_now, point_now, pose = np.empty((6, 3)), np.empty((6, 3)), np.empty((4, 4))
    work, both = np.empty((6, 6)), np.empty((6, 12))
    for b in range(len(motions)):
        land(axis, point, prismatic, tool_at_zero, motions[b], axis_now, point_now, pose)
        columns_of(axis_now, point_now, prismatic, pose, jacobians[b])
        squares = 0.0
        for i in range(6):
            for j in range(6):
                work[i, j] = jacobians[b, i, j]
                squares += work[i, j] * work[i, j]
        at_least[b] = _size_of_determinant(work) / (squares / 5.0) ** 2.5
        if at_least[b] < within:
            at_least[b] = max(at_least[b], _bound_by_inverse(jacobians[b], both))
        least = min(least, at_least[b])
    return least


@compiled
def _bound_by_inverse(jacobian: FloatArray, both: FloatArray) -> float:
    """Return what the smallest singular value exceeds, by the inverse; ``both`` (6, 12) is work.

    Examples
    --------
    >>> round(_bound_by_inverse(np.diag([1.0, 1, 1, 1, 1, 0.01]), np.empty((6, 12))), 6)
    0.009998
    """
    for i in range(6):
        for j in range(6):
            both[i, j] = jacobian[i, j]
            both[i, 6 + j] = 1.0 if i == j else 0.0
    for column in range(6):
        pivot = column
        for row in range(column + 1, 6):
            if abs(both[row, column]) > abs(both[pivot, column]):
                pivot = row
        largest = both[pivot, column]
        if largest == 0.0:
            return 0.0
        for j in range(column, 12):
            value = both[pivot, j]
            both[pivot, j] = both[column, j]
            both[column, j] = value / largest
        for row in range(6):
            share = both[row, column]
            if row != column and share != 0.0:
                for j in range(column, 12):
                    both[row, j] -= share * both[column, j]
    squares = 0.0
    for i in range(6):
        for j in range(6, 12):
            squares += both[i, j] * both[i, j]
    return 1.0 / math.sqrt(squares)


@compiled
def _size_of_determinant(work: FloatArray) -> float:
    """Return |det|, by Gaussian elimination with the largest pivot of each column."""
    size = 1.0
    for column in range(6):
        pivot = column
        for row in range(column + 1, 6):
            if abs(work[row, column]) > abs(work[pivot, column]):
                pivot = row
        largest = work[pivot, column]
        size *= abs(largest)
        if size == 0.0:
            return 0.0
        for j in range(column, 6):
            kept = work[column, j]
            work[column, j], work[pivot, j] = work[pivot, j], kept
        for row in range(column + 1, 6):
            share = work[row, column] / largest
            for j in range(column + 1, 6):
                work[row, j] -= share * work[column, j]
    return size
