"""Speeds that make the twist asked for, the fewest of them, and damped near singular postures."""

from typing import Any

import numpy as np
import pytest

from kinematics.arm import Arm, SingularityThresholds
from kinematics.jacobian import motion_of, tool_twist
from kinematics.joint_speeds import JointSpeeds, joint_speeds
from kinematics.task_space import task_space
from tests.kinematics.example_arms import (
    AT_FLANGE,
    FIVE,
    NINE,
    PLANAR,
    QUARTER,
    SELECTIVE,
    SEVEN,
    SIX,
    SIX_ON_A_TRACK,
    arm_of,
    prismatic,
    random_joint_values,
    revolute,
)


def speeds_for(
    arm: Arm, joint_values: Any, twist: Any, task: Any = None
) -> tuple[JointSpeeds, np.ndarray]:
    space = task_space(arm, AT_FLANGE, task)
    assert space is not None
    of_joints = motion_of(arm, np.asarray(joint_values, dtype=float), AT_FLANGE).of_joints
    return joint_speeds(arm, space, of_joints, np.asarray(twist, dtype=float)), of_joints


def names(answer: JointSpeeds) -> list[str]:
    return [finding.name for finding in answer.findings]


def smallest_scaled(arm: Arm, joint_values: np.ndarray) -> float:
    space = task_space(arm, AT_FLANGE, "pose")
    assert space is not None
    scaled = space.scaled(motion_of(arm, joint_values, AT_FLANGE).of_joints)
    return float(np.linalg.svd(scaled)[1][space.pose_rank - 1])


@pytest.mark.parametrize("rows", [PLANAR, SELECTIVE, FIVE, SIX], ids=len)
def test_twist_to_speeds_to_twist(rows: Any) -> None:
    """Away from singular postures, for twists the arm can make; and the speeds are the ones."""
    random = np.random.default_rng(1)
    arm = arm_of(*rows)
    tried = 0
    for joint_values in random_joint_values(random, arm, 40):
        if smallest_scaled(arm, joint_values) < 0.03:
            continue
        tried += 1
        wanted = random.normal(size=arm.joint_count)
        _, of_joints = speeds_for(arm, joint_values, np.zeros(6))
        twist = tool_twist(of_joints, wanted)
        answer, _ = speeds_for(arm, joint_values, twist)
        # Condition below 2 / 0.03, times rounding.
        np.testing.assert_allclose(answer.speeds, wanted, rtol=0.0, atol=1e-12)
        np.testing.assert_allclose(tool_twist(of_joints, answer.speeds), twist, atol=1e-13)
        np.testing.assert_allclose(answer.unmet, 0.0, rtol=0.0, atol=1e-13)
        assert answer.findings == ()
    assert tried >= 15


@pytest.mark.parametrize("rows", [SEVEN, SIX_ON_A_TRACK, NINE], ids=len)
def test_spare_joints_take_the_smallest_speeds(rows: Any) -> None:
    """Against numpy's pseudoinverse of the scaled Jacobian (least squares in pure numbers)."""
    random = np.random.default_rng(2)
    arm = arm_of(*rows)
    space = task_space(arm, AT_FLANGE)
    assert space is not None
    tried = 0
    for joint_values in random_joint_values(random, arm, 20):
        if smallest_scaled(arm, joint_values) < 0.03:
            continue
        tried += 1
        twist = random.normal(size=6)
        answer, of_joints = speeds_for(arm, joint_values, twist)
        np.testing.assert_allclose(tool_twist(of_joints, answer.speeds), twist, atol=1e-12)
        scale = np.array([1.0 / space.length] * 3 + [1.0] * 3)
        inverse = np.linalg.pinv(of_joints * scale[:, None] * space.joint_scale)
        expected = space.joint_scale * (inverse @ (scale * twist))
        np.testing.assert_allclose(answer.speeds, expected, rtol=0.0, atol=1e-11)
    assert tried >= 8


def test_by_hand() -> None:
    """Two links at right angles: joint 2 alone moves its own link, joint 1 the rest."""
    answer, _ = speeds_for(arm_of(*PLANAR), [0.0, QUARTER], [-0.31, 0.42, 0, 0, 0, 1.0])
    np.testing.assert_allclose(answer.speeds, [1.0, 0.0], rtol=0.0, atol=1e-15)
    lift, _ = speeds_for(arm_of(prismatic(direction=-1)), [0.2], [0, 0, 0.5, 0, 0, 0])
    assert lift.speeds.tolist() == [-0.5]


def test_a_twist_of_nothing_takes_nothing() -> None:
    answer, _ = speeds_for(arm_of(*SIX), [0.1, 0.5, 0.3, 0.2, 0.9, 0.1], np.zeros(6))
    assert answer.speeds.tolist() == [0.0] * 6
    assert answer.findings == ()


# A turn, and a slide across it.
SLIDER = arm_of(
    revolute(alpha=QUARTER),
    prismatic(),
    characteristic_length=1.0,
    thresholds=SingularityThresholds(near=0.1),
)


def near_wrist(bend: float) -> tuple[JointSpeeds, float]:
    """Ask SIX for a unit twist along the direction that is weakest at this bend of joint 5."""
    arm = arm_of(*SIX, thresholds=SingularityThresholds(near=0.02))
    joint_values = np.array([0.3, 0.5, -0.4, 0.9, bend, 1.2])
    space = task_space(arm, AT_FLANGE)
    assert space is not None
    scaled = space.scaled(motion_of(arm, joint_values, AT_FLANGE).of_joints)
    left, values, _ = np.linalg.svd(scaled)
    answer, _ = speeds_for(arm, joint_values, left[:, -1] / space.row_scale)
    return answer, float(values[-1])


