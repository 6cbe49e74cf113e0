"""Fifteen numbers of a line: every rigid motion acts on them as a matrix."""

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from kinematics.inverse.line_forms import FORM, joint_matrices, line_forms, motion_matrix
from tests.kinematics.inverse.seeds import fresh


def drawn_pose(rng: np.random.Generator) -> np.ndarray:
    pose = np.eye(4)
    pose[:3, :3] = Rotation.random(random_state=int(rng.integers(2**31))).as_matrix()
    pose[:3, 3] = rng.normal(size=3)
    return pose


def test_moving_a_line_is_multiplying_its_form() -> None:
    rng = fresh()
    for _ in range(50):
        pose, line, place = drawn_pose(rng), rng.normal(size=3), rng.normal(size=3)
        moved = line_forms(pose[:3, :3] @ line, pose[:3, :3] @ place + pose[:3, 3])
        by_matrix = motion_matrix(pose) @ line_forms(line, place)
        np.testing.assert_allclose(by_matrix, moved, atol=1e-13 * max(1.0, np.abs(moved).max()))


def test_one_motion_after_another_is_the_product() -> None:
    rng = fresh()
    one, other = drawn_pose(rng), drawn_pose(rng)
    product = motion_matrix(one) @ motion_matrix(other)
    np.testing.assert_allclose(motion_matrix(one @ other), product, atol=1e-13)


@pytest.mark.parametrize("slides", [False, True])
def test_a_joints_three_matrices_give_every_motion_of_it(slides: bool) -> None:
    rng = fresh()
    axis, point = rng.normal(size=(1, 3)), rng.normal(size=(1, 3))
    axis /= np.linalg.norm(axis)
    matrices = joint_matrices(axis, point, np.array([slides]))[0]
    for v in rng.uniform(-3.0, 3.0, 10):
        pose = np.eye(4)
        if slides:
            pose[:3, 3] = v * axis[0]
            terms = np.array([1.0, v, v * v])
        else:
            pose[:3, :3] = Rotation.from_rotvec(v * axis[0]).as_matrix()
            pose[:3, 3] = point[0] - pose[:3, :3] @ point[0]
            terms = np.array([1.0, np.cos(v), np.sin(v)])
        np.testing.assert_allclose(
            np.tensordot(terms, matrices, 1), motion_matrix(pose), atol=1e-12
        )


def test_a_turning_joint_leaves_its_own_line_alone() -> None:
    rng = fresh()
    axis, point = np.array([[0.0, 0.6, 0.8]]), rng.normal(size=(1, 3))
    form = line_forms(axis[0], point[0])
    matrices = joint_matrices(axis, point, np.zeros(1, bool))[0]
    for terms in ((1.0, np.cos(2.0), np.sin(2.0)), (1.0, np.cos(-0.4), np.sin(-0.4))):
        np.testing.assert_allclose(np.tensordot(terms, matrices, 1) @ form, form, atol=1e-13)


def test_along_exp_minus_it_a_turn_reaches_four_directions_alone() -> None:
    # What lets sixteen rows do instead of 24: elimination_pencil.py.
    rng = fresh()
    axis, point = np.array([[0.36, 0.48, 0.8]]), rng.normal(size=(1, 3))
    terms = joint_matrices(axis, point, np.zeros(1, bool))[0]
    values = np.linalg.svd(terms[1] + 1j * terms[2], compute_uv=False)
    assert values[3] > 0.1
    assert values[4:].max() < 1e-12
    assert len(values) == FORM
