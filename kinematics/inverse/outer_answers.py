"""What the outer joints of an arm with a special triple can do for many targets.

Idea: three joints that meet leave their meeting point where it is, parallel ones the planes across
them. For each target that point, or plane, is asked of the other three joints: a point (or plane)
to start from, one to end at, three lines of which the third may stand on the target's side. The
answers of all targets stand in one table.

Source: Pieper, The kinematics of manipulators under computer control, 1968; see peel.py.
Not covered: how three joints move a point or a plane (kinematics/inverse/regional.py).
"""

import math

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.peel import BY_INVERSE, IS_PLANE, START_MOVED, THIRD_MOVED
from kinematics.inverse.regional import regional
from kinematics.inverse.regional_nearest import carry, nearest_regional
from kinematics.inverse.regional_rows import FREE, MOST_ROWS_FOUND, NEAR_FREE, NONE_FREE
from kinematics.inverse.tolerances import EXACT_SLACK, FOLD_SLACKS, NEARLY_FREE_SLACKS
from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray


@compiled
def outer_answers(
    how: NDArray[np.int64],
    slides: NDArray[np.bool_],
    axes: FloatArray,
    points: FloatArray,
    pair: FloatArray,
    fixed: FloatArray,
    tool_inverse: FloatArray,
    slack: float,
    targets: FloatArray,
    begin: int,
    answers: FloatArray,
    of: NDArray[np.int64],
    flags: NDArray[np.int64],
) -> tuple[int, int]:
    """Write what the outer joints can do for targets (m, 4, 4) from one on, until out of room.

    Parameters
    ----------
    how, slides, axes, points, pair, fixed, tool_inverse : of ``Peeled``.
    slack : by how much geometry and targets may be off.
    answers : (room, 4), written: a, b, c and which of them is free, as ``regional`` has them.
    of : (room,), which target. flags : (m,), of ``regional``.

    Returns
    -------
    after : index of the first target not done. rows : answers written.
    """
    moved, start, goal = np.zeros((4, 4)), np.zeros(4), np.zeros(4)
    all_axes, all_points, rows = axes.copy(), points.copy(), 0
    for b in range(begin, targets.shape[0]):
        if rows + MOST_ROWS_FOUND > answers.shape[0]:
            return b, rows
        take_off_tool(targets[b], tool_inverse, moved)
        ask(how, axes, points, fixed, moved, all_axes, all_points, start, goal)
        is_plane = how[IS_PLANE] == 1
        found, flags[b] = regional(
            pair, slides, all_axes, all_points, is_plane, start, goal, slack, answers[rows:]
        )
        for k in range(found):
            if slack > EXACT_SLACK:
                flags[b] |= _mark_free(
                    slides, all_axes, all_points, is_plane, start, goal, slack, answers[rows]
                )
                if k > 0 and _nearly_double(answers[rows - 1, 2], answers[rows, 2], slack):
                    flags[b] |= NEAR_FREE
            of[rows] = b
            rows += 1
    return targets.shape[0], rows


@compiled
def _nearly_double(one: float, other: float, slack: float) -> bool:
    """Return whether two values of joint c lie so close that a rounded table may lose such a pair.

    Those closer still belong to one root, split by axes a and b that meet, or are parallel, but for
    the rounding.
    """
    apart = abs(one - other)
    apart = min(apart, abs(apart - 2.0 * math.pi))
    return FOLD_SLACKS * slack < apart <= FOLD_SLACKS * math.sqrt(slack)


@compiled
def _mark_free(
    slides: NDArray[np.bool_],
    axes: FloatArray,
    points: FloatArray,
    is_plane: bool,
    start: FloatArray,
    goal: FloatArray,
    slack: float,
    answer: FloatArray,
) -> int:
    """Mark the joint of an answer that is free within the slack of a rounded table; return flags.

    What turns a point (or normal) by no more than the table is off has no value of its own.
    """
    at, nearest = np.empty(4), 1.0
    for k in range(4):
        at[k] = start[k]
    if not is_plane:
        at[3] = 1.0
    for step in range(3):
        joint = 2 - step
        if joint == 0:
            for k in range(3):
                at[k] = goal[k]
        if not slides[joint]:
            swing = _off_axis(axes[joint], points[joint], is_plane, at)
            nearest = min(nearest, swing)
            if swing <= slack and joint < 2 and answer[3] == NONE_FREE:
                answer[3] = joint
        carry(slides[joint], axes[joint], points[joint], is_plane, answer[joint], at, at)
    if nearest > NEARLY_FREE_SLACKS * slack:
        return 0
    return FREE if nearest <= slack else NEAR_FREE


