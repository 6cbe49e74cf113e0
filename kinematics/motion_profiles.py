"""How joints go from one posture to another and come to rest there, smoothly.

Idea: all joints follow one polynomial of fifth degree from 0 to 1, which begins and ends without
speed and without acceleration; of all such motions its jerk, squared and summed over time, is the
least. So each joint keeps to the straight line between both postures, and since what bounds an arm
bounds sums of its joint values, a move between two postures within travel stays within it.
Source: Flash and Hogan 1985, "The coordination of arm movements", J. Neuroscience 5(7), eq. 3;
Biagiotti and Melchiorri 2008, "Trajectory Planning for Automatic Machines and Robots", 2.1.6.
Not covered: tool paths, moves that do not stop between postures, what a load lets an arm do.
"""

import math

import numpy as np

from kinematics.arm import Arm
from kinematics.table import FloatArray

PEAK_SPEED = 15.0 / 8.0
"""Largest slope of the polynomial, half way."""

PEAK_ACCELERATION = 10.0 / math.sqrt(3.0)
"""Largest second derivative, at (3 - sqrt 3) / 6 of the time."""

RAMP_S = 0.3
"""So long a joint takes to its top speed at least: what drives of some hundred watts do."""

USUAL_TOP_SPEEDS = {"rad": math.radians(90.0), "m": 0.5}
"""Of joints whose table says none, per second: slow for most arms, and never startling."""


def progress(share_of_time: float) -> float:
    """Return the share of the way after a share of the time; 0 before it begins, 1 after its end.

    Examples
    --------
    >>> progress(0.0), progress(0.5), progress(1.0), progress(7.0)
    (0.0, 0.5, 1.0, 1.0)
    """
    t = min(max(share_of_time, 0.0), 1.0)
    return t * t * t * (10.0 + t * (-15.0 + 6.0 * t))


def top_speeds(arm: Arm) -> FloatArray:
    """Return the top speed of each joint, (joints,), rad/s or m/s; a usual one where none is said.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = (Row(JointKind.PRISMATIC, 0.0, 0.0, 0.0, 0.0, top_speed=2.0),
    ...         Row(JointKind.PRISMATIC, 0.0, 0.0, 0.0, 0.0))
    >>> top_speeds(Arm("slides", Table(Convention.STANDARD, rows)))
    array([2. , 0.5])
    """
    rows = [arm.table.rows[place] for place in arm.drive_map.driven]
    return np.array(
        [USUAL_TOP_SPEEDS[row.unit] if row.top_speed is None else row.top_speed for row in rows]
    )


def shortest_duration(way: FloatArray, speeds: FloatArray) -> float:
    """Return the seconds a move takes at least if no joint is to exceed its speed.

    Nor does one reach it sooner than ``RAMP_S`` would allow from standstill.

    Parameters
    ----------
    way : (joints,), how far each joint goes, rad or m; speeds : (joints,), > 0, rad/s or m/s.

    Examples
    --------
    A joint that goes 1 rad at up to 0.5 rad/s: half way it does 15/8 of the mean speed.

    >>> shortest_duration(np.array([1.0]), np.array([0.5]))
    3.75
    """
    if not len(way):
        return 0.0
    at_top_speed = np.abs(way) / speeds
    by_speed = PEAK_SPEED * float(at_top_speed.max())
    by_ramp = math.sqrt(PEAK_ACCELERATION * RAMP_S * float(at_top_speed.max()))
    return max(by_speed, by_ramp)


def on_the_way(first: FloatArray, last: FloatArray, share_of_time: float) -> FloatArray:
    """Return the posture (joints,) after a share of the time that a move takes.

    Examples
    --------
    >>> on_the_way(np.array([0.0, 1.0]), np.array([1.0, -1.0]), 0.5)
    array([0.5, 0. ])
    """
    return first + progress(share_of_time) * (last - first)
