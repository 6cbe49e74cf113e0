"""From one joint's value to those of all six: the null vector, the other side, what turn is left.

Idea: where the third joint of an order is right the twelve equations leave a vector of products of
the fourth's and fifth's half-angle tangents; neighbours among the products have the tangent as
their ratio, and the direction that pairs of neighbours share most gives the joint as an angle, so
that half a turn is no special place. With three joints known, the triangle that the elimination
left behind gives cosine and sine of the first and second; the sixth is the turn that remains.

Source: Raghavan and Roth 1993; null vectors by reflections, Golub and Van Loan, Matrix
Computations, section 5.4. The shared direction: the main axis of a 2 x 2 matrix, Jacobi 1846.

Not covered: accuracy: motions made here are polished (polish.py); two solutions with one value of
the third joint, of which another order tells.
"""

import math

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.elimination_companion import DOUBLED
from kinematics.inverse.elimination_pencil import PRODUCTS
from kinematics.inverse.elimination_sides import KEPT, LEFT, RIGHT
from kinematics.inverse.small_matrices import reflect_columns
from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray

UNDETERMINED = 1e-10
"""Share of the largest diagonal entry below which a product of the right side cannot be told, and
is taken for 0: two sliding joints have products that always come together."""

FURTHEST = 1e3
"""Lengths of the arm that a joint may slide: beyond that a tangent is infinite."""


@compiled
def write_postures(
    axis: FloatArray,
    prismatic: NDArray[np.bool_],
    positions: NDArray[np.int64],
    signs: FloatArray,
    rotations: FloatArray,
    powers: FloatArray,
    tops: FloatArray,
    order: NDArray[np.int64],
    third: FloatArray,
    of: NDArray[np.int64],
    motions: FloatArray,
) -> None:
    """Write motions of all joints for values of the third one.

    Parameters
    ----------
    axis, prismatic : (6, 3), (6,), of the arm. positions : (6,), which row is first, second ...
    signs : (6,), of the row motion per unknown, by position. rotations : (m, 4, 4), tool targets
        times the tool at zero turned back. powers, tops, order : as the elimination wrote them.
    third : (k,), the unknown at the third position, rad. of : (k,), for which target.
    motions : (k, 6), written; turns are not wrapped.

    Examples
    --------
    See elimination_orders.Order, which brings all this.
    """
    table, columns, sums = np.empty((DOUBLED, 24)), np.empty(12, np.int64), np.empty(24)
    unknown, products, vector, turned = np.empty(6), np.empty(RIGHT), np.empty(3), np.empty(3)
    terms = np.empty((3, 3))
    for b in range(third.shape[0]):
        target = of[b]
        unknown[2], unknown[5] = third[b], 0.0
        _write_null_vector(powers[target], third[b], table, columns, sums)
        for joint in range(2):
            slides = prismatic[positions[3 + joint]]
            unknown[3 + joint] = _ratio(table, 3 if joint == 0 else 1, slides)
        for joint in range(3):
            value = unknown[2 + joint]
            slides = prismatic[positions[2 + joint]]
            terms[joint, 0] = 1.0
            terms[joint, 1] = value if slides else math.cos(value)
            terms[joint, 2] = value * value if slides else math.sin(value)
        _write_products(tops[target], order[target], terms, products)
        for joint in range(2):
            # Products 1 and 2 are the first joint's terms alone, 3 and 6 the second's.
            place = 0 if joint == 0 else 2
            unknown[joint] = products[place]
            if not prismatic[positions[joint]]:
                sine = products[1 if joint == 0 else 5]
                unknown[joint] = math.atan2(sine, products[place])
        for position in range(6):
            motions[b, positions[position]] = signs[position] * unknown[position]
        last = positions[5]
        motions[b, last] = _turn_left(
            axis, prismatic, last, rotations[target], motions[b], vector, turned
        )


@compiled
def _write_null_vector(
    powers: FloatArray,
    third: float,
    table: FloatArray,
    columns: NDArray[np.int64],
    sums: FloatArray,
) -> None:
    """Leave the null vector of the twelve equations in the second half of the table's last row."""
    cosine, sine = math.cos(third), math.sin(third)
    for row in range(DOUBLED):
        for column in range(DOUBLED):
            table[row, column] = 0.0
            table[row, DOUBLED + column] = 1.0 if row == column else 0.0
    for equation in range(KEPT):
        for product in range(PRODUCTS):
            value = powers[equation, product] + cosine * powers[equation, product + PRODUCTS]
            value += sine * powers[equation, product + 2 * PRODUCTS]
            table[product, 2 * equation], table[product + 3, 2 * equation + 1] = value, value
    reflect_columns(table, DOUBLED, DOUBLED, DOUBLED - 1, 2 * DOUBLED, columns, sums)


