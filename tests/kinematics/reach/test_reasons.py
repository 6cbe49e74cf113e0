"""Reasons: their number is by how much the target is missed, their pose is one the arm has."""

from dataclasses import replace

import numpy as np
import pytest

from kinematics.chain import tool_in_base
from kinematics.reach.checks import Reacher
from kinematics.reach.targets import (
    NONE,
    NOT_FOUND,
    ORIENTATION,
    REACHABLE,
    UNREACHABLE,
    VERDICTS,
    Reason,
    Target,
    Targets,
)
from kinematics.reach.tolerances import MOST_SPANNED
from kinematics.rotations import rotation_about
from tests.kinematics.example_arms import (
    AT_FLANGE,
    PLANAR,
    SELECTIVE,
    SEVEN,
    SHOULDER_AND_ELBOW,
    SIX,
    arm_of,
    revolute,
)
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.reach.arm_classes import CLASSES, postures_within_travel, targets_at


def reason_of(rows: tuple[object, ...], pose: np.ndarray, freedom: int = NONE) -> Reason:
    checks = Reacher(arm_of(*rows), AT_FLANGE).check(  # type: ignore[arg-type]
        Targets.of([Target(pose, freedom)])
    )
    reason = checks.reason_of(0)
    assert reason is not None
    return reason


def test_a_tilted_pose_of_four_axes() -> None:
    pose = tool_in_base(arm_of(*SELECTIVE), np.array([0.3, 0.9, 0.12, 0.4]), AT_FLANGE)
    pose[:3, :3] = rotation_about(np.array([1.0, 0.0, 0.0]), 0.21) @ pose[:3, :3]
    reason = reason_of(SELECTIVE, pose)
    assert reason.unit == "rad"
    np.testing.assert_allclose(reason.shortfall, 0.21, atol=1e-9)
    assert reason.nearest is not None
    np.testing.assert_allclose(reason.nearest[:3, 3], pose[:3, 3], atol=1e-9)
    assert "0.21 rad" in reason.text()


def test_a_place_above_the_plane_of_two_links() -> None:
    pose = np.eye(4)
    pose[:3, 3] = 0.3, 0.2, 0.05
    reason = reason_of(PLANAR, pose, ORIENTATION)
    assert reason.unit == "m"
    np.testing.assert_allclose(reason.shortfall, 0.05, atol=1e-6)
    assert reason.nearest is not None
    np.testing.assert_allclose(reason.nearest[:3, 3], [0.3, 0.2, 0.0], atol=1e-6)


def test_a_place_in_the_column_beside_axis_1() -> None:
    """The first three joints with a sideways offset never come nearer to axis 1 than that."""
    rows = (SHOULDER_AND_ELBOW[0], *(replace(row, d=0.1) for row in SHOULDER_AND_ELBOW[1:]))
    pose = np.eye(4)
    pose[:3, 3] = 0.05, 0.0, 0.8
    reason = reason_of(rows, pose, ORIENTATION)
    np.testing.assert_allclose(reason.shortfall, 0.15, atol=1e-6)
    assert reason.nearest is not None
    np.testing.assert_allclose(np.hypot(*reason.nearest[:2, 3]), 0.2, atol=1e-6)


@pytest.mark.parametrize("name", CLASSES)
def test_a_no_of_every_class_has_a_number_and_a_pose_of_the_arm(name: str) -> None:
    """Targets far out, and targets turned upside down where they are."""
    random = fresh()
    arm, tool, freedom = CLASSES[name](random)
    targets = targets_at(arm, tool, freedom, postures_within_travel(random, arm, 8))
    targets.tool_in_base[:4, :3, 3] *= 3.0
    targets.tool_in_base[4:, :3, 1:3] *= -1.0
    targets.tool_in_base[4:, :3, 3] += random.normal(scale=0.3, size=(4, 3))
    checks = Reacher(arm, tool).check(targets)
    missing = np.flatnonzero(checks.verdict > 0).tolist()
    assert missing or name in ("PPP and wrist", "place by PPP", "PRR and wrist")
    for index in missing:
        reason = checks.reason_of(index)
        assert reason is not None
        assert reason.shortfall > 0.0
        assert reason.unit in ("m", "rad")
        assert "{" not in reason.text()
        assert reason.code == reason.code.lower().replace(" ", "-")
        assert reason.nearest is not None
        np.testing.assert_allclose(np.linalg.det(reason.nearest[:3, :3]), 1.0)
        assert VERDICTS[checks.verdict[index]] != "reachable"


def test_the_nearest_pose_of_a_wrist_out_of_reach_is_as_near_as_the_bound() -> None:
    pose = tool_in_base(arm_of(*SIX), np.array([0.3, 0.2, 0.0, 0.4, 0.5, 0.6]), AT_FLANGE)
    pose[:3, 3] += 0.4 * pose[:3, 3] / np.linalg.norm(pose[:3, 3])
    checks = Reacher(arm_of(*SIX), AT_FLANGE).check(Targets.of([Target(pose)]))
    assert checks.verdict.tolist() == [UNREACHABLE]
    reason = checks.reason_of(0)
    assert reason is not None
    assert reason.nearest is not None
    assert np.linalg.norm(reason.nearest[:3, 3] - pose[:3, 3]) < 0.6


def test_a_search_that_finds_nothing_says_how_near_it_came() -> None:
    """Seven joints, folded to a place that their links reach with no such orientation."""
    pose = np.eye(4)
    pose[:3, 3] = 0.0, 0.0, 1.2
    pose[:3, :3] = np.diag([1.0, -1.0, -1.0])
    checks = Reacher(arm_of(*SEVEN), AT_FLANGE).check(Targets.of([Target(pose)]))
    if checks.verdict[0] == NOT_FOUND:
        reason = checks.reason_of(0)
        assert reason is not None
        assert reason.code == "not-found"
        assert reason.shortfall > 0.0
    else:
        assert checks.verdict[0] == UNREACHABLE


@pytest.mark.parametrize(
    ("rows", "most"),
    [(SEVEN, MOST_SPANNED), ((revolute(a=0.2, alpha=0.5), *SEVEN), 1)],
    ids=["seven", "eight"],
)
def test_families_of_arms_with_joints_to_spare_are_followed_for_a_few_targets(
    rows: tuple[object, ...], most: int
) -> None:
    arm, count = arm_of(*rows), most + 1  # type: ignore[arg-type]
    (pose,) = tool_in_base(arm, np.full((1, arm.joint_count), 0.4), AT_FLANGE)
    checks = Reacher(arm, AT_FLANGE).check(Targets.of([Target(pose, NONE)] * count))
    assert checks.verdict.tolist() == [REACHABLE] * count
    assert all(checks.families_of(index) for index in {0, most - 1})
    assert checks.families_of(most) == ()
    names = [{finding.name for finding in checks.findings_of(index)} for index in range(count)]
    assert ["families-not-followed" in some for some in names] == [False] * most + [True]
