"""Jacobians against a complex step through the plain chain, and speeds and loads by hand."""

import numpy as np
import pytest

from kinematics.arm import Arm
from kinematics.jacobian import (
    ROW_NAMES,
    characteristic_length,
    in_axes,
    joint_efforts,
    motion_of,
    tool_twist,
)
from kinematics.rotations import rotation_about
from kinematics.table import Coupling
from kinematics.table_conversion import converted
from kinematics.transforms import pose
from tests.kinematics.example_arms import (
    AT_FLANGE,
    PLANAR,
    SELECTIVE,
    SHOULDER_AND_ELBOW,
    SIX,
    TWELVE,
    arm_of,
    prismatic,
    random_arm,
    random_joint_values,
    random_pose,
    revolute,
)
from tests.kinematics.plain_chain import stepped_jacobian

# Complex steps have no truncation error; what is left is rounding, in both chains, of up to ten
# metres of links. Measured over 1000 random arms of one to twelve joints: at most 7e-15.
ROUNDING = 3e-14


@pytest.mark.parametrize("count", [1, 3, 6, 7, 12])
@pytest.mark.parametrize(
    "kind",
    [
        {},
        {"prismatic_share": 0.0},
        {"prismatic_share": 1.0},
        {"prismatic_first": True},
        {"coupled": True, "passive": 2},
    ],
    ids=str,
)
def test_against_complex_steps(kind: dict[str, object], count: int) -> None:
    random = np.random.default_rng([count, len(kind)])
    for _ in range(5):
        arm = random_arm(random, count, **kind)
        tool = random_pose(random)
        for joint_values in random_joint_values(random, arm, 3):
            of_joints = motion_of(arm, joint_values, tool).of_joints
            expected = stepped_jacobian(arm, joint_values, tool)
            np.testing.assert_allclose(of_joints, expected, rtol=0.0, atol=ROUNDING)


def test_the_tool_point_counts_and_not_the_flange() -> None:
    """A tool 0.2 m out on the last link adds to the lever of both joints."""
    tool = pose(np.eye(3), [0.2, 0.0, 0.0])
    of_joints = motion_of(arm_of(*PLANAR), np.zeros(2), tool).of_joints
    assert of_joints[:, 0].tolist() == pytest.approx([0, 0.93, 0, 0, 0, 1])
    assert of_joints[:, 1].tolist() == pytest.approx([0, 0.51, 0, 0, 0, 1])
    assert ROW_NAMES == ("vx", "vy", "vz", "wx", "wy", "wz")


def test_a_sliding_column_is_its_axis_alone() -> None:
    of_joints = motion_of(arm_of(*SELECTIVE), np.array([0.3, 0.4, 0.1, 0]), AT_FLANGE).of_joints
    np.testing.assert_allclose(of_joints[:, 2], [0, 0, -1, 0, 0, 0], rtol=0.0, atol=1e-15)


def test_couplings_add_columns_of_rows_by_hand() -> None:
    """With joint 2 held against the horizontal, turning joint 1 carries the forearm parallel."""
    upper, fore = revolute(a=0.4), revolute(a=0.3, couplings=(Coupling(1, -1.0),))
    motion = motion_of(arm_of(upper, fore), np.array([0.0, 0.0]), AT_FLANGE)
    assert motion.of_rows[:, 0].tolist() == pytest.approx([0, 0.7, 0, 0, 0, 1])
    assert motion.of_joints[:, 0].tolist() == pytest.approx([0, 0.4, 0, 0, 0, 0])
    assert motion.of_joints[:, 1].tolist() == pytest.approx([0, 0.3, 0, 0, 0, 1])


@pytest.mark.parametrize("batch", [(), (0,), (3,), (2, 2)])
@pytest.mark.parametrize("rows", [(), PLANAR, SIX, TWELVE])
def test_shapes(rows: tuple[object, ...], batch: tuple[int, ...]) -> None:
    arm = arm_of(*rows)
    motion = motion_of(arm, np.zeros((*batch, arm.joint_count)), AT_FLANGE)
    assert motion.of_joints.shape == motion.of_rows.shape == (*batch, 6, len(rows))
    assert motion.tool_in_base.shape == (*batch, 4, 4)
    turned = in_axes(motion.of_joints, np.broadcast_to(np.eye(3), (*batch, 3, 3)))
    assert turned.shape == motion.of_joints.shape


def test_of_posture_leaves_the_batch_axis_out() -> None:
    arm = arm_of(*SIX)
    postures = random_joint_values(np.random.default_rng(1), arm, 3)
    third, alone = (
        motion_of(arm, postures, AT_FLANGE).of_posture(2),
        motion_of(arm, postures[2], AT_FLANGE),
    )
    for part in ("tool_in_base", "of_rows", "of_joints"):
        np.testing.assert_allclose(getattr(third, part), getattr(alone, part), rtol=0, atol=1e-15)


