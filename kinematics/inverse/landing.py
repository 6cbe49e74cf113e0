"""Where joint motions bring the tool, how far that is from a target, and the Jacobian there.

Idea: a joint is a line that stands still while its joint moves; it carries all that comes after
it. Walking from the base outwards, each joint turns (or shifts) the frame so far about its line as
it stands *now*, so the walk also yields every line in its present place, and from these the
Jacobian at once. No table frames are needed: lines at zero motion and the tool's pose at zero
motion say all. The gap to a target is a shift and a rotation vector, both in base axes.

Source: product of exponentials, Brockett 1984; Murray, Li and Sastry 1994, chapter 3. The Jacobian
by lines: Whitney 1972. Rotation vector by atan2 of both parts, with the symmetric part near a half
turn, where the antisymmetric one vanishes.

Not covered: lengths with a unit (all lengths here are shares of the arm's), travel, drive maps.
"""

import math

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.kernel_numbers import X, Y, Z
from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray

NEAR_HALF_TURN = -0.99
"""Cosine below which a rotation vector is read from the symmetric part: 8 deg from a half turn."""


@compiled
def land(
    axis: FloatArray,
    point: FloatArray,
    prismatic: NDArray[np.bool_],
    tool_at_zero: FloatArray,
    motions: FloatArray,
    axis_now: FloatArray,
    point_now: FloatArray,
    pose: FloatArray,
) -> None:
    """Write where motions bring the lines of the joints and the tool.

    Parameters
    ----------
    axis, point : (n, 3), unit direction and a point of each joint's line at zero motion.
    prismatic : (n,), which joints shift along their line.
    tool_at_zero : (4, 4).
    motions : (n,), rad, or lengths.
    axis_now, point_now : (n, 3), written: the lines at these motions.
    pose : (4, 4), written: the tool; the last row is left alone.

    Examples
    --------
    >>> pose, now, place = np.eye(4), np.empty((1, 3)), np.empty((1, 3))
    >>> line, origin, out = np.array([[0.0, 0, 1]]), np.zeros((1, 3)), np.eye(4)
    >>> out[0, 3] = 2.0
    >>> turned = np.array([np.pi / 2])
    >>> land(line, origin, np.zeros(1, bool), out, turned, now, place, pose)
    >>> pose[:3, 3].round(12) + 0.0
    array([0., 2., 0.])
    """
    for row in range(3):
        for column in range(4):
            pose[row, column] = 1.0 if row == column else 0.0
    for i in range(motions.shape[0]):
        for row in range(3):
            line, place = 0.0, pose[row, 3]
            for k in range(3):
                line += pose[row, k] * axis[i, k]
                place += pose[row, k] * point[i, k]
            axis_now[i, row], point_now[i, row] = line, place
        kx, ky, kz = axis_now[i, 0], axis_now[i, 1], axis_now[i, 2]
        if prismatic[i]:
            pose[0, 3] += motions[i] * kx
            pose[1, 3] += motions[i] * ky
            pose[2, 3] += motions[i] * kz
            continue
        cosine, sine = math.cos(motions[i]), math.sin(motions[i])
        for row in range(3):
            pose[row, 3] -= point_now[i, row]
        for column in range(4):
            x, y, z = pose[0, column], pose[1, column], pose[2, column]
            along = (kx * x + ky * y + kz * z) * (1.0 - cosine)
            pose[0, column] = x * cosine + (ky * z - kz * y) * sine + kx * along
            pose[1, column] = y * cosine + (kz * x - kx * z) * sine + ky * along
            pose[2, column] = z * cosine + (kx * y - ky * x) * sine + kz * along
        for row in range(3):
            pose[row, 3] += point_now[i, row]
    for row in range(3):
        x, y, z = pose[row, 0], pose[row, 1], pose[row, 2]
        for column in range(4):
            moved = x * tool_at_zero[0, column] + y * tool_at_zero[1, column]
            moved += z * tool_at_zero[2, column]
            pose[row, column] = moved + pose[row, 3] if column == 3 else moved


