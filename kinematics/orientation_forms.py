"""The 28 ways to write an orientation: their names and both directions.

Left out: the arithmetic (rotations, angle_triples), which input is accepted (orientation_input),
units other than radians (the edge).

A form is ``matrix``, ``quaternion-wxyz``, ``quaternion-xyzw``, ``rotation-vector``, or
``<sequence>-<axes>``, e.g. ``zyx-current``. The angles of a triple stand in the order of the
sequence; ``fixed`` turns are about the axes that stand still, ``current`` ones about the moving.
"""

from typing import Final

import numpy as np
from numpy.typing import ArrayLike

from kinematics.angle_triples import (
    AxisOrder,
    angles_of,
    distance_from_gimbal_lock,
    rotation_from_angles,
    sum_is_determined,
)
from kinematics.errors import InvalidOrientation
from kinematics.findings import Finding
from kinematics.form_names import way_out_of_unknown_form
from kinematics.kernels.angles import angle_triples
from kinematics.kernels.compiler import for_kernel
from kinematics.kernels.quaternions import quaternions_wxyz
from kinematics.number_checks import FloatArray
from kinematics.orientation_findings import angles_not_unique
from kinematics.rotations import (
    QUATERNION_SIGNS,
    quaternion_wxyz_of,
    rotation_from_quaternion,
    rotation_from_vector,
    rotation_vector_of,
)
from kinematics.tolerances import LOCK_NOTICE

SEQUENCES: Final = (
    *("xyx", "xyz", "xzx", "xzy", "yxy", "yxz"),
    *("yzx", "yzy", "zxy", "zxz", "zyx", "zyz"),
)
ORDERS: Final = {
    f"{sequence}-{axes}": AxisOrder(
        ("xyz".index(sequence[0]), "xyz".index(sequence[1]), "xyz".index(sequence[2])),
        about_fixed=axes == "fixed",
    )
    for sequence in SEQUENCES
    for axes in ("fixed", "current")
}
TRIPLES: Final[tuple[str, ...]] = tuple(ORDERS)
FORMS: Final[tuple[str, ...]] = (
    "matrix",
    "quaternion-wxyz",
    "quaternion-xyzw",
    "rotation-vector",
    *TRIPLES,
)


def shape_of(form: str) -> tuple[int, ...]:
    """Return the shape of the values of one orientation.

    Raises
    ------
    InvalidOrientation : an unknown form; the way out names the nearest.

    Examples
    --------
    >>> shape_of("quaternion-wxyz"), shape_of("matrix"), shape_of("zyz-fixed")
    ((4,), (3, 3), (3,))
    """
    if form not in FORMS:
        raise InvalidOrientation(
            f"there is no orientation form {str(form)[:60]!r}",
            where=("form",),
            value=form,
            way_out=way_out_of_unknown_form(str(form), FORMS),
        )
    if form == "matrix":
        return (3, 3)
    return (4,) if form.startswith("quaternion") else (3,)


def rotation_from(form: str, values: ArrayLike) -> FloatArray:
    """Return the rotation that values in a form describe, for numbers already known to be good.

    Nothing but form and shape is checked (see orientation_input): a matrix is handed through,
    quaternions are normalised, and rows without a meaning (zero quaternion, NaN) give NaN.

    Parameters
    ----------
    form : one of FORMS.
    values : (..., 3), (..., 4) or (..., 3, 3) as the form has it; angles in rad.

    Returns
    -------
    rotation : (..., 3, 3), active, entries within a few 1e-16.

    Raises
    ------
    InvalidOrientation : an unknown form, or values of another shape.

    Source
    ------
    Craig, Introduction to Robotics, chapter 2, for fixed and current turns.

    Examples
    --------
    >>> rotation_from("xyz-fixed", [0, 0, np.pi / 2]).round(12) + 0.0
    array([[ 0., -1.,  0.],
           [ 1.,  0.,  0.],
           [ 0.,  0.,  1.]])
    """
    shape = shape_of(form)
    numbers = np.asarray(values, dtype=np.float64)
    if numbers.shape[-len(shape) :] != shape:
        raise InvalidOrientation(
            f"values of {form} have the shape {numbers.shape}; it must end in {shape}",
            value=numbers.shape,
            way_out="put batch axes first and the values of one orientation last",
        )
    if form == "matrix":
        return numbers.copy()
    if form == "quaternion-wxyz":
        return rotation_from_quaternion(numbers)
    if form == "quaternion-xyzw":
        return rotation_from_quaternion(np.roll(numbers, 1, axis=-1))
    if form == "rotation-vector":
        return rotation_from_vector(numbers)
    return rotation_from_angles(ORDERS[form], numbers)


