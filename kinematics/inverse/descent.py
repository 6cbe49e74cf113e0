"""From one posture downhill to a target: damped least squares in joint values, within travel.

Idea: linearise the gap between tool and target in the joint values and take the step that makes it
smallest, held back by a damping that grows when a step fails and never exceeds the gap squared, so
that the last steps double the digits even at singular places. Joints at the end of their travel
stay out of steps beyond it; a sum of joint values beyond its bounds adds its excess to the gap.
What is left small at the end is a solution, all else a local minimum.

Source: Levenberg 1944, Marquardt 1963; damping by Nielsen 1999, its cap by Yamashita and Fukushima
2001 and Sugihara 2011 (Solvability-unconcerned inverse kinematics); joints held at their bounds:
projected steps, Bertsekas 1982.

Not covered: where to start and whether all solutions were met (kinematics/inverse/iterative.py).
"""

import math

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.descent_arrays import Desk, Lines, Room
from kinematics.inverse.landing import columns_of, gap_to, land
from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray

POSE, POSITION, DIRECTION, ABOUT = range(4)
"""What of the target counts: all; its point; its point and the way tool z points; its point and the
turn about one line of the base."""

_SETTLED = 1e-26
"""Square of a gap that rounding leaves."""
_STILL = 1e-28
"""Square of a step that changes no digit."""
_STUCK = 1e-4
"""Relative decrease of the squared gap below which a start has met a local minimum, while the gap
is not small."""
_SMALL = 1e-6
_GOOD, _NEARLY_THERE = 1e-24, 1e-10
"""Squared gaps between which more steps may help: past a singular posture some targets lie at the
end of a long, nearly level valley."""
_STEEPEST = 1e12
"""Damping at which a step is too short to change anything."""


@compiled
def gap_at(
    lines: Lines, room: Room, desk: Desk, task: int, share: float, target: FloatArray, q: FloatArray
) -> float:
    """Write the gap at joint values, and where lines and tool are; return the gap squared.

    Parameters
    ----------
    share : weight of turns beside lengths, 1 unless positions are to be met first.
    q : (joints,), rad, and lengths as shares of the arm's.
    """
    motions, gap, pose = desk.motions, desk.gap, desk.pose
    for row in range(motions.shape[0]):
        motions[row] = 0.0
        for joint in range(q.shape[0]):
            motions[row] += lines.drive[row, joint] * q[joint]
    land(
        lines.axis,
        lines.point,
        lines.prismatic,
        lines.tool_at_zero,
        motions,
        desk.axis_now,
        desk.point_now,
        pose,
    )
    if task in (POSE, ABOUT):
        gap_to(pose, target, gap)
    else:
        for row in range(3):
            gap[row], gap[3 + row] = target[row, 3] - pose[row, 3], 0.0
    if task == ABOUT:
        gap[3] = lines.turn[0] * gap[3] + lines.turn[1] * gap[4] + lines.turn[2] * gap[5]
        gap[4] = gap[5] = 0.0
    elif task == DIRECTION:
        _direction_gap(pose, target, gap)
    squared = 0.0
    for row in range(6):
        gap[row] *= 1.0 if row < 3 else share
        squared += gap[row] * gap[row]
    for form in range(room.least.shape[0]):
        value = 0.0
        for joint in range(q.shape[0]):
            value += room.weights[form, joint] * q[joint]
        excess = max(room.least[form] - value, 0.0) + min(room.most[form] - value, 0.0)
        gap[6 + form] = excess
        squared += excess * excess
    return squared


@compiled
def _direction_gap(pose: FloatArray, target: FloatArray, gap: FloatArray) -> None:
    """Write the rotation vector that brings tool z onto the target's by the shortest way."""
    x = pose[1, 2] * target[2, 2] - pose[2, 2] * target[1, 2]
    y = pose[2, 2] * target[0, 2] - pose[0, 2] * target[2, 2]
    z = pose[0, 2] * target[1, 2] - pose[1, 2] * target[0, 2]
    cosine = pose[0, 2] * target[0, 2] + pose[1, 2] * target[1, 2] + pose[2, 2] * target[2, 2]
    sine = math.sqrt(x * x + y * y + z * z)
    if sine < 1e-12 and cosine < 0.0:
        # Opposite directions: any line across will do, and tool x is one.
        x, y, z, sine = pose[0, 0], pose[1, 0], pose[2, 0], 1.0
        factor = math.pi
    else:
        factor = math.atan2(sine, cosine) / sine if sine > 0.0 else 1.0
    gap[3], gap[4], gap[5] = x * factor, y * factor, z * factor


@compiled
def slopes_at(lines: Lines, room: Room, desk: Desk, task: int, share: float) -> None:
    """Write the Jacobian of what counts, where ``gap_at`` left off."""
    of_rows, of_joints, pose = desk.of_rows, desk.of_joints, desk.pose
    columns_of(desk.axis_now, desk.point_now, lines.prismatic, pose, of_rows)
    if task == ABOUT:
        for row in range(of_rows.shape[1]):
            about = lines.turn[0] * of_rows[3, row] + lines.turn[1] * of_rows[4, row]
            of_rows[3, row] = about + lines.turn[2] * of_rows[5, row]
            of_rows[4, row] = of_rows[5, row] = 0.0
    elif task == DIRECTION:
        for row in range(of_rows.shape[1]):
            along = pose[0, 2] * of_rows[3, row] + pose[1, 2] * of_rows[4, row]
            along += pose[2, 2] * of_rows[5, row]
            for k in range(3):
                of_rows[3 + k, row] -= along * pose[k, 2]
    for joint in range(of_joints.shape[1]):
        for k in range(6):
            of_joints[k, joint] = 0.0
        for row in range(of_rows.shape[1]):
            ratio = lines.drive[row, joint]
            if ratio != 0.0:
                for k in range(3):
                    of_joints[k, joint] += ratio * of_rows[k, row]
                    of_joints[3 + k, joint] += ratio * share * of_rows[3 + k, row]
        if task == POSITION:
            of_joints[3, joint] = of_joints[4, joint] = of_joints[5, joint] = 0.0
        for form in range(room.least.shape[0]):
            beyond = desk.gap[6 + form] != 0.0
            of_joints[6 + form, joint] = room.weights[form, joint] if beyond else 0.0


