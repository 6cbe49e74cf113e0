"""Typed poses of arms of few joints: whoever is at a pose is near enough to what is typed of it."""

import numpy as np
import pytest

from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.reach.checks import Reacher
from kinematics.reach.targets import NONE, REACHABLE, Checks, Targets
from kinematics.rotations import rotation_about
from kinematics.table import JointKind, Row, Travel
from kinematics.tolerances import TARGET_ANGLE, TARGET_POSITION
from kinematics.travel_limits import travel_margin
from tests.kinematics.example_arms import QUARTER, arm_of
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.reach.arm_classes import CLASSES, postures_within_travel, targets_at

TYPED = 0.45
"""Tolerances by which a typed pose is off in place and turn: two decimals leave no more."""


def typed(random: np.random.Generator, targets: Targets) -> Targets:
    for pose in targets.tool_in_base:
        shift, about = (side / np.linalg.norm(side) for side in random.normal(size=(2, 3)))
        pose[:3, 3] += TYPED * TARGET_POSITION * shift
        pose[:3, :3] = rotation_about(about, TYPED * TARGET_ANGLE) @ pose[:3, :3]
    return targets


def assert_reached(arm: Arm, tool: np.ndarray, targets: Targets, checks: Checks) -> None:
    assert checks.verdict.tolist() == [REACHABLE] * len(targets)
    of = np.repeat(np.arange(len(targets)), np.diff(checks.offsets))
    poses = tool_in_base(arm, checks.joint_values, tool)
    shift = np.linalg.norm(poses[:, :3, 3] - targets.tool_in_base[of, :3, 3], axis=1)
    assert shift.max() <= TARGET_POSITION * 1.000001
    assert (travel_margin(arm, checks.joint_values) >= -1e-9).all()


def within(random: np.random.Generator, arm: Arm, count: int) -> np.ndarray:
    """Return postures that a typed pose does not push beyond travel.

    Near a fold 0.005 mm turn a joint by a degree.
    """
    postures = postures_within_travel(random, arm, 3 * count)
    return postures[travel_margin(arm, postures) > 0.02][:count]


@pytest.mark.parametrize(
    "name", ["RRPR", "RPRR", "level wrist", "five, three parallel", "five, with wrist"]
)
def test_typed_poses_are_reached(name: str) -> None:
    random = fresh()
    for _ in range(5):
        arm, tool, freedom = CLASSES[name](random)
        targets = typed(random, targets_at(arm, tool, freedom, within(random, arm, 15)))
        assert_reached(arm, tool, targets, Reacher(arm, tool).check(targets))


@pytest.mark.parametrize("aligned", [0.0, 1e-9, 1e-7, 1e-5, 1e-3])
@pytest.mark.parametrize("is_typed", [False, True], ids=["exact", "typed"])
def test_a_gantry_with_its_wrist_in_line_is_reached(aligned: float, is_typed: bool) -> None:
    """The joint that five joints lack lines up with the first of the wrist."""
    random = fresh()
    slide, turn = Travel(0.0, 2.0), Travel(-3.0, 3.0)
    rows = [
        Row(JointKind.PRISMATIC, 0.0, QUARTER, 0.0, QUARTER, travel=slide),
        Row(JointKind.PRISMATIC, 0.0, QUARTER, 0.2, QUARTER, travel=slide),
        Row(JointKind.PRISMATIC, 0.0, 0.0, 0.3, 0.0, travel=slide),
        Row(JointKind.REVOLUTE, 0.0, QUARTER, 0.2, 0.0, travel=turn),
        Row(JointKind.REVOLUTE, 0.3, 0.0, 0.0, 0.0, travel=turn),
    ]
    arm, tool = arm_of(*rows), np.eye(4)
    for place in (0.0, QUARTER, -QUARTER):
        postures = random.uniform([0.1, 0.1, 0.1, -2.9, 0.0], [1.9, 1.9, 1.9, 2.9, 0.0], (10, 5))
        postures[:, 4] = place + aligned
        targets = targets_at(arm, tool, NONE, postures)
        checks = Reacher(arm, tool).check(typed(random, targets) if is_typed else targets)
        assert_reached(arm, tool, targets, checks)


@pytest.mark.parametrize("name", ["RRPR", "level wrist", "five, three parallel"])
def test_a_tolerance_of_nothing_is_what_six_joints_are_held_to(name: str) -> None:
    random = fresh()
    arm, tool, freedom = CLASSES[name](random)
    targets = targets_at(arm, tool, freedom, within(random, arm, 10))
    targets.position_tolerance[:] = targets.angle_tolerance[:] = 0.0
    assert_reached(arm, tool, targets, Reacher(arm, tool).check(targets))
    targets.tool_in_base[:, :3, 3] += 1e-5
    assert (Reacher(arm, tool).check(targets).position_error < 1e-8).all()
