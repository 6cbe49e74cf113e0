"""Poses along ways through a graph of frames, and what loops are off by.

Left out: the ways themselves (frame_graph), names, checks.
"""

import math

import numpy as np

from kinematics.kernels.compiler import compiled
from kinematics.kernels.frame_graph import IntArray
from kinematics.number_checks import FloatArray


@compiled
def loops_walked(
    of_in: FloatArray, begins: IntArray, steps: IntArray
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return what poses_along and closures do, at one call.

    A call from outside takes as long as a dozen loops.
    """
    poses = poses_along(of_in, begins, steps)
    position, angle = closures(poses)
    return poses, position, angle


@compiled
def poses_along(of_in: FloatArray, begins: IntArray, steps: IntArray) -> FloatArray:
    """Return the product of the poses along each way, inverted where a step goes back.

    Parameters
    ----------
    of_in : (relations, 4, 4), rigid.
    begins, steps : of close_loops or shortest_ways.

    Returns
    -------
    poses : (ways, 4, 4), of each way's last frame in its first.

    Source
    ------
    Craig, Introduction to Robotics, chapter 2: compound and inverted transforms.

    Examples
    --------
    >>> of_in = np.eye(4)[None].copy()
    >>> of_in[0, 0, 3] = 0.5
    >>> poses_along(of_in, np.array([0, 1]), np.array([-1]))[0, 0, 3]
    np.float64(-0.5)
    """
    poses = np.empty((len(begins) - 1, 4, 4))
    step, before = np.empty((3, 4)), np.empty((3, 4))
    for each in range(len(begins) - 1):
        for i in range(4):
            for j in range(4):
                poses[each, i, j] = 1.0 if i == j else 0.0
        for place in range(begins[each], begins[each + 1]):
            back = steps[place] < 0
            k = ~steps[place] if back else steps[place]
            for i in range(3):
                step[i, 3] = 0.0 if back else of_in[k, i, 3]
                for j in range(3):
                    step[i, j] = of_in[k, j, i] if back else of_in[k, i, j]
                    if back:
                        step[i, 3] -= step[i, j] * of_in[k, j, 3]
            for i in range(3):
                for j in range(4):
                    before[i, j] = poses[each, i, j]
            for i in range(3):
                for j in range(4):
                    total = before[i, 3] if j == 3 else 0.0
                    for inside in range(3):
                        total += before[i, inside] * step[inside, j]
                    poses[each, i, j] = total
    return poses


@compiled
def closures(poses: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return what each pose is off the identity by: a distance and an angle of 0 to pi.

    Parameters
    ----------
    poses : (count, 4, 4).

    Returns
    -------
    position, angle : (count,), m and rad.

    Source
    ------
    The skew part of a rotation has the length sin, its trace is 1 + 2 cos; together they lose no
    digits near 0 nor near pi.

    Examples
    --------
    >>> closures(np.diag([-1.0, -1.0, 1.0, 1.0])[None])[1]
    array([3.14159265])
    """
    position, angle = np.empty(len(poses)), np.empty(len(poses))
    for each in range(len(poses)):
        t = poses[each]
        position[each] = math.sqrt(t[0, 3] ** 2 + t[1, 3] ** 2 + t[2, 3] ** 2)
        x, y, z = t[2, 1] - t[1, 2], t[0, 2] - t[2, 0], t[1, 0] - t[0, 1]
        angle[each] = math.atan2(
            math.sqrt(x * x + y * y + z * z), t[0, 0] + t[1, 1] + t[2, 2] - 1.0
        )
    return position, angle
