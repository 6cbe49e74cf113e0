"""The other solution beside a fold, from the one that is known.

Idea: where an arm comes near a fold, two solutions lie close together along the one direction in
which the tool hardly moves. In that direction the gap is a parabola: it falls from the solution
that is known, turns at the fold and comes back to 0 as far behind it. Slope and bend of the
parabola are the smallest singular value and its rate along that direction, so the other solution is
one step away. A table that is rounded may lose one of the two when its exact neighbour is solved.

Source: normal form of a fold, e.g. Govaerts, Numerical Methods for Bifurcations of Dynamical
Equilibria, 2000, chapter 3. Not covered: pairs of which neither is known.
"""

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.landing import jacobians_at
from kinematics.number_checks import FloatArray

STEP = 1e-4
"""Radians (or L) over which the Jacobian's change is taken: half of the digits of a double are
left, and the bend of a parabola needs no more."""

FURTHEST = 1.0
"""Radians (or L) beyond which the parabola says nothing about the other solution."""


def twins_of(
    lines: tuple[FloatArray, FloatArray, NDArray[np.bool_], FloatArray],
    motions: FloatArray,
    nearer: float,
) -> tuple[FloatArray, NDArray[np.intp]]:
    """Return where the other solutions beside folds may lie, to be polished, and of which rows.

    Parameters
    ----------
    lines : as ``landing.land`` takes them. motions : (k, n), solutions, lengths over L; n up to 6.
    nearer : smallest singular value up to which a solution counts as beside a fold.

    Examples
    --------
    Two links, nearly stretched, and the elbow on the other side:

    >>> axis, point, out = np.tile([0.0, 0, 1], (2, 1)), np.zeros((2, 3)), np.eye(4)
    >>> point[1, 0], out[0, 3] = 0.5, 1.0
    >>> bent = np.array([[0.0, 0.02]])
    >>> twins, rows = twins_of((axis, point, np.zeros(2, bool), out), bent, 0.1)
    >>> len(rows)
    0
    """
    jacobians = np.empty((len(motions), 6, motions.shape[1]))
    jacobians_at(*lines, motions, jacobians)
    left, values, right = np.linalg.svd(jacobians, full_matrices=False)
    rows = np.flatnonzero(values[:, -1] <= nearer)
    across, along, slope = left[rows, :, -1], right[rows, -1], values[rows, -1]
    ahead = np.empty((len(rows), 6, motions.shape[1]))
    jacobians_at(*lines, motions[rows] + STEP * along, ahead)
    change = ((ahead - jacobians[rows]) @ along[:, :, None])[:, :, 0]
    bend = (across * change).sum(axis=1) / STEP
    with np.errstate(divide="ignore", invalid="ignore"):
        far = -2.0 * slope / bend
    near = np.abs(far) <= FURTHEST
    twins: FloatArray = motions[rows[near]] + far[near, None] * along[near]
    return twins, rows[near]