def values_of(form: str, rotation: ArrayLike) -> FloatArray:
    """Return a rotation in a form, in its one canonical range; never -0.0.

    Triples: first and last in (-pi, pi], middle in [-pi/2, pi/2] (three different axes) or [0, pi];
    within LOCK_EXACT of gimbal lock the last is 0. Quaternions: w >= 0, at a half turn the first
    component that is not 0 is positive. Rotation vectors: length 0 to pi, the same sign rule.

    Parameters
    ----------
    form : one of FORMS.
    rotation : (..., 3, 3).

    Returns
    -------
    values : (..., 3), (..., 4) or (..., 3, 3); angles in rad. rotation_from gives the same matrix
        within 1e-12 (LOCK_EXACT; elsewhere within a few 1e-16).

    Raises
    ------
    InvalidOrientation : an unknown form.

    Source
    ------
    See quaternion_wxyz_of, rotation_vector_of and angle_triples.angles_of.

    Examples
    --------
    >>> values_of("quaternion-xyzw", np.eye(3))
    array([0., 0., 0., 1.])
    """
    shape_of(form)
    if form == "matrix":
        return np.asarray(rotation, dtype=np.float64) + 0.0
    if form == "quaternion-wxyz":
        return quaternion_wxyz_of(rotation)
    if form == "quaternion-xyzw":
        return np.roll(quaternion_wxyz_of(rotation), -1, axis=-1)
    if form == "rotation-vector":
        return rotation_vector_of(rotation)
    return angles_of(ORDERS[form], rotation)


def distance_from_lock(form: str, rotation: ArrayLike) -> FloatArray:
    """Return how far a triple's middle angle is from gimbal lock; infinite for other forms.

    Parameters
    ----------
    form : one of FORMS.
    rotation : (..., 3, 3).

    Returns
    -------
    distance : (...), rad, 0 to pi/2, or +inf.

    Raises
    ------
    InvalidOrientation : an unknown form.

    Source
    ------
    See angle_triples.distance_from_gimbal_lock.

    Examples
    --------
    >>> float(distance_from_lock("zyz-current", np.eye(3)))
    0.0
    >>> float(distance_from_lock("matrix", np.eye(3)))
    inf
    """
    shape_of(form)
    if form not in ORDERS:
        return np.full(np.shape(rotation)[:-2], np.inf)
    return distance_from_gimbal_lock(ORDERS[form], rotation)


def values_and_distance(form: str, poses: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return the rotations of poses in a form, and how far from gimbal lock they are.

    Parameters
    ----------
    form : one of FORMS.
    poses : (count, 4, 4).

    Returns
    -------
    values : as ``values_of``; distance : as ``distance_from_lock``.

    Examples
    --------
    >>> values_and_distance("zyz-current", np.eye(4)[None])
    (array([[0., 0., 0.]]), array([0.]))
    """
    run = OrientationRun(form, for_kernel(poses))
    run()
    return run.values, run.from_lock


class OrientationRun:
    """The arrays of so many poses' orientations in one form and the kernel that fills them.

    Parameters
    ----------
    poses : (count, 4, 4), as kernels take them; read at each call.

    Attributes
    ----------
    values, from_lock : as ``values_and_distance`` returns them, of the last call.
    """

    def __init__(self, form: str, poses: FloatArray) -> None:
        self._form, self._poses = form, poses
        self.values = np.empty((len(poses), *shape_of(form)))
        self.from_lock = np.full(len(poses), np.inf)
        self._triple = None
        if form in ORDERS:
            self._triple = (poses, *ORDERS[form].of_kernel, self.values, self.from_lock)

    def __call__(self) -> None:
        """Write them."""
        if self._triple is not None:
            angle_triples(*self._triple)
        elif self._form == "quaternion-wxyz":
            quaternions_wxyz(self._poses, *QUATERNION_SIGNS, self.values)
        else:
            self.values[:] = values_of(self._form, self._poses[:, :3, :3])


def lock_finding(form: str, rotation: ArrayLike) -> Finding | None:
    """Return the finding that a triple's angles are not unique, or None if they are.

    Parameters
    ----------
    form : one of FORMS.
    rotation : (3, 3).

    Returns
    -------
    finding : code 5, measure the distance from gimbal lock; the sentence names the combination of
        first and last angle that stays determined, with its value in rad and in degrees.

    Raises
    ------
    InvalidOrientation : an unknown form.

    Source
    ------
    Diebel, Representing Attitude, 2006, singularities of the Euler angle sequences.

    Examples
    --------
    >>> lock_finding("zyz-current", rotation_from("zyz-current", [0.2, 0.0, 0.3])).say[:58]
    'at gimbal lock only first + last = 0.5 rad (28.6478898 deg'
    """
    distance = float(distance_from_lock(form, rotation))
    if not distance <= LOCK_NOTICE:
        return None
    first, _, last = values_of(form, rotation).tolist()
    is_sum = bool(sum_is_determined(ORDERS[form], rotation))
    return angles_not_unique(form, first, last, distance, is_sum=is_sum)
