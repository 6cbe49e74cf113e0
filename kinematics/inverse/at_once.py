"""One target of an arm with a special triple, from pose to best joint values in one compiled walk.

Idea: what many targets go through kernel after kernel (solution_table.py, lost_rank.py, drive.py)
costs one target more in calls than in arithmetic. Here the same kernels are called from a compiled
one. It answers where there is nothing to be decided: no joint is free, every candidate landed to
the last digits, no solution has lost a motion, and the best posture is within travel and on no
limit. Of anything else it says nothing, and the target takes the usual way.

Source: none; the kernels have theirs. Not covered: what is said in words, and why not.
"""

from typing import Any

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.closing import MOST_PER_ANSWER, close_answers
from kinematics.inverse.lost_rank import bound_smallest
from kinematics.inverse.outer_answers import outer_answers
from kinematics.inverse.polish import keep_distinct, polish
from kinematics.inverse.regional_rows import MOST_ROWS_FOUND
from kinematics.inverse.solution_table import FEW_STEPS, NOT_TRIED
from kinematics.inverse.tolerances import LOOSE, NEARLY_LANDED, SAME_MOTIONS, WORTH_POLISHING
from kinematics.kernels.branch_signs import branch_codes, branch_signs
from kinematics.kernels.compiler import compiled
from kinematics.kernels.whole_turns import INSIDE, ROUNDED, WORKING, postures_of
from kinematics.number_checks import FloatArray

MARGIN, POSITION_ERROR, ANGLE_ERROR, BRANCH, TOLD = 6, 7, 8, 9, 10
"""Of what is written of the best posture: after its six joint values the margin, errors in metres
and radians, and the number of its branch, -1 where that is not asked for; and the length of it."""

_MOST_SOLUTIONS = 16
"""As many as six joints can have."""

_Arguments = tuple[Any, ...]


@compiled
def answer_at_once(
    triple: _Arguments,
    drive: _Arguments,
    branch: _Arguments,
    length: float,
    within: float,
    spans: FloatArray,
    near: FloatArray,
    by_nearness: bool,
    named: bool,
    frame_in_base: FloatArray,
    tool_in_frame: FloatArray,
    told: FloatArray,
) -> int:
    """Write the best posture of one target; return how many there are.

    Parameters
    ----------
    triple : of ``Peeled``, as a plain tuple; its table is exact. drive : of ``Drive.for_kernel``.
    branch : what ``branch_signs`` and ``branch_codes`` take of an arm, and how many ways may share
        all words.
    length : L, metres. within : smallest singular value of a solution that has not lost a motion.
    spans : (6,), of ``Drive``. near : (6,), joint values that postures are ranked by nearness to,
        if ``by_nearness``. named : whether the branch is asked for.
    frame_in_base : (4, 4); tool_in_frame : (1, 4, 4), the target; metres.
    told : (TOLD,), written.

    Returns
    -------
    count of postures within travel; 0 where the usual way must be taken.
    """
    target, motions = np.empty((1, 4, 4)), np.empty((_MOST_SOLUTIONS, 6))
    for row in range(4):
        for column in range(4):
            total = 0.0
            for inner in range(4):
                total += frame_in_base[row, inner] * tool_in_frame[0, inner, column]
            target[0, row, column] = total / length if column == 3 and row < 3 else total
    gaps = np.empty((_MOST_SOLUTIONS, 2))
    solutions = _solutions(triple, within, target, motions, gaps)
    if solutions == 0:
        return 0
    motions = motions[:solutions]
    told[BRANCH] = -1.0
    codes = np.zeros(solutions, np.int64)
    if named:
        _name(motions, branch, codes)
    for k in range(solutions):
        for i in range(6):
            if triple[2][i]:
                motions[k, i] *= length
    joint_drive, passive, limits, ends, row_box, middle, budget = drive
    values, source, margin, flags, seen, any_clipped = postures_of(
        motions, joint_drive, passive, limits, ends, row_box, middle, budget
    )
    if any_clipped or seen.min() < 0.0:
        return 0
    count, best = _best(values, margin, flags, near, spans, by_nearness)
    if count == 0 or flags[best] & WORKING or margin[best] > 0.5:
        return 0
    for j in range(6):
        told[j] = values[best, j]
    told[MARGIN] = margin[best]
    told[POSITION_ERROR], told[ANGLE_ERROR] = gaps[source[best], 0] * length, gaps[source[best], 1]
    if named:
        told[BRANCH] = codes[source[best]]
    return count


