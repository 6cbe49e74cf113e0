"""Solutions at neighbouring values of a held joint, joined to paths that the arm can run along.

Idea: a joint is held at one value after the next, and each value has its handful of solutions. Two
of neighbouring values are one path where each is the other's nearest and no joint jumps. Along a
path whole turns are taken over from one posture to the next, as the drives would; a stretch is what
of it stands within travel, walked from its best posture both ways. So a joint that would have to
begin a turn that its travel does not have ends the stretch, though its angle looks the same.

Source: tracking of self-motions by a redundant parameter: Burdick 1989, On the inverse kinematics
of redundant manipulators; the walk from the best posture: derived here.
Not covered: what happens between the values, which may join or part paths that come close.
"""

import math

import numpy as np
from numpy.typing import NDArray

from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray

NONE = -1
"""Stands for no node, and for no stretch."""

FIRST, LAST, BEST = range(3)
"""Columns of what ``walk`` writes of a stretch: its nodes."""

_TURN = 2.0 * math.pi


@compiled
def link(
    offsets: NDArray[np.int64],
    each: int,
    values: FloatArray,
    turning: NDArray[np.bool_],
    scale: FloatArray,
    most: float,
    ahead: NDArray[np.int64],
    behind: NDArray[np.int64],
) -> None:
    """Write which node of the next held value, and of the one before, each node goes on in.

    Parameters
    ----------
    offsets : (m * each + 1,), first node of each target's held values, in order.
    each : held values a target. values : (k, joints), postures, the nodes.
    turning : (joints,), which of them are angles; whole turns apart is no distance.
    scale : (joints,), what differences are divided by. most : by how much a joint may change.
    ahead, behind : (k,), written; ``NONE`` where a path ends.

    Examples
    --------
    >>> nodes, ahead, behind = np.array([[0.0], [2.0], [0.1]]), *np.empty((2, 3), np.int64)
    >>> link(np.array([0, 2, 3]), 2, nodes, np.ones(1, bool), np.ones(1), 0.5, ahead, behind)
    >>> ahead.tolist(), behind.tolist()
    ([2, -1, -1], [-1, -1, 0])
    """
    for node in range(values.shape[0]):
        ahead[node], behind[node] = NONE, NONE
    for place in range(offsets.shape[0] - 2):
        if (place + 1) % each == 0:
            continue
        begin, middle, end = offsets[place], offsets[place + 1], offsets[place + 2]
        for node in range(begin, middle):
            to, off = _nearest(values, node, middle, end, turning, scale)
            if off <= most and _nearest(values, to, begin, middle, turning, scale)[0] == node:
                ahead[node], behind[to] = to, node


@compiled
def _nearest(
    values: FloatArray,
    node: int,
    begin: int,
    end: int,
    turning: NDArray[np.bool_],
    scale: FloatArray,
) -> tuple[int, float]:
    """Return which of some nodes is nearest to another, and by how much a joint changes."""
    nearest, least = -1, 1e300
    for other in range(begin, end):
        furthest = 0.0
        for joint in range(values.shape[1]):
            off = values[other, joint] - values[node, joint]
            if turning[joint]:
                off -= _TURN * np.rint(off / _TURN)
            furthest = max(furthest, abs(off) / scale[joint])
        if furthest < least:
            nearest, least = other, furthest
    return nearest, least


@compiled
def walk(
    order: NDArray[np.int64],
    eligible: NDArray[np.bool_],
    ahead: NDArray[np.int64],
    behind: NDArray[np.int64],
    bounds: FloatArray,
    turning: NDArray[np.bool_],
    most: float,
    values: FloatArray,
    stretch: NDArray[np.int64],
    ends: NDArray[np.int64],
) -> int:
    """Write the stretches of eligible nodes, each from the best of its nodes both ways.

    Parameters
    ----------
    order : (k,), nodes, the best first. eligible : (k,), which may be walked through.
    ahead, behind : (k,), as ``link`` writes them.
    bounds : (2, joints), least and largest value of joints. turning : (joints,), joints whose
        whole turns are taken over; others may change by ``most`` at a step.
    values : (k, joints), overwritten where whole turns are taken over.
    stretch : (k,), written, which stretch each node is of. ends : (k, 3), written.

    Returns
    -------
    How many stretches there are.

    Examples
    --------
    >>> nodes, all_of = np.array([[3.0], [-3.1], [-2.9]]), np.ones(3, bool)
    >>> ahead, behind = np.array([1, 2, -1]), np.array([-1, 0, 1])
    >>> bounds, stretch, ends = np.array([[-4.0], [3.3]]), *np.empty((2, 3, 3), np.int64)
    >>> walk(
    ...     np.arange(3), all_of, ahead, behind, bounds, np.ones(1, bool), 1.0, nodes,
    ...     stretch[0], ends,
    ... ), ends[:2].tolist(), nodes.ravel().round(2)
    (2, [[0, 1, 0], [2, 2, 2]], array([ 3.  ,  3.18, -2.9 ]))
    """
    count = np.int64(0)
    for node in range(stretch.shape[0]):
        stretch[node] = NONE
    for best in order:
        if not eligible[best] or stretch[best] != NONE:
            continue
        stretch[best] = count
        last = _walked(best, ahead, eligible, bounds, turning, most, values, stretch)
        first = _walked(best, behind, eligible, bounds, turning, most, values, stretch)
        ends[count, FIRST], ends[count, LAST], ends[count, BEST] = first, last, best
        count += 1
    return int(count)


@compiled
def _walked(
    node: int,
    onward: NDArray[np.int64],
    eligible: NDArray[np.bool_],
    bounds: FloatArray,
    turning: NDArray[np.bool_],
    most: float,
    values: FloatArray,
    stretch: NDArray[np.int64],
) -> int:
    """Return the last node that one way from a node leads to, all of them marked."""
    while True:
        to = onward[node]
        if to == NONE or not eligible[to] or stretch[to] != NONE:
            return node
        for joint in range(values.shape[1]):
            value, before = values[to, joint], values[node, joint]
            if turning[joint]:
                value += _TURN * np.rint((before - value) / _TURN)
            elif abs(value - before) > most:
                return node
            if value < bounds[0, joint] or value > bounds[1, joint]:
                return node
        for joint in range(values.shape[1]):
            if turning[joint]:
                turns = np.rint((values[node, joint] - values[to, joint]) / _TURN)
                values[to, joint] += _TURN * turns
        stretch[to] = stretch[node]
        node = to
