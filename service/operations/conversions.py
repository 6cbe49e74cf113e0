"""Many orientations in another form: numbers, lines and items, a piece at a time.

Left out: how they were read (bulk/conversions.py) and how answers are printed (wire).
"""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from kinematics.angle_triples import BoolArray
from kinematics.findings import ANGLES_NOT_UNIQUE, FINE, INPUT_REPAIRED
from kinematics.orientation_batches import (
    CheckedRotations,
    ToldRotations,
    checked_rotations,
    told_rotations,
)
from kinematics.orientation_forms import shape_of
from kinematics.table import FloatArray
from service.convert import Units, finding_out, orientation_in, values_out
from service.details import Detail
from service.errors import TooLarge
from service.problems import KINDS

MOST_ORIENTATIONS = 200_000
_FEW = 1024
Where = tuple[str | int, ...]


def refuse_too_many(count: int) -> None:
    """Refuse more than MOST_ORIENTATIONS.

    Raises
    ------
    TooLarge : with status 422.
    """
    if count > MOST_ORIENTATIONS:
        raise TooLarge(
            f"more than {MOST_ORIENTATIONS} orientations",
            where=("values",),
            value=count,
            way_out="send them in several requests",
            status=422,
        )


@dataclass(frozen=True)
class Piece:
    """Some orientations in the form asked for.

    Attributes
    ----------
    values : (count, numbers), in the user's units; NaN where refused.
    checked, told : what was found on the way in and on the way out.
    """

    values: FloatArray
    checked: CheckedRotations
    told: ToldRotations

    @property
    def refused(self) -> int:
        """How many cannot be used."""
        return int(np.count_nonzero(~self.checked.usable))

    @property
    def applying(self) -> dict[int, BoolArray]:
        """For each code that is no refusal, where it applies, the lowest first."""
        return {
            ANGLES_NOT_UNIQUE: self.told.near_lock & self.checked.usable,
            INPUT_REPAIRED: self.checked.repaired,
        }


@dataclass(frozen=True)
class Conversions:
    """Orientations as they came, and the form they are wanted in.

    Attributes
    ----------
    values : (count, numbers) in the user's units, a matrix by rows; NaN where ``unreadable``.
    where : path to a row and one of its numbers, both from 0, as a complaint tells it.
    unreadable : rows that hold something that is no number, or not as many.
    names : one for each, if there are any; they go back beside the answer.
    """

    form: str
    to: str
    units: Units
    values: FloatArray
    where: Callable[[int, Where], Where]
    unreadable: Mapping[int, Detail] = field(default_factory=dict)
    names: Sequence[str] | None = None

    @property
    def count(self) -> int:
        """Orientations in all."""
        return len(self.values)

    def piece(self, begin: int, end: int) -> Piece:
        """Return orientations ``begin`` ... ``end``."""
        checked = self._checked(begin, end)
        # Only matrices stand where they came, in the body of the request.
        told = told_rotations(self.to, checked.rotation, in_place=self.form != "matrix")
        values = values_out(self.units, self.to, told.values).reshape(len(told.values), -1)
        if not checked.usable.all():
            values = np.where(checked.usable[:, None], values, np.nan)
        return Piece(values, checked, told)

    def codes(self, begin: int, piece: Piece) -> NDArray[np.int64]:
        """Return the code of each orientation of a piece, of several the highest."""
        codes = np.full(len(piece.values), FINE, dtype=np.int64)
        for code, applies in piece.applying.items():
            codes[applies] = code
        for place in np.flatnonzero(~piece.checked.usable).tolist():
            codes[place] = KINDS[self._refusal(begin + place, piece.checked, place).code].number
        return codes

    def more(self, begin: int, piece: Piece) -> dict[int, dict[str, object]]:
        """Return what items say beside ``ok`` and ``values``, of those that are not just fine."""
        applying = piece.applying.values()
        special = np.logical_or.reduce([*applying, ~piece.checked.usable])
        return {
            place: self._more(begin + place, piece, place)
            for place in np.flatnonzero(special).tolist()
        }

    def any_usable(self) -> bool:
        """Return whether at least one can be used, or there is none at all."""
        begins = range(0, self.count, _FEW)
        return not begins or any(self._checked(at, at + _FEW).usable.any() for at in begins)

    def refusals(self, most: int) -> list[Detail]:
        """Return why the first of them cannot be used, where none can."""
        checked = self._checked(0, most)
        return [self._refusal(row, checked, row) for row in range(len(checked.usable))]

    def _checked(self, begin: int, end: int) -> CheckedRotations:
        given = self.values[begin:end]
        with np.errstate(invalid="ignore"):  # signalling NaNs
            in_si = orientation_in(self.units, self.form, given)
        return checked_rotations(self.form, in_si.reshape(len(given), *shape_of(self.form)))

    def _more(self, row: int, piece: Piece, place: int) -> dict[str, object]:
        checked, told = piece.checked, piece.told
        if checked.usable[place]:
            findings = [checked.repair(place)] if checked.repaired[place] else []
            findings += [told.lock(place)] if told.near_lock[place] else []
            return {
                "code": max(finding.code for finding in findings),
                "findings": [finding_out(self.units, finding) for finding in findings],
            }
        detail = self._refusal(row, checked, place)
        return {
            "code": KINDS[detail.code].number,
            "findings": [],
            "problem": detail.problem_of_item(),
        }

    def _refusal(self, row: int, checked: CheckedRotations, place: int) -> Detail:
        if row in self.unreadable:
            return self.unreadable[row]
        error = checked.refusal(place)
        given = self.values[row].reshape(shape_of(self.form))
        value = (given[error.where] if error.where else given).tolist()
        at = self.where(row, error.where)
        return Detail(error.code, error.say, at, "body", value, error.way_out)
