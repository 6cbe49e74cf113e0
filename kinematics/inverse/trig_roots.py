"""All angles at which a sum of squares of linear trigonometric terms vanishes, and none missed.

f(c) = sum of w L(c)^2 with L = k0 + kc cos c + ks sin c and weights of either sign is what closing
a chain of three joints comes to. The circle is cut into cells; bounds from Taylor's theorem prove a
cell free of roots, or f monotone or bent one way in it, or else it is halved: what is found is all.
Kept as squares, f keeps its relative accuracy where all terms are small at once, near double roots;
an extremum off 0 by no more than the data may be off gives both roots it stands for, and itself.

Source: exclusion by bounds over cells, as in Moore, Interval Analysis, 1966, chapter 7, here in
plain floating point: rounding, some 1e-16 of the terms, is covered by the slack alone.
Not covered: f that vanishes everywhere; the caller sees that by its coefficients beforehand.
"""

import math

import numpy as np

from kinematics.inverse.kernel_numbers import NONE, entries
from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray

TERMS = 4
"""Squares in a sum."""

WEIGHT, CONSTANT, COSINE, SINE, SLACK, AMPLITUDE = range(6)
"""Columns of a sum of squares, (TERMS or more, 6): one row for each term, w, k0, kc, ks, by how
much the term may be off, and room for the amplitude of its swing."""

MOST_ROOTS_FOUND = 16
"""A sum has at most four roots; an extremum that may be one counts for three."""

ONE_ROOT = 1e-14
"""Share of what makes it up within which an extremum is 0 to the rounding: roots beside it are then
known to half of the digits at best, and it is an answer itself."""

_COARSEST, _FINEST = entries(3, 23, 19)
"""Levels of cells: of 45 degrees, and of 1.5e-6 rad, which are not halved: the roots in one are one
to the data."""

_TABLED = 9
_FIRST = 0.3 - math.pi
"""Where the cells begin: off the right angles, where the roots of drawing-board arms lie."""
_ANGLES = _FIRST + 2.0 * math.pi / (1 << _TABLED) * np.arange(1 << _TABLED)
_COSINES, _SINES = np.cos(_ANGLES), np.sin(_ANGLES)


@compiled
def linear_roots(
    constant: float, cosine: float, sine: float, slack: float, found: FloatArray
) -> int:
    """Write the angles where k0 + kc cos + ks sin = 0, and return how many.

    Two or none; where the extremum misses 0 by at most ``slack``, the two angles as far to either
    side of it as they would be if it passed 0 by as much. The extremum itself comes third where
    they are closer to it than they are known. Amplitudes of 0 have no roots. found : (3 or more,).

    Source
    ------
    k cos(x - x0) = -k0, x - x0 from both its cosine and its sine for accuracy near 0 and pi.

    Examples
    --------
    >>> found = np.zeros(3)
    >>> linear_roots(-0.5, 1.0, 0.0, 1e-9, found), np.degrees(found[:2]).round(9)
    (2, array([ 60., -60.]))
    """
    amplitude = math.sqrt(cosine * cosine + sine * sine)
    if amplitude == 0.0 or abs(constant) > amplitude + slack:
        return 0
    top = math.atan2(sine, cosine)
    passed = (amplitude - constant) * (amplitude + constant)
    aside = math.atan2(math.sqrt(abs(passed)), -constant)
    found[0], found[1] = top + aside, top - aside
    if abs(passed) > ONE_ROOT * amplitude * amplitude:
        return 2
    found[2] = top if constant < 0.0 else top + math.pi
    return 3


@compiled
def _point(level: int, index: int) -> tuple[float, float]:
    """Return cosine and sine where a cell starts; the same numbers for all levels and turns."""
    index &= (1 << level) - 1
    if level <= _TABLED:
        index <<= _TABLED - level
        return _COSINES[index], _SINES[index]
    angle = _FIRST + 2.0 * math.pi / (1 << level) * index
    return math.cos(angle), math.sin(angle)


