"""Whether a whole box of postures is sure to miss a target: bounds on how far the tool goes in it.

Idea: from the middle of a box of joint values the tool moves no further than each joint turns it,
times its distance from that joint's axis. If that does not lead to the target, no posture of the
box does. Where it might, all joints are looked at together: the tool moves as its Jacobian says,
but for a rest that the squares of the widths bound. If the nearest that straight motions within
the box come to the target leaves more than that rest, the direction of what is left proves it.

Source: bounds of first and second order: Rao, Asaithambi and Agrawal, Inverse kinematic solution of
robot manipulators using interval analysis, 1998, and Moore, Interval Analysis, 1966; both recalled,
these bounds derived here. The direction as a proof: Farkas 1902.

Why the rest is bounded. Place: the second derivative of a point by joints s <= r is no longer than
its distance from axis r (1 for a slide r, 0 where s slides), and that distance grows in the box by
no more than the joints after r move the point. Direction: the same of a point on the unit sphere,
no slide moving it. Turn: the tool's turn and the turn about the fixed Jacobian's vector part by
half of the sum, over pairs, of both widths times the sine between their axes; and as balls of
rotations of less than half pi are convex, rotation vectors of norm up to t differ by no more than
(t/2) / sin(t/2) times the angle between their turns.

Not covered: rounding, which is left a thousand times its size but not enclosed (BOX_ROUNDING): what
is proved this way is proved numerically.
"""

import math

import numpy as np
from numpy.typing import NDArray

from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray

_SWEEPS = 12
"""Times each joint is moved to where it leaves least, before a box is given up as undecided."""
_STRAIGHT = 1e-6
"""Radians up to which an arc is as long as its chord: the difference, angle^2 / 24, is below
rounding, and none has to be divided by none."""


@compiled
def widths_of_rows(drive: FloatArray, half: FloatArray, widths: FloatArray) -> None:
    """Write by how much each row may move to either side, (rows,), for joint values (joints,).

    Examples
    --------
    >>> widths = np.empty(2)
    >>> widths_of_rows(np.array([[1.0, 0.0], [-1.0, 2.0]]), np.array([0.1, 0.2]), widths)
    >>> widths
    array([0.1, 0.5])
    """
    for row in range(drive.shape[0]):
        widths[row] = 0.0
        for joint in range(drive.shape[1]):
            widths[row] += abs(drive[row, joint]) * half[joint]


@compiled
def reaches_of_rows(
    axis_now: FloatArray,
    point_now: FloatArray,
    prismatic: NDArray[np.bool_],
    pose: FloatArray,
    widths: FloatArray,
    furthest: FloatArray,
    reaches: FloatArray,
) -> float:
    """Write how far one radian of each row moves the tool's point at most, anywhere in a box.

    Return how far it moves in all. Rows are as ``landing.land`` writes them in the middle of the
    box; ``widths`` (rows,) to either side; ``furthest`` (rows,), its distance from them at most.

    Examples
    --------
    >>> line, place, pose = np.array([[0.0, 0, 1]]), np.zeros((1, 3)), np.eye(4)
    >>> pose[0, 3] = 2.0
    >>> far, reaches = np.array([9.0]), np.empty(1)
    >>> reaches_of_rows(line, place, np.zeros(1, bool), pose, np.array([0.1]), far, reaches)
    0.2
    """
    moved = 0.0
    for row in range(widths.shape[0] - 1, -1, -1):
        reaches[row] = 1.0
        if not prismatic[row]:
            x, y, z = (
                pose[0, 3] - point_now[row, 0],
                pose[1, 3] - point_now[row, 1],
                pose[2, 3] - point_now[row, 2],
            )
            reaches[row] = min(_aside(axis_now, row, x, y, z) + moved, furthest[row])
        moved += reaches[row] * widths[row]
    return moved


@compiled
def turns_of_rows(
    axis_now: FloatArray,
    prismatic: NDArray[np.bool_],
    pose: FloatArray,
    widths: FloatArray,
    turns: FloatArray,
) -> float:
    """Write how far one radian of each row turns tool z at most, and return how far in all, rad.

    Examples
    --------
    >>> turns = np.empty(1)
    >>> turns_of_rows(np.eye(3)[2:], np.zeros(1, bool), np.eye(4), np.array([0.1]), turns)
    0.0
    """
    moved = 0.0
    for row in range(widths.shape[0] - 1, -1, -1):
        turns[row] = 0.0
        if not prismatic[row]:
            aside = _aside(axis_now, row, pose[0, 2], pose[1, 2], pose[2, 2])
            turns[row] = min(aside + moved, 1.0)
        moved += turns[row] * widths[row]
    return moved


