"""Twelve equations, of first and second degree in x, as one matrix with sixteen eigenvalues x.

Idea: in coordinates w = (a, b) in which the equations of first degree hold x only with a, they say
x a = K w. So x^2 a is known as well, the others hold x^2 b alone besides, and (a, b, x b) is what
the matrix multiplies by x. As many rows as there are solutions: none of its eigenvalues is made up
by the way it was written down.

Source: Gohberg, Lancaster and Rodman, Matrix Polynomials, 1982, for companions; reduced in this
way here. Kohli and Osvatic 1993 have sixteen rows for arms of six joints.

Not covered: where the equations come from (elimination_pencil.py), eigenvalues (numpy).
"""

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.small_matrices import reflect_columns, solve_rows
from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray

DOUBLED, ROOTS = 12, 16
"""Products that the equations hold, and their degree in x."""


@compiled
def turn_forms(
    still: int,
    columns: int,
    kept: int,
    first_row: int,
    first_column: int,
    table: FloatArray,
    forms: FloatArray,
    sums: FloatArray,
) -> None:
    """Write five forms in the coordinates whose axes are rows of the table.

    Parameters
    ----------
    still : how many equations, before doubling, know nothing of x, 0 to 2.
    columns, kept : coordinates before and after. first_row, first_column : of the axes, in table.
    forms : (5, 12, 12), of x^0 and x^1 in the equations of first degree, x^0 to x^2 in the others.
    sums : at least (12,), overwritten.
    """
    for form in range(5):
        many = 8 - 4 * still if form < 2 else 4 + 2 * still
        for row in range(many):
            for axis in range(kept):
                total = 0.0
                for column in range(columns):
                    total += (
                        forms[form, row, column] * table[first_row + axis, first_column + column]
                    )
                sums[axis] = total
            for axis in range(kept):
                forms[form, row, axis] = sums[axis]


@compiled
def write_companion(
    still: int,
    forms: FloatArray,
    table: FloatArray,
    companion: FloatArray,
    order: NDArray[np.int64],
    sums: FloatArray,
) -> float:
    """Write the matrix (16, 16); return the least of what was divided by, over the largest.

    Parameters
    ----------
    still, forms, sums : as for ``turn_forms``; forms are overwritten.
    table : (12, 48), order : (16,), overwritten. companion : (16, 16), written.

    Examples
    --------
    Twelve equations x v_i = i v_i, of which four are squared, x^2 v_i = i^2 v_i:

    >>> forms, number = np.zeros((5, 12, 12)), np.arange(12.0)
    >>> for i in range(8):
    ...     forms[0, i, i], forms[1, i, i] = -number[i], 1.0
    >>> for i in range(4):
    ...     forms[2, i, 8 + i], forms[4, i, 8 + i] = -(number[8 + i] ** 2), 1.0
    >>> work, companion = (np.empty((12, 48)), np.empty(16, np.int64)), np.empty((16, 16))
    >>> write_companion(0, forms, work[0], companion, work[1], np.empty(48))
    1.0
    >>> np.sort(np.linalg.eigvals(companion)).round(6).astype(int).tolist()
    [-11, -10, -9, -8, 0, 1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11]
    """
    lines, squares = 8 - 4 * still, 4 + 2 * still
    n = lines + squares
    for row in range(n):
        for column in range(lines):
            table[row, column] = forms[1, column, row]
        for column in range(n):
            table[row, lines + column] = 1.0 if row == column else 0.0
    if lines:
        reflect_columns(table, n, lines, lines, lines + n, order, sums)
        turn_forms(still, n, n, 0, lines, table, forms, sums)
    for row in range(lines):
        for column in range(lines):
            table[row, column] = forms[1, row, column]
        for column in range(n):
            table[row, lines + column] = forms[0, row, column]
    worst = solve_rows(table, lines, lines + n)
    for row in range(lines):
        for column in range(n):
            forms[0, row, column] = -table[row, lines + column]
    _square_rows(lines, squares, forms, table)
    worst = min(worst, solve_rows(table, squares, ROOTS + squares))
    for row in range(ROOTS):
        for column in range(ROOTS):
            if row < lines:
                value = forms[0, row, column] if column < n else 0.0
            elif row < n:
                value = 1.0 if column == row + squares else 0.0
            else:
                value = -table[row - n, squares + column]
            companion[row, column] = value
    return worst


@compiled
def _square_rows(lines: int, squares: int, forms: FloatArray, table: FloatArray) -> None:
    """Write the square equations as what multiplies x^2 b, then w, then x b."""
    n = lines + squares
    for row in range(squares):
        for column in range(n):
            total = 0.0
            for inner in range(lines):
                total += forms[4, row, inner] * forms[0, inner, column]
            # Of x^2 a = x K w, what comes by x a and by x b; with what is of the first power.
            table[row, squares + n + column] = total + forms[3, row, column]
        for column in range(squares):
            table[row, column] = forms[4, row, lines + column]
        for column in range(n):
            total = forms[2, row, column]
            for inner in range(lines):
                total += table[row, squares + n + inner] * forms[0, inner, column]
            table[row, squares + column] = total
        for column in range(squares):
            table[row, squares + n + column] = table[row, squares + n + lines + column]
