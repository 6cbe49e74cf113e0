"""Many orientations from outside at once: those that can be used, those repaired, those not.

Says of each what checked_rotation and lock_finding say of one, without a Python step for each.
Left out: names of forms and single orientations (orientation_forms).
"""

from dataclasses import dataclass

import numpy as np

from kinematics.angle_triples import BoolArray, sum_is_determined
from kinematics.errors import KinematicsError
from kinematics.findings import Finding
from kinematics.many_rotations import (
    rotations_from_angles,
    rotations_from_quaternions,
    rotations_from_vectors,
)
from kinematics.number_checks import FloatArray, checked_numbers
from kinematics.orientation_findings import (
    angles_not_unique,
    matrix_replaced,
    no_direction,
    not_rigid,
    quaternion_normalised,
    vector_too_long,
)
from kinematics.orientation_forms import (
    ORDERS,
    distance_from_lock,
    shape_of,
    values_of,
)
from kinematics.rigidity import defect, is_mirrored, nearest_rotation
from kinematics.rotations import lengths
from kinematics.tolerances import (
    LARGEST_MAGNITUDE,
    LOCK_NOTICE,
    QUATERNION_SILENT,
    QUATERNION_ZERO,
    RIGID_REPAIRED,
    RIGID_SILENT,
)

_IDENTITY = {
    "matrix": np.eye(3),
    "quaternion-wxyz": np.array([1.0, 0.0, 0.0, 0.0]),
    "quaternion-xyzw": np.array([0.0, 0.0, 0.0, 1.0]),
}


@dataclass(frozen=True, slots=True)
class CheckedRotations:
    """Rotations with what was found on the way in.

    Attributes
    ----------
    form, values : as they came; angles in rad.
    rotation : (count, 3, 3); no rotation at all (the identity) where it could not be used.
    usable, repaired : (count,).
    size : (count,), what usable and repaired were judged by: the norm of a quaternion, the length
        of a rotation vector, the defect of a matrix; 0 for angle triples, and for rotation vectors
        none of which needs judging.
    """

    form: str
    values: FloatArray
    rotation: FloatArray
    usable: BoolArray
    repaired: BoolArray
    size: FloatArray

    def repair(self, row: int) -> Finding:
        """Return the finding about a row that was repaired."""
        size = float(self.size[row])
        if self.form == "matrix":
            return matrix_replaced(size)
        return quaternion_normalised(abs(size - 1.0))

    def refusal(self, row: int) -> KinematicsError:
        """Return the error of a row that is not usable; ``where`` is relative to its values."""
        values, size = self.values[row], float(self.size[row])
        try:
            checked_numbers(values, values.shape, f"an orientation in the form {self.form}")
        except KinematicsError as error:
            return error
        if self.form == "matrix":
            mirrored = size <= RIGID_REPAIRED or bool(is_mirrored(values))
            return not_rigid(values, size, mirrored=mirrored)
        if self.form == "rotation-vector":
            return vector_too_long(values, size)
        return no_direction(values, size)


@dataclass(frozen=True, slots=True)
class ToldRotations:
    """Rotations in a form.

    Attributes
    ----------
    form : one of FORMS.
    values : (count, 3), (count, 4) or (count, 3, 3); angles in rad.
    near_lock : (count,), whether the angles are not unique: within LOCK_NOTICE of gimbal lock.
    distance : (count,), from gimbal lock, rad, infinite for forms without.
    is_sum : (count,), whether near lock the sum of first and last is determined.
    """

    form: str
    values: FloatArray
    near_lock: BoolArray
    distance: FloatArray
    is_sum: BoolArray

    def lock(self, row: int) -> Finding:
        """Return the finding about a row that is near lock."""
        first, _, last = self.values[row].tolist()
        distance = float(self.distance[row])
        return angles_not_unique(self.form, first, last, distance, is_sum=bool(self.is_sum[row]))


