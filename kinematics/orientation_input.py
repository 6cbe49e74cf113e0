"""Orientations from outside: which are accepted, and which are repaired on the way in.

Left out: what the forms mean (orientation_forms); units other than radians (the edge).
"""

from kinematics.findings import Finding
from kinematics.number_checks import FloatArray, checked_numbers
from kinematics.orientation_findings import (
    no_direction,
    quaternion_normalised,
    vector_too_long,
)
from kinematics.orientation_forms import rotation_from, shape_of
from kinematics.rigidity import checked_rotation_matrix
from kinematics.rotations import lengths
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
    if form == "rotation-vector" and lengths(numbers) > LARGEST_MAGNITUDE:
        raise vector_too_long(numbers, float(lengths(numbers)))
    return rotation_from(form, numbers), ()


def _quaternion_findings(quaternion: FloatArray) -> tuple[Finding, ...]:
    norm = float(lengths(quaternion))
    if norm < QUATERNION_ZERO:
        raise no_direction(quaternion, norm)
    off = abs(norm - 1.0)
    return () if off <= QUATERNION_SILENT else (quaternion_normalised(off),)
