"""Walks through a graph of frames: the loops that relations close, and shortest ways.

A frame is an integer, a relation k the pose of frame ``outer[k]`` in frame ``inner[k]``. A step
along it is written k, a step back ~k. Left out: poses (frame_poses), names, checks.
"""

import numpy as np
from numpy.typing import NDArray

from kinematics.kernels.compiler import compiled

IntArray = NDArray[np.int64]


@compiled
def close_loops(
    inner: IntArray, outer: IntArray, frames: int
) -> tuple[IntArray, IntArray, IntArray, IntArray, IntArray]:
    """Return the loops that relations close, each by the shortest way through those before it.

    A loop starts at its lowest frame. Since no loop holds a relation later than the one that
    closes it, all are independent, and there are relations - frames + groups of them.

    Parameters
    ----------
    inner, outer : (relations,).
    frames : how many there are.

    Returns
    -------
    begins : (loops + 1,), where each loop's steps begin.
    steps : (steps of all loops,).
    group : (frames,), the lowest frame that each one is connected with.
    first_arc : (frames,), the first arc that leaves each frame, or -1. Arc 2 k is relation k
        forward, 2 k + 1 backward.
    next_arc : (2 relations,), the next arc that leaves the same frame, or -1.

    Source
    ------
    Union-find and breadth-first search; Cormen et al., Introduction to Algorithms, 21 and 22.2.

    Examples
    --------
    >>> begins, steps, group, _, _ = close_loops(np.array([0, 1, 2]), np.array([1, 2, 0]), 3)
    >>> begins.tolist(), steps.tolist(), group.tolist()
    ([0, 3], [0, 1, 2], [0, 0, 0])
    """
    relations = len(inner)
    first_arc, next_arc = _all(frames, -1), np.empty(2 * relations, np.int64)
    last_arc, arrived, seen = _all(frames, -1), np.empty(frames, np.int64), _all(frames, -1)
    queue, way = np.empty(frames, np.int64), np.empty(frames + 1, np.int64)
    begins, loops = _all(relations + 1, 0), 0
    steps = np.empty(4 * relations + 16, np.int64)
    group = np.empty(frames, np.int64)
    for frame in range(frames):
        group[frame] = frame
    for k in range(relations):
        one, other = _root(group, inner[k]), _root(group, outer[k])
        if one != other:
            group[max(one, other)] = min(one, other)
        else:
            # From the end of relation k back to its start, along the relations before it.
            length = _shortest_way(
                inner, outer, first_arc, next_arc, outer[k], inner[k], k, seen, arrived, queue, way
            )
            way[length] = k
            begin, length = begins[loops], length + 1
            while begin + length > len(steps):
                steps = _first(steps, len(steps), 2 * len(steps))
            _from_lowest_frame(inner, outer, way, length, steps, begin)
            loops += 1
            begins[loops] = begin + length
        _append_arc(inner[k], 2 * k, first_arc, next_arc, last_arc)
        _append_arc(outer[k], 2 * k + 1, first_arc, next_arc, last_arc)
    for frame in range(frames):
        group[frame] = _root(group, frame)
    count = begins[loops]
    begins = _first(begins, loops + 1, loops + 1)
    return begins, _first(steps, count, count), group, first_arc, next_arc