@compiled
def gap_to(pose: FloatArray, target: FloatArray, gap: FloatArray) -> None:
    """Write the shift and the rotation vector, in base axes, that bring a pose onto a target.

    Parameters
    ----------
    pose, target : (4, 4).
    gap : (6,), written: lengths, then rad; the turn is at most pi.

    Examples
    --------
    >>> quarter, gap = np.eye(4), np.empty(6)
    >>> quarter[:2, :2] = [[0, -1], [1, 0]]
    >>> gap_to(np.eye(4), quarter, gap)
    >>> (gap * 2 / np.pi).round(12)
    array([0., 0., 0., 0., 0., 1.])
    """
    for row in range(3):
        gap[row] = target[row, 3] - pose[row, 3]
    r00, r11, r22 = (
        _entry(target, pose, X, X),
        _entry(target, pose, Y, Y),
        _entry(target, pose, Z, Z),
    )
    r01, r10 = _entry(target, pose, X, Y), _entry(target, pose, Y, X)
    r02, r20 = _entry(target, pose, X, Z), _entry(target, pose, Z, X)
    r12, r21 = _entry(target, pose, Y, Z), _entry(target, pose, Z, Y)
    x, y, z = 0.5 * (r21 - r12), 0.5 * (r02 - r20), 0.5 * (r10 - r01)
    sine, cosine = math.sqrt(x * x + y * y + z * z), 0.5 * (r00 + r11 + r22 - 1.0)
    angle = math.atan2(sine, cosine)
    if cosine > NEAR_HALF_TURN:
        factor = angle / sine if sine > 0.0 else 1.0
        gap[3], gap[4], gap[5] = x * factor, y * factor, z * factor
        return
    # Of R + R^T = 2 cos I + 2 (1 - cos) n n^T the longest column gives the axis n but for its sign.
    if r00 >= r11 and r00 >= r22:
        nx, ny, nz = r00 - cosine, 0.5 * (r01 + r10), 0.5 * (r02 + r20)
    elif r11 >= r22:
        nx, ny, nz = 0.5 * (r01 + r10), r11 - cosine, 0.5 * (r12 + r21)
    else:
        nx, ny, nz = 0.5 * (r02 + r20), 0.5 * (r12 + r21), r22 - cosine
    factor = angle / math.sqrt(nx * nx + ny * ny + nz * nz)
    if nx * x + ny * y + nz * z < 0.0:
        factor = -factor
    gap[3], gap[4], gap[5] = nx * factor, ny * factor, nz * factor


@compiled
def _entry(target: FloatArray, pose: FloatArray, row: int, column: int) -> float:
    """Return an entry of the rotation from the pose to the target, in base axes."""
    entry = target[row, 0] * pose[column, 0] + target[row, 1] * pose[column, 1]
    return entry + target[row, 2] * pose[column, 2]  # type: ignore[no-any-return]


@compiled
def columns_of(
    axis_now: FloatArray,
    point_now: FloatArray,
    prismatic: NDArray[np.bool_],
    pose: FloatArray,
    jacobian: FloatArray,
) -> None:
    """Write the Jacobian (6, n) of the tool point in base axes from what ``land`` wrote.

    Rows vx vy vz wx wy wz, one column per motion.

    Examples
    --------
    >>> pose, jacobian = np.eye(4), np.empty((6, 1))
    >>> pose[0, 3] = 2.0
    >>> line, place = np.array([[0.0, 0, 1]]), np.zeros((1, 3))
    >>> columns_of(line, place, np.zeros(1, bool), pose, jacobian)
    >>> jacobian.ravel()
    array([0., 2., 0., 0., 0., 1.])
    """
    for i in range(axis_now.shape[0]):
        hx, hy, hz = axis_now[i, 0], axis_now[i, 1], axis_now[i, 2]
        if prismatic[i]:
            jacobian[0, i], jacobian[1, i], jacobian[2, i] = hx, hy, hz
            jacobian[3, i], jacobian[4, i], jacobian[5, i] = 0.0, 0.0, 0.0
            continue
        x, y, z = (
            pose[0, 3] - point_now[i, 0],
            pose[1, 3] - point_now[i, 1],
            pose[2, 3] - point_now[i, 2],
        )
        jacobian[0, i] = hy * z - hz * y
        jacobian[1, i] = hz * x - hx * z
        jacobian[2, i] = hx * y - hy * x
        jacobian[3, i], jacobian[4, i], jacobian[5, i] = hx, hy, hz


