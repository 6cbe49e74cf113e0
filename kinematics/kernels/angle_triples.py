"""Three angles about frame axes, of many rotations at once, both ways.

Turns are written about current axes, from left to right; what is about fixed axes is read
backwards. Left out: NaN, and the orders' names and ranges (kinematics/angle_triples.py).
"""

import math

from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray


@compiled
def rotations_of_angles(
    angles: FloatArray, left: int, middle: int, right: int, rotations: FloatArray
) -> None:
    """Write the product of three elementary rotations.

    Parameters
    ----------
    angles : (count, 3), rad, from left to right in the product.
    left, middle, right : indices of the axes; neighbours differ.
    rotations : (count, 3, 3).

    Source
    ------
    Craig, Introduction to Robotics, chapter 2.

    Examples
    --------
    >>> import numpy as np
    >>> rotations = np.empty((1, 3, 3))
    >>> rotations_of_angles(np.array([[np.pi / 2, 0.0, 0.0]]), 2, 1, 0, rotations)
    >>> rotations[0].round(12) + 0.0
    array([[ 0., -1.,  0.],
           [ 1.,  0.,  0.],
           [ 0.,  0.,  1.]])
    """
    j, k = (left + 1) % 3, (left + 2) % 3
    for b in range(angles.shape[0]):
        r = rotations[b]
        cosine, sine = math.cos(angles[b, 0]), math.sin(angles[b, 0])
        for row in range(3):
            r[left, row] = 0.0
            r[row, left] = 0.0
        r[left, left] = 1.0
        r[j, j] = cosine
        r[k, k] = cosine
        r[j, k] = -sine
        r[k, j] = sine
        for place in range(1, 3):
            axis = middle if place == 1 else right
            p, q = (axis + 1) % 3, (axis + 2) % 3
            cosine, sine = math.cos(angles[b, place]), math.sin(angles[b, place])
            for row in range(3):
                one, other = r[row, p], r[row, q]
                r[row, p] = cosine * one + sine * other
                r[row, q] = cosine * other - sine * one


@compiled
def angles_of_rotations(
    rotations: FloatArray,
    i: int,
    j: int,
    k: int,
    parity: float,
    first_is_last: bool,
    lock: float,
    angles: FloatArray,
    locked: FloatArray,
) -> None:
    """Write the angles of rotations, outermost first.

    Parameters
    ----------
    rotations : (count, 3, 3).
    i, j, k : outermost axis, middle axis, the third one.
    parity : 1.0 if they are right-handed in this order, else -1.0.
    first_is_last : whether the innermost axis is the outermost again.
    lock : distance from gimbal lock, rad, up to which the outer angle is put to 0.
    angles : (count, 3): outer, middle, inner.
    locked : (count,): 0.0 off lock; at lock 1.0 where the sum of outer and inner is determined and
        -1.0 where their difference is.

    Source
    ------
    Paul, Robot Manipulators, 1981, chapter 3: the outer turn is undone, the inner angle read from
    what is left.

    Examples
    --------
    >>> import numpy as np
    >>> angles, locked = np.empty((1, 3)), np.empty(1)
    >>> angles_of_rotations(np.eye(3)[None], 2, 1, 0, -1.0, False, 1e-12, angles, locked)
    >>> (angles + 0.0).tolist(), locked.tolist()
    ([[0.0, 0.0, 0.0]], [0.0])
    """
    innermost = i if first_is_last else k
    for b in range(rotations.shape[0]):
        r = rotations[b]
        across_j, across_k, along = r[j, innermost], r[k, innermost], r[i, innermost]
        across = math.sqrt(across_j * across_j + across_k * across_k)
        locked[b] = 0.0
        if math.atan2(across, abs(along)) <= lock:
            locked[b] = 1.0 if along > 0.0 else -1.0
            across = 0.0
        if first_is_last:
            outer = math.atan2(across_j, -parity * across_k)
            middle = math.atan2(across, along)
        else:
            outer = math.atan2(-parity * across_j, across_k)
            middle = math.atan2(parity * along, across)
        if locked[b] != 0.0:
            outer = 0.0
        cosine, sine = math.cos(outer), parity * math.sin(outer)
        ahead = cosine * r[j, j] + sine * r[k, j]
        if first_is_last:
            beside = -parity * (cosine * r[j, k] + sine * r[k, k])
        else:
            beside = parity * (cosine * r[j, i] + sine * r[k, i])
        angles[b, 0] = outer
        angles[b, 1] = middle
        angles[b, 2] = math.atan2(beside, ahead)
