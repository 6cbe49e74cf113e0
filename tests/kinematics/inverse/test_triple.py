"""The two triangles against products of rotations, to the last digit where they are flat."""

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from kinematics.inverse.triple import (
    meeting_triple,
    parallel_triple,
    span_across,
    split_meeting,
    split_parallel,
)

# Rounding of the angles, times the length of what they turn.
ROUNDING = 2e-14


def random_directions(random: np.random.Generator) -> np.ndarray:
    directions = random.normal(size=(3, 3))
    directions /= np.linalg.norm(directions, axis=1)[:, None]
    return directions


def turns_of(axes: np.ndarray, motions: np.ndarray) -> np.ndarray:
    """Return the product of three turns."""
    one, two, three = (Rotation.from_rotvec(axes[i] * motions[i]) for i in range(3))
    turned: np.ndarray = (one * two * three).as_matrix()
    return turned


def about(axis: np.ndarray, point: np.ndarray, angle: float) -> np.ndarray:
    moved = np.eye(4)
    moved[:3, :3] = Rotation.from_rotvec(axis * angle).as_matrix()
    moved[:3, 3] = point - moved[:3, :3] @ point
    return moved


def apart(one: np.ndarray, other: np.ndarray) -> float:
    """Return the largest difference of angles, whole turns aside."""
    return float(np.abs((one - other + np.pi) % (2 * np.pi) - np.pi).max())


def test_meeting_axes_have_two_ways_and_the_given_one_is_among_them() -> None:
    random = np.random.default_rng(1)
    for _ in range(300):
        axes, motions = random_directions(random), random.uniform(-np.pi, np.pi, 3)
        pose, split = np.eye(4), np.empty((2, 3))
        pose[:3, :3] = turns_of(axes, motions)
        count, excess = split_meeting(meeting_triple(axes), pose, 0.0, split)
        assert (count, excess) == (2, 0.0)
        for found in split:
            np.testing.assert_allclose(turns_of(axes, found), pose[:3, :3], rtol=0.0, atol=ROUNDING)
        assert min(apart(found, motions) for found in split) < 1e-9


@pytest.mark.parametrize("bend", [0.0, 1e-15, 1e-12, 1e-9, 1e-8, 1e-6, 1e-3])
@pytest.mark.parametrize("stretched", [False, True])
def test_a_lined_up_wrist_keeps_all_digits(bend: float, stretched: bool) -> None:
    random = np.random.default_rng(2)
    axes = np.array([[0.0, 0, 1], [0, 1, 0], [0, 0, 1]])
    for _ in range(50):
        motions = random.uniform(-np.pi, np.pi, 3)
        motions[1] = (np.pi if stretched else 0.0) + bend
        pose, split = np.eye(4), np.empty((2, 3))
        pose[:3, :3] = turns_of(axes, motions)
        # Rounding of the pose may put the triangle that much beyond flat.
        count, excess = split_meeting(meeting_triple(axes), pose, 1e-14, split)
        assert count == 2
        assert excess < 1e-15
        for found in split:
            np.testing.assert_allclose(turns_of(axes, found), pose[:3, :3], rtol=0.0, atol=ROUNDING)
        assert min(apart(found[1:2], motions[1:2]) for found in split) < 3e-15


def test_a_slanted_wrist_tells_by_how_much_it_fails() -> None:
    # Neighbours 40 and 50 deg apart reach 90 deg from the first axis, not 100.
    axes = Rotation.from_rotvec(np.deg2rad([[0, 0, 0], [0, 40, 0], [0, 90, 0]])).apply([0, 0, 1])
    pose, split = np.eye(4), np.empty((2, 3))
    pose[:3, :3] = Rotation.from_euler("y", 10, degrees=True).as_matrix()
    count, excess = split_meeting(meeting_triple(axes), pose, 1e-6, split)
    assert count == 0
    assert excess == pytest.approx(np.deg2rad(10), abs=1e-15)


def test_parallel_axes_have_two_ways_and_the_given_one_is_among_them() -> None:
    random = np.random.default_rng(3)
    for _ in range(300):
        direction = random_directions(random)[0]
        axes = direction * random.choice([-1.0, 1.0], (3, 1))
        points, motions = random.normal(size=(3, 3)), random.uniform(-np.pi, np.pi, 3)
        turns = [about(*each) for each in zip(axes, points, motions, strict=True)]
        pose, split = turns[0] @ turns[1] @ turns[2], np.empty((2, 3))
        count, excess = split_parallel(parallel_triple(axes, points), pose, 0.0, split)
        assert (count, excess) == (2, 0.0)
        for found in split:
            turns = [about(*each) for each in zip(axes, points, found, strict=True)]
            np.testing.assert_allclose(turns[0] @ turns[1] @ turns[2], pose, rtol=0.0, atol=1e-13)
        assert min(apart(found, motions) for found in split) < 1e-8


def test_a_stretched_elbow_keeps_all_digits_and_one_too_short_tells_by_how_much() -> None:
    axes, points = np.array([[0.0, 0, 1]] * 3), np.array([[0.0, 0, 0], [2, 0, 0], [3, 0, 0]])
    triple, split = parallel_triple(axes, points), np.empty((2, 3))
    for bend in (0.0, 1e-9, 1e-6):
        turns = [about(*each) for each in zip(axes, points, (0.3, bend, 0.1), strict=True)]
        pose = turns[0] @ turns[1] @ turns[2]
        count, _ = split_parallel(triple, pose, 1e-14, split)
        assert count == 2
        # Half of the digits of a length are lost in the angle: the cosine is flat there.
        assert min(apart(found, np.array([0.3, bend, 0.1])) for found in split) < 2e-7
    pose = np.eye(4)
    pose[0, 3] = 0.25
    assert np.hypot(*span_across(triple, pose)) == pytest.approx(3.25, abs=1e-15)
    count, excess = split_parallel(triple, pose, 1e-6, split)
    assert count == 0
    assert excess == pytest.approx(0.25, abs=1e-15)
