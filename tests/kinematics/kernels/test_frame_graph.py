"""Loops and ways of random graphs against a search in plain Python and the rank of the loops."""

from collections import deque
from itertools import pairwise

import numpy as np
import pytest

from kinematics.kernels.frame_graph import close_loops, shortest_ways


def ends_of(seed: int) -> tuple[np.ndarray, np.ndarray, int]:
    """Return a random graph, not connected, some relations given twice."""
    draw = np.random.default_rng(seed)
    frames, relations = int(draw.integers(2, 30)), int(draw.integers(1, 60))
    inner = draw.integers(0, frames, relations)
    outer = (inner + draw.integers(1, frames, relations)) % frames
    return inner, outer, frames


def plain_distances(inner: np.ndarray, outer: np.ndarray, start: int) -> dict[int, int]:
    near: dict[int, list[int]] = {}
    for one, other in zip(inner.tolist(), outer.tolist(), strict=True):
        near.setdefault(one, []).append(other)
        near.setdefault(other, []).append(one)
    found, waiting = {start: 0}, deque([start])
    while waiting:
        here = waiting.popleft()
        for there in near.get(here, ()):
            if there not in found:
                found[there] = found[here] + 1
                waiting.append(there)
    return found


def walked(inner: np.ndarray, outer: np.ndarray, steps: list[int]) -> list[int]:
    """Return the frames along steps, which must fit together."""
    ends = [(inner[k], outer[k]) if k >= 0 else (outer[~k], inner[~k]) for k in steps]
    for (_, arrived), (left, _) in pairwise(ends):
        assert arrived == left
    return [int(ends[0][0]), *(int(arrived) for _, arrived in ends)]


@pytest.mark.parametrize("seed", range(40))
def test_loops_are_closed_independent_and_as_many_as_there_are(seed: int) -> None:
    inner, outer, frames = ends_of(seed)
    begins, steps, group, _, _ = close_loops(inner, outer, frames)
    for frame in range(frames):
        assert group[frame] == min(plain_distances(inner, outer, frame))
    count = len(begins) - 1
    assert count == len(inner) - frames + len(set(group.tolist()))
    cycles = np.zeros((count, len(inner)))
    for loop in range(count):
        taken = steps[begins[loop] : begins[loop + 1]].tolist()
        path = walked(inner, outer, taken)
        assert path[0] == path[-1] == min(path)
        assert len(set(path[:-1])) == len(path) - 1
        for step in taken:
            cycles[loop, step if step >= 0 else ~step] += 1 if step >= 0 else -1
        # The last relation closes the loop; the rest is the shortest way before it was there.
        last = max(step if step >= 0 else ~step for step in taken)
        before = plain_distances(inner[:last], outer[:last], int(outer[last]))
        assert len(taken) == 1 + before[int(inner[last])]
    assert np.linalg.matrix_rank(cycles) == count if count else True


@pytest.mark.parametrize("seed", range(20))
def test_ways_are_shortest(seed: int) -> None:
    inner, outer, frames = ends_of(seed)
    _, _, group, first_arc, next_arc = close_loops(inner, outer, frames)
    draw = np.random.default_rng(seed)
    starts, ends = draw.integers(0, frames, 50), draw.integers(0, frames, 50)
    connected = group[starts] == group[ends]
    starts, ends = starts[connected], ends[connected]
    begins, steps = shortest_ways(inner, outer, first_arc, next_arc, starts, ends, 10**6)
    for way, (start, end) in enumerate(zip(starts.tolist(), ends.tolist(), strict=True)):
        taken = steps[begins[way] : begins[way + 1]].tolist()
        assert len(taken) == plain_distances(inner, outer, start)[end]
        if taken:
            path = walked(inner, outer, taken)
            assert (path[0], path[-1]) == (start, end)


def test_of_ways_of_one_length_the_relation_given_first_is_taken() -> None:
    inner, outer = np.array([0, 0, 1, 2]), np.array([2, 1, 3, 3])
    _, _, _, first_arc, next_arc = close_loops(inner, outer, 4)
    _, steps = shortest_ways(inner, outer, first_arc, next_arc, np.array([0]), np.array([3]), 9)
    assert steps.tolist() == [0, 3]
    twice = np.array([1, 1]), np.array([0, 0])
    _, _, _, first_arc, next_arc = close_loops(*twice, 2)
    _, steps = shortest_ways(*twice, first_arc, next_arc, np.array([0]), np.array([1]), 9)
    assert steps.tolist() == [-1]


def test_long_loops_fit() -> None:
    """A ring longer than what was set aside for its steps, closed a hundred times."""
    frames = 400
    inner = np.concatenate([np.arange(frames - 1), np.arange(0, 100)])
    outer = np.concatenate([np.arange(1, frames), np.arange(frames - 1, frames - 101, -1)])
    begins, steps, _, _, _ = close_loops(inner, outer, frames)
    lengths = np.diff(begins)
    assert lengths[0] == frames
    assert len(lengths) == 100
    assert len(steps) == lengths.sum()
