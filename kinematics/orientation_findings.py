"""What is to be said of an orientation: repaired on the way in, not unique on the way out, refused.

Made from numbers that are known already, so that one and many say the same. Left out: finding
those numbers (rigidity, orientation_forms, orientation_batches).
"""

import numpy as np

from kinematics.errors import InvalidOrientation, NotRigid, OutOfRange
from kinematics.findings import ANGLES_NOT_UNIQUE, INPUT_REPAIRED, Finding
from kinematics.number_checks import FloatArray
from kinematics.tolerances import LOCK_NOTICE, QUATERNION_SILENT, RIGID_REPAIRED, RIGID_SILENT


def quaternion_normalised(off: float) -> Finding:
    """Return the finding that a quaternion was normalised.

    Parameters
    ----------
    off : how far its norm was from 1.

    Examples
    --------
    >>> quaternion_normalised(0.25).text()
    'the norm of the quaternion is off 1 by 0.25, more than 1e-06; it was normalised'
    """
    return Finding(
        INPUT_REPAIRED,
        "input-repaired",
        "the norm of the quaternion is off 1 by {measure}, more than {threshold}; "
        "it was normalised",
        off,
        QUATERNION_SILENT,
    )


def matrix_replaced(size: float) -> Finding:
    """Return the finding that a matrix was replaced by the nearest rotation.

    Parameters
    ----------
    size : its defect, see rigidity.defect.

    Examples
    --------
    >>> matrix_replaced(2e-3).measure
    0.002
    """
    return Finding(
        INPUT_REPAIRED,
        "input-repaired",
        "the matrix was off a rotation by {measure} (largest entry of |R^T R - I|), more than "
        "{threshold}; the nearest rotation was taken",
        size,
        RIGID_SILENT,
    )


def angles_not_unique(
    form: str, first: float, last: float, distance: float, *, is_sum: bool
) -> Finding:
    """Return the finding that of three angles only a combination of two is determined.

    Parameters
    ----------
    form : the angles' form.
    first, last : the angles, rad.
    distance : of the middle angle from gimbal lock, rad.
    is_sum : whether the sum is determined, else the difference.

    Source
    ------
    Diebel, Representing Attitude, 2006, singularities of the Euler angle sequences.

    Examples
    --------
    >>> angles_not_unique("zyz-current", 0.5, 0.0, 0.0, is_sum=True).say[:58]
    'at gimbal lock only first + last = 0.5 rad (28.6478898 deg'
    """
    value = first + last if is_sum else first - last
    value = float(np.arctan2(np.sin(value), np.cos(value)))
    combination = "first + last" if is_sum else "first - last"
    return Finding(
        ANGLES_NOT_UNIQUE,
        "angles-not-unique",
        f"at gimbal lock only {combination} = {value:.9g} rad ({np.degrees(value):.9g} deg) of the "
        f"{form} angles is determined; the middle angle is {{measure}} from it, a notice is given "
        "within {threshold}",
        distance,
        LOCK_NOTICE,
        "rad",
    )


def no_direction(quaternion: FloatArray, norm: float) -> InvalidOrientation:
    """Return the refusal of a quaternion without a direction.

    Examples
    --------
    >>> no_direction(np.zeros(4), 0.0).say
    'the quaternion has the norm 0 and so no direction'
    """
    return InvalidOrientation(
        f"the quaternion has the norm {norm:.3g} and so no direction",
        value=quaternion.tolist(),
        way_out="give a quaternion of norm 1; no rotation is 1 for w and 0 for x, y, z",
    )


def vector_too_long(vector: FloatArray, length: float) -> OutOfRange:
    """Return the refusal of a rotation vector beyond 1e9 rad.

    Examples
    --------
    >>> vector_too_long(np.array([2e9, 0.0, 0.0]), 2e9).say
    'the rotation vector has the length 2e+09 rad, beyond 1e9 rad'
    """
    return OutOfRange(
        f"the rotation vector has the length {length:.6g} rad, beyond 1e9 rad",
        value=vector.tolist(),
        way_out="check the units; a rotation vector of at most pi says the same",
    )


def not_rigid(matrix: FloatArray, size: float, *, mirrored: bool) -> NotRigid:
    """Return the refusal of a matrix that is no rotation, or a mirrored one.

    Parameters
    ----------
    matrix : (3, 3).
    size : its defect, see rigidity.defect.
    mirrored : whether its determinant is negative.

    Examples
    --------
    >>> not_rigid(np.diag([1.0, 1.0, -1.0]), 0.0, mirrored=True).say[:22]
    'the matrix is mirrored'
    """
    if size <= RIGID_REPAIRED:
        return NotRigid(
            "the matrix is mirrored: its columns are perpendicular, but its determinant is -1",
            defect=size,
            value=matrix.tolist(),
            way_out="a frame is right-handed: check the sign and the order of the columns",
        )
    return NotRigid(
        f"the matrix is no rotation: the largest entry of |R^T R - I| is {size:.6g}, "
        f"and at most {RIGID_REPAIRED:g} is repaired"
        + ("; its determinant is negative as well (mirrored)" if mirrored else ""),
        defect=size,
        value=matrix.tolist(),
        way_out="give the entries with four decimals or more, or use another form",
    )
