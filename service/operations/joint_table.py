"""Joint vectors that came as one table of numbers, checked and turned into SI piece by piece.

Left out: how the table was read (wire/npy.py, wire/csv_rows.py) and the work on it (many.py).
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field

import numpy as np

from kinematics.arm import Arm
from kinematics.errors import NotFinite, OutOfRange
from kinematics.table import FloatArray
from kinematics.tolerances import LARGEST_MAGNITUDE
from service.convert import Units, joint_values_in
from service.details import Detail
from service.operations.joint_rows import JointRows

Where = tuple[str | int, ...]
_FEW = 1024


@dataclass(frozen=True)
class JointTable:
    """Joint vectors in the user's units, one below the other.

    Attributes
    ----------
    values : (count, joints); NaN where ``unreadable`` says why.
    where : path to the value of a row and a joint, both from 0, as a complaint tells it.
    unreadable : rows that hold something that is no number.
    """

    arm: Arm
    units: Units
    values: FloatArray
    where: Callable[[int, int], Where]
    unreadable: Mapping[int, Detail] = field(default_factory=dict)

    @property
    def count(self) -> int:
        """Joint vectors in all."""
        return len(self.values)

    def piece(self, begin: int, end: int) -> JointRows:
        """Return vectors ``begin`` ... ``end`` in SI, with what is wrong with the others."""
        given = self.values[begin:end]
        with np.errstate(invalid="ignore"):  # signalling NaNs
            values = joint_values_in(self.arm, self.units, given)
            usable = (np.abs(values) <= LARGEST_MAGNITUDE).all(axis=1)
        if usable.all():
            return JointRows(values, np.arange(len(given)), {}, len(given))
        refused = {
            int(row): self._refused(begin + int(row), given[row], values[row])
            for row in np.flatnonzero(~usable)
        }
        return JointRows(values[usable], np.flatnonzero(usable), refused, len(given))

    def any_usable(self) -> bool:
        """Return whether at least one vector can be used, or there is none at all."""
        begins = range(0, self.count, _FEW)
        return not begins or any(len(self.piece(at, at + _FEW).values) for at in begins)

    def _refused(self, row: int, given: FloatArray, values: FloatArray) -> Detail:
        if row in self.unreadable:
            return self.unreadable[row]
        finite = np.isfinite(given)
        if not finite.all():
            joint = int(np.flatnonzero(~finite)[0])
            say, way_out = f"{given[joint]} is not a finite number", "give a number"
            code = NotFinite.code
        else:
            joint = int(np.flatnonzero(np.abs(values) > LARGEST_MAGNITUDE)[0])
            say = f"joint value {values[joint]:.6g} is beyond 1e9 metres or radians"
            code, way_out = OutOfRange.code, "check the units"
        return Detail(code, say, self.where(row, joint), "body", float(given[joint]), way_out)
