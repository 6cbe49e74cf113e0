"""What holds for every network of frames: trees give the truth, loops are counted, both ways round.

Drawn: the shape of the network, which ends come first, in which order relations are given.
"""

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.spatial.transform import Rotation

from kinematics.frame_estimate import estimate
from kinematics.frames import FrameGraph
from kinematics.transforms import inverse
from tests.kinematics.networks import rigid

FEW = settings(max_examples=40, deadline=None)


@st.composite
def networks(draw: st.DrawFn, most_more: int = 12) -> tuple[FrameGraph, np.ndarray, int]:
    """Return a graph, the truth by its frames' numbers, and how many groups it has."""
    frames = draw(st.integers(2, 14))
    seed = draw(st.integers(0, 2**32 - 1))
    truth = rigid(
        Rotation.random(frames, random_state=seed),
        np.random.default_rng(seed).uniform(-5, 5, (frames, 3)),
    )
    parents = [draw(st.none() | st.integers(0, k - 1)) for k in range(1, frames)]
    pairs = [(k, parent) for k, parent in enumerate(parents, start=1) if parent is not None]
    group = list(range(frames))
    for child, parent in pairs:
        group[child] = group[parent]
    for _ in range(draw(st.integers(0, most_more))):
        one, other = draw(st.integers(0, frames - 1)), draw(st.integers(0, frames - 1))
        if group[one] == group[other] and one != other:
            pairs.append((one, other))
    pairs = draw(st.permutations(pairs))
    pairs = [pair[::-1] if draw(st.booleans()) else pair for pair in pairs]
    of_in = np.array([inverse(truth[within]) @ truth[of] for of, within in pairs])
    graph = FrameGraph(
        [f"f{of}" for of, _ in pairs],
        [f"f{within}" for _, within in pairs],
        of_in.reshape(-1, 4, 4),
    )
    number = [int(name[1:]) for name in graph.names[1:]]
    return graph, np.concatenate([np.eye(4)[None], truth[number]]), len(graph.connections.known)


@FEW
@given(networks())
def test_any_pair_in_a_group_is_as_in_truth(drawn: tuple[FrameGraph, np.ndarray, int]) -> None:
    graph, truth, known = drawn
    pairs = [
        (of, within)
        for of in range(1, known + 1)
        for within in range(1, known + 1)
        if graph.group[of] == graph.group[within]
    ]
    of, within = ([graph.names[pair[side]] for pair in pairs] for side in (0, 1))
    there = graph.ways(of, within).poses
    expected = [inverse(truth[w]) @ truth[o] for o, w in pairs]
    np.testing.assert_allclose(there, np.reshape(expected, (-1, 4, 4)), rtol=0, atol=1e-12)
    back = graph.ways(within, of).poses
    np.testing.assert_allclose(there @ back, np.tile(np.eye(4), (len(pairs), 1, 1)), atol=1e-12)


@FEW
@given(networks())
def test_loops_are_as_many_as_they_must_be_and_close(
    drawn: tuple[FrameGraph, np.ndarray, int],
) -> None:
    graph, _, known = drawn
    groups = len(set(graph.group[1:].tolist()))
    assert len(graph.loops) == len(graph.inner) - known + groups
    assert all(path[0] == path[-1] for path in graph.loops.walks.frames)
    position, angle = graph.closures
    assert position.max(initial=0.0) < 1e-12
    assert angle.max(initial=0.0) < 1e-13


@FEW
@given(networks(), st.floats(1e-5, 1e-2), st.floats(1e-5, 1e-2))
def test_an_estimate_of_what_agrees_is_the_truth_whatever_the_weights(
    drawn: tuple[FrameGraph, np.ndarray, int], position_sd: float, angle_sd: float
) -> None:
    graph, truth, _ = drawn
    relations = len(graph.inner)
    draw = np.random.default_rng(relations)
    found = estimate(
        graph,
        position_sd * draw.uniform(0.5, 2.0, relations),
        angle_sd * draw.uniform(0.5, 2.0, relations),
    )
    assert found.settled
    numbers = np.arange(len(graph.names))
    expected = inverse(truth[graph.group]) @ truth
    between = found.pose_between(numbers, graph.group)
    np.testing.assert_allclose(between, expected, rtol=0, atol=1e-10)