@compiled
def _aside(axis_now: FloatArray, row: int, x: float, y: float, z: float) -> float:
    """Return the length of the part of a vector that is across an axis."""
    hx, hy, hz = axis_now[row, 0], axis_now[row, 1], axis_now[row, 2]
    return math.sqrt((hy * z - hz * y) ** 2 + (hz * x - hx * z) ** 2 + (hx * y - hy * x) ** 2)


@compiled
def bend_of_point(prismatic: NDArray[np.bool_], widths: FloatArray, reaches: FloatArray) -> float:
    """Return by how much a point may be off where its Jacobian leads, anywhere in a box.

    ``reaches`` (rows,): how far a radian moves it at most. Directions are points of a sphere.

    Examples
    --------
    >>> bend_of_point(np.zeros(1, bool), np.array([0.5]), np.array([2.0]))
    0.25
    """
    before, bend = 0.0, 0.0
    for row in range(widths.shape[0]):
        if prismatic[row]:
            bend += reaches[row] * widths[row] * before
        else:
            bend += reaches[row] * widths[row] * (before + 0.5 * widths[row])
            before += widths[row]
    return bend


@compiled
def bend_of_turn(axis_now: FloatArray, prismatic: NDArray[np.bool_], widths: FloatArray) -> float:
    """Return the angle by which the tool's turn may be off that about its Jacobian's vector.

    Examples
    --------
    >>> turning, widths = np.zeros(2, bool), np.array([0.5, 0.25])
    >>> [bend_of_turn(np.eye(3)[axes], turning, widths) for axes in ([2, 2], [0, 1])]
    [0.0, 0.0625]
    """
    bend = 0.0
    for row in range(widths.shape[0]):
        if prismatic[row]:
            continue
        # Rows in between turn one of both axes, and the sine changes by no more.
        between = 0.0
        for earlier in range(row - 1, -1, -1):
            if prismatic[earlier]:
                continue
            h = axis_now[row]
            sine = between + _aside(axis_now, earlier, h[0], h[1], h[2])
            bend += 0.5 * widths[row] * widths[earlier] * min(sine, 1.0)
            between += widths[earlier]
    return bend


@compiled
def stretch_of(angle: float) -> float:
    """Return how much longer differences of rotation vectors up to ``angle`` are than their turns.

    Examples
    --------
    >>> stretch_of(1e-9), round(stretch_of(1.5), 3)
    (1.0, 1.1)
    """
    return 0.5 * angle / math.sin(0.5 * angle) if angle > _STRAIGHT else 1.0


@compiled
def cannot_vanish(
    columns: FloatArray, gap: FloatArray, half: FloatArray, left: FloatArray, moves: FloatArray
) -> bool:
    """Tell whether no motions within a box bring a gap within 1 in its first and next three rows.

    Columns (m, n) say how motions close the gap (m,), m at least 6; rows from the sixth on must be
    closed altogether. Motions ``moves`` (n,) that leave little, and what they leave, ``left``
    (m,), are written. What is left proves it where it points further than all motions together.

    Examples
    --------
    >>> columns, gap = np.zeros((6, 1)), np.zeros(6)
    >>> columns[0, 0], gap[0], left, moves = 2.0, 5.0, np.empty(6), np.empty(1)
    >>> [cannot_vanish(columns, gap, np.array([w]), left, moves) for w in (1.0, 2.5)]
    [True, False]
    """
    rows, joints = columns.shape
    for row in range(rows):
        left[row] = gap[row]
    for joint in range(joints):
        moves[joint] = 0.0
    for _ in range(_SWEEPS):
        for joint in range(joints):
            along, square = 0.0, 0.0
            for row in range(rows):
                along += columns[row, joint] * left[row]
                square += columns[row, joint] * columns[row, joint]
            if square == 0.0:
                continue
            there = min(max(moves[joint] + along / square, -half[joint]), half[joint])
            step = there - moves[joint]
            moves[joint] = there
            for row in range(rows):
                left[row] -= step * columns[row, joint]
        shift = math.sqrt(left[0] ** 2 + left[1] ** 2 + left[2] ** 2)
        turn = math.sqrt(left[3] ** 2 + left[4] ** 2 + left[5] ** 2)
        total = 0.0
        for row in range(rows):
            total += left[row] * left[row]
        if total <= 1.0:
            return False  # less will be left after more sweeps, and this is not enough
        away = 0.0
        for row in range(rows):
            away += left[row] * gap[row]
        for joint in range(joints):
            along = 0.0
            for row in range(rows):
                along += columns[row, joint] * left[row]
            away -= abs(along) * half[joint]
        if away > shift + turn:
            return True
    return False
