"""Proofs by boxes: never of a target that a posture within travel is at, and right where geometry
is known."""

import numpy as np
import pytest

from kinematics.arm import Arm, CombinedTravel
from kinematics.chain import tool_in_base
from kinematics.inverse.branch_and_bound import BranchAndBound
from kinematics.inverse.measured import DIRECTION, POSE, POSITION
from kinematics.inverse.tolerances import BOX_BUDGET
from kinematics.rotations import rotation_about
from kinematics.table import Travel
from kinematics.tolerances import TARGET_ANGLE, TARGET_POSITION
from kinematics.travel_limits import travel_margin
from tests.kinematics.example_arms import (
    AT_FLANGE,
    FIVE,
    PLANAR,
    SHOULDER_AND_ELBOW,
    arm_of,
    prismatic,
    random_pose,
    revolute,
)
from tests.kinematics.inverse.bounded_arms import COUPLED, bounded
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.reach.arm_classes import CLASSES, postures_within_travel

USUAL = np.array([TARGET_POSITION, TARGET_ANGLE])
EXACT = np.array([1e-9, 1e-9])


def assert_met(arm: Arm, tool: np.ndarray, task: str, pose: np.ndarray, values: np.ndarray) -> None:
    """Assert that a posture is within travel and, by the whole chain, on its target."""
    assert travel_margin(arm, values) >= -1e-12
    there = tool_in_base(arm, values, tool)
    assert np.linalg.norm(there[:3, 3] - pose[:3, 3]) <= TARGET_POSITION * (1.0 + 1e-6)
    if task != POSITION:
        seen = slice(0, 3) if task == POSE else slice(2, 3)
        assert np.abs(there[:3, seen] - pose[:3, seen]).max() <= TARGET_ANGLE * (1.0 + 1e-6)


@pytest.mark.parametrize(
    "name", ["RRPR", "level wrist", "place by RRR", "place by RPP", "place by RR"]
)
def test_no_target_that_a_posture_is_at_is_proved_out_of_reach(name: str) -> None:
    random, met = fresh(), 0
    for _ in range(4):
        arm, tool, freedom = CLASSES[name](random)
        task = POSITION if freedom else POSE
        asked = BranchAndBound(arm, tool, task)
        for pose in tool_in_base(arm, postures_within_travel(random, arm, 5), tool):
            outcome = asked.ask(pose, USUAL)
            assert not outcome.proved
            if outcome.witness is not None:
                met += 1
                assert_met(arm, tool, task, pose, outcome.witness)
    assert met >= 18, "what is not proved leads to a posture"


