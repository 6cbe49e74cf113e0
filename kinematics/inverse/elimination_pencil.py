"""From six equations in three joints to a matrix of sixteen rows whose eigenvalues are one joint.

Idea: the six equations E(t) u = 0 hold products u of two joints' half-angle tangents, and are
linear in cos t and sin t of the third. On the side of exp(-i t) only four directions of the
fourteen numbers matter, so two complex combinations of the six have no such part: split into real
and imaginary parts they are four equations of the first degree in x = tan((t - t0) / 2), and the
two left over are of the second. Times one more tangent: twelve equations for twelve products, of
degree 8 + 2 * 4 = 16 in x, which is the number of solutions an arm of six joints can have, and an
eigenvalue problem without any roots that mean nothing. Where axes run parallel or meet, one or two
of the six know nothing of t; they are told apart and the count stays 16.

Source: Raghavan and Roth 1993 for the twelve equations; sixteen rows instead of their 24 first by
Kohli and Osvatic, Inverse kinematics of general 6R and 5R,P serial manipulators, 1993. By complex
combinations: derived here. Primrose 1986, and Lee and Liang 1988, for 16.

Not covered: eigenvalues (numpy), what follows from one (elimination_postures.py).
"""

import math

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.elimination_companion import DOUBLED, turn_forms, write_companion
from kinematics.inverse.elimination_sides import FADING, KEPT, LEFT
from kinematics.inverse.small_matrices import reflect_columns
from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray

PRODUCTS = 9
"""Products of two joints' terms."""

ANGLE_AT_ZERO = 0.3
"""Radians at which x is 0: half a turn on from there it is infinite. Any that no arm favours."""


