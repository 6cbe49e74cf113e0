"""How near three joints bring a point, or a plane, to one that they cannot bring it to.

Downhill by damped Newton steps from some fixed postures; the nearest of where these lead is told.
For a point the length left is the honest shortfall: the target has to come closer by that much. Of
a plane it mixes direction and offset, over the arm's length.

Source: Levenberg 1944, Marquardt 1963, with the whole curvature as Newton has it; damping by the
gain of each step, Nielsen, Damping Parameter in Marquardt's Method, 1999.
Not covered: proof that nothing lies nearer; travel.
"""

import math

import numpy as np

from kinematics.inverse.kernel_numbers import NO
from kinematics.inverse.regional_pairs import Flags
from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray

_STARTS = 12
_STEPS = 40
_NEAR_ENOUGH = 1e-15
_LEAST_PIVOT = 1e-14
"""Of three equations in pure numbers: below it a pivot is the rounding of those before it."""
_LEAST_DAMPING = 1e-13
_LONGEST_STEP = 3.0
"""Radians, or over the length: further off nothing is as it is here."""
_SETTLED, _STUCK = 1e-13, 1e-10
"""Share of the squared miss that a step must promise; more after one that rounding undid."""

# Shares of a turn, of an L-shaped grid with irrational steps (Kronecker 1884; Roberts 2018).
_SHARES = np.modf(np.arange(1, _STARTS + 1)[:, None] * np.array([0.8191725, 0.6710436, 0.5497005]))[
    0
]


@compiled
def carry(
    slides: bool,
    axis: FloatArray,
    point: FloatArray,
    is_plane: bool,
    motion: float,
    given: FloatArray,
    carried: FloatArray,
) -> None:
    """Write what a joint's motion makes of a point, a direction or a plane.

    Parameters
    ----------
    axis, point : (3,), of the joint. given, carried : (4,), x y z and 1 of a point, 0 of a
        direction; normal and offset of a plane. May be the same.

    Examples
    --------
    >>> out = np.zeros(4)
    >>> carry(False, np.eye(3)[2], np.eye(3)[0], False, math.pi, np.array([3.0, 0, 0, 1]), out)
    >>> out.round(12) + 0.0
    array([-1.,  0.,  0.,  1.])
    """
    x, y, z, w = given[0], given[1], given[2], given[3]
    hx, hy, hz = axis[0], axis[1], axis[2]
    if slides:
        if is_plane:
            carried[0], carried[1], carried[2] = x, y, z
            carried[3] = w + motion * (x * hx + y * hy + z * hz)
        else:
            carried[0], carried[1] = x + w * motion * hx, y + w * motion * hy
            carried[2], carried[3] = z + w * motion * hz, w
        return
    rx, ry, rz = x, y, z
    if not is_plane:
        rx, ry, rz = x - w * point[0], y - w * point[1], z - w * point[2]
    sx, sy, sz = hy * rz - hz * ry, hz * rx - hx * rz, hx * ry - hy * rx
    # 1 - cos by the half angle, and h x (h x r): small turns move by small amounts exactly.
    half = math.sin(0.5 * motion)
    sine, versine = math.sin(motion), 2.0 * half * half
    dx = sine * sx + versine * (hy * sz - hz * sy)
    dy = sine * sy + versine * (hz * sx - hx * sz)
    dz = sine * sz + versine * (hx * sy - hy * sx)
    carried[0], carried[1], carried[2], carried[3] = x + dx, y + dy, z + dz, w
    if is_plane:
        carried[3] = w + dx * point[0] + dy * point[1] + dz * point[2]


@compiled
def _rate(
    slides: bool,
    axis: FloatArray,
    point: FloatArray,
    is_plane: bool,
    at: FloatArray,
    rate: FloatArray,
) -> None:
    """Write how what a joint carries to ``at`` moves with the joint: a direction, or a plane's."""
    x, y, z = at[0], at[1], at[2]
    hx, hy, hz = axis[0], axis[1], axis[2]
    if slides:
        rate[0], rate[1], rate[2], rate[3] = hx, hy, hz, 0.0
        if is_plane:
            rate[0], rate[1], rate[2] = 0.0, 0.0, 0.0
            rate[3] = x * hx + y * hy + z * hz
        return
    if not is_plane:
        x, y, z = x - point[0], y - point[1], z - point[2]
    rate[0], rate[1], rate[2] = hy * z - hz * y, hz * x - hx * z, hx * y - hy * x
    rate[3] = 0.0
    if is_plane:
        rate[3] = rate[0] * point[0] + rate[1] * point[1] + rate[2] * point[2]


@compiled
def _miss(
    prismatic: Flags,
    axes: FloatArray,
    points: FloatArray,
    is_plane: bool,
    motions: FloatArray,
    start: FloatArray,
    goal: FloatArray,
    error: FloatArray,
    rates: FloatArray,
    turns: FloatArray,
) -> float:
    """Write goal less what is reached (4,), and its rates (3, 4); return the squared length.

    And ``turns`` (3, 4), the axes that turn, as they then stand; zeros for those that slide.
    """
    error[:] = start
    if not is_plane:
        error[3] = 1.0
    for step in range(3):
        joint = 2 - step
        carry(prismatic[joint], axes[joint], points[joint], is_plane, motions[joint], error, error)
        _rate(prismatic[joint], axes[joint], points[joint], is_plane, error, rates[joint])
        for k in range(4):
            turns[joint, k] = axes[joint, k] if k < 3 and not prismatic[joint] else 0.0
        for behind in range(joint + 1, 3):
            slides, axis, point = prismatic[joint], axes[joint], points[joint]
            carry(slides, axis, point, is_plane, motions[joint], rates[behind], rates[behind])
            carry(slides, axis, point, NO, motions[joint], turns[behind], turns[behind])
    squared = 0.0
    for k in range(4 if is_plane else 3):
        error[k] = goal[k] - error[k]
        squared += error[k] * error[k]
    if not is_plane:
        error[3] = 0.0
    return squared


