"""Branch and bound over joint values: boxes sure to miss a target go, the others are halved.

Idea: travel is a box of joint values. If it is not sure to miss (box_tests.py) it is halved across
the joint that moves the tool most in it, and each half is asked the same, the one nearer to the
target first. Where no box is left, no posture within travel gets there. Where boxes become too
small to be halved again, the target is as good as met, or so close to it that doubles cannot tell.

Source: Moore, Interval Analysis, 1966; for arms: Rao, Asaithambi and Agrawal 1998. Recalled.
Not covered: how long it takes. It grows with a power of one over the gap, and with each joint.
"""

import math
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.box_tests import (
    bend_of_point,
    bend_of_turn,
    cannot_vanish,
    reaches_of_rows,
    stretch_of,
    turns_of_rows,
    widths_of_rows,
)
from kinematics.inverse.descent import DIRECTION, POSE, POSITION
from kinematics.inverse.descent_arrays import Lines, Room
from kinematics.inverse.landing import columns_of, gap_to, land
from kinematics.inverse.tolerances import BOX_ROUNDING, WIDEST_TURN
from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray

EMPTY, SMALL, SPENT = range(3)
"""How a search ended: no box is left; one is too small to halve; so many were looked at."""

COUNT, LOOKED_AT = range(2)
"""Places of what goes on from one search to the next: boxes that wait, and boxes looked at."""

_TURN_WEIGHT = 0.6
"""Weight of a joint's turn beside its way, a share of the length, when one is chosen to halve."""


class Bench(NamedTuple):
    """The arrays a search for boxes works on, laid out once.

    Attributes
    ----------
    motions, widths, reaches, turns : (rows,); axis_now, point_now : (rows, 3); pose : (4, 4).
    gap, left : (6 + sums,); columns : (6 + sums, joints + sums); half, moves : (joints + sums,).
    of_rows : (6, rows). furthest : (rows,), the tool's distance from each row's axis at most.
    """

    motions: FloatArray
    widths: FloatArray
    reaches: FloatArray
    turns: FloatArray
    axis_now: FloatArray
    point_now: FloatArray
    pose: FloatArray
    gap: FloatArray
    left: FloatArray
    columns: FloatArray
    half: FloatArray
    moves: FloatArray
    of_rows: FloatArray
    furthest: FloatArray


def bench_for(rows: int, joints: int, sums: int, furthest: FloatArray) -> Bench:
    """Return fresh arrays for an arm of so many rows, joints and bounded sums of joint values."""
    return Bench(
        np.zeros(rows), np.zeros(rows), np.zeros(rows), np.zeros(rows),
        np.zeros((rows, 3)), np.zeros((rows, 3)), np.eye(4),
        np.zeros(6 + sums), np.zeros(6 + sums), np.zeros((6 + sums, joints + sums)),
        np.zeros(joints + sums), np.zeros(joints + sums), np.zeros((6, rows)), furthest,
    )  # fmt: skip


@compiled
def explore(
    lines: Lines,
    room: Room,
    bench: Bench,
    task: int,
    target: FloatArray,
    tolerance: FloatArray,
    boxes: FloatArray,
    counts: NDArray[np.int64],
    most: int,
    smallest: float,
) -> int:
    """Look at waiting boxes until none is left, or one is too small; return how it ended.

    Parameters
    ----------
    tolerance : (2,), by how much place (a share of the length) and turn may be missed.
    boxes : (places, 2, joints), middle and half widths of boxes that wait, the next one last.
    counts : (2,), by COUNT and LOOKED_AT; both arrays go on from one call to the next.
    most : boxes that may be looked at. smallest : radians, or shares of the length, that a tool
        moves in a box that is too small to halve; that box is the last one left.
    """
    joints = lines.drive.shape[1]
    while counts[COUNT] > 0:
        if counts[LOOKED_AT] >= most:
            return SPENT
        counts[LOOKED_AT] += 1
        box = boxes[counts[COUNT] - 1]
        for joint in range(joints):
            bench.half[joint] = box[1, joint]
            bench.moves[joint] = 0.0
        if _misses(lines, room, bench, task, target, tolerance, box[0]):
            counts[COUNT] -= 1
            continue
        joint, size = _to_halve(lines, bench, task, joints)
        if size < smallest or counts[COUNT] == boxes.shape[0]:
            return SMALL
        _halve(boxes, counts[COUNT] - 1, joint, bench.moves[joint])
        counts[COUNT] += 1
    return EMPTY


