"""Poses as rigid 4 x 4 matrices: put together, inverted, and checked when they come from outside.

Left out: chains of poses (chain) and poses known only through others (frames).

The pose of x in y is written ``x_in_y``: ``p_in_y = x_in_y @ p_in_x``, so that names cancel in a
product, ``tool_in_base = flange_in_base @ tool_in_flange``. Metres; any leading batch axes.
"""

import numpy as np
from numpy.typing import ArrayLike

from kinematics.errors import KinematicsError, NotRigid
from kinematics.findings import Finding
from kinematics.number_checks import FloatArray, checked_numbers
from kinematics.orientation_input import checked_rotation
from kinematics.tolerances import RIGID_SILENT


def pose(rotation: ArrayLike, position: ArrayLike) -> FloatArray:
    """Return the 4 x 4 pose with this rotation and this position.

    Parameters
    ----------
    rotation : (..., 3, 3), of x in y.
    position : (..., 3), m, of the origin of x in y; batch axes are broadcast.

    Returns
    -------
    x_in_y : (..., 4, 4).

    Source
    ------
    Homogeneous transform, Craig, Introduction to Robotics, chapter 2.

    Examples
    --------
    >>> pose(np.eye(3), [1, 2, 3])[:3, 3]
    array([1., 2., 3.])
    """
    rotations = np.asarray(rotation, dtype=np.float64)
    positions = np.asarray(position, dtype=np.float64)
    batch = np.broadcast_shapes(rotations.shape[:-2], positions.shape[:-1])
    x_in_y = np.zeros((*batch, 4, 4))
    x_in_y[..., :3, :3] = rotations
    x_in_y[..., :3, 3] = positions
    x_in_y[..., 3, 3] = 1.0
    return x_in_y


def in_frame(base_in_frame: FloatArray, x_in_base: FloatArray) -> FloatArray:
    """Return poses in a frame from poses in the base.

    Parameters
    ----------
    base_in_frame : (4, 4); x_in_base : (..., 4, 4).

    Returns
    -------
    x_in_frame : (..., 4, 4).

    Examples
    --------
    >>> in_frame(pose(np.eye(3), [0, 0, 1]), pose(np.eye(3), [1, 2, 3]))[:3, 3]
    array([1., 2., 4.])
    """
    x_in_frame: FloatArray = base_in_frame @ x_in_base
    return x_in_frame


def inverse(x_in_y: ArrayLike) -> FloatArray:
    """Return the pose of y in x from the pose of x in y.

    Parameters
    ----------
    x_in_y : (..., 4, 4), rigid.

    Returns
    -------
    y_in_x : (..., 4, 4).

    Source
    ------
    Craig, Introduction to Robotics, chapter 2: the transposed rotation, and minus the position
    turned by it.

    Examples
    --------
    >>> inverse(pose(np.eye(3), [1, 2, 3]))[:3, 3]
    array([-1., -2., -3.])
    """
    poses = np.asarray(x_in_y, dtype=np.float64)
    turned_back = np.swapaxes(poses[..., :3, :3], -1, -2)
    position = -(turned_back @ poses[..., :3, 3:])[..., 0]
    return pose(turned_back, position + 0.0)


def checked_position(values: object) -> FloatArray:
    """Return a position from outside.

    Parameters
    ----------
    values : 3 numbers, m.

    Returns
    -------
    position : (3,), m.

    Raises
    ------
    KinematicsError : not 3 numbers (code unusable-value).
    NotFinite, OutOfRange : see checked_numbers.

    Source
    ------
    None needed: counts and bounds only.

    Examples
    --------
    >>> checked_position([0, 0, 0.5])
    array([0. , 0. , 0.5])
    """
    return checked_numbers(values, (3,), "a position", KinematicsError)


def checked_pose(matrix: object) -> tuple[FloatArray, tuple[Finding, ...]]:
    """Return a pose given from outside as a 4 x 4 matrix, and what was repaired.

    Parameters
    ----------
    matrix : 4 rows of 4 numbers, the position (m) in the last column.

    Returns
    -------
    x_in_y : (4, 4), its last row exactly 0 0 0 1.
    findings : code 6 where the rotation was replaced by the nearest one; else empty.

    Raises
    ------
    KinematicsError : not 4 x 4 numbers (code unusable-value).
    NotFinite, OutOfRange : see checked_numbers.
    NotRigid : the last row is not 0 0 0 1, or see checked_rotation.
        ``where`` holds row and column, or the row.

    Source
    ------
    Definition of SE(3).

    Examples
    --------
    >>> x_in_y, findings = checked_pose(np.eye(4))
    >>> findings
    ()
    """
    numbers = checked_numbers(matrix, (4, 4), "a pose as a matrix", KinematicsError)
    off = float(np.abs(numbers[3] - [0.0, 0.0, 0.0, 1.0]).max())
    if off > RIGID_SILENT:
        raise NotRigid(
            f"the last row of a pose is 0 0 0 1; this one differs by {off:.6g}",
            defect=off,
            where=(3,),
            value=numbers[3].tolist(),
            way_out="the position stands in the last column: is the matrix transposed, or scaled?",
        )
    rotation, findings = checked_rotation("matrix", numbers[:3, :3])
    return pose(rotation, numbers[:3, 3]), findings
