"""Orientations from outside: which are accepted, and which are repaired on the way in.

Left out: what the forms mean (orientation_forms); units other than radians (the edge).
"""

import numpy as np

from kinematics.errors import InvalidOrientation, OutOfRange
from kinematics.findings import INPUT_REPAIRED, Finding
from kinematics.number_checks import FloatArray, checked_numbers
from kinematics.orientation_forms import rotation_from, shape_of
from kinematics.rigidity import checked_rotation_matrix
from kinematics.tolerances import LARGEST_MAGNITUDE, QUATERNION_SILENT, QUATERNION_ZERO


def checked_rotation(form: str, values: object) -> tuple[FloatArray, tuple[Finding, ...]]:
    """Return the rotation that one orientation from outside describes, and what was repaired.

    Parameters
    ----------
    form : one of FORMS.
    values : 3 or 4 numbers, or 3 rows of 3; angles in rad.

    Returns
    -------
    rotation : (3, 3).
    findings : code 6 where a quaternion was normalised (norm off by more than QUATERNION_SILENT) or
        a matrix replaced by the nearest rotation (defect above RIGID_SILENT); else empty.

    Raises
    ------
    InvalidOrientation : unknown form, wrong count, no number, quaternion of norm below 1e-6.
    NotFinite : NaN or infinity.
    OutOfRange : a number or the length of a rotation vector beyond 1e9.
    NotRigid : a matrix with a defect above RIGID_REPAIRED or with a negative determinant.
        ``where`` of each is relative to ``values``, except ``("form",)`` for an unknown form.

    Source
    ------
    Definition of SO(3); nearest rotation by the polar factor.

    Examples
    --------
    >>> rotation, findings = checked_rotation("quaternion-wxyz", [2, 0, 0, 0])
    >>> findings[0].text()
    'the norm of the quaternion is off 1 by 1, more than 1e-06; it was normalised'
    """
    numbers = checked_numbers(values, shape_of(form), f"an orientation in the form {form}")
    if form == "matrix":
        return checked_rotation_matrix(numbers)
    if form.startswith("quaternion"):
        return rotation_from(form, numbers), _quaternion_findings(numbers)
    if form == "rotation-vector" and np.linalg.norm(numbers) > LARGEST_MAGNITUDE:
        raise OutOfRange(
            f"the rotation vector has the length {np.linalg.norm(numbers):.6g} rad, beyond 1e9 rad",
            value=numbers.tolist(),
            way_out="check the units; a rotation vector of at most pi says the same",
        )
    return rotation_from(form, numbers), ()


def _quaternion_findings(quaternion: FloatArray) -> tuple[Finding, ...]:
    norm = float(np.linalg.norm(quaternion))
    if norm < QUATERNION_ZERO:
        raise InvalidOrientation(
            f"the quaternion has the norm {norm:.3g} and so no direction",
            value=quaternion.tolist(),
            way_out="give a quaternion of norm 1; no rotation is 1 for w and 0 for x, y, z",
        )
    if abs(norm - 1.0) <= QUATERNION_SILENT:
        return ()
    return (
        Finding(
            INPUT_REPAIRED,
            "input-repaired",
            "the norm of the quaternion is off 1 by {measure}, more than {threshold}; "
            "it was normalised",
            abs(norm - 1.0),
            QUATERNION_SILENT,
        ),
    )
