"""Targets as rows of a table of doubles: ``x y z``, or ``x y z w x y z`` with a quaternion.

Left out: targets in words (reach_targets.py).
"""

from typing import Any

import numpy as np

from kinematics.table import FloatArray
from service.convert import Units
from service.errors import UnusableValue
from service.wire.reach_alike import PLACE, AlikeTargets, read_alike
from service.wire.reach_gathered import USUAL_FORM, ReadTargets

PLACES, POSES = 3, 7
"""Columns of a table of places, and of one of poses."""


def table_rows(table: FloatArray) -> list[dict[str, Any]]:
    """Return rows ``x y z``, or ``x y z w x y z`` with a quaternion, as a body has targets.

    Raises
    ------
    UnusableValue : the table has another number of columns.

    Examples
    --------
    >>> import numpy as np
    >>> table_rows(np.array([[1.0, 2.0, 3.0]]))
    [{'position': [1.0, 2.0, 3.0]}]
    """
    if table.shape[1] == PLACES:
        return [{"position": row} for row in table.tolist()]
    if table.shape[1] == POSES:
        form = "quaternion-wxyz"
        return [
            {"pose": {"position": row[:3], "orientation": {"form": form, "values": row[3:]}}}
            for row in table.tolist()
        ]
    raise UnusableValue(
        f"a table of {table.shape[1]} columns is none of targets",
        value=table.shape[1],
        way_out="send x, y, z, or x, y, z and the quaternion w, x, y, z",
    )


def table_targets(table: FloatArray, units: Units) -> ReadTargets | None:
    """Return targets ``x y z`` or ``x y z w x y z`` in which nothing is odd, else None.

    Examples
    --------
    >>> from service.convert import UNITS
    >>> table_targets(np.array([[1.0, 2.0, 3.0]]), UNITS["m-rad"]).tool_in_frame[0, :3, 3]
    array([1., 2., 3.])
    """
    columns = table.shape[1]
    if columns not in (PLACES, POSES) or not np.isfinite(table).all():
        return None
    form = USUAL_FORM if columns == POSES else PLACE
    return read_alike(AlikeTargets(form, table[:, PLACES:], table[:, :PLACES]), units)
