"""Rotation matrices from axes, quaternions and rotation vectors, and back.

Left out: angle triples (angle_triples), whether a matrix is a rotation at all (rigidity), and the
names of the forms (orientation_forms).

Everywhere: active matrices and column vectors, ``v_outer = rotation @ v_body``; radians; any
leading batch axes, also of length 0; right-handed; quaternions scalar first, Hamilton product.
"""

import math

import numpy as np
from numpy.typing import ArrayLike

from kinematics.errors import InvalidOrientation, NotFinite
from kinematics.kernels.compiler import for_kernel
from kinematics.kernels.quaternions import quaternions_wxyz
from kinematics.number_checks import FloatArray
from kinematics.tolerances import HALF_TURN_NOISE, RIGID_SILENT, SHORT_VECTOR

QUATERNION_SIGNS = (0.5 * HALF_TURN_NOISE, RIGID_SILENT)
"""Scalar up to which a rotation is a half turn, and size up to which a component has no sign of its
own: an accepted matrix is good to RIGID_SILENT only."""


def lengths(vectors: FloatArray) -> FloatArray:
    """Return the lengths of vectors, each rounded as if it were alone.

    Parameters
    ----------
    vectors : (..., n).

    Returns
    -------
    lengths : (...); NaN and infinity where the components are so, and infinity where their squares
        are beyond the range of doubles.

    Source
    ------
    Euclid; the squares are added in the order of the components.

    Examples
    --------
    >>> lengths(np.array([[3.0, 4.0], [0.0, 0.0]])).tolist()
    [5.0, 0.0]
    """
    with np.errstate(invalid="ignore", over="ignore"):
        return np.asarray(np.sqrt(sum(part * part for part in np.moveaxis(vectors, -1, 0))))


def elementary_rotation(axis_index: int, angle: ArrayLike) -> FloatArray:
    """Return the rotation about the x, y or z axis.

    Parameters
    ----------
    axis_index : 0, 1 or 2 for x, y or z.
    angle : (...), rad, any finite size.

    Returns
    -------
    rotation : (..., 3, 3); the zeros and the one are exact.

    Source
    ------
    Craig, Introduction to Robotics, chapter 2, elementary rotations.

    Examples
    --------
    >>> elementary_rotation(2, np.pi / 2).round(12) + 0.0
    array([[ 0., -1.,  0.],
           [ 1.,  0.,  0.],
           [ 0.,  0.,  1.]])
    """
    angles = np.asarray(angle, dtype=np.float64)
    j, k = (axis_index + 1) % 3, (axis_index + 2) % 3
    cosine, sine = np.cos(angles), np.sin(angles)
    rotation = np.zeros((*angles.shape, 3, 3))
    rotation[..., axis_index, axis_index] = 1.0
    rotation[..., j, j] = cosine
    rotation[..., k, k] = cosine
    rotation[..., j, k] = -sine
    rotation[..., k, j] = sine
    return rotation


def rotation_about(axis: ArrayLike, angle: ArrayLike) -> FloatArray:
    """Return the rotation by an angle about an axis through the origin.

    Parameters
    ----------
    axis : (..., 3), direction of any length but zero, in the frame the rotation acts in.
    angle : (...), rad, any finite size; broadcast against the batch axes of ``axis``.

    Returns
    -------
    rotation : (..., 3, 3), entries within a few 1e-16.

    Raises
    ------
    NotFinite : NaN or infinity in axis or angle.
    InvalidOrientation : an axis of length zero.

    Source
    ------
    Rodrigues' formula, e.g. Siciliano et al., Robotics: Modelling, Planning and Control, 2.5;
    1 - cos is taken as 2 sin^2 of the half angle, which keeps the digits of small angles.

    Examples
    --------
    >>> rotation_about([0, 0, 5], np.pi / 2).round(12) + 0.0
    array([[ 0., -1.,  0.],
           [ 1.,  0.,  0.],
           [ 0.,  0.,  1.]])
    """
    axes = np.asarray(axis, dtype=np.float64)
    angles = np.asarray(angle, dtype=np.float64)
    if not (np.isfinite(axes).all() and np.isfinite(angles).all()):
        raise NotFinite("an axis or angle is NaN or infinite", way_out="give finite numbers")
    longest = np.abs(axes).max(axis=-1, keepdims=True)
    if (longest == 0.0).any():
        raise InvalidOrientation(
            "a rotation axis has length zero",
            value=axes.tolist(),
            way_out="give a direction with at least one component that is not 0",
        )
    scaled = axes / longest  # squares of 1e-200 or 1e200 would leave the range of doubles
    x, y, z = np.moveaxis(scaled / np.linalg.norm(scaled, axis=-1, keepdims=True), -1, 0)
    sine, versine = np.sin(angles), 2.0 * np.sin(0.5 * angles) ** 2
    rows = [
        [1.0 - versine * (y * y + z * z), versine * x * y - sine * z, versine * x * z + sine * y],
        [versine * x * y + sine * z, 1.0 - versine * (x * x + z * z), versine * y * z - sine * x],
        [versine * x * z - sine * y, versine * y * z + sine * x, 1.0 - versine * (x * x + y * y)],
    ]
    return np.stack([np.stack(row, axis=-1) for row in rows], axis=-2)


