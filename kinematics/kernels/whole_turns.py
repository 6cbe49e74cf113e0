"""All joint values that move the rows of an arm as wanted, for many wanted motions at once.

A row that is turned by whole turns stands where it stood: a row motion v stands for all v + 2 pi k,
and the joint values are those of all k for which they lie within travel. Where each joint moves a
row of its own that is a product of short lists, where rows are coupled a lattice. It is walked like
an odometer, and each posture is held against all limits. Where none is within travel, the one that
exceeds it least is kept instead.

Source: none, counting. Not covered: more than ``budget`` postures of one wanted motion. Those
nearest the middle of travel (or to given joint values) are looked at, and the caller is told.
"""

from typing import TypeVar

import numpy as np
from numpy.typing import NDArray

from kinematics.kernels.compiler import compiled_exactly
from kinematics.number_checks import FloatArray

TURN = 2.0 * np.pi
ROUNDED = 1e9
"""Margins and distances are ranked in steps of one over this: rounding must not choose."""

INSIDE, WORKING, CLIPPED = 1, 2, 4
"""Bits of a posture's flags: within travel; beyond a working travel; put onto a limit that it
exceeded by no more than the edge."""

FIRST, CHOICES, AT = 0, 1, 2
"""Rows of the odometer: lowest whole turns of each joint, how many choices, which of them."""

MARGIN, EXCESS, BEYOND_WORKING = 0, 1, 2
"""What a posture is judged by: smallest share of travel left; the sum of shares it exceeds travels
by; 1 where it is beyond a working travel."""

IntArray = NDArray[np.int64]
Numbers = TypeVar("Numbers", FloatArray, IntArray)


@compiled_exactly
def postures_of(
    motions: FloatArray,
    drive: tuple[FloatArray, NDArray[np.intp], NDArray[np.bool_]],
    passive: tuple[FloatArray, NDArray[np.intp], NDArray[np.bool_], float],
    limits: tuple[
        FloatArray, FloatArray, FloatArray, FloatArray, NDArray[np.bool_], NDArray[np.intp]
    ],
    box: tuple[FloatArray, NDArray[np.bool_], float],
    row_box: FloatArray,
    middle: FloatArray,
    budget: int,
) -> tuple[FloatArray, IntArray, FloatArray, IntArray, FloatArray, bool]:
    """Return the postures of each wanted motion within travel, or the least bad one.

    Parameters
    ----------
    motions : (k, rows), wanted, rad or m.
    drive : joint values per motion of driven rows (n, n); driven rows (n,); which turn (n,).
    passive : motions of passive rows per joint value (p, n); those rows (p,); which turn (p,); by
        how much they may be off.
    limits : weights (l, n), constants, lower, upper, working (l,), as in kernels/travel.py; and the
        one joint whose value each is a limit of, or -1 (l,).
    box : least and largest joint value to be listed (2, n); whether that is a limit (n,), or one
        turn for want of one; by how much a limit may be exceeded by a value then put onto it.
    row_box : (2, n), motions of the driven rows in the box.
    middle : (n,), motions of the driven rows near which to look first; budget : postures looked at.

    Returns
    -------
    joint values (p, n); source (p,), index into motions, ascending; margin (p,); flags (p,); how
    many there are of each wanted motion, (k,), negative where not all were looked at; and whether
    any was put onto a limit.

    Examples
    --------
    >>> one, turn = np.ones(1), np.array([[-4.0], [4.0]])
    >>> drive = np.ones((1, 1)), np.array([0]), np.array([True])
    >>> passive = np.empty((0, 1)), np.empty(0, np.intp), np.empty(0, np.bool_), 1e-7
    >>> limits = np.ones((1, 1)), 0 * one, -4 * one, 4 * one, np.array([False]), np.array([0])
    >>> box = turn, np.array([True]), 0.0
    >>> postures_of(np.array([[3.0]]), drive, passive, limits, box, turn, 0 * one, 9)[0].round(3)
    array([[-3.283],
           [ 3.   ]])
    """
    inverse_map, driven, turning = drive
    passive_map, passive_rows, passive_turning, same = passive
    weights, constants, lower, upper, working, alone = limits
    ends, travelled, edge = box
    count, n = len(motions), len(driven)
    values, seen = np.empty((count + 8, n)), np.zeros(count)
    margin: FloatArray = np.empty(count + 8)
    source: IntArray = np.empty(count + 8, np.int64)
    flags: IntArray = np.empty(count + 8, np.int64)
    turns, judged, q = np.empty((3, n), np.int64), np.empty(3), np.empty(n)
    filled, any_clipped = 0, False
    for wanted in range(count):
        v, first, least = motions[wanted], filled, np.inf
        whole = _ranges(v, driven, turning, row_box, edge, middle, budget, turns)
        while True:
            _joint_values(v, turns, inverse_map, driven, turning, q)
            if _passive_rows_fit(v, q, passive_map, passive_rows, passive_turning, same):
                bits = _onto_limits(q, ends, travelled, edge)
                _judge(q, weights, constants, lower, upper, working, alone, judged)
                bad = judged[EXCESS] + _turns_away(q, turning, travelled)
                if bad == 0.0 or (least > 0.0 and bad < least):
                    if filled == len(source):
                        values, margin = _longer_rows(values), _longer(margin)
                        source, flags = _longer(source), _longer(flags)
                    at = filled if least == 0.0 else first
                    source[at], margin[at] = wanted, judged[MARGIN]
                    for j in range(n):
                        values[at, j] = q[j]
                    inside = INSIDE if judged[EXCESS] == 0.0 else 0
                    flags[at] = bits | inside | (WORKING if judged[BEYOND_WORKING] else 0)
                    filled, least = at + 1, bad
                    any_clipped |= bits != 0
            if not _next(turns):
                break
        inside_of = filled - first if filled > first and flags[first] & INSIDE else 0
        seen[wanted] = inside_of if whole else -inside_of - 1
    return values[:filled], source[:filled], margin[:filled], flags[:filled], seen, any_clipped