@compiled
def _at(squares: FloatArray, cosine: float, sine: float) -> tuple[float, float, float]:
    """Return f and its first two derivatives at an angle given by cosine and sine."""
    value, first, second = 0.0, 0.0, 0.0
    for k in range(TERMS):
        w = squares[k, WEIGHT]
        swing = squares[k, COSINE] * cosine + squares[k, SINE] * sine
        term = squares[k, CONSTANT] + swing
        slope = squares[k, SINE] * cosine - squares[k, COSINE] * sine
        value += w * term * term
        first += w * term * slope
        second += w * (slope * slope - term * swing)
    return value, 2.0 * first, 2.0 * second


@compiled
def _over_cell(
    squares: FloatArray, level: int, index: int, width: float
) -> tuple[float, float, float, float, float]:
    """Return f and its first two derivatives in the middle of a cell, and bounds over the cell.

    The bounds are of the third derivative and of what the slack may change f by. They come from
    bounds of the terms over this very cell: near a double root they are as small as the terms,
    where bounds that hold for the whole circle would let nothing be proved.
    """
    cosine, sine = _point(level + 1, 2 * index + 1)
    value, first, second, twist, off = 0.0, 0.0, 0.0, 0.0, 0.0
    for k in range(TERMS):
        w, s, reach = squares[k, WEIGHT], squares[k, SLACK], squares[k, AMPLITUDE]
        swing = squares[k, COSINE] * cosine + squares[k, SINE] * sine
        term = squares[k, CONSTANT] + swing
        slope = squares[k, SINE] * cosine - squares[k, COSINE] * sine
        value += w * term * term
        first += w * term * slope
        second += w * (slope * slope - term * swing)
        steepest = abs(slope) + reach * width
        largest = abs(term) + steepest * width
        twist += abs(w) * steepest * (3.0 * reach + largest)
        off += abs(w) * s * (2.0 * largest + s)
    return value, 2.0 * first, 2.0 * second, 2.0 * twist, off


@compiled
def change_by_slack(squares: FloatArray, cosine: float, sine: float) -> float:
    """Return by how much the slack of the terms may change f at an angle."""
    off = 0.0
    for k in range(TERMS):
        s = squares[k, SLACK]
        term = squares[k, CONSTANT] + squares[k, COSINE] * cosine + squares[k, SINE] * sine
        off += abs(squares[k, WEIGHT]) * s * (2.0 * abs(term) + s)
    return off


@compiled
def _crossing(squares: FloatArray, low: float, high: float, start: float, rises: bool) -> float:
    """Return the one root between two angles: Newton's steps, halving where they lead outside."""
    at = start
    for _ in range(80):
        value, slope, bent = _at(squares, math.cos(at), math.sin(at))
        if (value > 0.0) == rises:
            high = at
        else:
            low = at
        following = at - value / slope if slope != 0.0 else low
        if low < following < high:
            # The last step is the one whose square no longer matters.
            step = following - at
            if step * step * abs(bent) <= 1e-16 * abs(slope):
                return following
        else:
            following = 0.5 * (low + high)
        if high - low <= 4e-16 * (1.0 + abs(at)):
            return following
        at = following
    return at


@compiled
def _extremum(squares: FloatArray, low: float, high: float, rises: bool) -> float:
    """Return where f' vanishes between two angles between which it crosses 0 once."""
    at = 0.5 * (low + high)
    for _ in range(80):
        _value, slope, bent = _at(squares, math.cos(at), math.sin(at))
        if (slope > 0.0) == rises:
            high = at
        else:
            low = at
        following = at - slope / bent if bent != 0.0 else low
        if not low < following < high:
            following = 0.5 * (low + high)
        if abs(following - at) <= 1e-15 * (1.0 + abs(at)):
            return following
        at = following
    return at


