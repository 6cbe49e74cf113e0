"""Rotation matrices of many quaternions and of many rotation vectors.

Left out: NaN, infinity and quaternions without direction, which the caller keeps away
(kinematics/orientation_batches.py).
"""

import math

from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray


@compiled
def rotations_of_quaternions(quaternions: FloatArray, rotations: FloatArray) -> None:
    """Write the rotation of each quaternion, of any length but zero.

    Parameters
    ----------
    quaternions : (count, 4), scalar first.
    rotations : (count, 3, 3).

    Source
    ------
    Diebel, Representing Attitude, 2006, the rotation matrix of a unit quaternion; there passive,
    here active (the transpose).

    Examples
    --------
    >>> import numpy as np
    >>> rotations = np.empty((1, 3, 3))
    >>> rotations_of_quaternions(np.array([[2.0, 2.0, 0.0, 0.0]]), rotations)
    >>> rotations[0].tolist()  # 90 deg about x
    [[1.0, 0.0, 0.0], [0.0, 0.0, -1.0], [0.0, 1.0, 0.0]]
    """
    for b in range(quaternions.shape[0]):
        q = quaternions[b]
        largest = max(max(abs(q[0]), abs(q[1])), max(abs(q[2]), abs(q[3])))
        # Squares of 1e-200 or 1e200 would leave the range of doubles.
        w, x, y, z = q[0] / largest, q[1] / largest, q[2] / largest, q[3] / largest
        write_rotation(w, x, y, z, rotations[b])


@compiled
def rotations_of_vectors(vectors: FloatArray, short: float, rotations: FloatArray) -> None:
    """Write the rotation of each rotation vector.

    Parameters
    ----------
    vectors : (count, 3), rad.
    short : length below which the sine of half an angle is the half angle.
    rotations : (count, 3, 3).

    Source
    ------
    Shuster, J. Astronautical Sciences 41(4), 1993, rotation vector; by way of quaternions.

    Examples
    --------
    >>> import numpy as np
    >>> rotations = np.empty((1, 3, 3))
    >>> rotations_of_vectors(np.array([[0.0, 0.0, np.pi]]), 1e-10, rotations)
    >>> rotations[0].round(12).diagonal()
    array([-1., -1.,  1.])
    """
    for b in range(vectors.shape[0]):
        x, y, z = vectors[b, 0], vectors[b, 1], vectors[b, 2]
        angle = math.sqrt(x * x + y * y + z * z)
        ratio = 0.5 if angle < short else math.sin(0.5 * angle) / angle
        write_rotation(math.cos(0.5 * angle), ratio * x, ratio * y, ratio * z, rotations[b])


@compiled
def write_rotation(w: float, x: float, y: float, z: float, r: FloatArray) -> None:
    """Write the rotation of one quaternion whose squares are within the range of doubles.

    Parameters
    ----------
    r : (3, 3), or (4, 4), a pose, whose rotation is written.
    """
    twice = 2.0 / (w * w + x * x + y * y + z * z)
    r[0, 0] = 1.0 - twice * (y * y + z * z)
    r[0, 1] = twice * (x * y - w * z)
    r[0, 2] = twice * (x * z + w * y)
    r[1, 0] = twice * (x * y + w * z)
    r[1, 1] = 1.0 - twice * (x * x + z * z)
    r[1, 2] = twice * (y * z - w * x)
    r[2, 0] = twice * (x * z - w * y)
    r[2, 1] = twice * (y * z + w * x)
    r[2, 2] = 1.0 - twice * (x * x + y * y)