@compiled
def to_tangents(slides: NDArray[np.bool_], kept: FloatArray, powers: FloatArray) -> None:
    """Write six equations (6, 35 or more) in half-angle tangents of the two joints, (6, 27).

    1, cos, sin become 1, x, x^2 over 1 + x^2; terms of a joint that slides stay what they are.
    slides : (6,), which joints of the order do; the fourth and fifth count.

    Examples
    --------
    >>> kept, powers = np.zeros((6, 27)), np.empty((6, 27))
    >>> kept[0, 1] = 1.0
    >>> to_tangents(np.zeros(6, bool), kept, powers)
    >>> powers[0, :9].astype(int).tolist()
    [1, 0, -1, 0, 0, 0, 1, 0, -1]
    """
    for row in range(KEPT):
        for column in range(LEFT):
            powers[row, column] = kept[row, column]
        for joint in range(2):
            if slides[4 - joint]:
                continue
            stride = 1 if joint == 0 else 3
            for column in range(LEFT):
                if (column // stride) % 3 == 0:
                    constant = powers[row, column]
                    cosine, sine = powers[row, column + stride], powers[row, column + 2 * stride]
                    powers[row, column] = constant + cosine
                    powers[row, column + stride] = 2.0 * sine
                    powers[row, column + 2 * stride] = constant - cosine


@compiled
def write_companions(
    slides: NDArray[np.bool_],
    still: int,
    kept: FloatArray,
    powers: FloatArray,
    companions: FloatArray,
    health: FloatArray,
    leftover: FloatArray,
) -> None:
    """Write the matrices whose eigenvalues are x of the third joint, for many targets.

    Parameters
    ----------
    slides : (6,). still : how many of the six equations know nothing of the third joint, 0 to 2.
    kept : (m, 6, 35), as ``eliminate_sides`` writes them.
    powers : (m, 6, 27), written: the equations in half-angle tangents of joints four and five.
    companions : (m, 16, 16), written. health : (m,), written: the least of what was divided by, 1
        at best. leftover : (m,), written: how much of the third joint is in equations called still.

    Examples
    --------
    See elimination_orders.Order, which brings all this.
    """
    apart, order, sums = np.empty((KEPT, 43)), np.empty(16, np.int64), np.empty(48)
    linear, square, steady = np.empty((2, 4, 9)), np.empty((3, 4, 9)), np.empty((2, 9))
    table, forms = np.empty((DOUBLED, 48)), np.empty((5, DOUBLED, DOUBLED))
    for b in range(kept.shape[0]):
        to_tangents(slides, kept[b], powers[b])
        leftover[b] = _set_still_apart(still, kept[b], powers[b], apart, steady, order, sums)
        told = _split(still, apart, table, linear, square, order, sums)
        _double(still, linear, square, forms)
        if still > 0:
            _keep_to_steady(still, steady, table, forms, order, sums)
        health[b] = min(told, write_companion(still, forms, table, companions[b], order, sums))


@compiled
def _set_still_apart(
    still: int,
    kept: FloatArray,
    powers: FloatArray,
    apart: FloatArray,
    steady: FloatArray,
    order: NDArray[np.int64],
    sums: FloatArray,
) -> float:
    """Write equations as (., fading, powers), those without the third joint into ``steady``.

    Return how much of it they have, beside the others.
    """
    most, least = 0.0, 0.0
    for row in range(KEPT):
        for column in range(FADING):
            value = kept[row, LEFT + column]
            apart[row, column], apart[row, FADING + column] = value, value
            most = max(most, abs(value))
        for column in range(LEFT):
            apart[row, 2 * FADING + column] = powers[row, column]
    if still == 0:
        return 0.0
    rows = KEPT - still
    reflect_columns(apart, KEPT, FADING, rows, 2 * FADING + LEFT, order, sums)
    for row in range(still):
        for column in range(FADING):
            least = max(least, abs(apart[rows + row, FADING + column]))
        for column in range(PRODUCTS):
            steady[row, column] = apart[rows + row, 2 * FADING + column]
    return least / most if most > 0.0 else 0.0


@compiled
def _split(
    still: int,
    apart: FloatArray,
    table: FloatArray,
    linear: FloatArray,
    square: FloatArray,
    order: NDArray[np.int64],
    sums: FloatArray,
) -> float:
    """Write the equations of first and of second degree in x; return how well they are told apart.

    A complex combination u + i v of the equations whose part along exp(-i t) is 0 is orthogonal to
    the columns of a matrix twice as large; each such u, v gives a real equation, and (-v, u)
    another. What is orthogonal to all u and v is of the second degree.
    """
    rows, many, half = KEPT - still, 4 - 2 * still, FADING // 2
    for row in range(rows):
        for column in range(half):
            real, imaginary = apart[row, FADING + column], apart[row, FADING + half + column]
            table[row, column], table[row, half + column] = real, imaginary
            table[rows + row, column], table[rows + row, half + column] = -imaginary, real
    for row in range(2 * rows):
        for column in range(2 * rows):
            table[row, FADING + column] = 1.0 if row == column else 0.0
    told = reflect_columns(table, 2 * rows, FADING, FADING, FADING + 2 * rows, order, sums)
    for j in range(many):
        _write_linear(rows, table, FADING + j, apart, linear, j)
        for row in range(rows):
            # The columns that were reflected are not read again.
            apart[row, 2 * j] = table[FADING + j, FADING + row]
            apart[row, 2 * j + 1] = table[FADING + j, FADING + rows + row]
    for row in range(rows):
        for column in range(2 * many):
            table[row, column] = apart[row, column]
        for column in range(LEFT):
            table[row, 2 * many + column] = apart[row, 2 * FADING + column]
    told = min(told, reflect_columns(table, rows, 2 * many, many, 2 * many + LEFT, order, sums))
    _write_square(2 + still, many, table, square)
    return told


@compiled
def _write_square(rows: int, many: int, table: FloatArray, square: FloatArray) -> None:
    """Write the equations of second degree in x, times 1 + x^2, from below the ``many`` lines."""
    cosine, sine = math.cos(ANGLE_AT_ZERO), math.sin(ANGLE_AT_ZERO)
    for row in range(rows):
        for column in range(PRODUCTS):
            at = 2 * many + column
            constant = table[many + row, at]
            of_cos, of_sin = table[many + row, at + 9], table[many + row, at + 18]
            ahead, aside = of_cos * cosine + of_sin * sine, of_sin * cosine - of_cos * sine
            square[0, row, column] = constant + ahead
            square[1, row, column] = 2.0 * aside
            square[2, row, column] = constant - ahead


@compiled
def _write_linear(
    rows: int, table: FloatArray, at: int, apart: FloatArray, linear: FloatArray, j: int
) -> None:
    """Write the equation of first degree for u + i v in row ``at`` of the table.

    With exp(i t) = exp(i t0) (1 + i x) / (1 - i x), times 1 - i x, the real part.
    """
    cosine, sine = math.cos(ANGLE_AT_ZERO), math.sin(ANGLE_AT_ZERO)
    for column in range(PRODUCTS):
        real, imaginary, turned, across = 0.0, 0.0, 0.0, 0.0
        for row in range(rows):
            u, v = table[at, FADING + row], table[at, FADING + rows + row]
            constant = apart[row, 2 * FADING + column]
            of_cos, of_sin = (
                apart[row, 2 * FADING + 9 + column],
                apart[row, 2 * FADING + 18 + column],
            )
            real += u * constant
            imaginary += v * constant
            turned += 0.5 * (u * of_cos + v * of_sin)
            across += 0.5 * (v * of_cos - u * of_sin)
        linear[0, j, column] = real + cosine * turned - sine * across
        linear[1, j, column] = imaginary - sine * turned - cosine * across


@compiled
def _double(still: int, linear: FloatArray, square: FloatArray, forms: FloatArray) -> None:
    """Write the equations, and the same times a term of the fourth joint, in twelve products."""
    for form in range(5):
        many = 4 - 2 * still if form < 2 else 2 + still
        for row in range(many):
            for column in range(DOUBLED):
                forms[form, 2 * row, column], forms[form, 2 * row + 1, column] = 0.0, 0.0
            for column in range(PRODUCTS):
                value = linear[form, row, column] if form < 2 else square[form - 2, row, column]
                forms[form, 2 * row, column] = value
                forms[form, 2 * row + 1, column + 3] = value


@compiled
def _keep_to_steady(
    still: int,
    steady: FloatArray,
    table: FloatArray,
    forms: FloatArray,
    order: NDArray[np.int64],
    sums: FloatArray,
) -> None:
    """Turn to coordinates in which the equations without the third joint hold of themselves."""
    many = 2 * still
    for row in range(DOUBLED):
        for column in range(DOUBLED):
            table[row, many + column] = 1.0 if row == column else 0.0
        for j in range(still):
            table[row, 2 * j] = steady[j, row] if row < PRODUCTS else 0.0
            table[row, 2 * j + 1] = steady[j, row - 3] if row >= 3 else 0.0
    reflect_columns(table, DOUBLED, many, many, many + DOUBLED, order, sums)
    turn_forms(still, DOUBLED, DOUBLED - many, many, many, table, forms, sums)