def rotation_from_quaternion(quaternion_wxyz: ArrayLike) -> FloatArray:
    """Return the rotation of a quaternion of any length but zero.

    Zero and non-finite quaternions give NaN, so that one bad row does not stop a batch.

    Parameters
    ----------
    quaternion_wxyz : (..., 4), scalar first.

    Returns
    -------
    rotation : (..., 3, 3).

    Source
    ------
    Diebel, Representing Attitude, 2006, the rotation matrix of a unit quaternion; there passive,
    here active (the transpose).

    Examples
    --------
    >>> rotation_from_quaternion([1, 1, 0, 0]).tolist()  # 90 deg about x
    [[1.0, 0.0, 0.0], [0.0, 0.0, -1.0], [0.0, 1.0, 0.0]]
    """
    quaternions = np.asarray(quaternion_wxyz, dtype=np.float64)
    with np.errstate(invalid="ignore", divide="ignore"):
        scaled = quaternions / np.abs(quaternions).max(axis=-1, keepdims=True)
        w, x, y, z = np.moveaxis(scaled, -1, 0)
        twice = 2.0 / (w * w + x * x + y * y + z * z)
        rows = [
            [1.0 - twice * (y * y + z * z), twice * (x * y - w * z), twice * (x * z + w * y)],
            [twice * (x * y + w * z), 1.0 - twice * (x * x + z * z), twice * (y * z - w * x)],
            [twice * (x * z - w * y), twice * (y * z + w * x), 1.0 - twice * (x * x + y * y)],
        ]
        return np.stack([np.stack(row, axis=-1) for row in rows], axis=-2)


def quaternion_wxyz_of(rotation: ArrayLike) -> FloatArray:
    """Return the unit quaternion of a rotation, with w >= 0.

    At a half turn (within 2e-15 rad) w is exactly 0 and the first of x, y, z that is not 0
    (within 1e-12) is positive.

    Parameters
    ----------
    rotation : (..., 3, 3), or poses (..., 4, 4), whose rotations are taken.

    Returns
    -------
    quaternion_wxyz : (..., 4), scalar first, within a few 1e-16 for an exact rotation.

    Source
    ------
    Shepperd, J. Guidance and Control 1(3), 1978: of the four quotients the one with the largest
    denominator, so that no angle loses digits.

    Examples
    --------
    >>> quaternion_wxyz_of(np.diag([-1.0, -1.0, 1.0]))  # 180 deg about z
    array([0., 0., 0., 1.])
    """
    rotations = np.asarray(rotation, dtype=np.float64)
    batch = rotations.shape[:-2]
    quaternions = np.empty((math.prod(batch), 4))
    matrices = for_kernel(rotations).reshape(len(quaternions), *rotations.shape[-2:])
    quaternions_wxyz(matrices, *QUATERNION_SIGNS, quaternions)
    return quaternions.reshape(*batch, 4)


def rotation_from_vector(rotation_vector: ArrayLike) -> FloatArray:
    """Return the rotation about a vector by its length.

    Parameters
    ----------
    rotation_vector : (..., 3), rad, any finite length; non-finite rows give NaN.

    Returns
    -------
    rotation : (..., 3, 3).

    Source
    ------
    Exponential map of so(3); Shuster, J. Astronautical Sciences 41(4), 1993, rotation vector.

    Examples
    --------
    >>> rotation_from_vector([0, 0, np.pi]).round(12).tolist()
    [[-1.0, -0.0, 0.0], [0.0, -1.0, 0.0], [0.0, 0.0, 1.0]]
    """
    vectors = np.asarray(rotation_vector, dtype=np.float64)
    with np.errstate(invalid="ignore", divide="ignore", over="ignore"):
        angle = np.linalg.norm(vectors, axis=-1, keepdims=True)
        ratio = np.where(angle < SHORT_VECTOR, 0.5, np.sin(0.5 * angle) / angle)
        quaternion = np.concatenate([np.cos(0.5 * angle), ratio * vectors], axis=-1)
        return rotation_from_quaternion(quaternion)


def rotation_vector_of(rotation: ArrayLike) -> FloatArray:
    """Return axis times angle of a rotation, with an angle of 0 to pi.

    At a half turn the first component that is not 0 is positive.

    Parameters
    ----------
    rotation : (..., 3, 3).

    Returns
    -------
    rotation_vector : (..., 3), rad; an angle of 1e-8 rad comes out within 1e-15 rad.

    Source
    ------
    Logarithm of SO(3) by the quaternion: angle = 2 atan2(|vector|, scalar); the arc cosine of the
    trace would lose half the digits of small angles.

    Examples
    --------
    >>> rotation_vector_of(elementary_rotation(0, -0.25)) + 0.0
    array([-0.25,  0.  ,  0.  ])
    """
    quaternion = quaternion_wxyz_of(rotation)
    length = np.linalg.norm(quaternion[..., 1:], axis=-1, keepdims=True)
    with np.errstate(invalid="ignore", divide="ignore"):
        ratio = 2.0 * np.arctan2(length, quaternion[..., :1]) / length
    return np.where(length < SHORT_VECTOR, 2.0, ratio) * quaternion[..., 1:] + 0.0


def angle_of(rotation: ArrayLike) -> FloatArray:
    """Return the angle of a rotation about its axis.

    Parameters
    ----------
    rotation : (..., 3, 3).

    Returns
    -------
    angle : (...), rad, 0 to pi; accurate to 1e-15 rad at both ends.

    Source
    ------
    As rotation_vector_of.

    Examples
    --------
    >>> float(angle_of(elementary_rotation(1, 1e-8)))
    1e-08
    """
    quaternion = quaternion_wxyz_of(rotation)
    length = np.linalg.norm(quaternion[..., 1:], axis=-1)
    return np.asarray(2.0 * np.arctan2(length, quaternion[..., 0]))
