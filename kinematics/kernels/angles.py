"""Three angles of many rotation matrices, for any order of axes.

Left out: names of the orders and what is told at gimbal lock (kinematics/orientation_forms.py).
"""

import math

from kinematics.kernels.compiler import compiled_exactly
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