@compiled
def _around_extremum(
    squares: FloatArray, low: float, high: float, above: bool, found: FloatArray
) -> int:
    """Write the roots of a cell where f bends away from an extremum within it: none, or two.

    And the extremum itself, where they are closer to it than they are known. ``above``: f is above
    0 at both ends, and bends upwards.
    """
    top = _extremum(squares, low, high, above)
    cosine, sine = math.cos(top), math.sin(top)
    value, _slope, bent = _at(squares, cosine, sine)
    aside = math.sqrt(2.0 * abs(value / bent)) if bent != 0.0 else 0.0
    if (value > 0.0) != above:
        found[0] = _crossing(squares, low, top, max(low, top - aside), not above)
        found[1] = _crossing(squares, top, high, min(high, top + aside), above)
    elif abs(value) <= change_by_slack(squares, cosine, sine):
        found[0], found[1] = top - aside, top + aside
    else:
        return 0
    found[2] = top
    size = 0.0
    for k in range(TERMS):
        swing = squares[k, COSINE] * cosine + squares[k, SINE] * sine
        size += abs(squares[k, WEIGHT]) * (squares[k, CONSTANT] + swing) ** 2
    return 3 if abs(value) <= ONE_ROOT * size else 2


@compiled
def _in_cell(squares: FloatArray, level: int, index: int, found: FloatArray) -> int:
    """Write the roots of one cell and return how many, or -1 where it has to be halved."""
    width = math.pi / (1 << level)
    value, slope, bent, twist, off = _over_cell(squares, level, index, width)
    curve = abs(bent) * width + 0.5 * twist * width * width
    if abs(value) > (abs(slope) + 0.5 * curve) * width + off:
        return 0
    low = _FIRST + 2.0 * width * index
    if level == _FINEST:
        found[0] = low + width
        return 1
    monotone = abs(slope) > curve
    if not monotone and abs(bent) <= twist * width:
        return -1
    high = low + 2.0 * width
    cosine, sine = _point(level, index)
    at_low, slope_low, _bent = _at(squares, cosine, sine)
    cosine, sine = _point(level, index + 1)
    at_high, slope_high, _bent = _at(squares, cosine, sine)
    if (at_low > 0.0) != (at_high > 0.0):
        start = low + 2.0 * width * at_low / (at_low - at_high)
        found[0] = _crossing(squares, low, high, start, at_high > 0.0)
        return 1
    above = at_low > 0.0
    # Where f bends one way, only from one side can it reach 0 and turn back.
    if monotone or above != (bent > 0.0) or (slope_low > 0.0) == (slope_high > 0.0):
        return 0
    return _around_extremum(squares, low, high, above, found)


@compiled
def roots_of_squares(squares: FloatArray, found: FloatArray) -> int:
    """Write all roots of a sum of squares, wrapped into (-pi, pi], and return how many.

    Parameters
    ----------
    squares : (TERMS or more, 6), columns WEIGHT to SLACK; the last, AMPLITUDE, is written.
    found : (MOST_ROOTS_FOUND,), written; not sorted.

    Examples
    --------
    cos^2 - (1/2)^2 vanishes at 60, 120, -60 and -120 degrees.

    >>> squares = np.zeros((TERMS, 6))
    >>> squares[0, [WEIGHT, COSINE]], squares[1, [WEIGHT, CONSTANT]] = (1.0, 1.0), (-1.0, 0.5)
    >>> found = np.zeros(MOST_ROOTS_FOUND)
    >>> count = roots_of_squares(squares, found)
    >>> np.degrees(np.sort(found[:count])).round(9)
    array([-120.,  -60.,   60.,  120.])
    """
    for k in range(TERMS):
        kc, ks = squares[k, COSINE], squares[k, SINE]
        squares[k, AMPLITUDE] = math.sqrt(kc * kc + ks * ks)
    count, level, index = NONE, _COARSEST, NONE
    while True:
        more = _in_cell(squares, level, index, found[count : count + 3])
        if more < 0:
            level, index = level + 1, 2 * index
            continue
        for k in range(count, count + more):
            found[k] -= 2.0 * math.pi * math.ceil((found[k] - math.pi) / (2.0 * math.pi))
        count += more
        if count > MOST_ROOTS_FOUND - 3:
            return count
        # On to the next cell, and up where that is the first half of a larger one.
        index += 1
        while level > _COARSEST and index & 1 == 0:
            level, index = level - 1, index >> 1
        if level == _COARSEST and index >> _COARSEST:
            return count
