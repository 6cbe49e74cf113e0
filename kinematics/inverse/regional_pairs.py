"""What two neighbouring joints a and b hold fixed about each other, worked out once per arm.

F_a(a) F_b(b) x = goal leaves two unknowns in the plane across an axis: y = (y1, y2), the place x is
turned to. One equation of the chain gives y1 qa = A, one gives y2 qb = B, and the turn keeps the
distance from its axis, y1^2 + y2^2 = V1^2 + V2^2. Here are the plane's directions and qa, qb, which
say how near the pair is to a special one: qa = 0 for two axes that meet, qb = 0 for parallel ones,
qa = 0 for a slide square to the axis it is paired with.

Source: Pieper, The Kinematics of Manipulators under Computer Control, 1968, in coordinates of the
common normal of the two axes; kinds with a slide worked out likewise here.
Not covered: two joints on one line, which move a point like a single joint.
"""

import math

import numpy as np

from kinematics.inverse.kernel_numbers import entries
from kinematics.inverse.tolerances import AXES_WELL_APART, EXACT_AXES
from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray

Flags = np.typing.NDArray[np.bool_]

TURN_TURN, TURN_SLIDE, SLIDE_TURN, SLIDE_SLIDE = entries(0, 4)
KIND, QA, QB, ACROSS, ALONG, SHARE_A, SHARE_B = entries(0, 7)
"""Kind of the pair; divisors of A and B; sine and cosine between the two directions; what of one
equation is in the other."""
E1, E2, HA, HB, PA, PB, U = entries(7, 28, 3)
"""Starts of vectors: directions of the plane, axes, points on them, and PB - PA."""
PAIR = 28


@compiled
def dot_at(values: FloatArray, at: int, x: float, y: float, z: float) -> float:
    """Return the product of the vector that starts at an entry with another.

    Examples
    --------
    >>> dot_at(np.array([9.0, 1.0, 2.0, 3.0]), 1, 1.0, 0.0, 1.0)
    4.0
    """
    product: float = values[at] * x + values[at + 1] * y + values[at + 2] * z
    return product


@compiled
def _write_normalised(pair: FloatArray, at: int, x: float, y: float, z: float) -> float:
    """Write a vector at length 1 and return the length it had."""
    length = math.sqrt(x * x + y * y + z * z)
    pair[at], pair[at + 1], pair[at + 2] = x / length, y / length, z / length
    return length


@compiled
def _write_cross(pair: FloatArray, at: int, one: int, other: int) -> None:
    """Write the cross product of two vectors of the record, at length 1."""
    x1, y1, z1 = pair[one], pair[one + 1], pair[one + 2]
    x2, y2, z2 = pair[other], pair[other + 1], pair[other + 2]
    _write_normalised(pair, at, y1 * z2 - z1 * y2, z1 * x2 - x1 * z2, x1 * y2 - y1 * x2)


@compiled
def _write_square_part(pair: FloatArray, at: int, vector: int, axis: int) -> float:
    """Write the direction of a vector's part square to an axis and return that part's length.

    Any direction square to the axis, and 0, where the part is rounding.
    """
    x, y, z = pair[vector], pair[vector + 1], pair[vector + 2]
    hx, hy, hz = pair[axis], pair[axis + 1], pair[axis + 2]
    along = x * hx + y * hy + z * hz
    x, y, z = x - along * hx, y - along * hy, z - along * hz
    if x * x + y * y + z * z > EXACT_AXES * EXACT_AXES:
        length = _write_normalised(pair, at, x, y, z)
        # Once more: of a short part the first pass leaves an error along the axis.
        x, y, z = pair[at], pair[at + 1], pair[at + 2]
        along = x * hx + y * hy + z * hz
        _write_normalised(pair, at, x - along * hx, y - along * hy, z - along * hz)
        return length
    if abs(hx) <= min(abs(hy), abs(hz)):
        x, y, z = 1.0 - hx * hx, -hx * hy, -hx * hz
    elif abs(hy) <= abs(hz):
        x, y, z = -hy * hx, 1.0 - hy * hy, -hy * hz
    else:
        x, y, z = -hz * hx, -hz * hy, 1.0 - hz * hz
    _write_normalised(pair, at, x, y, z)
    return 0.0


