"""Every way the numbers on a screen can mean an orientation: which number is which, and its sign.

Left out: what the readings are held against (orientation_guesses), what they turn the tool by
(screen_rotations) and their words (reading_words).

Two readings that give the same rotation for every input are one: turns about fixed axes are the
same turns about current axes in reverse, and the tool seen from the base is the base seen from the
tool with all turns undone. Only what is left, the maps, is counted: three numbers leave 12
sequences x 6 orders x 8 signs as turns and 6 x 8 as a rotation vector, in each unit; four leave
24 x 8 as a quaternion and 24 x 8 as axis and angle; nine leave 2 x 4 as a matrix.
"""

from collections.abc import Iterator
from dataclasses import dataclass
from functools import cache
from itertools import product

import numpy as np
from numpy.typing import NDArray

from kinematics.number_checks import FloatArray
from kinematics.orientation_forms import SEQUENCES
from kinematics.rigidity import defect
from kinematics.screen_rotations import MIRRORED, PLACES, QUATERNIONS, SIGNS, turn_maps
from kinematics.tolerances import LOCK_AVOIDED, SHOWN_LENGTH, SHOWN_TURN

BoolArray = NDArray[np.bool_]

UNITS_OF_SCREENS = {"deg": np.pi / 180.0, "rad": 1.0, "half-turns": np.pi}
"""Angle units a screen may count in, in radians; the usual one first."""

AXIS_ANGLE = "axis-angle"
"""A screen's fourth number beside an axis; not among the 28 forms, since no request takes it."""


@dataclass(frozen=True, slots=True)
class Reading:
    """One way to read the numbers of a screen.

    The i-th value of ``form`` is ``signs[i] * shown[order[i] - 1]`` in ``unit``; with ``inverse``
    the values say the base as seen from the tool, else the tool as seen from the base.

    Attributes
    ----------
    form : one of the 28 forms, or axis-angle (values x, y, z of the axis, then the angle).
    order : the place on the screen, from 1, of each value of the form; a matrix row by row.
    signs : 1 or -1 for each value of the form.
    unit : a key of UNITS_OF_SCREENS; None where no value is an angle.
    inverse : whether the values say the inverse.
    """

    form: str
    order: tuple[int, ...]
    signs: tuple[int, ...]
    unit: str | None
    inverse: bool = False


@dataclass(frozen=True, slots=True)
class Family:
    """All maps of one kind in one unit.

    Attributes
    ----------
    kind : turns, rotation-vector, quaternion, axis-angle or matrix.
    unit : as of Reading.
    count : how many numbers the screen shows.
    bounded : whether angles above two turns rule the unit out.
    """

    kind: str
    unit: str | None
    count: int
    bounded: bool = True

    def readings(self) -> tuple[tuple[Reading, ...], ...]:
        """Return for each map all readings that are the same, in no order of merit."""
        return _readings(self)

    def quaternions(self, shown: FloatArray) -> FloatArray:
        """Return what each map makes of each readout.

        Parameters
        ----------
        shown : (readouts, count), as on the screen, finite.

        Returns
        -------
        quaternion_wxyz : (maps, readouts, 4), length 1, either sign; the tool in the base.

        Source
        ------
        Diebel, Representing Attitude, 2006: unit quaternions of turns and of axis and angle.

        Examples
        --------
        >>> family = Family("rotation-vector", "half-turns", 3)
        >>> family.quaternions(np.array([[0.0, 0.0, 1.0]]))[0].round(12).tolist()
        [[0.0, 0.0, 0.0, 1.0]]
        """
        factor = UNITS_OF_SCREENS[self.unit] if self.unit else 1.0
        return QUATERNIONS[self.kind](shown, factor)

    def possible(self, shown: FloatArray) -> BoolArray:
        """Return for each map and readout whether a screen of this kind could show it at all.

        No angle is larger than two turns; a quaternion and an axis have the length 1, and the
        rows of a matrix stand square, but for the digits a screen leaves out; an axis of 0 goes
        with an angle of 0.

        Parameters
        ----------
        shown : (readouts, count).

        Returns
        -------
        possible : (maps, readouts).
        """
        most = np.inf
        if self.unit and self.bounded:
            most = SHOWN_TURN / UNITS_OF_SCREENS[self.unit]
        if self.kind == AXIS_ANGLE:
            angle, axis = shown.T[PLACES[4][:, 0]], shown.T[PLACES[4][:, 1:]]
            lengths = np.linalg.norm(axis, axis=1)
            at_rest = (lengths == 0.0) & (angle == 0.0)
            fits = ((np.abs(lengths - 1.0) <= SHOWN_LENGTH) | at_rest) & (np.abs(angle) <= most)
            return np.repeat(fits, len(SIGNS), axis=0)
        if self.kind == "matrix":
            matrices = shown.reshape(-1, 3, 3)
            fits = (defect(matrices) <= SHOWN_LENGTH) & (np.linalg.det(matrices) > 0.0)
        elif self.kind == "quaternion":
            fits = np.abs(np.linalg.norm(shown, axis=-1) - 1.0) <= SHOWN_LENGTH
        else:
            fits = np.abs(shown).max(axis=-1) <= most
        return np.broadcast_to(fits, (len(self.readings()), len(shown)))

    def far_from_lock(self, shown: FloatArray) -> BoolArray:
        """Return for each map and readout whether its screen shows these numbers and no others.

        Near gimbal lock, and near a half turn of a vector or an axis, other numbers say nearly the
        same and a screen may show those.

        Parameters
        ----------
        shown : (readouts, count).

        Returns
        -------
        far : (maps, readouts).
        """
        angles = np.abs(shown) * (UNITS_OF_SCREENS[self.unit] if self.unit else 1.0)
        maps = len(self.readings())
        if self.kind == "turns":
            axes, places, _ = turn_maps()
            middle = angles.T[places[:, 1]]
            first_is_last = (axes[:, 0] == axes[:, 2])[:, None]
            off = np.where(first_is_last, np.minimum(middle, np.pi - middle), np.pi / 2 - middle)
            return np.asarray((off >= LOCK_AVOIDED) & (angles.max(axis=-1) <= np.pi))
        if self.kind == "rotation-vector":
            far = np.linalg.norm(angles, axis=-1) <= np.pi - LOCK_AVOIDED
            return np.broadcast_to(far, (maps, len(shown)))
        if self.kind == AXIS_ANGLE:
            angle = np.repeat(angles.T[PLACES[4][:, 0]], len(SIGNS), axis=0)
            return np.asarray(np.minimum(angle, np.pi - angle) >= LOCK_AVOIDED)
        return np.ones((maps, len(shown)), dtype=np.bool_)


