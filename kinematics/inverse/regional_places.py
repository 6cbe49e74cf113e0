"""All motions of up to three joints that bring the tool's point to places, one after another.

Each answer of the regional problem is walked through the arm, brought onto the place to the last
digit where it is not there yet, and kept if nobody has it. Arms of two joints are given a slide
they do not have, along some direction: of the answers those count whose slide stays where it is,
and downhill on the two joints alone decides that.

Source: as regional.py and regional_nearest.py; the virtual joint is common, recalled from no book.
Not covered: which ways to ask, and what is told of a no (regional_arm.py).
"""

import math
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.kernel_numbers import NO
from kinematics.inverse.regional import regional
from kinematics.inverse.regional_nearest import carry, downhill
from kinematics.inverse.regional_pairs import Flags
from kinematics.inverse.regional_rows import MOST_ROWS_FOUND
from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray

LANDED = 1e-15
"""Miss, over L, up to which motions are not polished: rounding of the chain."""

SAME = 2e-7
"""Radians (or over L) between motions that are one solution: at a fold nobody can tell them apart,
as they leave gaps of 1e-14 between them."""


class Ways(NamedTuple):
    """Ways to ask the regional problem about an arm of three joints, w of them; lengths over L.

    Attributes
    ----------
    slides, axes, points : (3,), (3, 3), (3, 3), the arm; joints it lacks turn about its tip.
    tip : (4,), the tool's point at zero motion, and 1.
    way_slides, way_axes, way_points : (w, 3), (w, 3, 3), (w, 3, 3), joints a, b, c of each way.
    pairs : (w, PAIR), of a and b.
    rows : (w, 3), which joint of the arm each is, or -1 for a virtual one.
    backwards : (w,), whether the place is carried back to the tip.
    """

    slides: Flags
    axes: FloatArray
    points: FloatArray
    tip: FloatArray
    way_slides: Flags
    way_axes: FloatArray
    way_points: FloatArray
    pairs: FloatArray
    rows: NDArray[np.int64]
    backwards: Flags


@compiled
def _miss(ways: Ways, motions: FloatArray, place: FloatArray, at: FloatArray) -> float:
    """Return how far the tool's point is from a place."""
    at[:] = ways.tip
    for step in range(3):
        joint = 2 - step
        axis, point = ways.axes[joint], ways.points[joint]
        carry(ways.slides[joint], axis, point, NO, motions[joint], at, at)
    x, y, z = place[0] - at[0], place[1] - at[1], place[2] - at[2]
    return math.sqrt(x * x + y * y + z * z)


@compiled
def _is_new(ways: Ways, motions: FloatArray, kept: FloatArray, first: int, count: int) -> bool:
    """Wrap turns into (-pi, pi], and return whether no motion of the target's is the same."""
    for i in range(3):
        if not ways.slides[i]:
            turns = math.ceil((motions[i] - math.pi) / (2.0 * math.pi))
            motions[i] -= 2.0 * math.pi * turns
    for row in range(first, count):
        same = True
        for i in range(3):
            apart = abs(motions[i] - kept[row, i])
            if not ways.slides[i]:
                apart = min(apart, abs(2.0 * math.pi - apart))
            same = same and apart <= SAME
        if same:
            return False
    return True


@compiled
def solve_places(
    ways: Ways,
    places: FloatArray,
    begin: int,
    slack: float,
    keep: float,
    motions: FloatArray,
    of: NDArray[np.int64],
    errors: FloatArray,
    flags: NDArray[np.int64],
) -> tuple[int, int]:
    """Write all motions for places from ``begin`` on, until all are done or there may be no room.

    Parameters
    ----------
    places : (m, 4), points, and anything. slack : see ``regional``. keep : largest miss kept.
    motions : (room, 3), of : (room,), errors : (room,), flags : (m,), written.

    Returns
    -------
    end : the first place not done. count : rows written.
    """
    count = 0
    roots, at, trial = np.empty((MOST_ROWS_FOUND, 4)), np.empty(4), np.empty(3)
    for b in range(begin, places.shape[0]):
        first = count
        if count + MOST_ROWS_FOUND * ways.rows.shape[0] > motions.shape[0]:
            return b, count
        flags[b] = 0
        for w in range(ways.rows.shape[0]):
            start, goal, sign = ways.tip, places[b], 1.0
            if ways.backwards[w]:
                start, goal, sign = places[b], ways.tip, -1.0
            found, more = regional(
                ways.pairs[w],
                ways.way_slides[w],
                ways.way_axes[w],
                ways.way_points[w],
                NO,
                start,
                goal,
                slack,
                roots,
            )
            flags[b] |= more
            for k in range(found):
                trial[:] = 0.0
                for i in range(3):
                    if ways.rows[w, i] >= 0:
                        trial[ways.rows[w, i]] = sign * roots[k, i]
                miss = _miss(ways, trial, places[b], at)
                if miss > LANDED:
                    downhill(ways.slides, ways.axes, ways.points, NO, ways.tip, places[b], trial)
                    miss = _miss(ways, trial, places[b], at)
                if miss <= keep and _is_new(ways, trial, motions, first, count):
                    motions[count] = trial
                    of[count], errors[count] = b, miss
                    count += 1
    return places.shape[0], count