@compiled
def _to_halve(lines: Lines, bench: Bench, task: int, joints: int) -> tuple[int, float]:
    """Return the joint that moves the tool most in the box, and by how much."""
    best, most = 0, -1.0
    for joint in range(joints):
        moved = 0.0
        for row in range(lines.drive.shape[0]):
            by = bench.reaches[row]
            if task == DIRECTION:
                by += _TURN_WEIGHT * bench.turns[row]
            elif task == POSE and not lines.prismatic[row]:
                by += _TURN_WEIGHT
            moved += by * abs(lines.drive[row, joint])
        moved *= bench.half[joint]
        if moved > most:
            best, most = joint, moved
    return best, most


@compiled
def _halve(boxes: FloatArray, place: int, joint: int, towards: float) -> None:
    """Put the halves of a box in its place and the next one, that towards the target last."""
    for other in range(boxes.shape[2]):
        boxes[place + 1, 0, other] = boxes[place, 0, other]
        boxes[place + 1, 1, other] = boxes[place, 1, other]
    half = 0.5 * boxes[place, 1, joint]
    sign = 1.0 if towards >= 0.0 else -1.0
    boxes[place, 1, joint] = boxes[place + 1, 1, joint] = half
    boxes[place, 0, joint] -= sign * half
    boxes[place + 1, 0, joint] += sign * half


@compiled
def _misses(
    lines: Lines,
    room: Room,
    bench: Bench,
    task: int,
    target: FloatArray,
    tolerance: FloatArray,
    middle: FloatArray,
) -> bool:
    """Tell whether a box is sure to miss the target, or what bounds sums of joint values."""
    joints, pose, gap = middle.shape[0], bench.pose, bench.gap
    for form in range(room.least.shape[0]):
        if _sum_missed(room, bench, form, middle):
            return True
    for row in range(lines.drive.shape[0]):
        bench.motions[row] = 0.0
        for joint in range(joints):
            bench.motions[row] += lines.drive[row, joint] * middle[joint]
    widths_of_rows(lines.drive, bench.half[:joints], bench.widths)
    land(
        lines.axis, lines.point, lines.prismatic, lines.tool_at_zero,
        bench.motions, bench.axis_now, bench.point_now, pose,
    )  # fmt: skip
    way = reaches_of_rows(
        bench.axis_now, bench.point_now, lines.prismatic, pose,
        bench.widths, bench.furthest, bench.reaches,
    )  # fmt: skip
    gap_to(pose, target, gap)
    shift = math.sqrt(gap[0] ** 2 + gap[1] ** 2 + gap[2] ** 2)
    if shift > way + tolerance[0] + BOX_ROUNDING:
        return True
    turned = _turn_at_most(lines, bench, task)
    if _turn_gap(task, pose, target, gap) > turned + tolerance[1] + BOX_ROUNDING:
        return True
    bend = bend_of_point(lines.prismatic, bench.widths, bench.reaches)
    if bend > way or (task == POSE and turned > WIDEST_TURN):
        return False
    _write_columns(lines, room, bench, task, tolerance, turned, bend)
    return cannot_vanish(bench.columns, gap, bench.half, bench.left, bench.moves)