def test_in_axes_keeps_the_point_and_turns_both_halves() -> None:
    """Against the plain chain of the same arm on a turned base."""
    random = np.random.default_rng(8)
    arm = random_arm(random, 6)
    (joint_values,) = random_joint_values(random, arm, 1)
    base_in_axes = rotation_about([1, -2, 0.5], 0.8)
    actual = in_axes(motion_of(arm, joint_values, AT_FLANGE).of_joints, base_in_axes)
    expected = stepped_jacobian(arm, joint_values, AT_FLANGE)
    expected = np.vstack([base_in_axes @ expected[:3], base_in_axes @ expected[3:]])
    np.testing.assert_allclose(actual, expected, rtol=0.0, atol=ROUNDING)


def test_twist_is_the_rate_of_the_pose() -> None:
    """Against a central difference along the joint speeds: its error is about 1e-10."""
    random = np.random.default_rng(2)
    arm = arm_of(*SIX)
    (joint_values,) = random_joint_values(random, arm, 1)
    speeds, step = random.normal(size=6), 1e-5
    twist = tool_twist(motion_of(arm, joint_values, AT_FLANGE).of_joints, speeds)
    after, before = (
        motion_of(arm, joint_values + sign * step * speeds, AT_FLANGE).tool_in_base
        for sign in (1, -1)
    )
    moved = (after - before) / (2 * step)
    spin = moved[:3, :3] @ ((after + before) / 2)[:3, :3].T
    expected = [*moved[:3, 3], spin[2, 1], spin[0, 2], spin[1, 0]]
    np.testing.assert_allclose(twist, expected, rtol=0.0, atol=1e-8)
    batch = tool_twist(np.zeros((4, 6, 6)), np.zeros((4, 6)))
    assert batch.shape == (4, 6)


def test_efforts_hold_a_weight_by_hand() -> None:
    """10 N pushed up at 0.8 m and 0.37 m of level lever; the base joint feels nothing."""
    arm = arm_of(*SHOULDER_AND_ELBOW)
    of_joints = motion_of(arm, np.zeros(3), AT_FLANGE).of_joints
    efforts = joint_efforts(of_joints, np.array([0.0, 0, 10, 0, 0, 0]))
    np.testing.assert_allclose(efforts, [0.0, 8.0, 3.7], rtol=0.0, atol=1e-14)
    lifted = arm_of(prismatic())
    of_lift = motion_of(lifted, np.zeros(1), AT_FLANGE).of_joints
    assert joint_efforts(of_lift, np.array([3.0, 0, 10, 0, 0, 5])).tolist() == [10.0]


def test_efforts_and_speeds_exchange_the_same_power() -> None:
    random = np.random.default_rng(6)
    arm = random_arm(random, 7, coupled=True, passive=1)
    postures = random_joint_values(random, arm, 20)
    of_joints = motion_of(arm, postures, AT_FLANGE).of_joints
    speeds, loads = random.normal(size=(20, 7)), random.normal(size=(20, 6))
    at_joints = (joint_efforts(of_joints, loads) * speeds).sum(axis=-1)
    at_tool = (tool_twist(of_joints, speeds) * loads).sum(axis=-1)
    np.testing.assert_allclose(at_joints, at_tool, rtol=0.0, atol=1e-12)


TOOL = pose(np.eye(3), [0.0, 0.0, 0.15])


@pytest.mark.parametrize(
    ("arm", "tool", "length"),
    [
        (arm_of(*PLANAR), AT_FLANGE, 0.73),
        (arm_of(*SELECTIVE), AT_FLANGE, 0.45 + 0.32 + 0.08),
        # The tool's distance is from the last axis' frame: 0.08 and 0.15 m along one line.
        (arm_of(*SELECTIVE), TOOL, 0.45 + 0.32 + 0.23),
        (arm_of(*SHOULDER_AND_ELBOW), AT_FLANGE, 0.4 + 0.43 + 0.37),
        # What lies before the first axis is base, not arm.
        (arm_of(revolute(a=0.7), revolute(a=0.4), convention="modified"), AT_FLANGE, 0.4),
        (arm_of(revolute(a=3.0), revolute(d=4.0, a=3.0)), AT_FLANGE, 8.0),
        (arm_of(prismatic(d=0.2), revolute()), AT_FLANGE, 0.2),
        (arm_of(), TOOL, 1.0),
        (arm_of(revolute(), revolute()), AT_FLANGE, 1.0),
        (arm_of(*PLANAR, characteristic_length=0.25), TOOL, 0.25),
    ],
)
def test_characteristic_length_by_hand(arm: Arm, tool: np.ndarray, length: float) -> None:
    assert characteristic_length(arm, tool) == pytest.approx(length, rel=1e-15)


@pytest.mark.parametrize("seed", range(10))
def test_both_conventions_have_the_same_length(seed: int) -> None:
    random = np.random.default_rng(seed)
    arm = random_arm(random, 6, coupled=True, passive=1)
    to = "modified" if arm.table.convention == "standard" else "standard"
    other = converted(arm, type(arm.table.convention)(to))
    length = characteristic_length(arm, arm.tool_in_flange(None))
    assert characteristic_length(other, other.tool_in_flange(None)) == pytest.approx(length)
