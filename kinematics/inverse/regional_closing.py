"""From a value of joint c to the whole answer: where a and b must stand, and which joint is free.

The terms of the equations tell the place y that joint b turns the start to (or the slide leaves it
at); one arc tangent tells b and one tells a. Where the pair is special one coordinate of y is known
by its square alone, and both signs are answers. Where what a joint has to turn lies on its axis,
that joint is free, and samples of it are written.

Source: Pieper 1968; the angle between two vectors by its sine and cosine both, Kahan, Computing
Cross-Products and Rotations, 2008.
Not covered: finding c (regional.py).
"""

import math

from kinematics.inverse.kernel_numbers import entries
from kinematics.inverse.regional_equations import (
    BESIDE,
    V1,
    V2,
    A,
    B,
)
from kinematics.inverse.regional_pairs import (
    ACROSS,
    E1,
    E2,
    HA,
    HB,
    KIND,
    PA,
    QA,
    QB,
    SLIDE_TURN,
    TURN_SLIDE,
    TURN_TURN,
    U,
)
from kinematics.inverse.regional_rows import (
    A_FREE,
    B_FREE,
    NONE_FREE,
    REGULAR,
    flags_of,
    put,
    put_samples,
)
from kinematics.inverse.tolerances import EXACT_AXES, NEARLY_FREE
from kinematics.inverse.trig_roots import (
    CONSTANT,
    COSINE,
    ONE_ROOT,
    SINE,
    SLACK,
    WEIGHT,
)
from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray

(NO_TERM,) = entries(-1, 0)


@compiled
def special_term(pair: FloatArray) -> int:
    """Return the term that is all of the sum for axes that meet or run parallel, or NO_TERM."""
    if abs(pair[QA]) <= EXACT_AXES:
        return A
    return B if abs(pair[QB]) <= EXACT_AXES else NO_TERM


@compiled
def _term(equations: FloatArray, row: int, cosine: float, sine: float) -> float:
    """Return a term at a value of c."""
    swing = equations[row, COSINE] * cosine + equations[row, SINE] * sine
    term: float = equations[row, CONSTANT] + swing
    return term


@compiled
def _slope(equations: FloatArray, row: int, cosine: float, sine: float) -> float:
    """Return the derivative of a term by a turning c; 0 for a sliding one."""
    slope: float = equations[row, SINE] * cosine - equations[row, COSINE] * sine
    return slope


@compiled
def sum_of_squares(equations: FloatArray, cosine: float, sine: float) -> tuple[float, float]:
    """Return the sum of squares, and by how much the slack may change it."""
    value, off = 0.0, 0.0
    for row in range(BESIDE):
        term, s = _term(equations, row, cosine, sine), equations[row, SLACK]
        value += equations[row, WEIGHT] * term * term
        off += abs(equations[row, WEIGHT]) * s * (2.0 * abs(term) + s)
    return value, off


@compiled
def fits(equations: FloatArray, special: int, cosine: float, sine: float, slack: float) -> bool:
    """Return whether a value of c that was not found as a root fits, within ``slack`` more."""
    for row in range(BESIDE):
        equations[row, SLACK] += slack
    if special == NO_TERM:
        value, off = sum_of_squares(equations, cosine, sine)
        fit = abs(value) <= off
    else:
        fit = abs(_term(equations, special, cosine, sine)) <= equations[special, SLACK]
    for row in range(BESIDE):
        equations[row, SLACK] -= slack
    return fit


@compiled
def swing_of_goal(pair: FloatArray, is_plane: bool, goal: FloatArray) -> float:
    """Return how far a turning joint a swings the goal; 1 of a slide."""
    if pair[KIND] == SLIDE_TURN:
        return 1.0
    x, y, z = goal[0], goal[1], goal[2]
    if not is_plane:
        x, y, z = x - pair[PA], y - pair[PA + 1], z - pair[PA + 2]
    hx, hy, hz = pair[HA], pair[HA + 1], pair[HA + 2]
    sx, sy, sz = hy * z - hz * y, hz * x - hx * z, hx * y - hy * x
    return math.sqrt(sx * sx + sy * sy + sz * sz)


