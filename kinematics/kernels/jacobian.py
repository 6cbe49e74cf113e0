"""Jacobian columns of many postures from their axes, and how they change with the rows."""

import numpy as np
from numpy.typing import NDArray

from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray


@compiled
def jacobians(
    direction: FloatArray,
    point: FloatArray,
    flange: FloatArray,
    tool_in_flange: FloatArray,
    revolute: NDArray[np.bool_],
    drive_matrix: FloatArray,
    tool: FloatArray,
    of_rows: FloatArray,
    of_joints: FloatArray,
) -> None:
    """Write the tool's pose and the Jacobian of its point per row motion and per joint value.

    Parameters
    ----------
    direction, point : (count, rows, 3), of each axis; flange : (count, 4, 4); all in the base.
    tool_in_flange : (4, 4).
    tool : (count, 4, 4), in the base.
    of_rows : (count, 6, rows); of_joints : (count, 6, joints); base axes.

    Examples
    --------
    >>> tool_in_flange, tool = np.eye(4), np.empty((1, 4, 4))
    >>> tool_in_flange[0, 3] = 0.5
    >>> of_rows, of_joints = np.empty((1, 6, 1)), np.empty((1, 6, 1))
    >>> z, at = np.array([[[0.0, 0.0, 1.0]]]), np.zeros((1, 1, 3))
    >>> one_row = np.array([True]), np.eye(1)
    >>> jacobians(z, at, np.eye(4)[None].copy(), tool_in_flange, *one_row, tool, of_rows, of_joints)
    >>> of_joints.ravel()
    array([0. , 0.5, 0. , 0. , 0. , 1. ])
    """
    rows, joints = drive_matrix.shape
    for b in range(direction.shape[0]):
        for i in range(4):
            for j in range(4):
                entry_of_pose = 0.0
                for k in range(4):
                    entry_of_pose += flange[b, i, k] * tool_in_flange[k, j]
                tool[b, i, j] = entry_of_pose
        for row in range(rows):
            x, y, z = direction[b, row, 0], direction[b, row, 1], direction[b, row, 2]
            if revolute[row]:
                out_x = tool[b, 0, 3] - point[b, row, 0]
                out_y = tool[b, 1, 3] - point[b, row, 1]
                out_z = tool[b, 2, 3] - point[b, row, 2]
                of_rows[b, 0, row] = y * out_z - z * out_y
                of_rows[b, 1, row] = z * out_x - x * out_z
                of_rows[b, 2, row] = x * out_y - y * out_x
                of_rows[b, 3, row] = x
                of_rows[b, 4, row] = y
                of_rows[b, 5, row] = z
            else:
                of_rows[b, 0, row] = x
                of_rows[b, 1, row] = y
                of_rows[b, 2, row] = z
                of_rows[b, 3, row] = 0.0
                of_rows[b, 4, row] = 0.0
                of_rows[b, 5, row] = 0.0
        for entry in range(6):
            for joint in range(joints):
                of_joints[b, entry, joint] = 0.0
            for row in range(rows):
                for joint in range(joints):
                    share = drive_matrix[row, joint]
                    if share != 0.0:
                        of_joints[b, entry, joint] += of_rows[b, entry, row] * share


@compiled
def change_with_rows(
    of_rows: FloatArray, covector: FloatArray, rates: FloatArray, change: FloatArray
) -> None:
    """Write d(covector^T J rates)/d(row variable) to ``change`` (count, rows), rates constant.

    Column i of the Jacobian changes with row k by ``w_k x J_i`` when k turns it (k <= i), and by
    ``w_i x v_k`` in its linear part when k comes after (k > i).

    Parameters
    ----------
    of_rows : (count, 6, rows); covector : (count, 6); rates : (count, rows).

    Source
    ------
    Closed form of the Jacobian's derivative by screws; derived here from dz_i/dq_k = w_k x z_i.

    Examples
    --------
    >>> turning = np.array([[[0.0], [0.5], [0.0], [0.0], [0.0], [1.0]]])  # about z
    >>> change = np.empty((1, 1))
    >>> change_with_rows(turning, np.array([[1.0, 0, 0, 0, 0, 0]]), np.array([[1.0]]), change)
    >>> change
    array([[-0.5]])
    """
    rows = of_rows.shape[2]
    for b in range(of_rows.shape[0]):
        fx, fy, fz = covector[b, 0], covector[b, 1], covector[b, 2]
        mx, my, mz = covector[b, 3], covector[b, 4], covector[b, 5]
        # Turns of the rows before k, and motions of row k and all after it.
        before_x, before_y, before_z = 0.0, 0.0, 0.0
        vx, vy, vz, wx, wy, wz = 0.0, 0.0, 0.0, 0.0, 0.0, 0.0
        for row in range(rows):
            rate = rates[b, row]
            vx += of_rows[b, 0, row] * rate
            vy += of_rows[b, 1, row] * rate
            vz += of_rows[b, 2, row] * rate
            wx += of_rows[b, 3, row] * rate
            wy += of_rows[b, 4, row] * rate
            wz += of_rows[b, 5, row] * rate
        for row in range(rows):
            rate = rates[b, row]
            ax, ay, az = of_rows[b, 3, row], of_rows[b, 4, row], of_rows[b, 5, row]
            lx, ly, lz = of_rows[b, 0, row], of_rows[b, 1, row], of_rows[b, 2, row]
            moved = fx * (ay * vz - az * vy + before_y * lz - before_z * ly)
            moved += fy * (az * vx - ax * vz + before_z * lx - before_x * lz)
            moved += fz * (ax * vy - ay * vx + before_x * ly - before_y * lx)
            moved += mx * (ay * wz - az * wy)
            moved += my * (az * wx - ax * wz)
            moved += mz * (ax * wy - ay * wx)
            change[b, row] = moved
            before_x += ax * rate
            before_y += ay * rate
            before_z += az * rate
            vx -= lx * rate
            vy -= ly * rate
            vz -= lz * rate
            wx -= ax * rate
            wy -= ay * rate
            wz -= az * rate
