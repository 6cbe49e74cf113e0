"""Linear equations of a few unknowns, many or few: least squares, or least motion, by reflections.

Idea: a reflection turns a column onto one coordinate without changing any length; one after the
other leaves a triangle, and triangles are solved from their corner. Equations that are too many
are met as well as can be (least squares); of unknowns that are too many the shortest are taken
(least norm), with the triangle of the transposed. One square system is both, and the reflections
tell the sign of its determinant along the way: two postures on one branch share it.

Source: Householder 1958; Golub and Van Loan, Matrix Computations, sections 5.2 and 5.6.
Not covered: lost rank; who may meet it adds damping as further equations.
"""

import math

from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray

_TINY = 1e-300
"""Stands for a diagonal entry that is 0, so that nothing is divided by it."""


@compiled
def triangle(tall: FloatArray, diagonal: FloatArray) -> float:
    """Bring a tall matrix to a triangle, in place, by reflections; return their sign.

    Parameters
    ----------
    tall : (p, q), p >= q, overwritten: above the diagonal the triangle, from it down the unit
        vectors that were reflected along.
    diagonal : (q,), written: of the triangle.

    Returns
    -------
    sign : of the determinant where p = q; its size says nothing.

    Examples
    --------
    >>> import numpy as np
    >>> diagonal = np.empty(2)
    >>> triangle(np.array([[0.0, 3.0], [2.0, 0.0]]), diagonal), np.abs(diagonal)
    (-1.0, array([2., 3.]))
    """
    p, q = tall.shape
    sign = 1.0
    for column in range(q):
        square = 0.0
        for row in range(column, p):
            square += tall[row, column] * tall[row, column]
        norm = math.sqrt(square)
        head = tall[column, column]
        # Away from the head, so that nothing cancels.
        turned = -norm if head > 0.0 else norm
        diagonal[column] = turned if norm > 0.0 else _TINY
        if turned < 0.0:
            sign = -sign
        tall[column, column] = head - turned
        size = math.sqrt(max(2.0 * norm * (norm + abs(head)), 0.0))
        if size == 0.0:
            continue
        sign = -sign
        for row in range(column, p):
            tall[row, column] /= size
        for other in range(column + 1, q):
            along = 0.0
            for row in range(column, p):
                along += tall[row, column] * tall[row, other]
            for row in range(column, p):
                tall[row, other] -= 2.0 * along * tall[row, column]
    return sign


@compiled
def least_squares(
    tall: FloatArray, diagonal: FloatArray, wanted: FloatArray, solution: FloatArray
) -> None:
    """Write x with |A x - wanted| least, A (p, q) being what ``triangle`` overwrote.

    Parameters
    ----------
    wanted : (p,), overwritten. solution : (q,).

    Examples
    --------
    >>> import numpy as np
    >>> tall, diagonal, x = np.array([[1.0], [1.0]]), np.empty(1), np.empty(1)
    >>> _ = triangle(tall, diagonal)
    >>> least_squares(tall, diagonal, np.array([1.0, 2.0]), x)
    >>> x.round(12)
    array([1.5])
    """
    q = tall.shape[1]
    for column in range(q):
        _reflect(tall, column, wanted)
    for row in range(q - 1, -1, -1):
        value = wanted[row]
        for column in range(row + 1, q):
            value -= tall[row, column] * solution[column]
        solution[row] = value / diagonal[row]


@compiled
def least_norm(
    tall: FloatArray, diagonal: FloatArray, wanted: FloatArray, solution: FloatArray
) -> None:
    """Write the shortest x with A x = wanted; A^T (p, q) being what ``triangle`` overwrote.

    Parameters
    ----------
    wanted : (q,). solution : (p,).

    Examples
    --------
    >>> import numpy as np
    >>> tall, diagonal, x = np.array([[1.0], [1.0]]), np.empty(1), np.empty(2)
    >>> _ = triangle(tall, diagonal)
    >>> least_norm(tall, diagonal, np.array([3.0]), x)
    >>> x.round(12)
    array([1.5, 1.5])
    """
    p, q = tall.shape
    for row in range(p):
        solution[row] = 0.0
    for row in range(q):
        value = wanted[row]
        for column in range(row):
            value -= tall[column, row] * solution[column]
        solution[row] = value / diagonal[row]
    for column in range(q - 1, -1, -1):
        _reflect(tall, column, solution)


@compiled
def _reflect(tall: FloatArray, column: int, vector: FloatArray) -> None:
    """Reflect a vector (p,) along the unit vector that a column holds."""
    along = 0.0
    for row in range(column, tall.shape[0]):
        along += tall[row, column] * vector[row]
    for row in range(column, tall.shape[0]):
        vector[row] -= 2.0 * along * tall[row, column]