@compiled
def _write_curvature(
    rates: FloatArray, turns: FloatArray, error: FloatArray, is_plane: bool, matrix: FloatArray
) -> None:
    """Write half the second derivatives of the squared miss (3, 3), the lower half.

    Of a point all of them: turning joint j before joint i turns the rate of i about j's axis. Of a
    plane those of the linear part alone.
    """
    for i in range(3):
        for j in range(i + 1):
            total = 0.0
            for k in range(4):
                total += rates[i, k] * rates[j, k]
            if not is_plane:
                hx, hy, hz = turns[j, 0], turns[j, 1], turns[j, 2]
                x, y, z = rates[i, 0], rates[i, 1], rates[i, 2]
                total -= error[0] * (hy * z - hz * y)
                total -= error[1] * (hz * x - hx * z)
                total -= error[2] * (hx * y - hy * x)
            matrix[i, j] = total


@compiled
def _step(
    matrix: FloatArray, slope: FloatArray, damping: float, factor: FloatArray, step: FloatArray
) -> float:
    """Write the damped step (3,), and return the decrease of the squared miss it promises.

    Returns -1 where the damping does not yet make the curvature positive, or the step short.
    """
    # Of three equations by hand: the factor L of L L^T, forwards and backwards.
    for i in range(3):
        for j in range(i + 1):
            left = matrix[i, j] + (damping if i == j else 0.0)
            for k in range(j):
                left -= factor[i, k] * factor[j, k]
            if i > j:
                factor[i, j] = left / factor[j, j]
            elif left <= _LEAST_PIVOT:
                return -1.0
            else:
                factor[i, i] = math.sqrt(left)
    for i in range(3):
        step[i] = slope[i]
        for k in range(i):
            step[i] -= factor[i, k] * step[k]
        step[i] /= factor[i, i]
    for back in range(3):
        i = 2 - back
        for k in range(i + 1, 3):
            step[i] -= factor[k, i] * step[k]
        step[i] /= factor[i, i]
    promised = 0.0
    for i in range(3):
        promised += step[i] * (damping * step[i] + slope[i])
        if abs(step[i]) > _LONGEST_STEP:
            return -1.0
    return promised


@compiled
def downhill(
    prismatic: Flags,
    axes: FloatArray,
    points: FloatArray,
    is_plane: bool,
    start: FloatArray,
    goal: FloatArray,
    motions: FloatArray,
) -> float:
    """Move a, b, c to where the miss is least nearby; return it, squared."""
    error, rates, turns = np.empty(4), np.empty((3, 4)), np.empty((3, 4))
    matrix, factor, slope, step = np.empty((3, 3)), np.empty((3, 3)), np.empty(3), np.empty(3)
    trial = motions.copy()
    squared = _miss(prismatic, axes, points, is_plane, trial, start, goal, error, rates, turns)
    damping, growth, fresh = 1e-2 * squared, 2.0, True
    for _ in range(_STEPS):
        if squared <= _NEAR_ENOUGH * _NEAR_ENOUGH:
            break
        if fresh:
            _write_curvature(rates, turns, error, is_plane, matrix)
            for i in range(3):
                slope[i] = 0.0
                for k in range(4):
                    slope[i] += rates[i, k] * error[k]
        promised = _step(matrix, slope, damping, factor, step)
        if 0.0 <= promised <= (_SETTLED if fresh else _STUCK) * squared:
            break
        tried = squared
        if promised > 0.0:
            for i in range(3):
                trial[i] = motions[i] + step[i]
            tried = _miss(
                prismatic, axes, points, is_plane, trial, start, goal, error, rates, turns
            )
        fresh = tried < squared
        if fresh:
            gain = 2.0 * (squared - tried) / promised - 1.0
            damping, growth = damping * max(0.2, 1.0 - gain * gain * gain), 2.0
            squared = tried
            for i in range(3):
                motions[i] = trial[i]
        else:
            damping, growth = max(damping, _LEAST_DAMPING) * growth, 2.0 * growth
    return squared


@compiled
def nearest_regional(
    prismatic: Flags,
    axes: FloatArray,
    points: FloatArray,
    is_plane: bool,
    start: FloatArray,
    goal: FloatArray,
    best: FloatArray,
) -> float:
    """Write a, b, c (3,) that bring the start nearest to the goal; return the length left.

    Parameters as those of ``regional``.

    Examples
    --------
    Two links of 0.5, a lift under them, and a goal 0.2 beyond their reach:

    >>> prismatic, axes = np.array([True, False, False]), np.tile([0.0, 0.0, 1.0], (3, 1))
    >>> points, best = np.array([[0, 0, 0], [0, 0, 0], [0.5, 0, 0]]), np.zeros(3)
    >>> start, goal = np.array([1.0, 0, 0, 0]), np.array([0.0, 1.2, 0.3, 0])
    >>> round(nearest_regional(prismatic, axes, points, False, start, goal, best), 9)
    0.2
    """
    motions = np.empty(3)
    least = -1.0
    for k in range(_STARTS):
        for i in range(3):
            share = 2.0 * _SHARES[k, i] - 1.0
            motions[i] = share if prismatic[i] else math.pi * share
        squared = downhill(prismatic, axes, points, is_plane, start, goal, motions)
        if least < 0.0 or squared < least:
            least = squared
            for i in range(3):
                best[i] = motions[i]
            if least <= _NEAR_ENOUGH * _NEAR_ENOUGH:
                break
    return math.sqrt(least)