@compiled_exactly
def _ranges(
    v: FloatArray,
    driven: NDArray[np.intp],
    turning: NDArray[np.bool_],
    row_box: FloatArray,
    edge: float,
    middle: FloatArray,
    budget: int,
    turns: IntArray,
) -> bool:
    """Write the whole turns of each driven row to be tried; return whether these are all."""
    product, whole = 1.0, True
    for i in range(len(driven)):
        turns[FIRST, i], turns[CHOICES, i], turns[AT, i] = 0, 1, 0
        if not turning[i]:
            continue
        motion = v[driven[i]]
        first = np.ceil((row_box[0, i] - edge - motion) / TURN)
        last = np.floor((row_box[1, i] + edge - motion) / TURN)
        nearest = np.round((middle[i] - motion) / TURN)
        if last < first:
            first = last = np.round((0.5 * (row_box[0, i] + row_box[1, i]) - motion) / TURN)
        if last - first >= budget:
            whole = False
            first = min(max(first, nearest - budget // 2), last - budget + 1)
            last = first + budget - 1
        turns[FIRST, i], turns[CHOICES, i] = int(first), int(last - first) + 1
        product *= turns[CHOICES, i]
    while product > budget:
        most = np.argmax(turns[CHOICES])
        product *= (turns[CHOICES, most] - 1) / turns[CHOICES, most]
        turns[CHOICES, most] -= 1
        centre = TURN * (turns[FIRST, most] + 0.5 * turns[CHOICES, most])
        if middle[most] - v[driven[most]] > centre:
            turns[FIRST, most] += 1
        whole = False
    return whole


@compiled_exactly
def _next(turns: IntArray) -> bool:
    """Move the odometer on; return False once it has come round."""
    for i in range(turns.shape[1]):
        turns[AT, i] += 1
        if turns[AT, i] < turns[CHOICES, i]:
            return True
        turns[AT, i] = 0
    return False


@compiled_exactly
def _joint_values(
    v: FloatArray,
    turns: IntArray,
    inverse_map: FloatArray,
    driven: NDArray[np.intp],
    turning: NDArray[np.bool_],
    q: FloatArray,
) -> None:
    for j in range(len(q)):
        q[j] = 0.0
    for i in range(len(q)):
        moved = v[driven[i]]
        if turning[i]:
            moved += TURN * (turns[FIRST, i] + turns[AT, i])
        for j in range(len(q)):
            if inverse_map[j, i] != 0.0:
                q[j] += inverse_map[j, i] * moved


@compiled_exactly
def _passive_rows_fit(
    v: FloatArray,
    q: FloatArray,
    passive_map: FloatArray,
    passive_rows: NDArray[np.intp],
    passive_turning: NDArray[np.bool_],
    same: float,
) -> bool:
    """Tell whether rows without a joint value move as wanted: their couplings decide."""
    for p in range(len(passive_rows)):
        off = -v[passive_rows[p]]
        for j in range(len(q)):
            off += passive_map[p, j] * q[j]
        if passive_turning[p]:
            off -= TURN * np.round(off / TURN)
        if abs(off) > same:
            return False
    return True


@compiled_exactly
def _onto_limits(q: FloatArray, ends: FloatArray, travelled: NDArray[np.bool_], edge: float) -> int:
    """Put what exceeds its limit by no more than the edge onto it."""
    bits = 0
    for j in range(len(q)):
        if travelled[j]:
            if ends[0, j] - edge <= q[j] < ends[0, j]:
                q[j], bits = ends[0, j], CLIPPED
            elif ends[1, j] < q[j] <= ends[1, j] + edge:
                q[j], bits = ends[1, j], CLIPPED
    return bits


@compiled_exactly
def _judge(
    q: FloatArray,
    weights: FloatArray,
    constants: FloatArray,
    lower: FloatArray,
    upper: FloatArray,
    working: NDArray[np.bool_],
    alone: NDArray[np.intp],
    judged: FloatArray,
) -> None:
    """Write margin, excess, and whether a working travel is exceeded.

    Sums of joint values and passive rows leave rounding of their own, which counts as no excess.
    """
    judged[MARGIN], judged[EXCESS], judged[BEYOND_WORKING] = np.inf, 0.0, 0.0
    for limit in range(len(constants)):
        if alone[limit] >= 0:
            value = q[alone[limit]]
        else:
            value = constants[limit]
            for j in range(len(q)):
                value += weights[limit, j] * q[j]
        share = min(value - lower[limit], upper[limit] - value) / (upper[limit] - lower[limit])
        if -1.0 / ROUNDED < share < 0.0:
            share = 0.0
        if working[limit]:
            judged[BEYOND_WORKING] = max(judged[BEYOND_WORKING], 1.0 if share < 0.0 else 0.0)
        else:
            judged[MARGIN] = min(judged[MARGIN], share)
            judged[EXCESS] -= min(share, 0.0)


@compiled_exactly
def _turns_away(q: FloatArray, turning: NDArray[np.bool_], travelled: NDArray[np.bool_]) -> float:
    """Return how far turning joints without travel are beyond (-pi, pi], the one turn listed."""
    away = 0.0
    for j in range(len(q)):
        if turning[j] and not travelled[j]:
            beyond = max(q[j] - np.pi, 0.0) if q[j] > 0.0 else max(-np.pi - q[j], 0.0)
            away += beyond if beyond > 1.0 / ROUNDED else 0.0
            if q[j] < 0.0 and q[j] + np.pi < 1.0 / ROUNDED:
                away += TURN
    return away / ROUNDED


@compiled_exactly
def _longer(values: Numbers) -> Numbers:
    longer: Numbers = np.empty(2 * len(values), values.dtype)
    for at in range(len(values)):  # compiles in a tenth of the time that a slice takes
        longer[at] = values[at]
    return longer


@compiled_exactly
def _longer_rows(values: FloatArray) -> FloatArray:
    longer = np.empty((2 * len(values), values.shape[1]))
    for at in range(len(values)):
        for j in range(values.shape[1]):
            longer[at, j] = values[at, j]
    return longer
