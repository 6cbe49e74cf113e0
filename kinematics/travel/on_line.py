"""A posture held against a line that the tool is to follow: its gap, its correction, its rates.

Idea: at a share of the line the tool's pose is known. The gap of a posture to it and the Jacobian
there make linear equations for the correction (Newton), and the same equations with the line's
velocity in place of the gap give the joint rates that follow the line. Six joints have one answer
to them; fewer have the one that misses least; of more the shortest motion is taken, in a norm that
holds joints back near their limits.

Source: Newton; Whitney 1969 for the rates; Chan and Dubey 1995, A weighted least-norm solution
based scheme for avoiding joint limits for redundant joint manipulators, with weights that depend on
the place alone. Not covered: how far such steps can be trusted (tracking.py).
"""

import math
from typing import NamedTuple

import numpy as np

from kinematics.inverse.descent_arrays import Lines
from kinematics.inverse.landing import columns_of, gap_to, land
from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray
from kinematics.travel.small_systems import least_norm, least_squares, triangle

POSE, SPIN_FREE, POSITION = range(3)
"""What of the line counts: all; its place and where tool z points; its place."""

_MOST_CORRECTIONS = 7
SETTLED = 1e-10
"""Correction, rad or share of the length, after which the next would be rounding: each squares, and
what is still off before it is within what counts as exact."""
_ROUNDING = 1e-14
"""Gap, rad or share of the length, of corrected postures beside a singular one, where corrections
are rounding over the singular value."""
_SHRINKS = 0.3
"""Of the correction before: more is no convergence to be relied on."""
_LAST_PART, _AT_LIMIT = 0.25, 0.2
"""Share of travel before a limit in which joints of an arm with spare ones are held back, and what
their motion is multiplied by at the limit: little enough for others to take over, and no so steep
a fall that the joints would have to swerve."""


class Line(NamedTuple):
    """A line with an even turn, as compiled code takes it; lengths are shares of the arm's.

    Attributes
    ----------
    start : (4, 4), the tool in the base. velocity : (6,), shift and turn per share of the line.
    row_map : (k, 6), what of a gap is worked on, and its weights. left : POSE, SPIN_FREE, POSITION.
    damping : added where rows may be dependent, else 0.
    lower, upper : (joints,), just beyond travel: where following ends, and what joints are held
        back from where some are spare; ``FAR`` for none.
    free : (joints,), 0 for joints that are then held where they are, else 1.
    """

    start: FloatArray
    velocity: FloatArray
    row_map: FloatArray
    left: int
    damping: float
    lower: FloatArray
    upper: FloatArray
    free: FloatArray


class Bench(NamedTuple):
    """The arrays that following works on."""

    motions: FloatArray
    axis_now: FloatArray
    point_now: FloatArray
    pose: FloatArray
    target: FloatArray
    gap: FloatArray
    of_rows: FloatArray
    of_joints: FloatArray
    tall: FloatArray
    diagonal: FloatArray
    wanted: FloatArray
    step: FloatArray
    weight: FloatArray
    trial: FloatArray
    onward: FloatArray
    twist: FloatArray


def bench_for(lines: Lines, line: Line) -> Bench:
    """Return fresh arrays for an arm on a line."""
    (rows, joints), worked_on = lines.drive.shape, len(line.row_map)
    spare = joints > worked_on and line.damping == 0.0
    tall = (joints, worked_on) if spare else (worked_on + joints * (line.damping > 0.0), joints)
    return Bench(
        motions=np.zeros(rows),
        axis_now=np.zeros((rows, 3)),
        point_now=np.zeros((rows, 3)),
        pose=np.eye(4),
        target=np.eye(4),
        gap=np.zeros(6),
        of_rows=np.zeros((6, rows)),
        of_joints=np.zeros((6, joints)),
        tall=np.zeros(tall),
        diagonal=np.zeros(tall[1]),
        wanted=np.zeros(tall[1] if spare else tall[0]),
        step=np.zeros(joints),
        weight=np.zeros(joints),
        trial=np.zeros(joints),
        onward=np.zeros(joints),
        twist=np.zeros(6),
    )


@compiled
def place_on(line: Line, share: float, target: FloatArray) -> None:
    """Write the pose (4, 4) at a share of the line; the last row is left alone."""
    wx, wy, wz = line.velocity[3], line.velocity[4], line.velocity[5]
    turn = math.sqrt(wx * wx + wy * wy + wz * wz)
    c, s = math.cos(share * turn), math.sin(share * turn)
    if turn > 0.0:
        wx, wy, wz = wx / turn, wy / turn, wz / turn
    for column in range(3):
        x, y, z = line.start[0, column], line.start[1, column], line.start[2, column]
        along = (1.0 - c) * (wx * x + wy * y + wz * z)
        target[0, column] = c * x + s * (wy * z - wz * y) + along * wx
        target[1, column] = c * y + s * (wz * x - wx * z) + along * wy
        target[2, column] = c * z + s * (wx * y - wy * x) + along * wz
    for row in range(3):
        target[row, 3] = line.start[row, 3] + share * line.velocity[row]