@compiled
def land_all(
    axis: FloatArray,
    point: FloatArray,
    prismatic: NDArray[np.bool_],
    tool_at_zero: FloatArray,
    motions: FloatArray,
    poses: FloatArray,
) -> None:
    """Write the tool poses (count, 4, 4) of many motions (count, n); lines as in ``land``.

    Examples
    --------
    >>> poses, none = np.empty((1, 4, 4)), np.empty((0, 3))
    >>> land_all(none, none, np.empty(0, bool), np.eye(4), np.empty((1, 0)), poses)
    >>> bool((poses[0] == np.eye(4)).all())
    True
    """
    n = motions.shape[1]
    axis_now, point_now = np.empty((n, 3)), np.empty((n, 3))
    for b in range(motions.shape[0]):
        land(axis, point, prismatic, tool_at_zero, motions[b], axis_now, point_now, poses[b])
        for column in range(4):
            poses[b, 3, column] = 1.0 if column == 3 else 0.0


@compiled
def gaps_to(poses: FloatArray, targets: FloatArray, of: FloatArray, gaps: FloatArray) -> None:
    """Write the gaps (count, 2), length and angle, between poses and the targets they belong to.

    Parameters
    ----------
    poses : (count, 4, 4); targets : (m, 4, 4); of : (count,), whole numbers, which target.

    Examples
    --------
    >>> gaps = np.empty((1, 2))
    >>> gaps_to(np.eye(4)[None], np.eye(4)[None], np.zeros(1), gaps)
    >>> gaps
    array([[0., 0.]])
    """
    gap = np.empty(6)
    for b in range(poses.shape[0]):
        gap_to(poses[b], targets[int(of[b])], gap)
        gaps[b, 0] = math.sqrt(gap[0] ** 2 + gap[1] ** 2 + gap[2] ** 2)
        gaps[b, 1] = math.sqrt(gap[3] ** 2 + gap[4] ** 2 + gap[5] ** 2)


@compiled
def jacobians_at(
    axis: FloatArray,
    point: FloatArray,
    prismatic: NDArray[np.bool_],
    tool_at_zero: FloatArray,
    motions: FloatArray,
    jacobians: FloatArray,
) -> None:
    """Write the Jacobians (count, 6, n) of many motions (count, n); as ``land``, ``columns_of``.

    Examples
    --------
    >>> line, place, slides = np.array([[0.0, 0, 1]]), np.zeros((1, 3)), np.zeros(1, bool)
    >>> out, jacobians = np.eye(4), np.empty((1, 6, 1))
    >>> out[0, 3] = 2.0
    >>> jacobians_at(line, place, slides, out, np.zeros((1, 1)), jacobians)
    >>> jacobians.ravel()
    array([0., 2., 0., 0., 0., 1.])
    """
    n = motions.shape[1]
    axis_now, point_now, pose = np.empty((n, 3)), np.empty((n, 3)), np.empty((4, 4))
    for b in range(motions.shape[0]):
        land(axis, point, prismatic, tool_at_zero, motions[b], axis_now, point_now, pose)
        columns_of(axis_now, point_now, prismatic, pose, jacobians[b])
