"""What lies between the postures of a track: least room within travel, largest rates, first excess.

Idea: between two neighbouring postures each joint value is a cubic in the share of the line, and so
is every bounded sum of joint values. Where a cubic is largest or smallest follows from a quadratic;
so no excursion beyond a limit between two postures is overlooked. Where a limit is exceeded first
is told by the two places it lies between.

Source: Hermite's cubic; the quadratic in Citardauq's form, which loses no digits. Not covered: what
a limit is called (kinematics/travel_limits.py).
"""

import math
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray
from kinematics.travel.tracking import Track

_EVEN = 1e-9
"""Share of a rate by which another must exceed it to be the larger."""
_VAST = 1e300
"""Stands for infinity, which compiled code knows not."""


class Bounds(NamedTuple):
    """Bounded sums of joint values, ``least <= weights q + constants <= most``.

    Attributes
    ----------
    weights : (limits, joints), of the joint values of a track. constants, least, most : (limits,).
    advice : (limits,), limits of working travel, which end no way.
    """

    weights: FloatArray
    constants: FloatArray
    least: FloatArray
    most: FloatArray
    advice: NDArray[np.bool_]


@compiled
def least_room(
    bounds: Bounds, track: Track, count: int, smallest: FloatArray, of: NDArray[np.int64]
) -> None:
    """Write the smallest share of travel left on a track, its share of the line, and the limit.

    Parameters
    ----------
    count : postures of the track. smallest : (2,), written: share of travel, share of the line.
    of : (1,), written: which limit; -1 where there is none.

    Examples
    --------
    A joint that starts at 0 with rate 1 and comes back to it reaches 0.25 half way, within 1:

    >>> from kinematics.travel.tracking import room_for
    >>> one = np.ones(1)
    >>> bounds = Bounds(np.ones((1, 1)), 0 * one, -one, one, np.array([False]))
    >>> track = room_for(2, 1)
    >>> track.shares[:], track.values[:], track.rates[:, 0] = (0.0, 1.0), 0.0, (1.0, -1.0)
    >>> smallest, of = np.empty(2), np.empty(1, np.int64)
    >>> least_room(bounds, track, 2, smallest, of)
    >>> smallest, of
    (array([0.375, 0.5  ]), array([0]))
    """
    smallest[0], smallest[1], of[0] = _VAST, 0.0, -1
    turns, ends = np.empty(4), np.empty(4)
    for limit in range(bounds.weights.shape[0]):
        if bounds.advice[limit]:
            continue
        span = bounds.most[limit] - bounds.least[limit]
        for at in range(max(count - 1, 1)):
            places = _extremes(bounds, limit, track, at, count, turns, ends)
            for place in range(places):
                room = min(ends[place] - bounds.least[limit], bounds.most[limit] - ends[place])
                if room < smallest[0] * span:
                    smallest[0], of[0] = room / span, limit
                    smallest[1] = _share_of(track, at, count, turns[place])


@compiled
def first_beyond(bounds: Bounds, track: Track, count: int, edge: float, found: FloatArray) -> bool:
    """Tell whether a limit is exceeded along a track, by more than ``edge``.

    Limits of working travel do not count.

    Parameters
    ----------
    found : (2,), written: shares of the line between which the first is; the same at the start.

    Examples
    --------
    >>> from kinematics.travel.tracking import room_for
    >>> one = np.ones(1)
    >>> bounds = Bounds(np.ones((1, 1)), 0 * one, -one, 0.2 * one, np.array([False]))
    >>> track = room_for(2, 1)
    >>> track.shares[:], track.values[:], track.rates[:, 0] = (0.0, 1.0), 0.0, (1.0, -1.0)
    >>> found = np.empty(2)
    >>> first_beyond(bounds, track, 2, 0.0, found), found
    (True, array([0. , 0.5]))
    """
    turns, ends = np.empty(4), np.empty(4)
    beyond = False
    for at in range(max(count - 1, 1)):
        found[0], found[1] = track.shares[at], _VAST
        for limit in range(bounds.weights.shape[0]):
            if bounds.advice[limit]:
                continue
            places = _extremes(bounds, limit, track, at, count, turns, ends)
            for place in range(places):
                room = min(ends[place] - bounds.least[limit], bounds.most[limit] - ends[place])
                if room < -edge:
                    beyond = True
                    found[1] = min(found[1], _share_of(track, at, count, turns[place]))
                    break
        if beyond:
            return True
    return False


