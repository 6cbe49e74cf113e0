"""Orthogonal reduction and elimination of matrices of some ten rows, inside compiled loops.

Idea: a reflection takes all of a column onto its first entry and leaves lengths alone; one after
another, the longest column first, they bring a matrix to triangular form, and whatever stands to
the right of it is reflected along. The rows below the triangle are then free of those columns:
so a null space is read off without ever being asked for.

Source: Householder, Unitary triangularization of a nonsymmetric matrix, 1958; with the longest
column first, Businger and Golub, Linear least squares solutions by Householder transformations,
1965. Elimination with the largest pivot: Golub and Van Loan, Matrix Computations, section 3.4.

Not covered: matrices so large that blocks would pay, and memory: the caller brings it all.
"""

import math

import numpy as np
from numpy.typing import NDArray

from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray

LEAST_PIVOT = 1e-60
"""A pivot below it is taken for it: what comes out is huge, and told so, but stays a number even
where three such are multiplied."""

_MOST_PIVOT = 1e60


@compiled
def reflect_columns(
    table: FloatArray,
    rows: int,
    pool: int,
    steps: int,
    columns: int,
    order: NDArray[np.int64],
    sums: FloatArray,
) -> float:
    """Bring the longest of the first columns to triangular form; return how well they span.

    Parameters
    ----------
    table : at least (rows, columns), worked on in place.
    pool : so many first columns are reduced, in an order of their own.
    steps : so many of them; the rest of the pool must then have been used up, or not matter.
    columns : the columns from pool to here are reflected along.
    order : at least (pool,), written: which column of the pool stands where.
    sums : at least (columns,), overwritten.

    Returns
    -------
    The last diagonal entry over the first, 0 where the columns do not span so many directions.

    Examples
    --------
    A vector orthogonal to (3, 4), below the triangle:

    >>> table = np.array([[3.0, 1, 0], [4, 0, 1]])
    >>> reflect_columns(table, 2, 1, 1, 3, np.empty(1, np.int64), np.empty(3))
    1.0
    >>> np.abs(table[1]).round(9)
    array([0. , 0.8, 0.6])
    """
    first, last = 1.0, 1.0
    for column in range(pool):
        order[column] = column
    for step in range(steps):
        longest = _bring_longest(table, rows, pool, step, order, sums)
        length = math.sqrt(longest)
        last = length
        if step == 0:
            first = length
        if length < LEAST_PIVOT:
            return 0.0
        head = table[step, step]
        end = -length if head >= 0.0 else length
        table[step, step] = head - end
        factor = 1.0 / (length * (length + abs(head)))
        for column in range(step + 1, columns):
            sums[column] = 0.0
        for row in range(step, rows):
            value = table[row, step] * factor
            for column in range(step + 1, columns):
                sums[column] += value * table[row, column]
        for row in range(step, rows):
            value = table[row, step]
            for column in range(step + 1, columns):
                table[row, column] -= value * sums[column]
            table[row, step] = 0.0
        table[step, step] = end
    return last / first


@compiled
def _bring_longest(
    table: FloatArray, rows: int, pool: int, step: int, order: NDArray[np.int64], sums: FloatArray
) -> float:
    """Exchange column ``step`` with the longest from there on; return its squared length."""
    for column in range(step, pool):
        sums[column] = 0.0
    for row in range(step, rows):
        for column in range(step, pool):
            sums[column] += table[row, column] * table[row, column]
    best = step
    for column in range(step + 1, pool):
        if sums[column] > sums[best]:
            best = column
    if best != step:
        order[step], order[best] = order[best], order[step]
        for row in range(rows):
            table[row, step], table[row, best] = table[row, best], table[row, step]
    return sums[best]  # type: ignore[no-any-return]


@compiled
def solve_rows(table: FloatArray, rows: int, columns: int) -> float:
    """Solve A X = B in place; return how far A is from having no inverse.

    Parameters
    ----------
    table : at least (rows, columns): A in the first ``rows`` columns, B in the others, where X
        stands afterwards. Rows are exchanged as the largest pivots ask.

    Returns
    -------
    The smallest pivot over the largest.

    Examples
    --------
    >>> table = np.array([[0.0, 2, 6], [1, 0, 5]])
    >>> solve_rows(table, 2, 3), table[:, 2].tolist()
    (0.5, [5.0, 3.0])
    """
    least, most = _MOST_PIVOT, LEAST_PIVOT
    for step in range(rows):
        best = step
        for row in range(step + 1, rows):
            if abs(table[row, step]) > abs(table[best, step]):
                best = row
        if best != step:
            for column in range(step, columns):
                table[step, column], table[best, column] = (
                    table[best, column],
                    table[step, column],
                )
        pivot = table[step, step]
        least, most = min(least, abs(pivot)), max(most, abs(pivot))
        if abs(pivot) < LEAST_PIVOT:
            pivot = LEAST_PIVOT
        share = 1.0 / pivot
        for column in range(step + 1, columns):
            table[step, column] *= share
        for row in range(rows):
            value = table[row, step]
            if row == step or value == 0.0:
                continue
            for column in range(step + 1, columns):
                table[row, column] -= value * table[step, column]
    return least / most if rows else 1.0
