"""The values that a joint to spare is held at: in small steps through its travel, or once around.

Idea: what a row can move by follows from the joints that drive it; a turn repeats after a whole
one, so no more than that is tried. A slide must have an end: without a travel the stretch along
which it keeps the tool in place has none either, and such an arm is refused with the row to mend.

Source: none. Not covered: rows that only couplings move.
"""

import numpy as np

from kinematics.arm import Arm
from kinematics.errors import KinematicsError
from kinematics.inverse.descent_arms import room_of
from kinematics.inverse.descent_arrays import FAR
from kinematics.inverse.tolerances import HELD_SHARES, HELD_STEP
from kinematics.table import FloatArray


def held_values(arm: Arm, row: int) -> FloatArray:
    """Return the motions of a row, rad or m, that it is held at, ascending, both ends among them.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table, Travel
    >>> row = Row(JointKind.REVOLUTE, 0.3, 0.0, 0.0, 0.0, travel=Travel(-1.0, 1.0))
    >>> values = held_values(Arm("one", Table(Convention.STANDARD, (row,))), 0)
    >>> len(values), values[[0, -1]].tolist()
    (59, [-1.0, 1.0])
    """
    low, high = motions_within(arm, row)
    turns = arm.table.rows[row].is_revolute
    steps = int(np.ceil((high - low) / HELD_STEP)) if turns else HELD_SHARES
    return np.linspace(low, high, max(steps, 2) + 1)


def motions_within(arm: Arm, row: int) -> tuple[float, float]:
    """Return the least and the largest motion of a driven row, rad or m; a turn at most.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table, Travel
    >>> row = Row(JointKind.REVOLUTE, 0.3, 0.0, 0.0, 0.0, direction=-1, travel=Travel(-1.0, 2.0))
    >>> motions_within(Arm("one", Table(Convention.STANDARD, (row,))), 0)
    (-2.0, 1.0)
    """
    room = room_of(arm, np.ones(arm.joint_count))
    ratios = arm.drive_map.matrix[row]
    ends = np.sort(np.stack([ratios * room.lower, ratios * room.upper]), axis=0)
    low, high = ends.sum(axis=1).tolist()
    if arm.table.rows[row].is_revolute and high - low > 2.0 * np.pi:
        middle = 0.5 * (low + high)
        low, high = middle - np.pi, middle + np.pi
    return low, high


def refuse_unbounded_slides(arm: Arm) -> None:
    """Refuse an arm with joints to spare, of which a slide has no travel.

    Raises
    ------
    KinematicsError : it says which.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> slide = Row(JointKind.PRISMATIC, 0.0, 0.0, 0.0, 0.0)
    >>> refuse_unbounded_slides(Arm("slide", Table(Convention.STANDARD, (slide,))))
    Traceback (most recent call last):
    kinematics.errors.KinematicsError: joint 1 slides without a travel, ...
    """
    room = room_of(arm, np.ones(arm.joint_count))
    for joint in np.flatnonzero(~arm.revolute_joints).tolist():
        if room.lower[joint] <= -FAR or room.upper[joint] >= FAR:
            row = arm.drive_map.driven[joint]
            raise KinematicsError(
                f"joint {joint + 1} slides without a travel, and the arm has joints to spare: the "
                "stretch along which it can keep the tool where it is would have no end",
                where=("rows", row, "travel"),
                value=None,
                way_out=f"give row {row + 1} the travel it has",
            )
