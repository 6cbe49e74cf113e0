"""Joint vectors of a request: as an array where all can be used, else one refusal for each bad one.

One bad vector never fails the others; a request in which none can be used is refused.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from itertools import chain

import numpy as np
from numpy.typing import NDArray

from kinematics.arm import Arm
from kinematics.chain import checked_joint_values, joints_in_words
from kinematics.errors import KinematicsError, NotFinite, OutOfRange, WrongJointCount
from kinematics.table import FloatArray
from kinematics.tolerances import LARGEST_MAGNITUDE
from service.convert import Units, joint_row_in, joint_values_in
from service.details import Detail, Location, as_given
from service.errors import ServiceError, TooLarge, UnusableValue

MOST_VECTORS = 200_000
MOST_VECTORS_WITH_SINGULARITY = 20_000
_NUMBERS = {float, int}


@dataclass(frozen=True)
class JointRows:
    """The joint vectors of a request.

    Attributes
    ----------
    values : (usable, joints), SI.
    places : index of each usable vector in the request.
    refused : what is wrong with each of the others, by index.
    count : of all.
    """

    values: FloatArray
    places: NDArray[np.intp]
    refused: dict[int, Detail]
    count: int

    @classmethod
    def of_one(cls, values: list[float]) -> "JointRows":
        """Return the one usable vector of a request for one, in SI."""
        return cls(np.array([values], dtype=np.float64), np.zeros(1, dtype=np.intp), {}, 1)

    def piece(self, begin: int, end: int) -> "JointRows":
        """Return vectors ``begin`` ... ``end`` of the request, counted from ``begin``."""
        if not self.refused:
            end = min(end, self.count)
            return JointRows(self.values[begin:end], np.arange(end - begin), {}, end - begin)
        first, last = self.usable_within(begin, end)
        refused = {
            index - begin: self.refused[index]
            for index in range(begin, end)
            if index in self.refused
        }
        places = self.places[first:last] - begin
        return JointRows(self.values[first:last], places, refused, len(places) + len(refused))

    def usable_within(self, begin: int, end: int) -> tuple[int, int]:
        """Return where in ``values`` the usable ones of vectors ``begin`` ... ``end`` stand."""
        first, last = np.searchsorted(self.places, (begin, end))
        return int(first), int(last)


def refuse_too_many(count: int, *, singularity: bool) -> None:
    """Refuse more joint vectors than one answer holds.

    Raises
    ------
    TooLarge
    """
    most = MOST_VECTORS_WITH_SINGULARITY if singularity else MOST_VECTORS
    if count > most:
        raise TooLarge(
            f"{count} joint vectors in one request",
            where=("joints",),
            value=count,
            way_out=f"send at most {most} at a time"
            + (', or ask with "singularity": false' if singularity else ""),
            status=422,
        )


def read_joint_rows(
    arm: Arm, units: Units, rows: Sequence[object], *, singularity: bool
) -> JointRows:
    """Return the joint vectors of a request in SI.

    Raises
    ------
    TooLarge : more vectors than one answer holds.
    ServiceError : none of the vectors can be used; it lists what is wrong with each.
    """
    refuse_too_many(len(rows), singularity=singularity)
    if len(rows) == 1 and (alone := _of_good_numbers(arm, units, rows[0])) is not None:
        return JointRows.of_one(alone)
    together = _all_at_once(arm, units, rows)
    if together is not None:
        return JointRows(together, np.arange(len(rows)), {}, len(rows))
    if all(isinstance(row, int | float) for row in rows):
        raise UnusableValue(
            "joints is a list of joint vectors, and this is one vector",
            where=("joints",),
            value=list(rows),
            way_out="write [[...]], one list for each posture",
        )
    usable: dict[int, FloatArray] = {}
    refused: dict[int, Detail] = {}
    for index, row in enumerate(rows):
        try:
            usable[index] = _one(arm, units, row)
        except KinematicsError as error:
            where = ("joints", index, *error.where)
            detail = Detail(error.code, error.say, where, "body", error.value, error.way_out)
            refused[index] = as_given(detail, {"joints": rows})
    if refused and not usable:
        first = next(iter(refused.values()))
        raise ServiceError(first.say, errors=list(refused.values()), status=422)
    values = np.array(list(usable.values())).reshape(len(usable), arm.joint_count)
    return JointRows(values, np.array(list(usable), dtype=np.intp), refused, len(rows))


def read_joint_row(arm: Arm, units: Units, values: list[float]) -> list[float]:
    """Return one joint vector in SI, as plain numbers.

    Raises
    ------
    ServiceError : it cannot be used.
    """
    row = _of_good_numbers(arm, units, values)
    if row is None:
        read_joint_rows(arm, units, [values], singularity=True)
        raise AssertionError("a joint vector is good alone and bad among others")
    return row


def read_joint_row_at(
    arm: Arm,
    units: Units,
    given: Sequence[object],
    where: tuple[str | int, ...],
    location: Location = "body",
) -> FloatArray:
    """Return one joint vector that stands at ``where`` in a request, (joints,) in SI.

    Raises
    ------
    ServiceError : it cannot be used; ``where`` leads to the value.
    """
    try:
        return np.array(read_joint_row(arm, units, list(given)))  # type: ignore[arg-type]
    except ServiceError as error:
        error.errors = tuple(
            replace(detail, where=(*where, *detail.where[2:]), location=location)
            for detail in error.errors
        )
        raise


def _of_good_numbers(arm: Arm, units: Units, row: object) -> list[float] | None:
    if type(row) is not list or len(row) != arm.joint_count or not set(map(type, row)) <= _NUMBERS:
        return None
    try:
        values = joint_row_in(arm, units, row)
    except OverflowError:
        return None
    return values if all(abs(value) <= LARGEST_MAGNITUDE for value in values) else None


def told_joints(arm: Arm, units: Units) -> str:
    """Return how many joint values the arm takes and what each of them is, in the user's units."""
    return joints_in_words(arm, length=units.length, angle=units.angle)


