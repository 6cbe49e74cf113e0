"""Poses between the wire and the core: one orientation form or a 4 x 4 matrix in, any form out."""

import numpy as np

from kinematics.errors import InvalidOrientation, KinematicsError
from kinematics.findings import Finding
from kinematics.number_checks import checked_numbers
from kinematics.orientation_forms import lock_finding, shape_of
from kinematics.orientation_input import checked_rotation
from kinematics.table import FloatArray
from kinematics.transforms import checked_pose, checked_position, pose
from service.convert import Units, orientation_in, orientation_out
from service.errors import MissingField, UnusableValue
from service.wire.models import Orientation, Pose

Where = tuple[str | int, ...]


def read_pose(given: Pose, units: Units, where: Where) -> tuple[FloatArray, tuple[Finding, ...]]:
    """Return the pose as (4, 4) in metres, and what was repaired on the way in.

    Raises
    ------
    MissingField, UnusableValue, KinematicsError : with ``where`` from the body's root.
    """
    if given.matrix is not None:
        if given.position is not None or given.orientation is not None:
            raise UnusableValue(
                "a pose is either a matrix or position and orientation",
                where=(*where, "matrix"),
                way_out="leave one of them out",
            )
        matrix = np.array(given.matrix, dtype=np.float64)
        matrix[:3, 3] = units.length_in(matrix[:3, 3])
        try:
            return checked_pose(matrix.tolist())
        except KinematicsError as error:
            raise error.below(*where, "matrix") from None
    if given.position is None or given.orientation is None:
        absent = "position" if given.position is None else "orientation"
        raise MissingField(
            f'"{absent}" is missing',
            where=(*where, absent),
            way_out="give position and orientation, or a matrix",
        )
    try:
        position = checked_position(units.length_in(np.array(given.position)).tolist())
    except KinematicsError as error:
        raise error.below(*where, "position") from None
    rotation, findings = read_orientation(given.orientation, units, (*where, "orientation"))
    return pose(rotation, position), findings


def read_orientation(
    given: Orientation, units: Units, where: Where
) -> tuple[FloatArray, tuple[Finding, ...]]:
    """Return the rotation (3, 3) of an orientation, and what was repaired on the way in.

    Raises
    ------
    KinematicsError : with ``where`` from the body's root.
    """
    form = checked_form(given.form, (*where, "form"))
    try:
        numbers = checked_numbers(given.values, shape_of(form), f"an orientation in {form}")
        return checked_rotation(form, orientation_in(units, form, numbers).tolist())
    except KinematicsError as error:
        raise error.below(*where, "values") from None


def pose_answer(x_in_y: FloatArray, form: str, units: Units) -> dict[str, object]:
    """Return a pose as answered, in the user's units."""
    return {
        "position": units.length_out(x_in_y[:3, 3]).tolist(),
        "orientation": {
            "form": form,
            "values": orientation_out(units, form, x_in_y[:3, :3]).tolist(),
        },
    }


def lock_findings(x_in_y: FloatArray, form: str) -> tuple[Finding, ...]:
    """Return the finding that the angles of a pose are not unique, if they are not."""
    finding = lock_finding(form, x_in_y[:3, :3])
    return () if finding is None else (finding,)


def checked_form(form: str, where: Where = ("form",)) -> str:
    """Return ``form`` if it is one of the 28.

    Raises
    ------
    InvalidOrientation : naming the nearest one.
    """
    try:
        shape_of(form)
    except InvalidOrientation as error:
        error.where = where
        raise
    return form
