"""Closed curves around a region that is known on every level line.

Idea: between two neighbouring level lines with as many stretches each, the region is a stack of
trapezoids whose sides are pieces of its boundary; where the number changes, or a stretch begins
flat, the lines on both sides of that height differ, and what they differ by is a level piece of the
boundary. So sides and differences together always close, whatever the curves do there, and chords
of sides in their order never cross. Levels are halved until each chord is as near to its side as
asked, which also closes in on the heights at which stretches part and join.

Source: scan lines of plane regions (Preparata and Shamos 1985, section 8.4). Not covered: stretches
that begin and end again between two of the first levels.
"""

from collections.abc import Callable, Sequence
from itertools import pairwise
from typing import NamedTuple

import numpy as np

from kinematics.envelope.shapes import Curve
from kinematics.envelope.tolerances import (
    FIRST_LEVELS,
    MOST_LEVEL_ROUNDS,
    NEXT_TO_A_CORNER,
    SAME_PLACE,
)
from kinematics.number_checks import FloatArray

Ends = FloatArray
"""Stretches of one level line, (stretches, 2): begin and end, sorted, apart from each other."""

LevelLines = Callable[[FloatArray], list[Ends]]
"""Stretches on level lines at heights (lines,)."""


_Place = tuple[float, float]
_Edge = tuple[_Place, _Place]


class _Level(NamedTuple):
    height: float
    ends: Ends


def outlines_of(lines: LevelLines, corners: FloatArray, chord: float) -> tuple[Curve, ...]:
    """Return the closed curves around a region, outer ones first, the largest first.

    Parameters
    ----------
    lines : what is reached on level lines.
    corners : (count,), heights at which boundary curves begin, end or turn back, sorted.
    chord : how far a straight line between two points may be from the curve.

    Examples
    --------
    >>> def disc(heights):
    ...     half = np.sqrt(np.maximum(1.0 - heights**2, 0.0))
    ...     return [np.array([[-end, end]]) for end in half]
    >>> (circle,) = outlines_of(disc, np.array([-1.0, 1.0]), 1e-4)
    >>> round(circle.signed_area, 2), circle.outer, len(circle.points) < 700
    (3.14, True, True)
    """
    size = float(corners[-1] - corners[0])
    slabs = []
    for low, high in pairwise(corners.tolist()):
        if high - low > 4.0 * NEXT_TO_A_CORNER * size:
            slabs.append(_levels(lines, low, high, NEXT_TO_A_CORNER * size, chord))
    return _closed(slabs, size)


def _levels(lines: LevelLines, low: float, high: float, inset: float, chord: float) -> list[_Level]:
    """Return levels of one slab between corners, close enough to each other, in order."""
    turns = np.linspace(0.0, np.pi, FIRST_LEVELS)
    heights = 0.5 * (low + high) - 0.5 * (high - low - 2.0 * inset) * np.cos(turns)
    levels = list(map(_Level, heights.tolist(), lines(heights)))
    settled = [False] * (len(levels) - 1)
    for _ in range(MOST_LEVEL_ROUNDS):
        wide = [b.height - a.height > inset for a, b in pairwise(levels)]
        asked = [place for place, done in enumerate(settled) if not done and wide[place]]
        if not asked:
            break
        middles = np.array([0.5 * (levels[k].height + levels[k + 1].height) for k in asked])
        found = map(_Level, middles.tolist(), lines(middles))
        between = dict(zip(asked, found, strict=True))
        halved, halved_settled = [levels[0]], []
        for place, (below, above) in enumerate(pairwise(levels)):
            middle = between.get(place)
            if middle is not None:
                near = _is_near(below, middle, above, chord)
                halved.append(middle)
                halved_settled.append(near)
            halved.append(above)
            halved_settled.append(settled[place] or (middle is not None and near))
        levels, settled = halved, halved_settled
    return levels


def _is_near(below: _Level, middle: _Level, above: _Level, chord: float) -> bool:
    """Whether straight sides from below to above are as near to the middle as asked."""
    if not len(below.ends) == len(middle.ends) == len(above.ends):
        return False
    step = above.ends - below.ends
    off = np.abs(middle.ends - 0.5 * (above.ends + below.ends))
    rise = above.height - below.height
    return bool((off * rise <= chord * np.hypot(step, rise)).all())


