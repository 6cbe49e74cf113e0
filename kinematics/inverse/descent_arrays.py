"""What a descent works on: an arm as lines, the room its joint values have, arrays laid out once.

Idea: compiled code takes arrays, and takes them best when somebody else has asked for the memory.
So the arm, its bounds and every array in between stand in named tuples, made in Python.

Source: none; a layout. Not covered: how they are made from an arm (descent_arms.py).
"""

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.number_checks import FloatArray

FAR = 1e9
"""Radians, or shares of the length, that stand for no bound; compiled code knows no infinity."""


class Lines(NamedTuple):
    """An arm as ``landing.land`` takes it, and how joint values drive its rows, lengths as shares.

    ``drive`` is (rows, joints); ``turn`` (3,) the line that counts in the task ``ABOUT``.
    """

    axis: FloatArray
    point: FloatArray
    prismatic: NDArray[np.bool_]
    tool_at_zero: FloatArray
    drive: FloatArray
    turn: FloatArray


class Room(NamedTuple):
    """Where joint values may be: ``lower <= q <= upper`` and ``least <= weights q <= most``.

    ``turning`` says which of them are angles, (joints,).
    """

    lower: FloatArray
    upper: FloatArray
    weights: FloatArray
    least: FloatArray
    most: FloatArray
    turning: NDArray[np.bool_]


class Desk(NamedTuple):
    """The arrays one descent works on, laid out once for many."""

    motions: FloatArray
    axis_now: FloatArray
    point_now: FloatArray
    pose: FloatArray
    gap: FloatArray
    of_rows: FloatArray
    of_joints: FloatArray
    normal: FloatArray
    factor: FloatArray
    slope: FloatArray
    step: FloatArray
    trial: FloatArray


def desk_for(rows: int, joints: int, forms: int) -> Desk:
    """Return fresh arrays for an arm of so many rows, joints and bounded sums.

    Not compiled: code that asks for memory takes longer to compile than all that works on it.
    """
    return Desk(
        np.zeros(rows),
        np.zeros((rows, 3)),
        np.zeros((rows, 3)),
        np.eye(4),
        np.zeros(6 + forms),
        np.zeros((6, rows)),
        np.zeros((6 + forms, joints)),
        np.zeros((joints, joints)),
        np.zeros((joints, joints)),
        np.zeros(joints),
        np.zeros(joints),
        np.zeros(joints),
    )


def widened(room: Room) -> Room:
    """Return room without bounds for as many joint values and sums."""
    far, many = np.full_like(room.lower, FAR), np.full_like(room.least, FAR)
    return room._replace(lower=-far, upper=far, least=-many, most=many)