@compiled
def normal_equations(desk: Desk) -> None:
    """Write J^T J and J^T gap."""
    of_joints, normal, gap, rows = desk.of_joints, desk.normal, desk.gap, desk.gap.shape[0]
    for i in range(normal.shape[0]):
        slope = 0.0
        for row in range(rows):
            slope += of_joints[row, i] * gap[row]
        desk.slope[i] = slope
        for j in range(i + 1):
            product = 0.0
            for row in range(rows):
                product += of_joints[row, i] * of_joints[row, j]
            normal[i, j] = product
            normal[j, i] = product


@compiled
def damped_step(desk: Desk, room: Room, damping: float, q: FloatArray) -> None:
    """Write the step of the damped normal equations; joints pushed beyond their travel stay."""
    normal, factor, step, slope = desk.normal, desk.factor, desk.step, desk.slope
    n = q.shape[0]
    for i in range(n):
        held = (q[i] <= room.lower[i] and slope[i] < 0.0) or (
            q[i] >= room.upper[i] and slope[i] > 0.0
        )
        # A held joint keeps a row of 0 but for a diagonal 1, marked by its sign.
        step[i] = 0.0 if held else slope[i]
        factor[i, i] = -1.0 if held else 1.0
    for i in range(n):
        free_i = factor[i, i] > 0.0
        for j in range(i):
            value = normal[i, j] if free_i and factor[j, j] > 0.0 else 0.0
            factor[i, j] = value
    for i in range(n):
        diagonal = normal[i, i] + damping if factor[i, i] > 0.0 else 1.0
        for j in range(i):
            value = factor[i, j]
            for k in range(j):
                value -= factor[i, k] * factor[j, k]
            value *= factor[j, j]
            factor[i, j] = value
            diagonal -= value * value
        # The diagonal keeps the reciprocal of the root: divisions once a row.
        factor[i, i] = 1.0 / math.sqrt(max(diagonal, 1e-300))
        value = step[i]
        for j in range(i):
            value -= factor[i, j] * step[j]
        step[i] = value * factor[i, i]
    for i in range(n - 1, -1, -1):
        value = step[i]
        for j in range(i + 1, n):
            value -= factor[j, i] * step[j]
        step[i] = value * factor[i, i]


@compiled
def _promised(desk: Desk, n: int) -> float:
    """Return the decrease of the squared gap that the linear model promises for the step."""
    decrease = 0.0
    for i in range(n):
        along = 0.0
        for j in range(n):
            along += desk.normal[i, j] * desk.step[j]
        decrease += desk.step[i] * (2.0 * desk.slope[i] - along)
    return decrease


@compiled
def descend(
    lines: Lines,
    room: Room,
    desk: Desk,
    task: int,
    share: float,
    target: FloatArray,
    q: FloatArray,
    most: int,
    patience: int,
) -> float:
    """Bring joint values (joints,) downhill, in place, in ``most`` steps; return the gap squared.

    Where it is nearly there, it may take ``patience`` times the steps.

    The gap in ``desk`` is that of the last trial, not of ``q``.
    """
    trial, step, n = desk.trial, desk.step, q.shape[0]
    squared = gap_at(lines, room, desk, task, share, target, q)
    damping, growth = 0.01 * squared, 2.0
    for done in range(patience * most):
        if squared < _SETTLED or (done >= most and not _GOOD < squared < _NEARLY_THERE):
            break
        slopes_at(lines, room, desk, task, share)
        normal_equations(desk)
        before = squared
        while damping < _STEEPEST:
            damped_step(desk, room, damping, q)
            moved = 0.0
            for i in range(n):
                trial[i] = min(max(q[i] + step[i], room.lower[i]), room.upper[i])
                step[i] = trial[i] - q[i]
                moved += step[i] * step[i]
            if moved < _STILL:
                return squared
            promised = _promised(desk, n)
            after = gap_at(lines, room, desk, task, share, target, trial)
            if after < squared:
                kept = 2.0 * (squared - after) / promised - 1.0 if promised > 0.0 else 0.0
                damping *= max(0.2, 1.0 - kept * kept * kept)
                growth, squared = 2.0, after
                damping = min(damping, squared)
                for i in range(n):
                    q[i] = trial[i]
                break
            damping = max(damping * growth, 1e-3 * squared)
            growth *= 2.0
        if squared == before or (squared > _SMALL and before - squared < _STUCK * before):
            break
    return squared


@compiled
def descend_all(
    lines: Lines,
    room: Room,
    desk: Desk,
    task: int,
    share: float,
    targets: FloatArray,
    of: NDArray[np.int64],
    q: FloatArray,
    most: int,
    patience: int,
    squared: FloatArray,
) -> None:
    """Bring many joint values downhill, each to its own of several targets.

    Parameters
    ----------
    targets : (m, 4, 4); of : (k,), which target.
    q : (k, joints), moved; squared : (k,), written: the squared gaps left.
    """
    for k in range(q.shape[0]):
        target = targets[of[k]]
        squared[k] = descend(lines, room, desk, task, share, target, q[k], most, patience)