@compiled
def _write_places(pair: FloatArray, points: FloatArray) -> None:
    """Write a place on each of two turning axes, close to each other, and the vector between them.

    The feet of the common normal; where the axes are nearly parallel their feet are far away and
    badly known, and the point of b as given, with its foot on a, will do.
    """
    ux, uy, uz = (
        points[1, 0] - points[0, 0],
        points[1, 1] - points[0, 1],
        points[1, 2] - points[0, 2],
    )
    across, along = pair[ACROSS], pair[ALONG]
    on_a, on_b = dot_at(pair, HA, ux, uy, uz), dot_at(pair, HB, ux, uy, uz)
    move_a, move_b = on_a, 0.0
    if across > AXES_WELL_APART:
        move_a = (on_a - along * on_b) / (across * across)
        move_b = (along * on_a - on_b) / (across * across)
    for k in range(3):
        pair[PA + k] = points[0, k] + move_a * pair[HA + k]
        pair[PB + k] = points[1, k] + move_b * pair[HB + k]
        pair[U + k] = pair[PB + k] - pair[PA + k]


@compiled
def _write_turns(pair: FloatArray, points: FloatArray) -> None:
    """Write the plane square to b of two turning axes, and how its equations are told apart.

    u . y and ha . y are known. One direction of the plane is taken along the longer of u and ha as
    seen along b, so that one equation tells one coordinate; the share of that equation within the
    other is then at most 1, and taken out.
    """
    _write_places(pair, points)
    distance = _write_square_part(pair, E1, U, HB)
    tilt = _write_square_part(pair, E2, HA, HB)
    if distance >= tilt:
        _write_cross(pair, E2, HB, E1)
        pair[SHARE_A] = 0.0
        pair[SHARE_B] = dot_at(pair, E1, pair[HA], pair[HA + 1], pair[HA + 2]) / max(
            distance, EXACT_AXES
        )
    else:
        _write_cross(pair, E1, E2, HB)
        pair[SHARE_A] = dot_at(pair, E2, pair[U], pair[U + 1], pair[U + 2]) / tilt
        pair[SHARE_B] = 0.0
    pair[QA] = dot_at(pair, E1, pair[U], pair[U + 1], pair[U + 2])
    pair[QB] = dot_at(pair, E2, pair[HA], pair[HA + 1], pair[HA + 2])


@compiled
def write_pair(prismatic: Flags, axes: FloatArray, points: FloatArray, pair: FloatArray) -> None:
    """Write the record of joints a and b, from the first two rows.

    Parameters
    ----------
    prismatic : (2 or more,); axes : (2 or more, 3), unit; points : (2 or more, 3).
    pair : (PAIR,), written.

    Examples
    --------
    Two parallel axes 0.5 apart:

    >>> pair = np.zeros(PAIR)
    >>> axes, points = np.array([[0, 0, 1.0], [0, 0, 1.0]]), np.array([[0, 0, 0], [0.5, 0, 0]])
    >>> write_pair(np.zeros(2, dtype=bool), axes, points, pair)
    >>> pair[[QA, QB, ALONG]]
    array([0.5, 0. , 1. ])
    """
    for k in range(3):
        pair[HA + k], pair[HB + k] = axes[0, k], axes[1, k]
        pair[PA + k], pair[PB + k] = points[0, k], points[1, k]
        pair[U + k] = points[1, k] - points[0, k]
    pair[QB] = 1.0
    pair[ALONG] = dot_at(pair, HA, pair[HB], pair[HB + 1], pair[HB + 2])
    pair[ACROSS] = _write_square_part(pair, E1, HA, HB)
    if not prismatic[0] and not prismatic[1]:
        pair[KIND] = TURN_TURN
        _write_turns(pair, points)
    elif not prismatic[0]:
        pair[KIND] = TURN_SLIDE
        pair[ACROSS] = _write_square_part(pair, E1, HB, HA)
        _write_cross(pair, E2, HA, E1)
        pair[QA] = pair[ALONG]
    elif not prismatic[1]:
        pair[KIND] = SLIDE_TURN
        _write_cross(pair, E2, HB, E1)
        pair[QA] = pair[ALONG]
    else:
        pair[KIND] = SLIDE_SLIDE
        # e2 is the normal of the plane that the two slides sweep.
        _write_cross(pair, E2, HB, E1)
        pair[QA] = pair[ACROSS]
