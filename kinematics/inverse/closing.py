"""The special triple closed behind each answer of the outer joints: candidates for solutions.

Idea: with the outer joints' motions taken off both sides of the target, what is left is a motion
that the triple can make in two ways or none. Where an outer joint is free (the point lies on its
axis, the plane stands square to it) any value of it answers the outer question; but the triple
closes for some only. The side of the triangle that it must close is a sinusoid in that joint, so
the interval in which it closes is known, and values are taken from there.

Source: Paden, Kinematics and control of robot manipulators, 1986, for the split; the interval of a
free joint: derived here.

Not covered: how exactly the candidates land (kinematics/inverse/polish.py).
"""

import math

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.outer_answers import take_off_tool
from kinematics.inverse.peel import FIRST, IS_PLANE
from kinematics.inverse.regional_rows import C_FREE, FREE
from kinematics.inverse.tolerances import CLOSES, CLOSES_SLACKS
from kinematics.inverse.triple import span_across, split_meeting, split_parallel
from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray

INSIDE = (0.5, 0.08, 0.92)
"""Where in the interval of a free joint its values are taken: the middle, and near both ends."""

MOST_PER_ANSWER = 14
"""Candidates of one answer: two, and two for each value of a free joint."""


@compiled
def close_answers(
    axis: FloatArray,
    point: FloatArray,
    prismatic: NDArray[np.bool_],
    tool_inverse: FloatArray,
    how: NDArray[np.int64],
    rows: NDArray[np.int64],
    sign: FloatArray,
    triple: FloatArray,
    slack: float,
    targets: FloatArray,
    answers: FloatArray,
    of: NDArray[np.int64],
    flags: NDArray[np.int64],
    motions: FloatArray,
    motions_of: NDArray[np.int64],
    excess: FloatArray,
) -> int:
    """Write the motions of all joints for answers of the outer ones; return how many.

    Parameters
    ----------
    axis, point : (6, 3), of the arm whose triple is exact. prismatic : (6,).
    tool_inverse, how, rows, sign, triple : of ``Peeled``. slack : as there.
    targets : (m, 4, 4). answers : (k, 4), of : (k,), of ``outer_answers``.
    flags : (m,): samples of joint c are taken for targets flagged FREE alone, since a joint that
        is nearly free has a value of its own, known to half of the digits.
    motions : (MOST_PER_ANSWER k, 6), motions_of : as long, written: row motions and their target.
    excess : (m,), least amount, over L or rad, by which the triple fails to close, of what stands
        there already.
    """
    moved, rest, split, own = np.empty((4, 4)), np.empty((4, 4)), np.empty((2, 3)), np.zeros(6)
    first, is_plane, count = how[FIRST], how[IS_PLANE] == 1, 0
    slack = max(CLOSES, CLOSES_SLACKS * slack)
    values = np.empty(1 + 2 * len(INSIDE))
    row = 0
    while row < answers.shape[0]:
        b = of[row]
        if row == 0 or b != of[row - 1]:
            take_off_tool(targets[b], tool_inverse, moved)
        for j in range(3):
            own[rows[j]] = sign[j] * answers[row, j]
        free, is_free = int(answers[row, 3]), flags[b] & FREE != 0
        row = _after_samples(answers, of, row)
        if free == C_FREE and not is_free:
            continue
        varied, tried = rows[max(free, 0)], 1
        values[0] = own[varied]
        if 0 <= free < C_FREE and is_free and not prismatic[varied]:
            _interval(axis, point, prismatic, first, is_plane, triple, moved, own, varied, values)
            tried = values.shape[0]
        for v in range(tried):
            own[varied] = values[v]
            take_off_outer(axis, point, prismatic, first, moved, own, rest)
            if is_plane:
                ways, short = split_parallel(triple, rest, slack, split)
            else:
                ways, short = split_meeting(triple, rest, slack, split)
            excess[b] = min(excess[b], short)
            for k in range(ways):
                for i in range(6):
                    motions[count, i] = own[i]
                for i in range(3):
                    motions[count, first + i] = split[k, i]
                motions_of[count] = b
                count += 1
    return count


@compiled
def _after_samples(answers: FloatArray, of: NDArray[np.int64], row: int) -> int:
    """Return the next row that differs in more than a free joint a or b."""
    free, after = int(answers[row, 3]), row + 1
    while 0 <= free < C_FREE and after < answers.shape[0] and of[after] == of[row]:
        for j in range(4):
            if j != free and answers[after, j] != answers[row, j]:
                return after
        after += 1
    return after