def _closed(slabs: Sequence[Sequence[_Level]], size: float) -> tuple[Curve, ...]:
    """Return the closed curves around slabs of levels."""
    edges: list[_Edge] = []
    below = _Level(slabs[0][0].height, np.empty((0, 2))) if slabs else None
    for slab in slabs:
        for number, level in enumerate(slab):
            assert below is not None
            if number and len(below.ends) == len(level.ends):
                edges += _sides(below.height, below.ends, level.height, level.ends)
            else:
                # What is below goes straight on to this height, and is closed or widened there.
                edges += _sides(below.height, below.ends, level.height, below.ends)
                edges += _level_pieces(level.height, below.ends, level.ends)
            below = level
    if below is not None:
        edges += _level_pieces(below.height, below.ends, np.empty((0, 2)))
    return _linked(edges, size)


def _sides(low: float, below: Ends, high: float, above: Ends) -> list[_Edge]:
    """Return the sides of trapezoids: the right ones run upwards, the left ones downwards."""
    sides = []
    for (left, right), (next_left, next_right) in zip(below.tolist(), above.tolist(), strict=True):
        sides.append(((right, low), (next_right, high)))
        sides.append(((next_left, high), (left, low)))
    return sides


def _level_pieces(height: float, below: Ends, above: Ends) -> list[_Edge]:
    """Return what is reached on one side of a height only: rightwards where it is above."""
    places = np.unique(np.concatenate([below.ravel(), above.ravel()]))
    lefts, rights = places[:-1], places[1:]
    in_below, in_above = (
        np.asarray(((ends[:, :1] <= lefts) & (rights <= ends[:, 1:])).any(axis=0))
        for ends in (below, above)
    )
    pieces = []
    for place in np.nonzero(in_below != in_above)[0].tolist():
        left, right = float(places[place]), float(places[place + 1])
        piece = (left, height), (right, height)
        pieces.append(piece if in_above[place] else piece[::-1])
    return pieces


def _linked(edges: Sequence[_Edge], size: float) -> tuple[Curve, ...]:
    """Return the closed curves that edges make, each of which begins where another ends."""
    follows: dict[_Place, list[_Place]] = {}
    for begin, end in edges:
        if begin != end:
            follows.setdefault(begin, []).append(end)
    curves = []
    for start in list(follows):
        while follows[start]:
            place, passed = follows[start].pop(), [start]
            while place != start:
                passed.append(place)
                place = follows[place].pop()
            points = clean(np.array(passed), SAME_PLACE * size)
            area = Curve(points, outer=True).signed_area
            if len(points) >= 3 and abs(area) > SAME_PLACE * size * size:
                curves.append((area, Curve(points, outer=area > 0.0)))
    curves.sort(key=lambda one: (not one[1].outer, -abs(one[0])))
    return tuple(curve for _, curve in curves)


def clean(points: FloatArray, slack: float) -> FloatArray:
    """Return the points of a closed curve without those that change it by no more than ``slack``.

    Examples
    --------
    >>> clean(np.array([[0.0, 0.0], [1.0, 0.0], [2.0, 0.0], [2.0, 2.0], [2.0, 2.0]]), 1e-9)
    array([[0., 0.],
           [2., 0.],
           [2., 2.]])
    """
    kept: list[FloatArray] = []
    for point in points:
        while len(kept) > 1 and _is_straight(kept[-2], kept[-1], point, slack):
            kept.pop()
        if not kept or np.abs(point - kept[-1]).max() > slack:
            kept.append(point)
    while len(kept) > 2 and (
        np.abs(kept[0] - kept[-1]).max() <= slack
        or _is_straight(kept[-2], kept[-1], kept[0], slack)
    ):
        kept.pop()
    while len(kept) > 2 and _is_straight(kept[-1], kept[0], kept[1], slack):
        kept.pop(0)
    return np.array(kept)


def _is_straight(before: FloatArray, at: FloatArray, after: FloatArray, slack: float) -> bool:
    step, part = after - before, at - before
    length = float(np.hypot(*step))
    if length <= slack:
        return True
    aside = abs(float(step[0] * part[1] - step[1] * part[0])) / length
    share = float(step @ part) / length
    return aside <= slack and -slack <= share <= length + slack
