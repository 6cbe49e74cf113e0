"""Rotation matrices of many quaternions, rotation vectors or angle triples, by compiled kernels.

For one orientation rotations and angle_triples do the same; their last digits, which may be
others, are those that digests of arms were taken of. Left out: whether the numbers are any good.
"""

import numpy as np

from kinematics.angle_triples import AxisOrder
from kinematics.kernels.angles import rotations_of_angles
from kinematics.kernels.compiler import for_kernel
from kinematics.kernels.rotation_matrices import rotations_of_quaternions, rotations_of_vectors
from kinematics.number_checks import FloatArray
from kinematics.tolerances import SHORT_VECTOR


def rotations_from_quaternions(quaternions_wxyz: FloatArray) -> FloatArray:
    """Return the rotations of quaternions of any length but zero.

    Parameters
    ----------
    quaternions_wxyz : (count, 4), finite, scalar first.

    Returns
    -------
    rotations : (count, 3, 3), within a few 1e-16 of rotation_from_quaternion.

    Source
    ------
    As rotation_from_quaternion.

    Examples
    --------
    >>> rotations_from_quaternions(np.array([[1.0, 0.0, 0.0, 1.0]]))[0].tolist()  # 90 deg about z
    [[0.0, -1.0, 0.0], [1.0, 0.0, 0.0], [0.0, 0.0, 1.0]]
    """
    rotations = np.empty((len(quaternions_wxyz), 3, 3))
    rotations_of_quaternions(for_kernel(quaternions_wxyz), rotations)
    return rotations


def rotations_from_vectors(vectors: FloatArray) -> FloatArray:
    """Return the rotations of rotation vectors.

    Parameters
    ----------
    vectors : (count, 3), rad, finite.

    Returns
    -------
    rotations : (count, 3, 3), within a few 1e-16 of rotation_from_vector.

    Source
    ------
    As rotation_from_vector.

    Examples
    --------
    >>> rotations_from_vectors(np.zeros((1, 3)))[0].tolist()
    [[1.0, 0.0, 0.0], [0.0, 1.0, 0.0], [0.0, 0.0, 1.0]]
    """
    rotations = np.empty((len(vectors), 3, 3))
    rotations_of_vectors(for_kernel(vectors), SHORT_VECTOR, rotations)
    return rotations


def rotations_from_angles(order: AxisOrder, angles: FloatArray) -> FloatArray:
    """Return the rotations that three turns each make together.

    Parameters
    ----------
    order : the axes.
    angles : (count, 3), rad, finite, in the order of ``order.axes``.

    Returns
    -------
    rotations : (count, 3, 3), within a few 1e-16 of rotation_from_angles.

    Source
    ------
    As rotation_from_angles.

    Examples
    --------
    >>> turned = rotations_from_angles(AxisOrder((2, 1, 0), False), np.array([[np.pi / 2, 0, 0]]))
    >>> turned[0, :, 0].round(12) + 0.0  # x goes to y
    array([0., 1., 0.])
    """
    rotations = np.empty((len(angles), 3, 3))
    outermost_first = angles[:, ::-1] if order.about_fixed else angles
    rotations_of_angles(for_kernel(outermost_first), *order.as_current, rotations)
    return rotations
