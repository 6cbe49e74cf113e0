"""An arm as the descent takes it: its lines, and the room that travel leaves its joint values.

Idea: all that bounds an arm is a bounded sum of joint values. A sum of one alone is a bound of that
joint, and held exactly; what is left, combined travel and the travel of rows that only couplings
move, is held as a gap. Lengths are shares of the arm's everywhere.

Source: none; bookkeeping. Not covered: working travel, which is advice.
"""

import numpy as np

from kinematics.arm import Arm
from kinematics.inverse.descent import gap_at, slopes_at
from kinematics.inverse.descent_arrays import FAR, Lines, Room, desk_for
from kinematics.inverse.screws import Screws
from kinematics.kernels.compiler import for_kernel
from kinematics.table import FloatArray
from kinematics.travel_limits import limits_of


def slopes_of(lines: Lines, room: Room, task: int, q: FloatArray) -> FloatArray:
    """Return the Jacobian (6, joints) of what counts in a task at joint values, pure numbers.

    Parameters
    ----------
    room : without bounds; q : (joints,), lengths as shares of the arm's.
    """
    rows, joints = lines.drive.shape
    desk = desk_for(rows, joints, 0)
    gap_at(lines, room, desk, task, 1.0, np.eye(4), q)
    slopes_at(lines, room, desk, task, 1.0)
    return desk.of_joints


def lines_of(screws: Screws, arm: Arm, turn: FloatArray | None = None) -> Lines:
    """Return an arm as the descent takes it; joint values of slides are shares of the length.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> arm = Arm("slide", Table(Convention.STANDARD, (Row(JointKind.PRISMATIC, 0, 0, 0, 0),)))
    >>> from kinematics.inverse.screws import screws_of
    >>> lines_of(screws_of(arm, np.eye(4)), arm).drive
    array([[1.]])
    """
    of_rows = np.where(screws.prismatic, screws.length, 1.0)
    of_joints = np.where(arm.revolute_joints, 1.0, screws.length)
    return Lines(
        for_kernel(screws.axis),
        for_kernel(screws.point),
        screws.prismatic,
        for_kernel(screws.tool_at_zero),
        for_kernel(arm.drive_map.matrix * of_joints / of_rows[:, None]),
        np.array([0.0, 0.0, 1.0]) if turn is None else for_kernel(turn),
    )


def room_of(arm: Arm, scale: FloatArray) -> Room:
    """Return the bounds of joint values over ``scale`` (joints,), and of sums of them.

    A travel of one joint bounds it, whether it is that joint's own or of a sum of it alone.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table, Travel
    >>> row = Row(JointKind.PRISMATIC, 0.0, 0.0, 0.0, 0.0, travel=Travel(0.0, 3.0))
    >>> room_of(Arm("slide", Table(Convention.STANDARD, (row,))), np.array([2.0])).upper
    array([1.5])
    """
    limits = limits_of(arm)
    kept = ~limits.working
    weights = limits.weights[kept] * scale
    least = (limits.lower - limits.constants)[kept]
    most = (limits.upper - limits.constants)[kept]
    lower, upper = np.full(arm.joint_count, -FAR), np.full(arm.joint_count, FAR)
    alone = (weights != 0.0).sum(axis=1) == 1
    for form in np.flatnonzero(alone):
        joint = int(np.argmax(weights[form] != 0.0))
        # A ratio of 1e-300 puts the ends beyond all doubles, where they bound nothing.
        with np.errstate(over="ignore"):
            ends = np.sort(np.array([least[form], most[form]]) / weights[form, joint])
        lower[joint], upper[joint] = max(lower[joint], ends[0]), min(upper[joint], ends[1])
    sums = weights[~alone]
    # Lengths of 1, so that an excess weighs about as a gap of the tool.
    size = np.linalg.norm(sums, axis=1)
    size[size == 0.0] = 1.0
    return Room(
        lower,
        upper,
        sums / size[:, None],
        least[~alone] / size,
        most[~alone] / size,
        arm.revolute_joints,
    )


def start_box(arm: Arm, room: Room) -> tuple[FloatArray, FloatArray]:
    """Return the box, (joints,) twice, that starts are spread over.

    Travel, or a whole turn, or the arm's length both ways for a slide without travel.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = tuple(Row(kind, 0.4, 0.0, 0.0, 0.0) for kind in JointKind)
    >>> arm = Arm("two", Table(Convention.STANDARD, rows))
    >>> start_box(arm, no_bounds(arm))[1].round(3)
    array([3.142, 1.   ])
    """
    half = np.where(arm.revolute_joints, np.pi, 1.0)
    lower = np.where(room.lower > -FAR, room.lower, -half)
    upper = np.where(room.upper < FAR, room.upper, half)
    # A joint with several turns starts within one of them, around the middle.
    middle, wide = (lower + upper) / 2.0, arm.revolute_joints & (upper - lower > 2.0 * np.pi)
    return np.where(wide, middle - np.pi, lower), np.where(wide, middle + np.pi, upper)


def no_bounds(arm: Arm) -> Room:
    """Return room for any joint values.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> arm = Arm("one", Table(Convention.STANDARD, (Row(JointKind.REVOLUTE, 0.4, 0, 0, 0),)))
    >>> no_bounds(arm).lower < -1e6
    array([ True])
    """
    far, none = np.full(arm.joint_count, FAR), np.empty(0)
    return Room(-far, far, np.empty((0, arm.joint_count)), none, none, arm.revolute_joints)
