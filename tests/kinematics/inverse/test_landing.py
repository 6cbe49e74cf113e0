"""Lines and tool carried through motions, against the table's own chain and scipy's rotations."""

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from kinematics.inverse.landing import columns_of, gap_to, gaps_to, land, land_all
from kinematics.inverse.screws import Screws, screws_of
from kinematics.jacobian import motion_of
from tests.kinematics.example_arms import (
    SELECTIVE,
    SEVEN,
    SIX,
    arm_of,
    random_arm,
    random_joint_values,
    random_pose,
)

# Two chains of up to seven rows, lengths of a few metres; measured over 1000 arms: at most 6e-15.
ROUNDING = 3e-14


def landed(screws: Screws, motions: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Return tool pose and Jacobian, lengths over L."""
    n = screws.rows
    axis_now, point_now, pose, jacobian = (np.zeros(s) for s in ((n, 3), (n, 3), (4, 4), (6, n)))
    lines = screws.axis, screws.point, screws.prismatic
    land(*lines, screws.tool_at_zero, motions, axis_now, point_now, pose)
    columns_of(axis_now, point_now, screws.prismatic, pose, jacobian)
    pose[3, 3] = 1.0
    return pose, jacobian


@pytest.mark.parametrize("rows", [SIX, SEVEN, SELECTIVE, None], ids=["six", "seven", "rrpr", "any"])
def test_lands_where_the_chain_does_with_its_jacobian(rows: tuple[object, ...] | None) -> None:
    random = np.random.default_rng(7)
    for _ in range(20):
        arm = random_arm(random, 5) if rows is None else arm_of(*rows)  # type: ignore[arg-type]
        tool = random_pose(random)
        screws = screws_of(arm, tool)
        values = random_joint_values(random, arm, 1)[0]
        expected = motion_of(arm, values, tool)
        # Motions of sliding rows and the linear rows of the Jacobian are shares of the length.
        over_length = np.where(screws.prismatic, 1.0 / screws.length, 1.0)
        pose, jacobian = landed(screws, arm.drive_map.motions(values) * over_length)
        pose[:3, 3] *= screws.length
        np.testing.assert_allclose(pose, expected.tool_in_base, rtol=0.0, atol=ROUNDING)
        jacobian *= over_length
        jacobian[:3] *= screws.length
        np.testing.assert_allclose(jacobian, expected.of_rows, rtol=0.0, atol=ROUNDING)


@pytest.mark.parametrize("off", [0.0, 1e-12, 1e-9, 1e-6, 1e-3, 0.14, 0.15, 1.0, 3.0])
@pytest.mark.parametrize("near", [0.0, np.pi])
def test_gap_is_the_shift_and_the_rotation_vector(near: float, off: float) -> None:
    random = np.random.default_rng(8)
    for _ in range(50):
        axis = random.normal(size=3)
        vector = axis / np.linalg.norm(axis) * abs(near - off)
        pose, target, gap = random_pose(random), np.eye(4), np.empty(6)
        target[:3, :3] = Rotation.from_rotvec(vector).as_matrix() @ pose[:3, :3]
        target[:3, 3] = random.normal(size=3)
        gap_to(pose, target, gap)
        np.testing.assert_allclose(gap[:3], target[:3, 3] - pose[:3, 3], rtol=0.0, atol=1e-15)
        # At a half turn either sign is right.
        turn = gap[3:] if gap[3:] @ vector >= 0.0 or abs(near - off) < np.pi else -gap[3:]
        np.testing.assert_allclose(turn, vector, rtol=0.0, atol=2e-14)


def test_many_at_once_are_the_same_as_one_by_one() -> None:
    screws = screws_of(arm_of(*SIX), np.eye(4))
    motions = np.random.default_rng(9).uniform(-4.0, 4.0, (5, 6))
    poses, gaps = np.empty((5, 4, 4)), np.empty((5, 2))
    land_all(screws.axis, screws.point, screws.prismatic, screws.tool_at_zero, motions, poses)
    for each, pose in zip(motions, poses, strict=True):
        np.testing.assert_array_equal(landed(screws, each)[0], pose)
    gaps_to(poses, poses[[1, 2]], np.array([0.0, 0, 0, 1, 1]), gaps)
    vector = Rotation.from_matrix(poses[1, :3, :3] @ poses[3, :3, :3].T).as_rotvec()
    assert gaps[1].tolist() == pytest.approx([0.0, 0.0], abs=1e-15)
    assert gaps[3] == pytest.approx(
        [np.linalg.norm(poses[3, :3, 3] - poses[2, :3, 3]), gaps[3, 1]], abs=1e-15
    )
    assert np.linalg.norm(vector) > 0.0
