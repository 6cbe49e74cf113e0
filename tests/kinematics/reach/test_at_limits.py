"""Typed poses of arms that stand at a travel limit."""

import numpy as np
import pytest

from kinematics.arm import CombinedTravel
from kinematics.chain import tool_in_base
from kinematics.reach.checks import Reacher
from kinematics.reach.targets import NONE, OUTSIDE_TRAVEL, REACHABLE, Target, Targets
from kinematics.table import Travel
from kinematics.transforms import inverse
from tests.kinematics.example_arms import AT_FLANGE, arm_of, prismatic, revolute
from tests.kinematics.inverse.seeds import fresh

ELBOW = Travel(-2.5, 2.5)
ARM = arm_of(
    revolute(a=0.4, travel=Travel(-3.0, 3.0)),
    revolute(a=0.3, travel=ELBOW),
    prismatic(travel=Travel(0.0, 0.2)),
    revolute(travel=Travel(-6.0, 6.0)),
)


def typed(pose: np.ndarray) -> np.ndarray:
    """Return a pose about z as a display of 0.01 mm and 0.01 deg has it."""
    shown = np.eye(4)
    shown[:3, 3] = pose[:3, 3].round(5)
    angle = np.radians(np.degrees(np.arctan2(pose[1, 0], pose[0, 0])).round(2))
    shown[:2, :2] = [[np.cos(angle), -np.sin(angle)], [np.sin(angle), np.cos(angle)]]
    return shown


def test_an_arm_at_a_limit_is_at_the_pose_it_shows() -> None:
    random, reacher = fresh(), Reacher(ARM, AT_FLANGE)
    values = random.uniform([-2.9, 0, 0.01, -5], [2.9, 0, 0.19, 5], size=(60, 4))
    values[:, 1] = random.choice([ELBOW.lower, ELBOW.upper], size=60)
    poses = np.array([typed(pose) for pose in tool_in_base(ARM, values, AT_FLANGE)])
    checks = reacher.check(Targets.of([Target(pose, NONE) for pose in poses]))
    assert checks.verdict.tolist() == [REACHABLE] * 60
    of = np.repeat(np.arange(60), np.diff(checks.offsets))
    off = inverse(poses[of]) @ tool_in_base(ARM, checks.joint_values, AT_FLANGE)
    # The errors told are those of the postures told.
    shift = np.linalg.norm(off[:, :3, 3], axis=1)
    np.testing.assert_allclose(checks.position_error, shift, atol=1e-12)
    assert shift.max() <= 1e-5
    assert checks.angle_error.max() <= np.radians(0.01)
    assert np.abs(checks.joint_values[:, 1]).max() <= ELBOW.upper


def test_what_another_limit_forbids_is_told_once() -> None:
    combined = CombinedTravel({1: 1.0, 2: 1.0}, Travel(-1.0, 1.0))
    arm = arm_of(*ARM.table.rows, combined_travel=(combined,))
    (pose,) = tool_in_base(arm, np.array([[2.2, 0.4, 0.1, 0.0]]), AT_FLANGE)
    checks = Reacher(arm, AT_FLANGE).check(Targets.of([Target(pose, NONE)]))
    assert checks.verdict.tolist() == [OUTSIDE_TRAVEL]
    assert len(checks.joint_values) == 2


@pytest.mark.parametrize(("beyond", "verdict"), [(1e-5, REACHABLE), (1e-3, OUTSIDE_TRAVEL)])
def test_no_more_than_the_tolerance_is_forgiven(beyond: float, verdict: int) -> None:
    # The elbow moves the tool by some 0.3 m for each radian.
    values = np.array([[0.3, ELBOW.upper + beyond, 0.1, 0.0]])
    (pose,) = tool_in_base(ARM, values, AT_FLANGE)
    checks = Reacher(ARM, AT_FLANGE).check(Targets.of([Target(pose, NONE)]))
    assert checks.verdict.tolist() == [verdict]
