"""Axes at zero motion against the chain itself, by the matrix exponential of each row's motion."""

import numpy as np
import pytest
from scipy.linalg import expm

from kinematics.chain import tool_in_base
from kinematics.inverse.screws import Screws, screws_of
from tests.kinematics.example_arms import (
    PLANAR,
    SIX,
    arm_of,
    prismatic,
    random_arm,
    random_joint_values,
    random_pose,
    revolute,
)
from tests.kinematics.inverse.seeds import fresh


def of_motions(screws: Screws, motions: np.ndarray) -> np.ndarray:
    """Return the tool in base, metres, as a product of matrix exponentials."""
    at = np.eye(4)
    for axis, point, slides, motion in zip(
        screws.axis, screws.point, screws.prismatic, motions, strict=True
    ):
        twist = np.zeros((4, 4))
        if slides:
            twist[:3, 3] = axis / screws.length
        else:
            twist[:3, :3] = np.cross(np.eye(3), axis)
            twist[:3, 3] = -np.cross(axis, point)
        at = at @ expm(twist * motion)
    at = at @ screws.tool_at_zero
    at[:3, 3] *= screws.length
    return at


@pytest.mark.parametrize("count", [1, 3, 6, 8])
def test_product_of_exponentials_is_the_chain(count: int) -> None:
    seed = np.random.SeedSequence().entropy
    random = fresh()
    for _ in range(8):
        arm = random_arm(random, count, coupled=True, passive=count // 3)
        tool = random_pose(random)
        values = random_joint_values(random, arm, 1)
        got = of_motions(screws_of(arm, tool), arm.drive_map.motions(values)[0])
        assert np.abs(got - tool_in_base(arm, values, tool)[0]).max() < 1e-12, seed


def test_length_is_that_of_the_line_through_the_axes_to_the_tool() -> None:
    assert screws_of(arm_of(*PLANAR), np.eye(4)).length == pytest.approx(0.73, abs=1e-15)
    six = screws_of(arm_of(*SIX), np.eye(4))
    at = np.vstack([six.point, six.tool_at_zero[:3, 3]])
    assert np.linalg.norm(np.diff(at, axis=0), axis=1).sum() == pytest.approx(1.0, abs=1e-15)


def test_an_arm_without_lengths_has_one_metre() -> None:
    screws = screws_of(arm_of(prismatic(), prismatic(alpha=1.0), revolute()), np.eye(4))
    assert screws.length == 1.0


def test_targets_are_scaled_in_their_position_alone() -> None:
    screws = screws_of(arm_of(*PLANAR), np.eye(4))
    targets = np.tile(np.eye(4), (2, 1, 1))
    targets[:, :3, 3] = 0.73
    scaled = screws.scaled(targets)
    assert scaled[:, :3, 3] == pytest.approx(1.0)
    assert (scaled[:, :3, :3] == np.eye(3)).all()
    assert (targets[:, :3, 3] == 0.73).all()