@compiled
def _angle_of_a(
    pair: FloatArray, is_plane: bool, goal: FloatArray, y1: float, y2: float, height: float
) -> float:
    """Return the turn of joint a that brings y to the goal."""
    hx, hy, hz = pair[HA], pair[HA + 1], pair[HA + 2]
    gx, gy, gz = goal[0], goal[1], goal[2]
    x = y1 * pair[E1] + y2 * pair[E2] + height * pair[HB]
    y = y1 * pair[E1 + 1] + y2 * pair[E2 + 1] + height * pair[HB + 1]
    z = y1 * pair[E1 + 2] + y2 * pair[E2 + 2] + height * pair[HB + 2]
    if not is_plane:
        gx, gy, gz = gx - pair[PA], gy - pair[PA + 1], gz - pair[PA + 2]
        x, y, z = x + pair[U], y + pair[U + 1], z + pair[U + 2]
    sx, sy, sz = hy * gz - hz * gy, hz * gx - hx * gz, hx * gy - hy * gx
    # h . (y x g) and (h x y) . (h x g): sine and cosine of the turn, scaled alike.
    sine = -(x * sx + y * sy + z * sz)
    cosine = sx * (hy * z - hz * y) + sy * (hz * x - hx * z) + sz * (hx * y - hy * x)
    return math.atan2(sine, cosine)


@compiled
def _put_closed(
    pair: FloatArray,
    is_plane: bool,
    goal: FloatArray,
    equations: FloatArray,
    c: float,
    cosine: float,
    sine: float,
    y1: float,
    y2: float,
    free: int,
    out: FloatArray,
    count: int,
) -> tuple[int, int]:
    """Write the answer for c, given with its cosine and sine, and the place y."""
    v1, v2 = _term(equations, V1, cosine, sine), _term(equations, V2, cosine, sine)
    beside = _term(equations, BESIDE, cosine, sine)
    turn = math.atan2(y2 * v1 - y1 * v2, y1 * v1 + y2 * v2)
    swing = math.sqrt(v1 * v1 + v2 * v2)
    flags = flags_of(swing)
    a, place = turn, turn
    if pair[KIND] == TURN_TURN:
        a = _angle_of_a(pair, is_plane, goal, y1, y2, beside)
        spare = B_FREE if swing <= NEARLY_FREE else NONE_FREE
        if spare == NONE_FREE and swing_of_goal(pair, is_plane, goal) <= NEARLY_FREE:
            spare = A_FREE
    elif pair[KIND] == TURN_SLIDE:
        a, place = -turn, beside + pair[ACROSS] * y1
        spare = A_FREE if swing <= NEARLY_FREE else NONE_FREE
    else:
        a = beside - pair[ACROSS] * y1
        spare = B_FREE if swing <= NEARLY_FREE else NONE_FREE
    if free == NONE_FREE and spare != NONE_FREE:
        return put_samples(out, count, a, place, c, spare), flags
    return put(out, count, a, place, c, free), flags


@compiled
def _leeway(
    pair: FloatArray, equations: FloatArray, special: int, cosine: float, sine: float
) -> float:
    """Return by how much the slack may change the one coordinate of y against the length of V.

    By itself, and by moving the root c: most where c is at an extremum of the special term.
    """
    other, divisor = (B, pair[QB]) if special == A else (A, pair[QA])
    s = equations[special, SLACK]
    slope = abs(_slope(equations, special, cosine, sine))
    moved = s / (slope + math.sqrt(s))
    rate = abs(_slope(equations, V1, cosine, sine)) + abs(_slope(equations, V2, cosine, sine))
    rate += abs(_slope(equations, other, cosine, sine) / divisor)
    leeway: float = equations[V1, SLACK] + abs(equations[other, SLACK] / divisor) + moved * rate
    return leeway


@compiled
def close(
    pair: FloatArray,
    is_plane: bool,
    goal: FloatArray,
    equations: FloatArray,
    special: int,
    c: float,
    cosine: float,
    sine: float,
    free: int,
    out: FloatArray,
    count: int,
) -> tuple[int, int]:
    """Write the one answer for c, or both where of one coordinate of y the square is known."""
    y1, y2 = 0.0, 0.0
    if special != A:
        y1 = _term(equations, A, cosine, sine) / pair[QA]
    if special != B:
        y2 = _term(equations, B, cosine, sine) / pair[QB]
    if special == NO_TERM:
        return _put_closed(
            pair, is_plane, goal, equations, c, cosine, sine, y1, y2, free, out, count
        )
    v1, v2 = _term(equations, V1, cosine, sine), _term(equations, V2, cosine, sine)
    length, known = math.sqrt(v1 * v1 + v2 * v2), abs(y1 + y2)
    squared = (length - known) * (length + known)
    # What is out of reach by less than the slack stands for a pair as far within it.
    if known - length > _leeway(pair, equations, special, cosine, sine):
        return count, REGULAR
    other = math.sqrt(abs(squared))
    flags = REGULAR
    # And for the one in the middle, where the two are closer to it than they are known.
    for k in range(3 if abs(squared) <= ONE_ROOT * length * length else 2):
        sided = other if k == 0 else (-other if k == 1 else 0.0)
        if special == A:
            y1 = sided
        else:
            y2 = sided
        count, more = _put_closed(
            pair, is_plane, goal, equations, c, cosine, sine, y1, y2, free, out, count
        )
        flags |= more
    return count, flags