@compiled
def _name(motions: FloatArray, branch: _Arguments, codes: NDArray[np.int64]) -> None:
    """Write the branch of each of one target's motions, lengths over L."""
    axis, point, prismatic, places, features, turned, level, names = branch
    signs = np.empty((len(motions), len(features)))
    branch_signs(motions, axis, point, prismatic, places, features, signs)
    branch_codes(signs, turned, level, np.zeros(len(motions), np.intp), names, codes)


@compiled
def _best(
    values: FloatArray,
    margin: FloatArray,
    flags: NDArray[np.int64],
    near: FloatArray,
    spans: FloatArray,
    by_nearness: bool,
) -> tuple[int, int]:
    """Return how many postures are within travel, and which ranks first, as ``best_first`` does."""
    count, best, best_rank, best_margin = 0, -1, 0.0, 0.0
    for p in range(len(flags)):
        if flags[p] & INSIDE:
            left, rank = np.round(margin[p] * ROUNDED), 0.0
            if by_nearness:
                for j in range(6):
                    rank = max(rank, abs(values[p, j] - near[j]) / spans[j])
                rank = -np.round(rank * ROUNDED)
            if best < 0 or rank > best_rank or (rank == best_rank and left > best_margin):
                best, best_rank, best_margin = p, rank, left
            count += 1
    return count, best


@compiled
def _solutions(
    triple: _Arguments, within: float, target: FloatArray, motions: FloatArray, gaps: FloatArray
) -> int:
    """Write all motions of one target, lengths over L; return how many, 0 where not sure."""
    axis, point, prismatic, tool_at_zero, solved_axis, solved_point, tool_inverse = triple[:7]
    how, rows, sign, slides, axes, points, pair, fixed, closing, slack = triple[7:]
    answers, of = np.empty((MOST_ROWS_FOUND + 1, 4)), np.empty(MOST_ROWS_FOUND + 1, np.int64)
    flags, excess, left = np.zeros(1, np.int64), np.full(1, NOT_TRIED), np.full(1, NOT_TRIED)
    _, found = outer_answers(
        how, slides, axes, points, pair, fixed, tool_inverse, slack, target, 0, answers, of, flags
    )
    if found == 0 or flags[0] != 0:
        return 0
    room = MOST_PER_ANSWER * found
    tried, tried_of, tried_gaps = np.empty((room, 6)), np.empty(room, np.int64), np.empty((room, 2))
    count = close_answers(
        solved_axis, solved_point, prismatic, tool_inverse, how, rows, sign, closing, slack,
        target, answers[:found], of, flags, tried, tried_of, excess,
    )  # fmt: skip
    tried, tried_of, tried_gaps = tried[:count], tried_of[:count], tried_gaps[:count]
    lines = axis, point, prismatic, tool_at_zero
    polish(*lines, target, tried_of, FEW_STEPS, WORTH_POLISHING, tried, tried_gaps)
    kept = np.empty(count, np.bool_)
    keep_distinct(prismatic, tried_of, SAME_MOTIONS, tried, tried_gaps, kept, left)
    if left[0] <= NEARLY_LANDED:
        return 0
    solutions = 0
    for row in range(count):
        if kept[row]:
            if solutions == _MOST_SOLUTIONS or max(tried_gaps[row, 0], tried_gaps[row, 1]) > LOOSE:
                return 0
            for i in range(6):
                motions[solutions, i] = tried[row, i]
            for i in range(2):
                gaps[solutions, i] = tried_gaps[row, i]
            solutions += 1
    jacobians, at_least = np.empty((solutions, 6, 6)), np.empty(solutions)
    if bound_smallest(*lines, motions[:solutions], within, jacobians, at_least) < within:
        return 0
    return solutions
