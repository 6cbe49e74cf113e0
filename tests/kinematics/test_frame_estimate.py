"""Estimates against scipy's least squares on the same residuals, and against the truth.

Oracle: scipy.optimize.least_squares with finite differences, over rotation vectors and positions of
all frames but one, the weighted residuals written out one relation at a time.
"""

import numpy as np
import pytest
from scipy.optimize import least_squares
from scipy.spatial.transform import Rotation

from kinematics import block_system
from kinematics.frame_estimate import Estimate, estimate
from kinematics.frame_residuals import Weights, linearised
from kinematics.frames import FrameGraph
from kinematics.transforms import pose
from tests.kinematics.networks import RandomNetwork, random_network, rigid


def sds_of(network: RandomNetwork, seed: int) -> tuple[np.ndarray, np.ndarray]:
    draw = np.random.default_rng(seed)
    return draw.uniform(0.5, 3.0, (2, len(network.inner))) * 1e-2  # type: ignore[return-value]


def residuals_of(
    frames: np.ndarray, network: RandomNetwork, sds: tuple[np.ndarray, np.ndarray]
) -> np.ndarray:
    """Return all weighted residuals of frames (count, 4, 4) in any one frame."""
    found = []
    for k, given in enumerate(network.of_in):
        between = np.linalg.inv(frames[network.inner[k]]) @ frames[network.outer[k]]
        off = Rotation.from_matrix(given[:3, :3].T @ between[:3, :3]).as_rotvec()
        found += [*((between[:3, 3] - given[:3, 3]) / sds[0][k]), *(off / sds[1][k])]
    return np.array(found)


def plainly_estimated(network: RandomNetwork, sds: tuple[np.ndarray, np.ndarray]) -> np.ndarray:
    """Return frames that fit best, frame 0 held where it is."""
    count = len(network.frame_in_hall)

    def frames_of(unknown: np.ndarray) -> np.ndarray:
        moved = unknown.reshape(count - 1, 6)
        rest = rigid(Rotation.from_rotvec(moved[:, :3]), moved[:, 3:])
        return np.concatenate([network.frame_in_hall[:1], rest])

    start = [
        [*Rotation.from_matrix(frame[:3, :3]).as_rotvec(), *frame[:3, 3]]
        for frame in network.frame_in_hall[1:]
    ]
    solved = least_squares(
        lambda unknown: residuals_of(frames_of(unknown), network, sds),
        np.ravel(start),
        method="lm",
        xtol=1e-15,
        ftol=1e-15,
        gtol=1e-15,
    )
    return frames_of(solved.x)


def relative(frames: np.ndarray) -> np.ndarray:
    return np.asarray(np.linalg.inv(frames[0]) @ frames)


def in_frame_0(network: RandomNetwork, graph: FrameGraph, found: Estimate) -> np.ndarray:
    names = [f"frame-{k}" for k in range(len(network.frame_in_hall))]
    numbers = graph.connections.numbers_of(names)
    return found.pose_between(numbers, np.full_like(numbers, numbers[0]))


@pytest.mark.parametrize(("seed", "error"), [(0, 0.01), (1, 0.01), (2, 0.1), (3, 0.3)])
def test_same_as_scipy(seed: int, error: float) -> None:
    network = random_network(5, 9, error=error, seed=seed)
    sds, graph = sds_of(network, seed), network.graph()
    found = estimate(graph, *sds)
    expected = plainly_estimated(network, sds)
    assert found.settled
    np.testing.assert_allclose(
        in_frame_0(network, graph, found), relative(expected), rtol=0, atol=2e-7
    )
    off = residuals_of(expected, network, sds)
    assert found.sum_of_squares == pytest.approx(off @ off, rel=1e-9)
    assert found.freedom == 6 * (9 - 4)
    assert found.misfit == pytest.approx(np.sqrt(off @ off / 30))
    lengths = np.linalg.norm(off.reshape(-1, 2, 3), axis=2) * np.array(sds).T
    np.testing.assert_allclose(found.position_residual, lengths[:, 0], rtol=0, atol=1e-6)
    np.testing.assert_allclose(found.angle_residual, lengths[:, 1], rtol=0, atol=1e-6)


@pytest.mark.parametrize("way", ["dense", "factors", "steps"])
@pytest.mark.parametrize(("frames", "relations"), [(2, 1), (30, 29), (30, 80)])
def test_relations_that_agree_give_the_truth(
    frames: int, relations: int, way: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(block_system, "MOST_DENSE", 1200 if way == "dense" else 0)
    monkeypatch.setattr(block_system, "MOST_ENVELOPE", 0 if way == "steps" else 1e9)
    network = random_network(frames, relations, seed=7)
    graph, usual = network.graph(), np.full(relations, 1e-3)
    found = estimate(graph, usual, usual)
    assert found.settled
    assert found.iterations <= 4
    truth = relative(network.frame_in_hall)
    np.testing.assert_allclose(in_frame_0(network, graph, found), truth, rtol=0, atol=1e-12)
    assert found.position_residual.max() < 1e-12
    assert found.freedom == 6 * (relations - frames + 1)
    assert (found.misfit is None) is (found.freedom == 0)


@pytest.mark.parametrize("way", ["factors", "steps"])
def test_large_networks_find_what_small_ones_do(way: str, monkeypatch: pytest.MonkeyPatch) -> None:
    network = random_network(40, 90, error=0.05, seed=9)
    graph, sds = network.graph(), sds_of(network, 9)
    dense = estimate(graph, *sds)
    monkeypatch.setattr(block_system, "MOST_DENSE", 0)
    monkeypatch.setattr(block_system, "MOST_ENVELOPE", 0 if way == "steps" else 1e9)
    found = estimate(graph, *sds)
    assert found.settled
    np.testing.assert_allclose(found.frame_in_root, dense.frame_in_root, rtol=0, atol=1e-9)


def test_groups_are_estimated_each_for_itself() -> None:
    heights = pose(np.eye(3), [[0, 0, 1.0], [0, 0, 2.0], [0, 0, 1.0], [0, 0, 4.0], [0, 0, 9.0]])
    graph = FrameGraph(["a", "a", "c", "c", "e"], ["b", "b", "d", "d", "world"], heights)
    found = estimate(graph, np.array([1.0, 1, 1, 0.5, 1]), np.ones(5))
    ends = ["a", "c", "e"], ["b", "d", "world"]
    of, within = (graph.connections.numbers_of(names) for names in ends)
    heights_found = found.pose_between(of, within)[:, 2, 3]
    np.testing.assert_allclose(heights_found, [1.5, (1 + 4 * 4) / 5, 9], rtol=0, atol=1e-12)
    assert found.freedom == 12


def test_wild_contradictions_settle_or_say_so() -> None:
    settled = 0
    for seed in range(10):
        network = random_network(8, 16, error=1.5, seed=seed)
        graph, usual = network.graph(), np.full(16, 1e-3)
        found = estimate(graph, usual, usual)
        assert np.isfinite(found.frame_in_root).all()
        at = linearised(graph, Weights(usual, usual), found.frame_in_root)
        slope = np.abs(at.gradient(found.pattern)).max() * 1e-3
        assert (slope < 1e-3 * found.sum_of_squares**0.5) or not found.settled
        settled += found.settled
    assert settled >= 8