@compiled
def _off_axis(axis: FloatArray, point: FloatArray, is_plane: bool, at: FloatArray) -> float:
    """Return the distance of a point from a line, or the sine between a plane's normal and it."""
    x, y, z = at[0], at[1], at[2]
    if not is_plane:
        x, y, z = x - point[0], y - point[1], z - point[2]
    sx, sy = axis[1] * z - axis[2] * y, axis[2] * x - axis[0] * z
    sz = axis[0] * y - axis[1] * x
    return math.sqrt(sx * sx + sy * sy + sz * sz)


@compiled
def nearest_answers(
    how: NDArray[np.int64],
    slides: NDArray[np.bool_],
    axes: FloatArray,
    points: FloatArray,
    fixed: FloatArray,
    tool_inverse: FloatArray,
    targets: FloatArray,
    answers: FloatArray,
    misses: FloatArray,
) -> None:
    """Write what brings the outer joints nearest to each target (m, 4, 4), and what is left.

    Parameters as those of ``outer_answers``; answers : (m, 4), none of them free; misses : (m,).
    """
    moved, start, goal = np.zeros((4, 4)), np.zeros(4), np.zeros(4)
    all_axes, all_points, best = axes.copy(), points.copy(), np.zeros(3)
    for b in range(targets.shape[0]):
        take_off_tool(targets[b], tool_inverse, moved)
        ask(how, axes, points, fixed, moved, all_axes, all_points, start, goal)
        misses[b] = nearest_regional(
            slides, all_axes, all_points, how[IS_PLANE] == 1, start, goal, best
        )
        answers[b, 3] = NONE_FREE
        for k in range(3):
            answers[b, k] = best[k]


@compiled
def ask(
    how: NDArray[np.int64],
    axes: FloatArray,
    points: FloatArray,
    fixed: FloatArray,
    moved: FloatArray,
    all_axes: FloatArray,
    all_points: FloatArray,
    start: FloatArray,
    goal: FloatArray,
) -> None:
    """Write what is asked of the outer joints: the third line (row 2 of ``all``), start and goal.

    Parameters
    ----------
    how, axes, points, fixed : of ``Peeled``. moved : (4, 4), D, of ``take_off_tool``.
    """
    by_inverse = how[BY_INVERSE] == 1
    other, same = (start, goal) if how[START_MOVED] == 1 else (goal, start)
    for k in range(4):
        same[k] = fixed[k]
    if how[THIRD_MOVED] == 1:
        _turn(moved, by_inverse, axes[2], all_axes[2])
        _shift(moved, by_inverse, points[2], all_points[2])
    if how[IS_PLANE] == 0:
        _shift(moved, by_inverse, fixed, other)
        return
    _turn(moved, by_inverse, fixed, other)
    # n . x = offset of the moved points: offset + n' . t, and by the inverse offset - n . t.
    way, sign = (fixed, -1.0) if by_inverse else (other, 1.0)
    along = way[0] * moved[0, 3] + way[1] * moved[1, 3] + way[2] * moved[2, 3]
    other[3] = fixed[3] + sign * along


@compiled
def take_off_tool(target: FloatArray, tool_inverse: FloatArray, moved: FloatArray) -> None:
    """Write D, the motion of all joints together: the target without the tool at zero motion.

    Examples
    --------
    >>> moved = np.zeros((4, 4))
    >>> take_off_tool(np.eye(4), np.eye(4), moved)
    >>> moved[:3].tolist() == np.eye(4)[:3].tolist()
    True
    """
    for row in range(3):
        for column in range(4):
            total = target[row, 3] if column == 3 else 0.0
            for k in range(3):
                total += target[row, k] * tool_inverse[k, column]
            moved[row, column] = total


@compiled
def _turn(moved: FloatArray, by_inverse: bool, way: FloatArray, turned: FloatArray) -> None:
    """Write a direction turned as a pose, or its inverse, turns."""
    for row in range(3):
        total = 0.0
        for k in range(3):
            total += (moved[k, row] if by_inverse else moved[row, k]) * way[k]
        turned[row] = total


@compiled
def _shift(moved: FloatArray, by_inverse: bool, place: FloatArray, shifted: FloatArray) -> None:
    """Write a point moved as a pose, or its inverse, moves."""
    for row in range(3):
        total = 0.0 if by_inverse else moved[row, 3]
        for k in range(3):
            total += (
                moved[k, row] * (place[k] - moved[k, 3]) if by_inverse else moved[row, k] * place[k]
            )
        shifted[row] = total
