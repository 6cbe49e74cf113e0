"""The drive map: how the joint values a controller shows move the rows of the table.

``variable = offset + C q``; C holds directions and couplings. Offsets are the chain's business.
"""

from dataclasses import dataclass, field

import numpy as np

from kinematics.errors import InvalidCoupling, SingularDriveMap
from kinematics.table import FloatArray, Row
from kinematics.tolerances import DRIVE_MAP_SINGULAR


@dataclass(frozen=True)
class DriveMap:
    """Directions and couplings of a table's rows.

    Attributes
    ----------
    matrix : (rows, joints), C; row motions per joint value, SI.
    driven : indices of the rows that have a joint value, in row order.

    Raises
    ------
    InvalidCoupling : to the row itself, to a passive or a missing row.
    SingularDriveMap : C over the driven rows cannot be inverted.

    Examples
    --------
    A linkage holds joint 3 against the horizontal: its row turns back by joint 2.

    >>> from kinematics.table import Coupling, JointKind
    >>> upper = Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0)
    >>> fore = Row(JointKind.REVOLUTE, 0.3, 0.0, 0.0, 0.0, couplings=(Coupling(1, -1.0),))
    >>> DriveMap((upper, fore)).motions(np.array([0.2, 0.5]))
    array([0.2, 0.3])
    """

    rows: tuple[Row, ...]
    matrix: FloatArray = field(init=False, repr=False, compare=False)
    driven: tuple[int, ...] = field(init=False, repr=False, compare=False)

    def __post_init__(self) -> None:
        driven = tuple(index for index, row in enumerate(self.rows) if not row.passive)
        matrix = np.zeros((len(self.rows), len(driven)))
        for column, index in enumerate(driven):
            matrix[index, column] = self.rows[index].direction
        for index, row in enumerate(self.rows):
            for position, coupling in enumerate(row.couplings):
                column = _column_of(self.rows, driven, index, position)
                matrix[index, column] += coupling.ratio
        _refuse_singular(matrix[list(driven), :])
        object.__setattr__(self, "driven", driven)
        object.__setattr__(self, "matrix", matrix)

    @property
    def joint_count(self) -> int:
        """Number of joint values: one for each driven row."""
        return len(self.driven)

    def motions(self, joint_values: FloatArray) -> FloatArray:
        """Return C q: how far each row has moved from its offset, (..., rows) for (..., joints)."""
        moved: FloatArray = joint_values @ self.matrix.T
        return moved


def _column_of(rows: tuple[Row, ...], driven: tuple[int, ...], index: int, position: int) -> int:
    axis = rows[index].couplings[position].axis
    if axis == index + 1:
        problem = f"row {axis} is coupled to itself"
    elif not 1 <= axis <= len(rows):
        problem = f"row {index + 1} is coupled to row {axis}, which is missing"
    elif axis - 1 not in driven:
        problem = f"row {index + 1} is coupled to row {axis}, which is passive"
    else:
        return driven.index(axis - 1)
    others = [number + 1 for number in driven if number != index]
    raise InvalidCoupling(
        problem,
        where=("rows", index, "couplings", position, "axis"),
        value=axis,
        way_out=f"couple to a driven row: {', '.join(map(str, others)) or 'there is none'}",
    )


def _refuse_singular(square: FloatArray) -> None:
    if square.size == 0:
        return
    values = np.linalg.svd(square, compute_uv=False)
    if values[-1] <= DRIVE_MAP_SINGULAR * values[0]:
        raise SingularDriveMap(
            "directions and couplings leave the driven rows dependent on each other",
            where=("rows",),
            value=square.tolist(),
            way_out="check the coupling ratios: no combination of joint values may move nothing",
        )
