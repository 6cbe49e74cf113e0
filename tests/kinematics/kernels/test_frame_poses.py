"""Poses along ways against products of matrices; what loops are off by against scipy's Rotation."""

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from kinematics.kernels.frame_poses import closures, poses_along
from tests.kinematics.networks import random_network, rigid


def test_poses_along_ways_are_products() -> None:
    network = random_network(12, 20, error=0.5, seed=4)
    draw = np.random.default_rng(4)
    steps = draw.integers(-20, 20, 60)
    begins = np.array([0, 0, 1, 25, 60])
    poses = poses_along(network.of_in, begins, steps)
    for way in range(4):
        expected = np.eye(4)
        for step in steps[begins[way] : begins[way + 1]].tolist():
            given = network.of_in[step] if step >= 0 else np.linalg.inv(network.of_in[~step])
            expected = expected @ given
        np.testing.assert_allclose(poses[way], expected, rtol=0, atol=1e-12)
        assert poses[way, 3].tolist() == [0, 0, 0, 1]


@pytest.mark.parametrize("angle", [0.0, 1e-12, 1e-8, 1e-3, 1.0, 3.0, np.pi - 1e-8, np.pi])
def test_angle_keeps_its_digits_at_both_ends(angle: float) -> None:
    axes = np.array([[1.0, 0, 0], [0, -1.0, 0], [0.6, 0, 0.8], [0.48, 0.6, -0.64]])
    poses = rigid(Rotation.from_rotvec(angle * axes), np.array([[0, 0, 0], [3.0, 4, 0]] * 2))
    position, found = closures(poses)
    np.testing.assert_allclose(found, angle, rtol=0, atol=1e-15)
    assert position.tolist() == [0, 5, 0, 5]


def test_closures_of_no_poses() -> None:
    position, angle = closures(np.empty((0, 4, 4)))
    assert len(position) == len(angle) == 0
