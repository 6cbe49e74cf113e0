"""First and second derivatives of what relations are off by, against differences."""

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from kinematics.frame_estimate import estimate
from kinematics.frame_residuals import Weights, _bent, linearised
from kinematics.transforms import pose
from tests.kinematics.networks import random_network, rigid


def test_second_derivatives_are_those_of_the_sum_of_squares() -> None:
    """Against differences of the gradient, at poses far from the least."""
    network = random_network(4, 7, error=0.6, seed=3)
    graph = network.graph()
    weights = Weights(np.full(7, 0.5), np.full(7, 0.7))
    found = estimate(graph, weights.position_sd, weights.angle_sd)
    pattern = found.pattern
    unknown = np.where(graph.group == np.arange(5), -1, np.arange(5) - 2)
    frames = rigid(Rotation.random(5, random_state=3), np.random.default_rng(3).normal(size=(5, 3)))

    def moved(step: np.ndarray) -> np.ndarray:
        whole = np.concatenate([step.reshape(-1, 6), np.zeros((1, 6))])[unknown]
        turned = Rotation.from_rotvec(whole[:, 3:]).as_matrix() @ frames[:, :3, :3]
        return pose(turned, frames[:, :3, 3] + whole[:, :3])

    def sum_of_squares(step: np.ndarray) -> float:
        return 0.5 * linearised(graph, weights, moved(step)).sum_of_squares

    at = linearised(graph, weights, frames)
    count = 6 * pattern.nodes
    steps = np.eye(count) * 1e-4
    slope = [(sum_of_squares(s) - sum_of_squares(-s)) / 2e-4 for s in steps]
    np.testing.assert_allclose(at.gradient(pattern).reshape(-1), slope, rtol=0, atol=1e-5)
    bend = [
        [
            sum_of_squares(s + t)
            - sum_of_squares(s - t)
            - sum_of_squares(t - s)
            + sum_of_squares(-s - t)
            for s in steps
        ]
        for t in steps
    ]
    whole = (pattern.normal(at.of_inner, at.of_outer) + at.bend(pattern)).dense()
    np.testing.assert_allclose(whole, np.array(bend) / 4e-8, rtol=0, atol=1e-3)


def test_small_and_large_residuals_bend_alike() -> None:
    """The quotient and its series agree where one takes over from the other."""
    half = 1e-3
    angles = 2.0 * half * np.array([1 - 1e-9, 1 + 1e-9])
    low, high = _bent(angles[:, None] * np.array([0.6, 0.0, 0.8])).reshape(-1)
    assert abs(low - high) < 1e-9
    assert _bent(np.array([[np.pi, 0, 0]])).item() == pytest.approx(1.0 / np.pi**2)
