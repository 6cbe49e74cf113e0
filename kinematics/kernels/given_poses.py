"""Poses from positions and orientations as they were given, in one pass over all of them.

Left out: matrices, repair, and the sentences about what cannot be used: whoever calls looks at the
extremes that are returned and asks for those elsewhere.
"""

import math

from kinematics.kernels.compiler import compiled
from kinematics.kernels.rotation_matrices import write_rotation
from kinematics.number_checks import FloatArray

QUATERNION = 0
ROTATION_VECTOR = 1
TRIPLE = 2


@compiled
def write_poses(
    kind: int,
    order: tuple[int, int, int, int],
    values: FloatArray,
    positions: FloatArray,
    poses: FloatArray,
) -> tuple[float, float, float]:
    """Write the pose of each position and orientation.

    Parameters
    ----------
    kind : QUATERNION, ROTATION_VECTOR or TRIPLE.
    order : where w, x, y and z of a quaternion stand; of a triple, the axes it turns about, each
        the current one, and 1 where the last value is the first turn.
    values : (count, 3) or (count, 4), finite; angles in rad.
    positions : (count, 3), m.
    poses : (count, 4, 4).

    Returns
    -------
    smallest, largest : length of a quaternion or a rotation vector; 1 for triples.
    farthest : largest magnitude of any number given.

    Source
    ------
    Diebel, Representing Attitude, 2006, active; Craig, Introduction to Robotics, chapter 2.

    Examples
    --------
    >>> import numpy as np
    >>> poses = np.empty((1, 4, 4))
    >>> write_poses(TRIPLE, (2, 1, 0, 0), np.array([[np.pi / 2, 0, 0]]), np.zeros((1, 3)), poses)
    (1.0, 1.0, 1.5707963267948966)
    >>> poses[0, :3, :3].round(12) + 0.0
    array([[ 0., -1.,  0.],
           [ 1.,  0.,  0.],
           [ 0.,  0.,  1.]])
    """
    smallest, largest, farthest = 1.0, 1.0, 0.0
    for each in range(len(values)):
        for place in range(values.shape[1]):
            farthest = max(farthest, abs(values[each, place]))
        for place in range(3):
            farthest = max(farthest, abs(positions[each, place]))
        if kind == TRIPLE:
            w, x, y, z = _half_turns(order, values[each])
        elif kind == ROTATION_VECTOR:
            x, y, z = values[each, 0], values[each, 1], values[each, 2]
            angle = math.sqrt(x * x + y * y + z * z)
            largest = max(largest, angle)
            ratio = 0.5 if angle < 1e-10 else math.sin(0.5 * angle) / angle
            w, x, y, z = math.cos(0.5 * angle), ratio * x, ratio * y, ratio * z
        else:
            w, x = values[each, order[0]], values[each, order[1]]
            y, z = values[each, order[2]], values[each, order[3]]
            length = math.sqrt(w * w + x * x + y * y + z * z)
            smallest, largest = min(smallest, length), max(largest, length)
        pose = poses[each]
        write_rotation(w, x, y, z, pose)
        for i in range(3):
            pose[i, 3] = positions[each, i]
            pose[3, i] = 0.0
        pose[3, 3] = 1.0
    return smallest, largest, farthest


@compiled
def _half_turns(
    order: tuple[int, int, int, int], angles: FloatArray
) -> tuple[float, float, float, float]:
    """Return the quaternion of three turns about current axes."""
    w, x, y, z = 1.0, 0.0, 0.0, 0.0
    for turn in range(3):
        half = 0.5 * (angles[2 - turn] if order[3] else angles[turn])
        cosine, sine = math.cos(half), math.sin(half)
        axis = order[turn]
        if axis == 0:
            w, x, y, z = (
                w * cosine - x * sine,
                x * cosine + w * sine,
                y * cosine + z * sine,
                z * cosine - y * sine,
            )
        elif axis == 1:
            w, x, y, z = (
                w * cosine - y * sine,
                x * cosine - z * sine,
                y * cosine + w * sine,
                z * cosine + x * sine,
            )
        else:
            w, x, y, z = (
                w * cosine - z * sine,
                x * cosine + y * sine,
                y * cosine - x * sine,
                z * cosine + w * sine,
            )
    return w, x, y, z
