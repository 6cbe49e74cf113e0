"""Targets as rows of a table of doubles: ``x y z``, or ``x y z w x y z`` with a quaternion.

Left out: targets in words (reach_targets.py).
"""

from typing import Any

import numpy as np

from kinematics.pose_batches import poses_as_given
from kinematics.reach.targets import NONE, ORIENTATION
from kinematics.table import FloatArray
from service.convert import Units
from service.errors import UnusableValue
from service.wire.plain_relations import orientations_in
from service.wire.reach_gathered import USUAL_FORM, Left, ReadTargets

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
    count, columns = table.shape
    if columns not in (PLACES, POSES) or not np.isfinite(table).all():
        return None
    values = table[:, PLACES:] if columns == POSES else np.tile([1.0, 0.0, 0.0, 0.0], (count, 1))
    given = orientations_in(USUAL_FORM, values, table[:, :PLACES], units)
    poses = None if given is None else poses_as_given(*given)
    if poses is None:
        return None
    left = Left(NONE if columns == POSES else ORIENTATION)
    return ReadTargets(
        names=[None] * count,
        places=np.arange(count),
        tool_in_frame=poses,
        freedom=np.full(count, left.freedom),
        cone=np.full(count, left.cone),
        position_tolerance=np.full(count, left.position_tolerance),
        angle_tolerance=np.full(count, left.angle_tolerance),
        forms=[USUAL_FORM] * count,
        repaired={},
        approaches={},
        refused={},
    )
