"""Where the axes of an arm's wrist meet, as seen from its flange.

Idea: data sheets draw the envelope of the wrist centre, since the tool is the customer's. It stands
still in the flange, because the last axis goes through it, and so it is a point like any other.
Six and more joints have three axes in the wrist, fewer have two.

Source: ISO 9787 (wrist reference point). Not covered: wrists whose axes pass each other.
"""

import numpy as np

from kinematics.arm import Arm
from kinematics.chain import walk
from kinematics.envelope.tolerances import AXES_MEET
from kinematics.errors import KinematicsError
from kinematics.inverse.geometry import meeting_point
from kinematics.jacobian import characteristic_length
from kinematics.number_checks import FloatArray
from kinematics.transforms import inverse


def wrist_in_flange(arm: Arm) -> FloatArray:
    """Return the pose (4, 4) in the flange of a point where the last axes meet.

    Raises
    ------
    KinematicsError : the arm has no such point; the error says why.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> half = np.pi / 2
    >>> sides = ((0, 1, 0.4), (0.4, 0, 0), (0, 1, 0), (0, -1, 0.4), (0, 1, 0), (0, 0, 0.1))
    >>> rows = [Row(JointKind.REVOLUTE, a, turns * half, d, 0.0) for a, turns, d in sides]
    >>> wrist_in_flange(Arm("six", Table(Convention.STANDARD, tuple(rows))))[:3, 3].round(12) + 0.0
    array([ 0. ,  0. , -0.1])
    """
    rows = arm.table.rows
    count = 3 if arm.joint_count >= 6 else 2
    first = len(rows) - count
    named = _named(range(first + 1, len(rows) + 1))
    if first < 1:
        raise _none(f"{len(rows)} rows leave no wrist beside axis 1")
    if not all(row.is_revolute for row in rows[first:]):
        raise _none(f"of rows {named} one slides")
    walked = walk(arm, np.zeros(arm.joint_count))
    axes, points = walked.axis_direction[first:], walked.axis_point[first:]
    turns = np.linalg.norm(np.cross(axes[:-1], axes[1:]), axis=1)
    if turns.min() <= AXES_MEET:
        raise _none(f"of axes {named} two are parallel")
    centre = meeting_point(axes, points)
    arms = centre - points
    off = np.linalg.norm(arms - (arms * axes).sum(axis=1)[:, None] * axes, axis=1).max()
    if off > AXES_MEET * characteristic_length(arm, np.eye(4)):
        raise _none(f"axes {named} do not meet in a point: the best one is {off * 1e3:.4g} mm off")
    pose = np.eye(4)
    pose[:3, 3] = (inverse(walked.flange_in_base) @ np.append(centre, 1.0))[:3]
    return pose


def _named(numbers: range) -> str:
    *others, last = map(str, numbers)
    return f"{', '.join(others)} and {last}"


def _none(why: str) -> KinematicsError:
    return KinematicsError(
        f"the arm has no wrist centre: {why}",
        where=("point",),
        value="wrist",
        way_out="ask for the tool point",
    )