def checked_rotations(form: str, values: FloatArray) -> CheckedRotations:
    """Return the rotations that orientations from outside describe.

    Parameters
    ----------
    form : one of FORMS.
    values : (count, 3), (count, 4) or (count, 3, 3) as the form has it; angles in rad; NaN and
        infinity are allowed, and spoil their own row only.

    Returns
    -------
    checked : usable, repaired and rotation of each row as checked_rotation has them.

    Raises
    ------
    InvalidOrientation : an unknown form, or values of another shape.

    Source
    ------
    As checked_rotation.

    Examples
    --------
    >>> checked = checked_rotations("quaternion-wxyz", np.array([[2.0, 0, 0, 0], [0.0, 0, 0, 0]]))
    >>> checked.usable.tolist(), checked.repaired.tolist()
    ([True, False], [True, False])
    >>> checked.repair(0).measure, checked.refusal(1).say
    (1.0, 'the quaternion has the norm 0 and so no direction')
    """
    usable = _within_range(form, values)
    repaired: BoolArray = np.zeros(len(values), dtype=bool)
    size = np.zeros(len(values))
    if form == "matrix":
        filled = _filled(form, values, usable)
        size = defect(filled)
        usable &= (size <= RIGID_REPAIRED) & ~is_mirrored(filled)
        repaired = usable & (size > RIGID_SILENT)
        rotation = _filled(form, filled, usable)
        if repaired.any():
            rotation = np.array(rotation)
            rotation[repaired] = nearest_rotation(rotation[repaired])
        return CheckedRotations(form, values, rotation, usable, repaired, size)
    if form not in ORDERS and not (form == "rotation-vector" and _all_short(values)):
        size = lengths(values)
        if form == "rotation-vector":
            usable &= size <= LARGEST_MAGNITUDE
        else:
            usable &= size >= QUATERNION_ZERO
            repaired = usable & (np.abs(size - 1.0) > QUATERNION_SILENT)
    rotation = _rotations(form, _filled(form, values, usable))
    return CheckedRotations(form, values, rotation, usable, repaired, size)


def told_rotations(form: str, rotation: FloatArray, *, in_place: bool = False) -> ToldRotations:
    """Return rotations in a form, and for which of them its angles are not unique.

    Parameters
    ----------
    form : one of FORMS.
    rotation : (count, 3, 3).
    in_place : whether matrices may become the values where they stand.

    Returns
    -------
    told : values as values_of has them, the rest as lock_finding has it.

    Raises
    ------
    InvalidOrientation : an unknown form.

    Source
    ------
    As values_of and lock_finding.

    Examples
    --------
    >>> told = told_rotations("zyz-current", np.eye(3)[None])
    >>> told.near_lock.tolist(), told.lock(0).measure
    ([True], 0.0)
    """
    if form == "matrix" and in_place:
        values = np.add(rotation, 0.0, out=rotation)  # never -0.0, as values_of has it
    else:
        values = values_of(form, rotation)
    distance = distance_from_lock(form, rotation)
    near_lock = distance <= LOCK_NOTICE
    is_sum = sum_is_determined(ORDERS[form], rotation) if near_lock.any() else near_lock
    return ToldRotations(form, values, near_lock, distance, is_sum)


def _rotations(form: str, values: FloatArray) -> FloatArray:
    """The rotations of values that are all good, of any form but the matrix."""
    if form in ORDERS:
        return rotations_from_angles(ORDERS[form], values)
    if form == "rotation-vector":
        return rotations_from_vectors(values)
    scalar_first = values if form == "quaternion-wxyz" else np.roll(values, 1, axis=-1)
    return rotations_from_quaternions(scalar_first)


def _within_range(form: str, values: FloatArray) -> BoolArray:
    """Which rows hold numbers of a usable size alone."""
    axes = tuple(range(-len(shape_of(form)), 0))
    # Most often there is nothing to find, and to look at all at once is much faster.
    usable: BoolArray = np.ones(len(values), dtype=bool)
    if not _all_within(values, LARGEST_MAGNITUDE):
        with np.errstate(invalid="ignore"):  # signalling NaNs
            usable &= (np.abs(values) <= LARGEST_MAGNITUDE).all(axis=axes)
    return usable


def _all_within(values: FloatArray, most: float) -> bool:
    """Whether all numbers are within ``most`` of 0, and none is NaN."""
    with np.errstate(invalid="ignore"):  # signalling NaNs
        return bool(-most <= values.min(initial=0.0) and values.max(initial=0.0) <= most)


def _all_short(vectors: FloatArray) -> bool:
    """Whether no vector can be too long: three components of half the limit make 0.87 of it."""
    return _all_within(vectors, 0.5 * LARGEST_MAGNITUDE)


def _filled(form: str, values: FloatArray, usable: BoolArray) -> FloatArray:
    if usable.all():
        return values
    filled = np.array(values)
    filled[~usable] = _IDENTITY.get(form, 0.0)
    return filled