@compiled
def _interval(
    axis: FloatArray,
    point: FloatArray,
    prismatic: NDArray[np.bool_],
    first: int,
    is_plane: bool,
    triple: FloatArray,
    moved: FloatArray,
    own: FloatArray,
    varied: int,
    values: FloatArray,
) -> None:
    """Write values of a free joint at which the triple closes, after the one it has already.

    Cosine (meeting), or square (parallel), of the side that the triple must close is
    middle + swing cos(value - top): three values of the joint tell all three numbers.
    """
    rest, third = np.empty((4, 4)), 2.0 * math.pi / 3.0
    middle, cosine, sine = 0.0, 0.0, 0.0
    for k in range(3):
        own[varied] = third * k
        take_off_outer(axis, point, prismatic, first, moved, own, rest)
        if is_plane:
            x, y = span_across(triple, rest)
            side = x * x + y * y
        else:
            side = 0.0
            for row in range(3):
                for column in range(3):
                    side += triple[0, row] * rest[row, column] * triple[2, column]
        middle += side / 3.0
        cosine += side * math.cos(own[varied]) * 2.0 / 3.0
        sine += side * math.sin(own[varied]) * 2.0 / 3.0
    swing, top = math.hypot(cosine, sine), math.atan2(sine, cosine)
    one, other = (triple[5, 0], triple[5, 1]) if is_plane else (triple[4, 0], triple[4, 1])
    if is_plane:
        least, most = (one - other) ** 2, (one + other) ** 2
    else:
        least, most = math.cos(min(one + other, 2.0 * math.pi - one - other)), math.cos(one - other)
    nearest, furthest = 0.0, math.pi
    if swing > 0.0:
        nearest = math.acos(min(1.0, max(-1.0, (most - middle) / swing)))
        furthest = math.acos(min(1.0, max(-1.0, (least - middle) / swing)))
    for k in range(values.shape[0] - 1):
        away = nearest + INSIDE[k // 2] * (furthest - nearest)
        values[1 + k] = top + (away if k % 2 == 0 else -away)


@compiled
def take_off_outer(
    axis: FloatArray,
    point: FloatArray,
    prismatic: NDArray[np.bool_],
    first: int,
    moved: FloatArray,
    motions: FloatArray,
    rest: FloatArray,
) -> None:
    """Write what the triple must do: D with the outer joints' motions taken off both sides."""
    for row in range(3):
        for column in range(4):
            rest[row, column] = moved[row, column]
    for i in range(first):
        _take_left(axis[i], point[i], prismatic[i], -motions[i], rest)
    for i in range(5, first + 2, -1):
        _take_right(axis[i], point[i], prismatic[i], -motions[i], rest)


@compiled
def _take_left(
    axis: FloatArray, point: FloatArray, slides: bool, motion: float, rest: FloatArray
) -> None:
    """Put the motion of a joint before a pose."""
    if slides:
        for row in range(3):
            rest[row, 3] += motion * axis[row]
        return
    kx, ky, kz = axis[0], axis[1], axis[2]
    cosine, sine = math.cos(motion), math.sin(motion)
    for row in range(3):
        rest[row, 3] -= point[row]
    for column in range(4):
        x, y, z = rest[0, column], rest[1, column], rest[2, column]
        along = (kx * x + ky * y + kz * z) * (1.0 - cosine)
        rest[0, column] = x * cosine + (ky * z - kz * y) * sine + kx * along
        rest[1, column] = y * cosine + (kz * x - kx * z) * sine + ky * along
        rest[2, column] = z * cosine + (kx * y - ky * x) * sine + kz * along
    for row in range(3):
        rest[row, 3] += point[row]


@compiled
def _take_right(
    axis: FloatArray, point: FloatArray, slides: bool, motion: float, rest: FloatArray
) -> None:
    """Put the motion of a joint behind a pose."""
    kx, ky, kz = axis[0], axis[1], axis[2]
    cosine, sine = math.cos(motion), -math.sin(motion)
    for row in range(3):
        # A row times a turn is the row turned the other way.
        x, y, z = rest[row, 0], rest[row, 1], rest[row, 2]
        if slides:
            rest[row, 3] += motion * (x * kx + y * ky + z * kz)
            continue
        rest[row, 3] += x * point[0] + y * point[1] + z * point[2]
        along = (kx * x + ky * y + kz * z) * (1.0 - cosine)
        x, y, z = (
            x * cosine + (ky * z - kz * y) * sine + kx * along,
            y * cosine + (kz * x - kx * z) * sine + ky * along,
            z * cosine + (kx * y - ky * x) * sine + kz * along,
        )
        rest[row, 0], rest[row, 1], rest[row, 2] = x, y, z
        rest[row, 3] -= x * point[0] + y * point[1] + z * point[2]