@compiled
def _share_of(track: Track, at: int, count: int, u: float) -> float:
    """Return the share of the line at ``u`` (0 to 1) between two postures."""
    if at + 1 >= count:
        return float(track.shares[at])
    return float(track.shares[at] + u * (track.shares[at + 1] - track.shares[at]))


@compiled
def _extremes(
    bounds: Bounds,
    limit: int,
    track: Track,
    at: int,
    count: int,
    turns: FloatArray,
    ends: FloatArray,
) -> int:
    """Write where between two postures a sum is extreme, rising from 0 to 1, and its values there.

    Returns how many: both ends, and up to two between them.
    """
    weights, value = bounds.weights, bounds.constants[limit]
    a, b, da, db = value, value, 0.0, 0.0
    last = min(at + 1, count - 1)
    width = track.shares[last] - track.shares[at]
    for joint in range(weights.shape[1]):
        weight = weights[limit, joint]
        if weight != 0.0:
            a += weight * track.values[at, joint]
            b += weight * track.values[last, joint]
            da += weight * width * track.rates[at, joint]
            db += weight * width * track.rates[last, joint]
    turns[0], ends[0] = 0.0, a
    if last == at:
        return 1
    bent, cube = 3.0 * (b - a) - 2.0 * da - db, da + db - 2.0 * (b - a)
    many = 1
    # Its slope: da + 2 bent u + 3 cube u^2.
    under = bent * bent - 3.0 * cube * da
    if under > 0.0:
        half = -(bent + math.copysign(math.sqrt(under), bent))
        first = half / (3.0 * cube) if cube != 0.0 else -1.0
        second = da / half if half != 0.0 else -1.0
        for u in (min(first, second), max(first, second)):
            if 0.0 < u < 1.0:
                turns[many], ends[many] = u, a + u * (da + u * (bent + u * cube))
                many += 1
    turns[many], ends[many] = 1.0, b
    return many + 1


@compiled
def largest_rates(track: Track, count: int, largest: FloatArray, where: FloatArray) -> None:
    """Write the largest absolute rate of each joint (joints,), and the share of the line there.

    Examples
    --------
    From rest to rest over 1, a cubic is fastest half way: 1.5.

    >>> from kinematics.travel.tracking import room_for
    >>> track, largest, where = room_for(2, 1), np.empty(1), np.empty(1)
    >>> track.shares[:], track.values[:, 0], track.rates[:] = (0.0, 1.0), (0.0, 1.0), 0.0
    >>> largest_rates(track, 2, largest, where)
    >>> largest, where
    (array([1.5]), array([0.5]))
    """
    for joint in range(largest.shape[0]):
        largest[joint], where[joint] = abs(track.rates[0, joint]), track.shares[0]
        for at in range(count - 1):
            width = track.shares[at + 1] - track.shares[at]
            a, b = track.values[at, joint], track.values[at + 1, joint]
            da, db = width * track.rates[at, joint], width * track.rates[at + 1, joint]
            rate, u = abs(db), 1.0
            bent, cube = 3.0 * (b - a) - 2.0 * da - db, da + db - 2.0 * (b - a)
            # The slope of the cubic is a parabola with its vertex here.
            vertex = -bent / (3.0 * cube) if cube != 0.0 else -1.0
            if 0.0 < vertex < 1.0 and abs(da + vertex * bent) > rate:
                rate, u = abs(da + vertex * bent), vertex
            # What rounding makes of an even rate is no larger one.
            if rate / width > largest[joint] * (1.0 + _EVEN):
                largest[joint] = rate / width
                where[joint] = track.shares[at] + u * width
