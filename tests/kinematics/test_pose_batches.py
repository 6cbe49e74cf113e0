"""Batches of poses as given, against the careful way for each, and what is left to that way."""

import numpy as np
import pytest

from kinematics.orientation_forms import FORMS, rotation_from, shape_of, values_of
from kinematics.pose_batches import poses_as_given
from tests.kinematics.networks import random_network

HALF_TURNS = np.array([np.diag([1.0, -1, -1]), np.diag([-1.0, 1, -1]), np.diag([-1.0, -1, 1])])


@pytest.mark.parametrize("form", FORMS)
def test_same_as_one_by_one(form: str) -> None:
    rotations = random_network(200, 200).frame_in_hall[:, :3, :3]
    rotations = np.concatenate([rotations, HALF_TURNS, np.eye(3)[None]])
    values = values_of(form, rotations)
    if form not in ("matrix", "quaternion-wxyz", "quaternion-xyzw"):
        values = values * 1.7  # beyond the canonical range too
    positions = np.arange(3.0 * len(values)).reshape(-1, 3) - 300
    poses = poses_as_given(form, values, positions)
    assert poses is not None
    np.testing.assert_allclose(poses[:, :3, :3], rotation_from(form, values), rtol=0, atol=2e-15)
    assert np.array_equal(poses[:, :3, 3], positions)
    assert (poses[:, 3] == [0, 0, 0, 1]).all()


@pytest.mark.parametrize("form", FORMS)
def test_no_turn_is_exact_and_none_is_none(form: str) -> None:
    values = values_of(form, np.eye(3)[None])
    poses = poses_as_given(form, values, np.zeros((1, 3)))
    assert poses is not None
    assert np.array_equal(poses[0], np.eye(4))
    none = poses_as_given(form, np.empty((0, *shape_of(form))), np.empty((0, 3)))
    assert none is not None
    assert none.shape == (0, 4, 4)


@pytest.mark.parametrize(
    ("form", "bad"),
    [
        ("quaternion-wxyz", [1.000002, 0, 0, 0]),
        ("quaternion-xyzw", [0, 0, 0, 0.999998]),
        ("quaternion-wxyz", [0, 0, 0, 0]),
        ("rotation-vector", [0.9e9, 0.9e9, 0]),
        ("zyx-current", [0, 1.1e9, 0]),
        ("matrix", [[1.000001, 0, 0], [0, 1, 0], [0, 0, 1]]),
        ("matrix", [[-1, 0, 0], [0, 1, 0], [0, 0, 1]]),
        ("matrix", [[2e9, 0, 0], [0, 1, 0], [0, 0, 1]]),
    ],
)
def test_what_must_be_mended_or_refused_is_left_to_the_careful_way(form: str, bad: object) -> None:
    good = values_of(form, np.eye(3)[None])
    values = np.concatenate([good, np.array([bad], dtype=float), good])
    assert poses_as_given(form, values, np.zeros((3, 3))) is None
    positions = np.zeros((1, 3))
    positions[0, 2] = -1.1e9
    assert poses_as_given(form, good, positions) is None