@compiled
def _sum_missed(room: Room, bench: Bench, form: int, middle: FloatArray) -> bool:
    """Tell whether a bounded sum of joint values is beyond its bounds all over the box.

    If not, how far it may move from the middle to stay within is noted as the gap of its row, and
    half of that room as the half width of a motion of its own.
    """
    value, wide, joints = 0.0, 0.0, middle.shape[0]
    for joint in range(joints):
        value += room.weights[form, joint] * middle[joint]
        wide += abs(room.weights[form, joint]) * bench.half[joint]
    below, above = room.least[form] - value, room.most[form] - value
    if below > wide + BOX_ROUNDING or above < -wide - BOX_ROUNDING:
        return True
    # Room beyond what the box fills does not matter, and may be without end.
    below, above = max(below, -wide), min(above, wide)
    bench.gap[6 + form] = 0.5 * (below + above)
    bench.half[joints + form] = 0.5 * (above - below) + BOX_ROUNDING
    return False


@compiled
def _turn_at_most(lines: Lines, bench: Bench, task: int) -> float:
    """Return how far what counts of the tool's turn may turn in a box, rad."""
    if task == DIRECTION:
        return turns_of_rows(bench.axis_now, lines.prismatic, bench.pose, bench.widths, bench.turns)
    turned = 0.0
    for row in range(bench.widths.shape[0]):
        if task == POSE and not lines.prismatic[row]:
            turned += bench.widths[row]
    return turned


@compiled
def _turn_gap(task: int, pose: FloatArray, target: FloatArray, gap: FloatArray) -> float:
    """Write the gap of what counts of the turn in place of the rotation vector; return its length.

    Of a direction the way from point to point of the unit sphere, straight.
    """
    for k in range(3):
        if task == DIRECTION:
            gap[3 + k] = target[k, 2] - pose[k, 2]
        elif task == POSITION:
            gap[3 + k] = 0.0
    return math.sqrt(gap[3] ** 2 + gap[4] ** 2 + gap[5] ** 2)


@compiled
def _write_columns(
    lines: Lines,
    room: Room,
    bench: Bench,
    task: int,
    tolerance: FloatArray,
    turned: float,
    bend: float,
) -> None:
    """Write how joints close the gap, and the gap, both over what is left open of each part."""
    joints, sums = lines.drive.shape[1], room.least.shape[0]
    pose, of_rows, columns, gap = bench.pose, bench.of_rows, bench.columns, bench.gap
    columns_of(bench.axis_now, bench.point_now, lines.prismatic, pose, of_rows)
    if task == DIRECTION:
        rest = bend_of_point(lines.prismatic, bench.widths, bench.turns) + tolerance[1]
        for row in range(of_rows.shape[1]):
            x, y, z = of_rows[3, row], of_rows[4, row], of_rows[5, row]
            of_rows[3, row] = y * pose[2, 2] - z * pose[1, 2]
            of_rows[4, row] = z * pose[0, 2] - x * pose[2, 2]
            of_rows[5, row] = x * pose[1, 2] - y * pose[0, 2]
    else:
        rest = bend_of_turn(bench.axis_now, lines.prismatic, bench.widths) + tolerance[1]
        rest *= stretch_of(turned)
    of_shift = 1.0 / (bend + tolerance[0] + BOX_ROUNDING)
    of_turn = 0.0 if task == POSITION else 1.0 / (rest + BOX_ROUNDING)
    for k in range(3):
        gap[k] *= of_shift
        gap[3 + k] *= of_turn
        for joint in range(joints):
            shift, turn = 0.0, 0.0
            for row in range(of_rows.shape[1]):
                shift += of_rows[k, row] * lines.drive[row, joint]
                turn += of_rows[3 + k, row] * lines.drive[row, joint]
            columns[k, joint], columns[3 + k, joint] = shift * of_shift, turn * of_turn
    for form in range(sums):
        gap[6 + form] *= of_shift
        for joint in range(joints):
            columns[6 + form, joint] = room.weights[form, joint] * of_shift
        columns[6 + form, joints + form] = -of_shift