@compiled
def shortest_ways(
    inner: IntArray,
    outer: IntArray,
    first_arc: IntArray,
    next_arc: IntArray,
    starts: IntArray,
    ends: IntArray,
    most: int,
) -> tuple[IntArray, IntArray]:
    """Return the way with the fewest relations for each pair of frames that are connected.

    Among ways of one length the relations given first win.

    Parameters
    ----------
    first_arc, next_arc : of close_loops.
    starts, ends : (ways,).
    most : steps of all ways together at which the search ends; the ways that are left have none.

    Returns
    -------
    begins : (ways + 1,), where each way's steps begin; a frame to itself has none.
    steps : (steps of all ways,).

    Source
    ------
    Breadth-first search; Cormen et al., Introduction to Algorithms, 22.2.

    Examples
    --------
    >>> inner, outer, arcs = np.array([0]), np.array([1]), np.array([-1, -1])
    >>> shortest_ways(inner, outer, np.array([0, 1]), arcs, np.array([1]), np.array([0]), 9)[1]
    array([-1])
    """
    frames = len(first_arc)
    arrived, seen = np.empty(frames, np.int64), _all(frames, -1)
    queue, way = np.empty(frames, np.int64), np.empty(frames, np.int64)
    begins, steps = _all(len(starts) + 1, 0), np.empty(16 * len(starts) + 16, np.int64)
    for each in range(len(starts)):
        start, end, begin = starts[each], ends[each], begins[each]
        if begin >= most:
            end = start
        length = _shortest_way(
            inner, outer, first_arc, next_arc, start, end, each, seen, arrived, queue, way
        )
        while begin + length > len(steps):
            steps = _first(steps, len(steps), 2 * len(steps))
        for place in range(length):
            steps[begin + place] = way[place]
        begins[each + 1] = begin + length
    count = begins[len(starts)]
    return begins, _first(steps, count, count)


@compiled
def _shortest_way(
    inner: IntArray,
    outer: IntArray,
    first_arc: IntArray,
    next_arc: IntArray,
    start: int,
    end: int,
    mark: int,
    seen: IntArray,
    arrived: IntArray,
    queue: IntArray,
    way: IntArray,
) -> int:
    """Write the steps from ``start`` to ``end`` and return how many; they must be connected."""
    seen[start] = mark
    queue[0] = start
    taken, waiting = 0, 1
    while seen[end] != mark:
        frame = queue[taken]
        taken += 1
        arc = first_arc[frame]
        while arc >= 0:
            beyond = inner[arc >> 1] if arc & 1 else outer[arc >> 1]
            if seen[beyond] != mark:
                seen[beyond] = mark
                arrived[beyond] = arc
                queue[waiting] = beyond
                waiting += 1
            arc = next_arc[arc]
    length = 0
    while end != start:
        arc = arrived[end]
        way[length] = ~(arc >> 1) if arc & 1 else arc >> 1
        length += 1
        end = outer[arc >> 1] if arc & 1 else inner[arc >> 1]
    for place in range(length // 2):
        way[place], way[length - 1 - place] = way[length - 1 - place], way[place]
    return length


@compiled
def _from_lowest_frame(
    inner: IntArray, outer: IntArray, way: IntArray, length: int, steps: IntArray, begin: int
) -> None:
    """Write a loop's steps so that it starts at its lowest frame."""
    lowest = 0
    for place in range(length):
        if _start(inner, outer, way[place]) < _start(inner, outer, way[lowest]):
            lowest = place
    for place in range(length):
        steps[begin + place] = way[(lowest + place) % length]


@compiled
def _all(count: int, value: int) -> IntArray:
    """Return an array of one value; what numpy has for it takes twice as long to compile."""
    filled = np.empty(count, np.int64)
    for place in range(count):
        filled[place] = value
    return filled


@compiled
def _first(values: IntArray, count: int, room: int) -> IntArray:
    """Return the first ``count`` values in an array with room for more."""
    copied = np.empty(room, np.int64)
    for place in range(count):
        copied[place] = values[place]
    return copied


@compiled
def _start(inner: IntArray, outer: IntArray, step: int) -> int:
    return inner[step] if step >= 0 else outer[~step]  # type: ignore[no-any-return]


@compiled
def _root(group: IntArray, frame: int) -> int:
    while group[frame] != frame:
        group[frame] = group[group[frame]]
        frame = group[frame]
    return frame


@compiled
def _append_arc(
    frame: int, arc: int, first_arc: IntArray, next_arc: IntArray, last_arc: IntArray
) -> None:
    next_arc[arc] = -1
    if last_arc[frame] < 0:
        first_arc[frame] = arc
    else:
        next_arc[last_arc[frame]] = arc
    last_arc[frame] = arc