@compiled
def _system_at(lines: Lines, line: Line, bench: Bench, share: float, q: FloatArray) -> float:
    """Write gap and triangle of a posture held against the line; return the determinant's sign.

    Zero stands for systems that are not square.
    """
    rows, joints = lines.drive.shape
    for row in range(rows):
        bench.motions[row] = 0.0
        for joint in range(joints):
            bench.motions[row] += lines.drive[row, joint] * q[joint]
    land(
        lines.axis,
        lines.point,
        lines.prismatic,
        lines.tool_at_zero,
        bench.motions,
        bench.axis_now,
        bench.point_now,
        bench.pose,
    )
    place_on(line, share, bench.target)
    gap_to(bench.pose, bench.target, bench.gap)
    columns_of(bench.axis_now, bench.point_now, lines.prismatic, bench.pose, bench.of_rows)
    for entry in range(6):
        for joint in range(joints):
            bench.of_joints[entry, joint] = 0.0
            for row in range(rows):
                bench.of_joints[entry, joint] += bench.of_rows[entry, row] * lines.drive[row, joint]
    _leave_free(line, bench)
    _fill(line, bench, q)
    sign = triangle(bench.tall, bench.diagonal)
    return sign if bench.tall.shape[0] == bench.tall.shape[1] else 0.0


@compiled
def _leave_free(line: Line, bench: Bench) -> None:
    """Take out of gap and Jacobian what the line leaves open, and write the velocity without it.

    The velocity, without a turn that is left open, goes to ``bench.twist``.
    """
    if line.left == POSITION:
        bench.gap[3:] = 0.0
    for k in range(6):
        bench.twist[k] = line.velocity[k]
    if line.left != SPIN_FREE:
        return
    for column in range(-2, bench.of_joints.shape[1]):
        along = 0.0
        for k in range(3):
            along += bench.target[k, 2] * _turn_of(bench, column, k)
        for k in range(3):
            less = along * bench.target[k, 2]
            if column == -2:
                bench.gap[3 + k] -= less
            elif column == -1:
                bench.twist[3 + k] -= less
            else:
                bench.of_joints[3 + k, column] -= less


@compiled
def _turn_of(bench: Bench, column: int, k: int) -> float:
    """Return a component of a turn: of the gap (-2), the velocity (-1), or a column of the
    Jacobian."""
    if column == -2:
        return float(bench.gap[3 + k])
    return float(bench.twist[3 + k] if column == -1 else bench.of_joints[3 + k, column])


@compiled
def _fill(line: Line, bench: Bench, q: FloatArray) -> None:
    """Write the equations' matrix, transposed where joints are spare, to ``tall``."""
    worked_on, joints = line.row_map.shape[0], q.shape[0]
    spare = joints > worked_on and line.damping == 0.0
    for joint in range(joints):
        bench.weight[joint] = _held_back(line, joint, q[joint]) if spare else 1.0
    for row in range(bench.tall.shape[0]):
        for column in range(bench.tall.shape[1]):
            bench.tall[row, column] = 0.0
    for row in range(worked_on):
        for joint in range(joints):
            entry = 0.0
            for k in range(6):
                entry += line.row_map[row, k] * bench.of_joints[k, joint]
            if spare:
                bench.tall[joint, row] = entry * bench.weight[joint]
            else:
                bench.tall[row, joint] = entry
    if bench.tall.shape[0] > worked_on and not spare:
        for joint in range(joints):
            bench.tall[worked_on + joint, joint] = line.damping


@compiled
def _held_back(line: Line, joint: int, value: float) -> float:
    """Return what a spare joint's motion is multiplied by: 1 in mid travel, less near a limit.

    It falls as a cubic, without a kink, over the last quarter of travel.
    """
    below, above = value - line.lower[joint], line.upper[joint] - value
    left = max(min(below, above), 0.0) / (_LAST_PART * (below + above))
    if left >= 1.0:
        return float(line.free[joint])
    return float(
        line.free[joint] * (_AT_LIMIT + (1.0 - _AT_LIMIT) * left * left * (3.0 - 2.0 * left))
    )


@compiled
def _answer_to(line: Line, bench: Bench, asked: FloatArray, answer: FloatArray) -> None:
    """Write the joint motion that makes the twist ``asked`` (6,), by the triangle as it stands."""
    worked_on, joints = line.row_map.shape[0], answer.shape[0]
    for row in range(bench.wanted.shape[0]):
        bench.wanted[row] = 0.0
        if row < worked_on:
            for k in range(6):
                bench.wanted[row] += line.row_map[row, k] * asked[k]
    if joints > worked_on and line.damping == 0.0:
        least_norm(bench.tall, bench.diagonal, bench.wanted, answer)
        for joint in range(joints):
            answer[joint] *= bench.weight[joint]
    else:
        least_squares(bench.tall, bench.diagonal, bench.wanted, answer)


@compiled
def _largest(values: FloatArray) -> float:
    """Return the largest absolute value."""
    largest = 0.0
    for index in range(values.shape[0]):
        largest = max(largest, abs(values[index]))
    return largest


@compiled
def corrected(
    lines: Lines, line: Line, bench: Bench, share: float, q: FloatArray, sign: FloatArray
) -> float:
    """Bring a posture onto the line, in place, and write its rates to ``bench.onward``.

    Parameters
    ----------
    q : (joints,). sign : (1,), written: of the determinant, 0 where there is none.

    Returns
    -------
    first : the first correction, the largest of a joint; below 0 where it does not converge.
    """
    first, before = 0.0, 0.0
    for tried in range(_MOST_CORRECTIONS):
        sign[0] = _system_at(lines, line, bench, share, q)
        _answer_to(line, bench, bench.gap, bench.step)
        size = _largest(bench.step)
        settled = size <= SETTLED or (tried > 0 and _largest(bench.gap) <= _ROUNDING)
        if tried == 0:
            first = size
        elif size > _SHRINKS * before and not settled:
            return -1.0
        for joint in range(q.shape[0]):
            q[joint] += bench.step[joint]
        if settled:
            _answer_to(line, bench, bench.twist, bench.onward)
            return first
        before = size
    return -1.0