def test_damping_by_hand() -> None:
    """The weak direction is met by s / (s^2 + t^2 - s^2) = s / t^2 instead of 1 / s."""
    threshold = 0.02
    for bend in (1e-3, 5e-3, 0.02, 0.04):
        answer, smallest = near_wrist(bend)
        assert smallest < threshold
        size = float(np.linalg.norm(answer.speeds))
        assert size == pytest.approx(smallest / threshold**2, rel=1e-9)
        assert "damped" in names(answer)
        finding = answer.findings[0]
        assert (finding.measure, finding.threshold) == (pytest.approx(smallest), threshold)
        # What is not met is said too: all but s^2 / t^2 of what was asked.
        left_over = next(f for f in answer.findings if f.name == "twist-not-met")
        assert left_over.measure == pytest.approx(1.0 - (smallest / threshold) ** 2, rel=1e-9)


def test_damping_starts_without_a_jump() -> None:
    """Either side of the threshold the speeds agree to the distance between the two sides."""
    below, above = 1e-3, 0.2
    for _ in range(80):  # the bend at which the smallest value is the threshold
        middle = (below + above) / 2
        below, above = (middle, above) if near_wrist(middle)[1] < 0.02 else (below, middle)
    (inside, s_inside), (outside, s_outside) = near_wrist(below - 1e-9), near_wrist(above + 1e-9)
    assert s_inside < 0.02 < s_outside
    assert "damped" in names(inside)
    assert outside.findings == ()
    # Speeds are about 1 / s = 50, with slopes of about 1 / s^2 = 2500.
    np.testing.assert_allclose(inside.speeds, outside.speeds, rtol=0.0, atol=1e-5)


def test_speeds_stay_bounded_all_the_way_through() -> None:
    """Never above 1 / t for a unit twist, and nothing at the singular place itself."""
    bends = np.concatenate([-np.geomspace(0.3, 1e-12, 60), [0.0], np.geomspace(1e-12, 0.3, 60)])
    sizes = [float(np.linalg.norm(near_wrist(bend)[0].speeds)) for bend in bends]
    assert max(sizes) <= 50.0 * (1.0 + 1e-9)
    assert max(sizes) > 45.0
    assert sizes[60] < 1e-9


def test_damping_reaches_only_the_weak_direction() -> None:
    """A slide past its axis: along the slide all is met, whatever the turn cannot do."""
    _, of_joints = speeds_for(SLIDER, [0.4, 0.001], np.zeros(6))
    answer, _ = speeds_for(SLIDER, [0.4, 0.001], of_joints[:, 1])
    np.testing.assert_allclose(answer.speeds, [0.0, 1.0], rtol=0.0, atol=1e-15)
    np.testing.assert_allclose(answer.unmet, 0.0, rtol=0.0, atol=1e-15)


def test_a_twist_no_posture_offers_is_left_unmet_and_said() -> None:
    """A planar arm asked to rise: it moves in its plane as asked, and says what it does not."""
    twist = np.array([0.1, 0.2, 0.5, 0.0, 0.0, 0.0])
    answer, _ = speeds_for(arm_of(*PLANAR, revolute(a=0.2)), [0.3, 1.0, 0.7], twist)
    np.testing.assert_allclose(answer.unmet, [0, 0, 0.5, 0, 0, 0], rtol=0.0, atol=1e-14)
    assert names(answer) == ["twist-not-met"]
    assert answer.findings[0].code == 0
    assert answer.findings[0].measure == pytest.approx(0.5 / np.linalg.norm([0.1, 0.2, 0.5]))
    assert np.isfinite(answer.speeds).all()


def test_unmet_is_what_is_left_of_the_twist() -> None:
    random = np.random.default_rng(5)
    for rows in (PLANAR, FIVE, SEVEN, (revolute(),), (prismatic(),) * 2):
        arm = arm_of(*rows)
        for joint_values in random_joint_values(random, arm, 5):
            twist = random.normal(size=6)
            answer, of_joints = speeds_for(arm, joint_values, twist)
            left = twist - tool_twist(of_joints, answer.speeds)
            np.testing.assert_allclose(answer.unmet, left, rtol=0.0, atol=1e-14)


def test_all_six_rows_are_asked_for_whatever_the_task() -> None:
    joint_values, twist = [0.1, 0.5, 0.3, 0.2, 0.9, 0.1], [0.1, 0.2, 0.3, 0.4, 0.5, 0.6]
    pose, _ = speeds_for(arm_of(*SIX), joint_values, twist)
    position, _ = speeds_for(arm_of(*SIX), joint_values, twist, task="position")
    np.testing.assert_allclose(position.speeds, pose.speeds, rtol=0.0, atol=1e-14)


def test_directions_the_arm_never_has_are_no_trouble_of_a_posture() -> None:
    """Four parallel axes: four singular values, of which the last is zero wherever the arm is."""
    arm = arm_of(*(revolute(a=0.3),) * 4)
    wanted = np.array([0.2, -0.1, 0.4, 0.3])
    joint_values = [0.3, 1.0, 0.7, -0.5]
    _, of_joints = speeds_for(arm, joint_values, np.zeros(6))
    answer, _ = speeds_for(arm, joint_values, tool_twist(of_joints, wanted))
    assert answer.findings == ()
    np.testing.assert_allclose(answer.unmet, 0.0, rtol=0.0, atol=1e-14)
    assert np.linalg.norm(answer.speeds) <= np.linalg.norm(wanted)
