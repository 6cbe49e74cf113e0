"""Motions that almost bring the tool onto a target, brought onto it: damped least squares.

Idea: one Newton step squares the gap where the Jacobian is sound. Near a singular posture the pure
step is wild, so a little damping is added to the normal equations, grown when a step made things
worse, shrunk when it did as well as promised, and never more than the squared gap: so the damping
dies out together with the gap, and convergence stays fast at the singular posture itself. Lengths
are shares of the arm's, so a radian and a length weigh alike.

Source: Levenberg 1944, Marquardt 1963; growth and decay after Nielsen, Damping parameter in
Marquardt's method, 1999; the bound by the squared gap after Yamashita and Fukushima, On the rate of
convergence of the Levenberg-Marquardt method, 2001.

Not covered: travel, drive maps, tasks of fewer rows (kinematics/inverse/iterative.py).
"""

import math

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.landing import columns_of, gap_to, land
from kinematics.inverse.tolerances import (
    ACCEPTED,
    GAP_SETTLED,
    LANDED,
    LOOSE,
    MOST_IDLE,
    NEAR_ROOT,
    NO_HOPE,
    STEP_SETTLED,
)
from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray

_FAR = 1e9
"""Squared gap of what was not tried yet."""

_LEAST_DAMPING = 1e-30
_MOST_DAMPING = 1e12


@compiled
def polish(
    axis: FloatArray,
    point: FloatArray,
    prismatic: NDArray[np.bool_],
    tool_at_zero: FloatArray,
    targets: FloatArray,
    of: NDArray[np.int64],
    most_steps: int,
    worth: float,
    motions: FloatArray,
    gaps: FloatArray,
) -> None:
    """Bring motions as near to their targets as damped steps can.

    Parameters
    ----------
    axis, point, prismatic, tool_at_zero : the lines, as in ``landing.land``.
    targets : (m, 4, 4), lengths over L. of : (k,), which of them each row is for.
    most_steps : most steps a row. worth : gap beyond which a row is left as it is.
    motions : (k, n), bettered in place; turns are not wrapped.
    gaps : (k, 2), written: length and angle that are left.

    Examples
    --------
    >>> line, place, slides = np.array([[0.0, 0, 1]]), np.zeros((1, 3)), np.zeros(1, bool)
    >>> turned, gaps, of = np.array([[0.4]]), np.empty((1, 2)), np.zeros(1, np.int64)
    >>> polish(line, place, slides, np.eye(4), np.eye(4)[None], of, 9, 1.0, turned, gaps)
    >>> bool(abs(turned[0, 0]) < 1e-14), bool((gaps < 1e-14).all())
    (True, True)
    """
    n = motions.shape[1]
    axis_now, point_now, pose = np.empty((n, 3)), np.empty((n, 3)), np.empty((4, 4))
    gap, jacobian, normal = np.empty(6), np.empty((6, n)), np.empty((n, n))
    slope, step, trial = np.empty(n), np.empty(n), np.empty(n)
    for b in range(motions.shape[0]):
        squared, damping, growth, promised, longest, idle = _FAR, 0.0, 2.0, 0.0, 0.0, 0
        for i in range(n):
            trial[i] = motions[b, i]
        for tried in range(most_steps + 1):
            land(axis, point, prismatic, tool_at_zero, trial, axis_now, point_now, pose)
            gap_to(pose, targets[of[b]], gap)
            length = gap[0] * gap[0] + gap[1] * gap[1] + gap[2] * gap[2]
            angle = gap[3] * gap[3] + gap[4] * gap[4] + gap[5] * gap[5]
            found = length + angle
            if found < squared:
                gained = (squared - found) / squared
                ratio = 2.0 * (squared - found) / promised - 1.0 if promised > 0.0 else 0.0
                damping = min(damping * max(0.2, 1.0 - ratio * ratio * ratio), found)
                squared, growth = found, 2.0
                gaps[b, 0], gaps[b, 1] = math.sqrt(length), math.sqrt(angle)
                for i in range(n):
                    motions[b, i] = trial[i]
                if tried == 0:
                    damping = 1e-2 * found
                    if found <= LANDED * LANDED or found > worth * worth:
                        break
                if found <= GAP_SETTLED * GAP_SETTLED or (gained < NO_HOPE and found > NO_HOPE):
                    break
                idle += 1 if gained < 0.5 and found <= ACCEPTED * ACCEPTED else 0
                columns_of(axis_now, point_now, prismatic, pose, jacobian)
                _write_slope(jacobian, gap, slope)
            else:
                # Jacobian and slope still belong to the motions that are kept.
                damping, growth = max(damping, _LEAST_DAMPING) * growth, growth * 2.0
                idle += 1 if squared <= ACCEPTED * ACCEPTED else 0
            if idle > MOST_IDLE or damping > _MOST_DAMPING:
                break
            while not solve_damped(jacobian, slope, damping, normal, step):
                damping = max(damping, _LEAST_DAMPING) * 4.0
                if damping > _MOST_DAMPING:
                    break
            longest, promised = _write_trial(motions[b], step, damping, slope, trial)
            if longest < STEP_SETTLED:
                break