@compiled
def _ratio(table: FloatArray, stride: int, slides: bool) -> float:
    """Return the joint whose tangents are the ratios of products a stride apart."""
    least, mixed, most = 0.0, 0.0, 0.0
    for product in range(DOUBLED):
        if stride == 3 and product >= DOUBLED - 3:
            continue
        if stride == 1 and product % 3 == 2:
            continue
        one = table[DOUBLED - 1, DOUBLED + product]
        next_one = table[DOUBLED - 1, DOUBLED + product + stride]
        least, mixed, most = least + one * one, mixed + one * next_one, most + next_one * next_one
    angle = math.atan2(2.0 * mixed, least - most)
    if not slides:
        return angle
    cosine, sine = math.cos(0.5 * angle), math.sin(0.5 * angle)
    return sine / cosine if abs(cosine) * FURTHEST > abs(sine) else FURTHEST


@compiled
def _write_products(
    top: FloatArray, order: NDArray[np.int64], terms: FloatArray, products: FloatArray
) -> None:
    """Write the right side's products from the triangle and the left side's terms."""
    largest = abs(top[0, 0])
    for row in range(RIGHT - 1, -1, -1):
        total = 0.0
        for column in range(LEFT):
            term = terms[0, column // 9] * terms[1, column // 3 % 3] * terms[2, column % 3]
            total += top[row, RIGHT + column] * term
        for column in range(row + 1, RIGHT):
            total -= top[row, column] * products[order[column]]
        known = abs(top[row, row]) > UNDETERMINED * largest
        products[order[row]] = total / top[row, row] if known else 0.0


@compiled
def _turn_left(
    axis: FloatArray,
    prismatic: NDArray[np.bool_],
    last: int,
    rotation: FloatArray,
    motions: FloatArray,
    vector: FloatArray,
    turned: FloatArray,
) -> float:
    """Return the turn of one joint that brings the others' turns to the target's."""
    least = 0
    for k in range(1, 3):
        if abs(axis[last, k]) < abs(axis[last, least]):
            least = k
    # A vector across the axis: the base axis least along it, less its part along it.
    for k in range(3):
        vector[k] = (1.0 if k == least else 0.0) - axis[last, least] * axis[last, k]
        turned[k] = vector[k]
    for joint in range(last + 1, 6):
        if not prismatic[joint]:
            _turn_back(axis, joint, motions[joint], turned)
    x, y, z = turned[0], turned[1], turned[2]
    for k in range(3):
        turned[k] = rotation[k, 0] * x + rotation[k, 1] * y + rotation[k, 2] * z
    for joint in range(last):
        if not prismatic[joint]:
            _turn_back(axis, joint, motions[joint], turned)
    hx, hy, hz = axis[last, 0], axis[last, 1], axis[last, 2]
    across = hx * (vector[1] * turned[2] - vector[2] * turned[1])
    across += hy * (vector[2] * turned[0] - vector[0] * turned[2])
    across += hz * (vector[0] * turned[1] - vector[1] * turned[0])
    along = vector[0] * turned[0] + vector[1] * turned[1] + vector[2] * turned[2]
    return math.atan2(across, along)


@compiled
def _turn_back(axis: FloatArray, joint: int, angle: float, vector: FloatArray) -> None:
    """Turn a vector about a joint's axis by minus its motion."""
    kx, ky, kz = axis[joint, 0], axis[joint, 1], axis[joint, 2]
    x, y, z = vector[0], vector[1], vector[2]
    cosine, sine = math.cos(angle), -math.sin(angle)
    along = (kx * x + ky * y + kz * z) * (1.0 - cosine)
    vector[0] = x * cosine + (ky * z - kz * y) * sine + kx * along
    vector[1] = y * cosine + (kz * x - kx * z) * sine + ky * along
    vector[2] = z * cosine + (kx * y - ky * x) * sine + kz * along