def read_vectors(
    name: str,
    rows: Sequence[object] | None,
    width: int,
    rows_of_joints: JointRows,
    in_si: Callable[[FloatArray], FloatArray],
) -> FloatArray | None:
    """Return speeds, twists or loads (usable, width) in SI, one for each joint vector.

    Raises
    ------
    UnusableValue : another count than that of the joint vectors.
    KinematicsError : a row of another width, or an entry that is no finite number.
    OutOfRange : an entry beyond 1e9 SI units.
    """
    if rows is None:
        return None
    if len(rows) != rows_of_joints.count:
        raise UnusableValue(
            f"{len(rows)} {name} for {rows_of_joints.count} joint vectors",
            where=(name,),
            value=len(rows),
            way_out=f"give one of {name} for each of joints",
        )
    values = np.empty((len(rows), width))
    for index, row in enumerate(rows):
        try:
            values[index] = _numbers(row, width, f"one of {name} takes {width} numbers")
        except KinematicsError as error:
            raise error.below(name, index) from None
    values = in_si(values)
    beyond = np.argwhere(np.abs(values) > LARGEST_MAGNITUDE)
    if beyond.size:
        index, position = beyond[0].tolist()
        raise OutOfRange(
            f"one of {name} is beyond 1e9 in SI units",
            where=(name, index, position),
            value=float(values[index, position]),
            way_out="check the units",
        )
    return values[rows_of_joints.places]


def _all_at_once(arm: Arm, units: Units, rows: Sequence[object]) -> FloatArray | None:
    """Return the vectors if a look at types and shape finds nothing to refuse."""
    if not all(type(row) is list and len(row) == arm.joint_count for row in rows):
        return None
    # numpy would take text and booleans for numbers: look at the types first.
    if not set(map(type, chain.from_iterable(rows))) <= _NUMBERS:  # type: ignore[arg-type]
        return None
    try:
        values = np.array(rows, dtype=np.float64).reshape(len(rows), arm.joint_count)
        return checked_joint_values(arm, joint_values_in(arm, units, values))
    except (KinematicsError, OverflowError):
        return None


def _one(arm: Arm, units: Units, row: object) -> FloatArray:
    if not isinstance(row, list):
        raise KinematicsError(
            "a joint vector is a list of numbers",
            value=row,
            way_out=f"give a list of {told_joints(arm, units)}",
        )
    if len(row) != arm.joint_count:
        raise WrongJointCount(
            f"{len(row)} joint values for an arm of {arm.joint_count} joints",
            value=len(row),
            way_out=f"give {told_joints(arm, units)}",
        )
    return checked_joint_values(
        arm, joint_values_in(arm, units, _numbers(row, arm.joint_count, "a joint vector"))
    )


def _numbers(row: object, width: int, what: str) -> FloatArray:
    if not isinstance(row, list) or len(row) != width:
        raise KinematicsError(what, value=row, way_out=f"give a list of {width} numbers")
    for position, entry in enumerate(row):
        if type(entry) not in (float, int):
            raise KinematicsError(
                "this is not a number",
                where=(position,),
                value=entry,
                way_out="give a number, without quotes",
            )
    numbers = np.array([_as_float(entry) for entry in row])
    for position, number in enumerate(numbers):
        if not np.isfinite(number):
            raise NotFinite(
                f"{number} is not a finite number",
                where=(position,),
                value=row[position],
                way_out="give a number",
            )
    return numbers


def _as_float(entry: float) -> float:
    try:
        return float(entry)
    except OverflowError:
        return float("inf")