@compiled
def _write_slope(jacobian: FloatArray, gap: FloatArray, slope: FloatArray) -> None:
    """Write J^T gap, half of what the squared gap falls by for each motion."""
    for i in range(slope.shape[0]):
        slope[i] = 0.0
        for row in range(6):
            slope[i] += jacobian[row, i] * gap[row]


@compiled
def _write_trial(
    motions: FloatArray, step: FloatArray, damping: float, slope: FloatArray, trial: FloatArray
) -> tuple[float, float]:
    """Write motions after a step; return its longest part and the decrease that it promises."""
    longest, promised = 0.0, 0.0
    for i in range(motions.shape[0]):
        trial[i] = motions[i] + step[i]
        longest = max(longest, abs(step[i]))
        promised += step[i] * (damping * step[i] + slope[i])
    return longest, promised


@compiled
def solve_damped(
    jacobian: FloatArray, slope: FloatArray, damping: float, normal: FloatArray, step: FloatArray
) -> bool:
    """Write the step x of (J^T J + damping I) x = slope; return whether that could be factored.

    Parameters
    ----------
    jacobian : (6, n); slope : (n,); normal : (n, n), overwritten; step : (n,), written.

    Source
    ------
    Cholesky's factorisation, e.g. Golub and Van Loan, Matrix Computations, section 4.2.

    Examples
    --------
    >>> step, column = np.empty(1), np.zeros((6, 1))
    >>> column[0] = 2.0
    >>> solve_damped(column, np.array([3.0]), 0.0, np.empty((1, 1)), step), step.tolist()
    (True, [0.75])
    """
    n = slope.shape[0]
    for i in range(n):
        for j in range(i + 1):
            total = damping if i == j else 0.0
            for row in range(6):
                total += jacobian[row, i] * jacobian[row, j]
            for k in range(j):
                total -= normal[i, k] * normal[j, k]
            if i > j:
                normal[i, j] = total * normal[j, j]
            elif total > 0.0:
                # The diagonal holds the inverse of the root: divided by once, used often.
                normal[i, i] = 1.0 / math.sqrt(total)
            else:
                return False
    for i in range(n):
        total = slope[i]
        for k in range(i):
            total -= normal[i, k] * step[k]
        step[i] = total * normal[i, i]
    for i in range(n - 1, -1, -1):
        total = step[i]
        for k in range(i + 1, n):
            total -= normal[k, i] * step[k]
        step[i] = total * normal[i, i]
    return True


@compiled
def keep_distinct(
    prismatic: NDArray[np.bool_],
    of: NDArray[np.int64],
    same: float,
    motions: FloatArray,
    gaps: FloatArray,
    kept: NDArray[np.bool_],
    left: FloatArray,
) -> None:
    """Wrap turns into (-pi, pi], and write which rows are solutions that stand there once.

    Parameters
    ----------
    of : (k,), ascending. same : rad, or lengths, between motions that are one solution.
    motions : (k, n), wrapped in place. gaps : (k, 2).
    kept : (k,), written. left : (m,), smallest gap of each target's rows that are no solutions,
        of what stands there already.

    Examples
    --------
    >>> motions, left = np.array([[7.0], [7.0 - 2 * np.pi], [7.0]]), np.ones(2)
    >>> gaps, kept = np.array([[0.0, 0], [0, 0], [0, 0.1]]), np.zeros(3, bool)
    >>> keep_distinct(np.zeros(1, bool), np.array([0, 0, 1]), 1e-7, motions, gaps, kept, left)
    >>> kept.tolist(), left.tolist()
    ([True, False, False], [1.0, 0.1])
    """
    begin = 0
    for b in range(motions.shape[0]):
        if of[b] != of[begin]:
            begin = b
        gap = math.sqrt(gaps[b, 0] * gaps[b, 0] + gaps[b, 1] * gaps[b, 1])
        kept[b] = gap <= ACCEPTED
        if not kept[b]:
            left[of[b]] = min(left[of[b]], gap)
            continue
        for i in range(motions.shape[1]):
            if not prismatic[i]:
                turns = math.ceil((motions[b, i] - math.pi) / (2.0 * math.pi))
                motions[b, i] -= 2.0 * math.pi * turns
        for other in range(begin, b):
            if not kept[other]:
                continue
            worse = math.sqrt(gaps[other, 0] * gaps[other, 0] + gaps[other, 1] * gaps[other, 1])
            apart = 0.0
            for i in range(motions.shape[1]):
                away = abs(motions[b, i] - motions[other, i])
                if not prismatic[i]:
                    away = min(away, abs(away - 2.0 * math.pi))
                apart = max(apart, away)
            loose = max(gap, worse)
            if apart < same or (loose > LOOSE and apart < NEAR_ROOT * math.sqrt(loose)):
                # The one that lands better stays.
                if gap < worse:
                    kept[other] = False
                else:
                    kept[b] = False
                    break
