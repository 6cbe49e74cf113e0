"""Three angles about frame axes, of many rotations at once, both ways.

Left out: names of the orders and what is told at gimbal lock (kinematics/orientation_forms.py).
"""

import math

import numpy as np

from kinematics.kernels.compiler import compiled, compiled_exactly
from kinematics.number_checks import FloatArray


@compiled_exactly
def angle_triples(
    rotations: FloatArray,
    axes: tuple[int, int, int],
    innermost: int,
    about_fixed: bool,
    lock: float,
    noise: float,
    angles: FloatArray,
    distance: FloatArray,
) -> None:
    """Write the three angles of each rotation and how far its middle angle is from gimbal lock.

    Parameters
    ----------
    rotations : (count, 3, 3), or (count, 4, 4), poses.
    axes : outermost axis, middle axis and the third one; innermost : the last turned about.
    about_fixed : whether the angles are written from the innermost to the outermost.
    lock : distance up to which the middle angle is put on the lock, rad.
    noise : distance from -pi up to which an angle is written as pi, rad.
    angles : (count, 3), rad; distance : (count,), rad, 0 to pi/2.

    Source
    ------
    See kinematics.angle_triples.angles_of.
    """
    i, j, k = axes
    parity = 1.0 if (j - i) % 3 == 1 else -1.0
    first_is_last = innermost == i
    for b in range(rotations.shape[0]):
        r = rotations[b]
        total = 0.0
        for row in range(3):
            total += r[row, 0] + r[row, 1] + r[row, 2]
        if not np.isfinite(total):
            # Numbers that are none make none, all three.
            angles[b, 0], angles[b, 1], angles[b, 2] = np.nan, np.nan, np.nan
            distance[b] = np.nan
            continue
        across_j, across_k, along = r[j, innermost], r[k, innermost], r[i, innermost]
        across = math.hypot(across_j, across_k)
        distance[b] = math.atan2(across, abs(along))
        locked = distance[b] <= lock
        if locked:
            across = 0.0
        if first_is_last:
            outer = math.atan2(across_j, -parity * across_k)
            middle = math.atan2(across, along)
        else:
            outer = math.atan2(-parity * across_j, across_k)
            middle = math.atan2(parity * along, across)
        if locked:
            outer = 0.0
        # The outer turn undone, the inner angle is read from what is left.
        cosine, sine = math.cos(outer), parity * math.sin(outer)
        own = cosine * r[j, j] + sine * r[k, j]
        if first_is_last:
            beside = -parity * (cosine * r[j, k] + sine * r[k, k])
        else:
            beside = parity * (cosine * r[j, i] + sine * r[k, i])
        inner = math.atan2(beside, own)
        first, last = (inner, outer) if about_fixed else (outer, inner)
        if locked and not about_fixed:
            # The inner angle holds what is determined; hand it to the first.
            first, last = (inner if along > 0.0 else -inner), 0.0
        # Adding 0.0 makes 0.0 of -0.0.
        angles[b, 0] = (math.pi if first <= noise - math.pi else first) + 0.0
        angles[b, 1] = middle + 0.0
        angles[b, 2] = (math.pi if last <= noise - math.pi else last) + 0.0


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
