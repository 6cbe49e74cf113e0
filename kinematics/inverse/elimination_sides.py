"""Both sides of the loop of six joints as numbers that three and two of the joints leave open.

Idea: let joint F6 be the last of the six in some order around the loop. It leaves its own line
alone, so F3 F4 F5 must bring that line where the other two, turned back, and the target bring it:
fifteen numbers on each side, of which the first is 1. The left side is linear in 27 products of
1, cos, sin (or 1, v, v^2) of three joints, the right in 9 of two. One reflection after another
takes the 8 that are not constant out of six of the fourteen equations: what remains speaks of
three joints alone.

Source: Raghavan and Roth 1993, with line forms in the place of their frames (line_forms.py).

Not covered: which order of the joints to take (elimination_orders.py), what the six equations are
good for (elimination_pencil.py).
"""

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.line_forms import FORM, TERMS, write_motion_matrix
from kinematics.inverse.small_matrices import reflect_columns
from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray

EQUATIONS, LEFT, RIGHT, FADING = 14, 27, 8, 8
"""Equations; products on the left, the constant first; products on the right but the constant;
and columns that carry along what the third joint's cosine and sine meet (see ``Order``)."""

KEPT = EQUATIONS - RIGHT
"""Equations that are left when the products on the right are gone."""

BEFORE_FIRST, AFTER_FIRST, AFTER_SECOND, AFTER_THIRD, AFTER_FOURTH, AFTER_FIFTH = 6, 1, 2, 3, 4, 5
"""Where among the joints of an order the target stands: after that many of them; behind the sixth
is before the first."""


@compiled
def write_sides(
    matrices: FloatArray,
    start: FloatArray,
    still_left: FloatArray,
    still_right: FloatArray,
    slot: int,
    moved: FloatArray,
    work: FloatArray,
    motion: FloatArray,
    left: FloatArray,
    right: FloatArray,
) -> None:
    """Write both sides for one target.

    Parameters
    ----------
    matrices : (6, 3, 15, 15), of the joints in their order. start : (15,), the sixth one's line.
    still_left, still_right : the side that the target has no part in; the other is not read.
    slot : where the target stands. moved : (4, 4), by what it moves the line there.
    work : (2, 15, 27), motion : (15, 15), overwritten.
    left : (15, 27), written; column 9 i + 3 j + k for terms i, j, k of joints three, four, five.
    right : (15, 27), written in its first 9 columns; 3 i + j for terms of joints two and one.

    Examples
    --------
    >>> same = np.zeros((6, 3, 15, 15))
    >>> same[:, 0] = np.eye(15)
    >>> start, left, right = np.arange(15.0), np.empty((15, 27)), np.empty((15, 27))
    >>> work = np.empty((2, 15, 27)), np.empty((15, 15))
    >>> write_sides(same, start, left, right, 1, np.eye(4), *work, left, right)
    >>> bool((right[:, 0] == start).all()), float(np.abs(right[:, 1:9]).max())
    (True, 0.0)
    """
    on_right = slot in (BEFORE_FIRST, AFTER_FIRST, AFTER_SECOND)
    write_motion_matrix(moved, motion)
    for row in range(FORM):
        work[0, row, 0] = start[row]
        for column in range(LEFT):
            if on_right:
                left[row, column] = still_left[row, column]
            elif column <= RIGHT:
                right[row, column] = still_right[row, column]
    many = 1
    if on_right:
        for step in range(2):
            if slot == (BEFORE_FIRST if step == 0 else AFTER_FIRST):
                _move(motion, many, work)
            many = _spread(matrices[step], many, work[0], work[1])
            _copy(work[1], many, work[0])
        if slot == AFTER_SECOND:
            _move(motion, many, work)
        _copy(work[0], many, right)
        return
    for position in (4, 3, 2):
        if slot == position + 1:
            _move(motion, many, work)
        many = _spread(matrices[position], many, work[0], work[1])
        _copy(work[1], many, work[0])
    _copy(work[0], many, left)


@compiled
def _spread(terms: FloatArray, many: int, forms: FloatArray, spread: FloatArray) -> int:
    """Write each of a joint's three matrices times many forms (15, many); return how many then."""
    for row in range(FORM):
        for term in range(TERMS):
            for column in range(many):
                spread[row, term * many + column] = 0.0
            for inner in range(FORM):
                value = terms[term, row, inner]
                if value != 0.0:
                    for column in range(many):
                        spread[row, term * many + column] += value * forms[inner, column]
    return TERMS * many


@compiled
def _move(motion: FloatArray, many: int, work: FloatArray) -> None:
    """Move the forms (15, many) in the first half of ``work`` by a motion matrix."""
    for row in range(FORM):
        for column in range(many):
            work[1, row, column] = 0.0
        for inner in range(FORM):
            value = motion[row, inner]
            if value != 0.0:
                for column in range(many):
                    work[1, row, column] += value * work[0, inner, column]
    _copy(work[1], many, work[0])


@compiled
def _copy(given: FloatArray, many: int, taken: FloatArray) -> None:
    for row in range(FORM):
        for column in range(many):
            taken[row, column] = given[row, column]


@compiled
def eliminate_sides(
    matrices: FloatArray,
    start: FloatArray,
    still_left: FloatArray,
    still_right: FloatArray,
    fading: FloatArray,
    slot: int,
    moved: FloatArray,
    order: NDArray[np.int64],
    tops: FloatArray,
    kept: FloatArray,
    spans: FloatArray,
) -> None:
    """Write, for many targets, the equations with the right side taken out of six of them.

    Parameters
    ----------
    matrices, start, still_left, still_right, slot : as for ``write_sides``.
    fading : (14, 8), columns carried along. moved : (m, 4, 4), of each target.
    order : (m, 8), written: which product of the right side stands in which column of ``tops``.
    tops : (m, 8, 35), written: the triangle of the right side's products, and the left side.
    kept : (m, 6, 35), written: the left side of the equations without them, and ``fading``.
    spans : (m,), written: how well the right side's products span, 1 at best.

    Examples
    --------
    See elimination_orders.Order, which brings all this.
    """
    work, motion = np.empty((2, FORM, LEFT)), np.empty((FORM, FORM))
    left, right = np.empty((FORM, LEFT)), np.empty((FORM, LEFT))
    columns = RIGHT + LEFT + FADING
    table, sums = np.empty((EQUATIONS, columns)), np.empty(columns)
    for b in range(moved.shape[0]):
        write_sides(
            matrices, start, still_left, still_right, slot, moved[b], work, motion, left, right
        )
        for row in range(EQUATIONS):
            # The first number of each form is 1 on both sides and says nothing.
            for column in range(RIGHT):
                table[row, column] = right[row + 1, column + 1]
                table[row, RIGHT + LEFT + column] = fading[row, column]
            for column in range(LEFT):
                table[row, RIGHT + column] = left[row + 1, column]
            table[row, RIGHT] -= right[row + 1, 0]
        spans[b] = reflect_columns(table, EQUATIONS, RIGHT, RIGHT, columns, order[b], sums)
        for row in range(RIGHT):
            for column in range(RIGHT + LEFT):
                tops[b, row, column] = table[row, column]
        for row in range(KEPT):
            for column in range(LEFT + FADING):
                kept[b, row, column] = table[RIGHT + row, RIGHT + column]