@dataclass(frozen=True, slots=True)
class Map:
    """One map of a family, by its place in it."""

    family: Family
    place: int

    def quaternions(self, shown: FloatArray) -> FloatArray:
        """Return the tool in the base for readouts (readouts, count): (readouts, 4), w x y z."""
        return np.asarray(self.family.quaternions(shown)[self.place])


def families_of(count: int, unit: str | None = None) -> tuple[Family, ...]:
    """Return the families of a screen with so many numbers, in one unit or in all.

    Examples
    --------
    >>> [(family.kind, family.unit) for family in families_of(4, "deg")]
    [('quaternion', None), ('axis-angle', 'deg')]
    """
    units = (unit,) if unit else tuple(UNITS_OF_SCREENS)
    kinds = {3: ("turns", "rotation-vector"), 4: (AXIS_ANGLE,)}.get(count, ())
    of_angles = (Family(kind, each, count, unit is None) for each in units for kind in kinds)
    others = {4: ("quaternion",), 9: ("matrix",)}.get(count, ())
    return (*(Family(kind, None, count) for kind in others), *of_angles)


# --- which readings are the same map -------------------------------------------------------


@cache
def _readings(family: Family) -> tuple[tuple[Reading, ...], ...]:
    if family.kind == "turns":
        choices = product(SEQUENCES, PLACES[3].tolist(), SIGNS.tolist())
        return tuple(_of_one_turn(family.unit, *choice) for choice in choices)
    if family.kind == "matrix":
        return tuple(_matrix_readings())
    places = PLACES[family.count].tolist()
    return tuple(
        _of_one_vector(family, place, sign) for place, sign in product(places, SIGNS.tolist())
    )


def _of_one_turn(
    unit: str | None, sequence: str, places: list[int], signs: list[int]
) -> tuple[Reading, ...]:
    order, kept = tuple(place + 1 for place in places), tuple(signs)
    undone = tuple(-sign for sign in signs)
    back = sequence[::-1]
    return (
        Reading(f"{sequence}-current", order, kept, unit),
        Reading(f"{back}-fixed", order[::-1], kept[::-1], unit),
        Reading(f"{back}-current", order[::-1], undone[::-1], unit, inverse=True),
        Reading(f"{sequence}-fixed", order, undone, unit, inverse=True),
    )


def _of_one_vector(family: Family, places: list[int], signs: list[int]) -> tuple[Reading, ...]:
    scalar, vector = places[:-3], tuple(place + 1 for place in places[-3:])
    kept, undone = tuple(signs), tuple(-sign for sign in signs)
    if family.kind == "rotation-vector":
        return (
            Reading("rotation-vector", vector, kept, family.unit),
            Reading("rotation-vector", vector, undone, family.unit, inverse=True),
        )
    first, one = scalar[0] + 1, (1,)
    if family.kind == AXIS_ANGLE:
        return (
            Reading(AXIS_ANGLE, (*vector, first), kept + one, family.unit),
            Reading(AXIS_ANGLE, (*vector, first), undone + one, family.unit, inverse=True),
        )
    return (
        Reading("quaternion-wxyz", (first, *vector), one + kept, None),
        Reading("quaternion-xyzw", (*vector, first), kept + one, None),
        Reading("quaternion-wxyz", (first, *vector), one + undone, None, inverse=True),
        Reading("quaternion-xyzw", (*vector, first), undone + one, None, inverse=True),
    )


def _matrix_readings() -> Iterator[tuple[Reading, ...]]:
    by_rows, by_columns = np.arange(1, 10), np.arange(1, 10).reshape(3, 3).T.ravel()
    for order, other in ((by_rows, by_columns), (by_columns, by_rows)):
        for signs in MIRRORED:
            entries = tuple(np.outer(signs, signs).ravel().tolist())
            yield (
                Reading("matrix", tuple(order.tolist()), entries, None),
                Reading("matrix", tuple(other.tolist()), entries, None, inverse=True),
            )
