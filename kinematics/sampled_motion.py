"""Joint motion as samples of it tell: rates, postures in between, and what no drive could do.

Idea: between two samples close in time each joint moves evenly, so that a posture between them is
their weighted mean and a rate the slope of a line through them. One sample at a time, in plain
numbers: batches of one would cost more than the sums.
Source: linear interpolation (Newton's first divided difference).
Left out: where samples come from and when (service/live), turns of a joint without end: whoever
counts 179, -179 where the joint went on turning sees a jump.
"""

from collections.abc import Sequence
from math import hypot
from typing import NamedTuple

import numpy as np

from kinematics.arm import Arm
from kinematics.jacobian import motion_of, tool_twist
from kinematics.table import FloatArray


class ToolMotion(NamedTuple):
    """How a tool moves: velocity of its point and turning, [3] each, and the length of both.

    m/s and rad/s, in the axes that were asked for.
    """

    linear: list[float]
    angular: list[float]
    speed: float
    turning_speed: float


def posture_between(
    first: Sequence[float], second: Sequence[float], share: float
) -> tuple[float, ...]:
    """Return the joint values after a ``share`` (0 to 1) of the way between two samples; SI.

    Examples
    --------
    >>> posture_between((0.0, 1.0), (1.0, 3.0), 0.25)
    (0.25, 1.5)
    """
    return tuple(
        before + share * (after - before) for before, after in zip(first, second, strict=True)
    )


def joint_rates(
    first: Sequence[float], second: Sequence[float], elapsed_s: float
) -> tuple[float, ...]:
    """Return the speed of each joint, rad/s or m/s, over ``elapsed_s`` > 0 between two samples.

    Examples
    --------
    >>> joint_rates((0.0, 1.0), (1.0, 3.0), 0.5)
    (2.0, 4.0)
    """
    return tuple((after - before) / elapsed_s for before, after in zip(first, second, strict=True))


def joint_too_fast(
    arm: Arm, first: Sequence[float], second: Sequence[float], elapsed_s: float
) -> int | None:
    """Return the number (from 1) of the joint that exceeds its top speed most; None if none does.

    A joint without a top speed may do anything.

    Parameters
    ----------
    first, second : joint values, rad or m.
    elapsed_s : the longest time that may lie between them, > 0.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> row = Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0, top_speed=2.0)
    >>> arm = Arm("two", Table(Convention.STANDARD, (row, row)))
    >>> joint_too_fast(arm, (0.0, 0.0), (0.1, 0.3), 0.1)
    2
    >>> joint_too_fast(arm, (0.0, 0.0), (0.1, 0.15), 0.1) is None
    True
    """
    worst, found = 1.0, None
    rows = arm.table.rows
    for place, index in enumerate(arm.drive_map.driven):
        top_speed = rows[index].top_speed
        if top_speed is None:
            continue
        share = abs(second[place] - first[place]) / (top_speed * elapsed_s)
        if share > worst:
            worst, found = share, place + 1
    return found


def tool_motion(
    arm: Arm,
    joint_values: Sequence[float],
    rates: Sequence[float],
    tool_in_flange: FloatArray,
    base_in_axes: FloatArray,
) -> ToolMotion:
    """Return how the tool moves at a posture while the joints move at ``rates``, all SI.

    Parameters
    ----------
    base_in_axes : (3, 3), rotation of the base in the axes asked for.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> arm = Arm("one", Table(Convention.STANDARD, (Row(JointKind.REVOLUTE, 0.5, 0, 0, 0),)))
    >>> tool_motion(arm, (0.0,), (2.0,), np.eye(4), np.eye(3))
    ToolMotion(linear=[0.0, 1.0, 0.0], angular=[0.0, 0.0, 2.0], speed=1.0, turning_speed=2.0)
    """
    of_joints = motion_of(arm, np.array(joint_values), tool_in_flange).of_joints
    twist = tool_twist(of_joints, np.array(rates)).reshape(2, 3)
    linear, angular = (twist @ base_in_axes.T).tolist()
    return ToolMotion(linear, angular, hypot(*linear), hypot(*angular))
