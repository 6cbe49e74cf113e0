"""Starts: even, and the nearest first."""

import numpy as np

from kinematics.inverse.starts import nearest_starts, scrambled_halton
from tests.kinematics.example_arms import (
    random_pose,
)
from tests.kinematics.inverse.seeds import fresh


def test_starts_fill_each_joint_evenly_and_no_two_alike() -> None:
    points = scrambled_halton(1024, 32, seed=7)
    assert ((points >= 0.0) & (points < 1.0)).all()
    for dimension in range(32):
        counts = np.histogram(points[:, dimension], bins=8, range=(0.0, 1.0))[0]
        assert counts.min() > 100
    # Pairs of high dimensions lie on few lines when digits are not permuted.
    assert np.abs(np.corrcoef(points.T) - np.eye(32)).max() < 0.2
    np.testing.assert_array_equal(points, scrambled_halton(1024, 32, seed=7))


def test_the_nearest_starts_come_first() -> None:
    random = fresh()
    poses = np.array([random_pose(random) for _ in range(40)])
    target = random_pose(random)
    for task, columns in ((0, slice(0, 4)), (1, slice(3, 4)), (2, slice(2, 4))):
        weight = np.array([0.5, 0.5, 1.0 if task == 2 else 0.5, 1.0])[columns]
        squares = ((poses - target)[:, :3, columns] ** 2 * weight).sum(axis=(1, 2))
        picked = nearest_starts(poses, target[None], task, 6)
        np.testing.assert_array_equal(picked, [np.argsort(squares)[:6]])
        everyone = nearest_starts(poses, target[None], task, 40)
        np.testing.assert_array_equal(everyone, [np.argsort(squares)])