@pytest.mark.parametrize("task", [POSE, POSITION, DIRECTION])
def test_couplings_and_combined_travel(task: str) -> None:
    """Six coupled joints, a sum of two of them bounded: met where a posture is."""
    random, arm = fresh(), COUPLED
    tool = random_pose(random, 0.1)
    asked = BranchAndBound(arm, tool, task)
    for pose in tool_in_base(arm, postures_within_travel(random, arm, 4), tool):
        outcome = asked.ask(pose, USUAL, BOX_BUDGET // 4)
        assert not outcome.proved
        if outcome.witness is not None:
            assert_met(arm, tool, task, pose, outcome.witness)


def test_two_links_reach_a_ring_and_nothing_else() -> None:
    """Against the cosine law: the elbow's travel is the ring's two circles."""
    random, tool = fresh(), AT_FLANGE
    first, second = (row.a for row in PLANAR)
    arm = bounded(PLANAR, (-np.pi, np.pi), (0.6, 2.2))
    near, far = (
        np.sqrt(first**2 + second**2 + 2.0 * first * second * np.cos(a)) for a in (2.2, 0.6)
    )
    asked, proved = BranchAndBound(arm, tool, POSITION), 0
    for _ in range(60):
        pose, angle, radius = np.eye(4), random.uniform(-np.pi, np.pi), random.uniform(0.0, 0.8)
        pose[:2, 3] = radius * np.cos(angle), radius * np.sin(angle)
        outcome = asked.ask(pose, np.array([1e-9, 0.0]))
        assert outcome.proved == (not near <= radius <= far)
        assert (outcome.witness is None) == outcome.proved
        proved += outcome.proved
    assert 10 < proved < 50


@pytest.mark.parametrize("gap", [1e-2, 1e-4, 1e-6])
def test_a_gap_to_the_end_of_reach_is_seen_however_small(gap: float) -> None:
    rows = SHOULDER_AND_ELBOW
    arm = bounded(rows, (-3.0, 3.0), (-1.0, 2.0), (-2.5, 2.5))
    out = tool_in_base(arm, np.array([0.4, 0.3, 0.0]), AT_FLANGE)
    shoulder = np.array([0.0, 0.0, 0.4])
    away = (out[:3, 3] - shoulder) / np.linalg.norm(out[:3, 3] - shoulder)
    asked = BranchAndBound(arm, AT_FLANGE, POSITION)
    for sign, expected in ((1.0, True), (-1.0, False)):
        pose = out.copy()
        pose[:3, 3] += sign * gap * away
        outcome = asked.ask(pose, np.array([1e-9, 0.0]))
        assert outcome.proved == expected
        assert outcome.boxes < 20_000


def test_a_combined_travel_that_keeps_the_arm_from_its_target() -> None:
    """Two links straight up need both joints at 90 deg and 0; a sum below 80 deg bars that."""
    pose = np.eye(4)
    pose[1, 3] = sum(row.a for row in PLANAR) - 1e-4
    ends = ((-3.0, 3.0), (-3.0, 3.0))
    free = bounded(PLANAR, *ends)
    barred = bounded(
        PLANAR, *ends, combined_travel=(CombinedTravel({1: 1.0, 2: 0.5}, Travel(-1.0, 1.4)),)
    )
    tolerance = np.array([1e-6, 0.0])
    assert BranchAndBound(free, AT_FLANGE, POSITION).ask(pose, tolerance).witness is not None
    assert BranchAndBound(barred, AT_FLANGE, POSITION).ask(pose, tolerance).proved


def test_a_pose_that_is_turned_off_is_proved_and_within_its_tolerance_met() -> None:
    """Five joints cannot roll about every line: 2 deg off is too much, and fine where 3 are."""
    arm = bounded(FIVE, *[(-2.5, 2.5)] * 5)
    pose = tool_in_base(arm, np.array([0.3, 0.5, -0.9, 0.7, 0.2]), AT_FLANGE)
    # About the line that no joint turns the tool about: across its z axis, in the arm's plane.
    plane = np.cross(pose[:3, 2], [np.sin(0.3), -np.cos(0.3), 0.0])
    pose[:3, :3] = rotation_about(plane, np.radians(2.0)) @ pose[:3, :3]
    asked = BranchAndBound(arm, AT_FLANGE, POSE)
    assert asked.ask(pose, np.array([1e-5, np.radians(0.5)])).proved
    witness = asked.ask(pose, np.array([1e-5, np.radians(3.0)])).witness
    assert witness is not None


def test_six_joints_are_proved_out_of_reach_in_the_wrong_orientation() -> None:
    """A general arm at full stretch has one orientation there, near enough."""
    random = fresh()
    rows = [revolute(a=0.2, alpha=angle, d=0.15) for angle in (0.9, -0.7, 1.2, -1.1, 0.8, 0.3)]
    arm = bounded(tuple(rows), *[(-2.0, 2.0)] * 6)
    postures = postures_within_travel(random, arm, 4000)
    poses = tool_in_base(arm, postures, AT_FLANGE)
    pose = poses[np.argmax(np.linalg.norm(poses[:, :3, 3], axis=1))].copy()
    pose[:3, :3] = np.diag([1.0, -1.0, -1.0]) @ pose[:3, :3]
    outcome = BranchAndBound(arm, AT_FLANGE, POSE).ask(pose, EXACT)
    assert outcome.proved
    assert outcome.boxes < BOX_BUDGET // 10


def test_travel_that_is_no_box() -> None:
    slide, turning = prismatic(), revolute(a=0.4)
    assert not BranchAndBound(arm_of(slide, turning), AT_FLANGE, POSITION).applies
    assert not BranchAndBound(arm_of(slide), AT_FLANGE, POSITION).ask(np.eye(4), USUAL).proved
    assert BranchAndBound(arm_of(turning, turning), AT_FLANGE, POSITION).applies


def test_a_joint_that_turns_often_is_looked_at_for_one_turn() -> None:
    pose = np.eye(4)
    pose[0, 3] = 0.8
    few, many = (
        BranchAndBound(bounded(PLANAR, (-turn, turn), (-2.0, 2.0)), AT_FLANGE, POSITION)
        .ask(pose, USUAL)
        .boxes
        for turn in (np.pi, 20.0)
    )
    assert few == many


def test_boxes_are_given_up_at_the_budget() -> None:
    arm = bounded(FIVE, *[(-2.5, 2.5)] * 5)
    pose = tool_in_base(arm, np.array([0.3, 0.5, -0.9, 0.7, 0.2]), AT_FLANGE)
    pose[:3, :3] = pose[:3, :3] @ rotation_about(np.array([1.0, 0.3, 0.2]), 0.02)
    outcome = BranchAndBound(arm, AT_FLANGE, POSE).ask(pose, USUAL, 50)
    assert outcome == (False, None, 50)
