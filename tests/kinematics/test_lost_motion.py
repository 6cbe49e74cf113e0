"""Lost motions against the Jacobian in any axes, in words by hand, and as limits of motions."""

import math
import re
from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from kinematics.arm import Arm, SingularityThresholds
from kinematics.jacobian import in_axes, motion_of
from kinematics.rotations import rotation_about
from kinematics.singularity import SINGULAR
from kinematics.table import JointKind, Row, Table
from kinematics.task_space import TaskSpace
from kinematics.tolerances import NEAR_SINGULAR
from kinematics.tolerances import SINGULAR as ZERO
from tests.kinematics.example_arms import (
    AT_FLANGE,
    FIVE,
    NINE,
    PLANAR,
    QUARTER,
    SELECTIVE,
    SEVEN,
    SHOULDER_AND_ELBOW,
    SIX,
    SIX_ON_A_TRACK,
    TWELVE,
    WRIST,
    arm_of,
    prismatic,
    random_arm,
    random_joint_values,
    random_pose,
    revolute,
)
from tests.kinematics.plain_chain import stepped_jacobian
from tests.kinematics.told_posture import Told, covectors, told

SINGULAR_POSTURES: dict[str, tuple[tuple[Row, ...], list[float], int]] = {
    "planar in line": (PLANAR, [0.3, 0.0], 1),
    "selective folded": (SELECTIVE, [0.3, np.pi, 0.1, 0.4], 1),
    "stretched up": (SHOULDER_AND_ELBOW, [0.3, QUARTER, 0.0], 2),
    "six, wrist": (SIX, [0.3, 0.5, -0.4, 0.9, 0.0, 1.2], 1),
    "six, elbow": (SIX, [0.3, 0.5, np.arctan2(0.41, 0.05), 0.9, 1.1, 1.2], 1),
    "seven, elbow": (SEVEN, [0.2, 0.6, -0.4, 0.0, 0.7, 0.8, 0.1], 1),
    "seven, straight": (SEVEN, [0.0] * 7, 3),
    "five, elbow": (FIVE, [0.3, 0.5, 0.0, 0.2, 0.1], 1),
    "wrist alone": (WRIST, [0.3, 0.0, 0.2], 1),
}


@pytest.mark.parametrize("name", SINGULAR_POSTURES)
@pytest.mark.parametrize("turned", [False, True])
def test_no_joint_motion_makes_a_lost_motion_in_any_axes(name: str, turned: bool) -> None:
    rows, joint_values, count = SINGULAR_POSTURES[name]
    arm = arm_of(*rows)
    base_in_frame = rotation_about([1.0, -2.0, 0.7], 1.1) if turned else np.eye(3)
    answer = told(arm, joint_values, base_in_frame=base_in_frame, frame="stand")
    lost = covectors(answer)
    assert len(lost) == count
    jacobian = in_axes(stepped_jacobian(arm, np.array(joint_values), AT_FLANGE), base_in_frame)
    np.testing.assert_allclose(lost @ jacobian, 0.0, rtol=0.0, atol=1e-9)
    np.testing.assert_allclose(np.linalg.norm(lost, axis=1), 1.0, rtol=1e-14)
    assert np.linalg.matrix_rank(lost) == count
    for one in answer.posture.lost_motion:
        assert " stand " in one.say
        assert "base" not in one.say


def test_a_lost_motion_in_other_axes_is_the_same_one() -> None:
    rows, joint_values, _ = SINGULAR_POSTURES["six, wrist"]
    base_in_world = rotation_about([0.3, 0.2, 1.0], 2.0)
    in_base = told(arm_of(*rows), joint_values).posture.lost_motion[0]
    in_world = told(
        arm_of(*rows), joint_values, base_in_frame=base_in_world, frame="world"
    ).posture.lost_motion[0]
    np.testing.assert_allclose(in_world.linear, base_in_world @ in_base.linear, atol=1e-15)
    np.testing.assert_allclose(in_world.angular, base_in_world @ in_base.angular, atol=1e-15)


def test_joints_named_move_and_move_nothing() -> None:
    """At each singular posture some motion of the named joints alone keeps the tool still."""
    for name, (rows, joint_values, _) in SINGULAR_POSTURES.items():
        answer = told(arm_of(*rows), joint_values)
        named = [joint - 1 for joint in answer.posture.joints]
        assert named, name
        scaled = answer.space.scaled(answer.motion.of_joints)[:, named]
        values = np.linalg.svd(scaled)[1]
        assert len(named) > int((values > 1e-9).sum()), name


def test_joints_of_arms_with_spare_ones_are_the_telling_few() -> None:
    """Elbow in line: axes 3 and 5 of the seven-joint arm are one line, whatever the others do."""
    rows, joint_values, _ = SINGULAR_POSTURES["seven, elbow"]
    assert told(arm_of(*rows), joint_values).posture.joints == (3, 5)


# --- words ---------------------------------------------------------------------------------

WORDS: dict[str, tuple[tuple[Row, ...], list[float], Any, list[str]]] = {
    "in line along x": (PLANAR, [0.0, 0.0], None, ["the tool cannot move along base x"]),
    "in line along y": (PLANAR, [QUARTER, 0.0], None, ["the tool cannot move along base y"]),
    "in line aslant": (
        PLANAR,
        [np.pi / 3, 0.0],
        None,
        ["the tool cannot move along base direction (0.50, 0.87, 0.00)"],
    ),
    "nearly in line": (
        PLANAR,
        [0.0, 0.001],
        None,
        ["the tool can hardly move along base x"],
    ),
    "a wrist in line, about its point": (
        (revolute(alpha=-QUARTER), revolute(alpha=QUARTER), revolute()),
        [0.0, 0.0, 0.0],
        None,
        ["the tool cannot turn about base x"],
    ),
    "a wrist in line, with a hand along z": (
        WRIST,
        [0.0, 0.0, 0.0],
        None,
        ["the tool cannot turn about base x without moving along base y"],
    ),
    "straight up": (
        SHOULDER_AND_ELBOW,
        [0.0, QUARTER, 0.0],
        None,
        ["the tool cannot move along base y", "the tool cannot move along base z"],
    ),
    "straight up, turned": (
        SHOULDER_AND_ELBOW,
        [np.pi / 6, QUARTER, 0.0],
        None,
        [
            "the tool cannot move along base z",
            "the tool cannot move along base direction (-0.50, 0.87, 0.00)",
        ],
    ),
}


@pytest.mark.parametrize("name", WORDS)
def test_words_by_hand(name: str) -> None:
    rows, joint_values, task, says = WORDS[name]
    posture = told(arm_of(*rows), joint_values, task=task).posture
    assert sorted(one.say for one in posture.lost_motion) == sorted(says)


def test_words_of_a_wrist_with_a_hand_are_true() -> None:
    """About x it cannot turn alone; turning and moving along y together it can: u has signs."""
    answer = told(arm_of(*WRIST), [0.0, 0.0, 0.0])
    (lost,) = covectors(answer)
    of_joints = stepped_jacobian(arm_of(*WRIST), np.zeros(3), AT_FLANGE)
    assert abs(lost @ [0, 0, 0, 1, 0, 0]) > 0.01
    np.testing.assert_allclose(lost @ of_joints, 0.0, rtol=0.0, atol=1e-15)


@pytest.mark.parametrize("name", ["six, wrist", "seven, elbow", "five, elbow"])
def test_the_two_directions_in_words_are_lines_of_the_lost_motion(name: str) -> None:
    """Both are lines, told without a sense: the largest entry is positive."""
    rows, joint_values, _ = SINGULAR_POSTURES[name]
    (one,) = told(arm_of(*rows), joint_values).posture.lost_motion
    numbers = r"\(([-\d.]+), ([-\d.]+), ([-\d.]+)\)"
    turn, move = (np.array(found, dtype=float) for found in re.findall(numbers, one.say))
    for shown, part in ((turn, one.angular), (move, one.linear)):
        line = part / np.linalg.norm(part) * np.sign(part[np.abs(part).argmax()])
        # Two decimals: off by up to half a hundredth in each entry.
        np.testing.assert_allclose(shown, line, rtol=0.0, atol=0.0051)


def test_several_lost_motions_do_not_turn_with_rounding() -> None:
    """Two directions equally lost span a plane; those told are its nearest to the axes."""
    rows, joint_values, _ = SINGULAR_POSTURES["stretched up"]
    first = covectors(told(arm_of(*rows), joint_values))
    for noise in (1e-15, -3e-15, 1e-14):
        other = covectors(told(arm_of(*rows), np.array(joint_values) + noise))
        np.testing.assert_allclose(other, first, rtol=0.0, atol=1e-12)
    np.testing.assert_allclose(first @ first.T, np.eye(2), rtol=0.0, atol=1e-14)


def test_the_largest_entry_is_positive_and_no_zero_is_negative() -> None:
    for rows, joint_values, _ in SINGULAR_POSTURES.values():
        for lost in covectors(told(arm_of(*rows), joint_values)):
            assert lost[np.abs(lost).argmax()] > 0.0
            assert not np.signbit(lost[lost == 0.0]).any()


# --- arms that lack a direction everywhere ----------------------------------------------------


def achievable(arm: Arm, space: TaskSpace, joint_values: np.ndarray, tool: np.ndarray) -> Any:
    """Return left singular vectors and values of the scaled Jacobian of the plain chain."""
    scaled = space.scaled(stepped_jacobian(arm, joint_values, tool))
    left, values, _ = np.linalg.svd(scaled)
    return left, values


def assert_is_a_limit_of_motions(
    arm: Arm, answer: Told, joint_values: np.ndarray, tool: np.ndarray
) -> None:
    """Some posture a hair away can do it, to first order in the hair."""
    space, rank = answer.space, answer.space.generic_rank
    (lost,) = covectors(answer)
    scaled = lost[list(space.rows)] / space.row_scale
    scaled /= np.linalg.norm(scaled)
    step = 1e-5
    left_over = []
    for joint in range(arm.joint_count):
        aside = joint_values.copy()
        aside[joint] += step * space.joint_scale[joint]
        left, values = achievable(arm, space, aside, tool)
        if values[rank - 1] < 1e-3 * step:
            continue  # this joint does not mend the posture
        missing = left[:, rank:].T @ scaled
        left_over.append(float(np.linalg.norm(missing)))
    assert left_over
    assert min(left_over) < 100 * step


@pytest.mark.parametrize("seed", range(5))
def test_five_joints_at_their_elbow(seed: int) -> None:
    """Rank 4 of 5: of the two directions without motion one is lost and one was never there."""
    random = np.random.default_rng(seed)
    tool = random_pose(random) if seed else AT_FLANGE
    joint_values = random.uniform(-1.0, 1.0, size=5) * [1, 1, 0, 1, 1]
    answer = told(arm_of(*FIVE), joint_values, tool=tool)
    assert answer.posture.state == "singular"
    assert answer.space.generic_rank == 5
    (lost,) = covectors(answer)
    of_joints = stepped_jacobian(arm_of(*FIVE), joint_values, tool)
    np.testing.assert_allclose(lost @ of_joints, 0.0, rtol=0.0, atol=1e-9)
    assert_is_a_limit_of_motions(arm_of(*FIVE), answer, joint_values, tool)


def singular_posture_of(arm: Arm, random: np.random.Generator) -> np.ndarray | None:
    """Follow the told step from random postures until one is singular to rounding."""
    sharp = replace(arm, thresholds=SingularityThresholds(singular=1e-13))
    for joint_values in random_joint_values(random, arm, 20):
        values = joint_values
        for _ in range(30):
            judgement = told(sharp, values).judgement
            if int(judgement.state) == SINGULAR:
                at_place: np.ndarray = values
                return at_place
            values = values + np.clip(judgement.step, -0.3, 0.3)
    return None


@pytest.mark.parametrize("seed", range(5))
def test_random_arms_of_five_joints_at_singular_postures(seed: int) -> None:
    random = np.random.default_rng(seed)
    arm = random_arm(random, 5, prismatic_share=0.0)
    joint_values = singular_posture_of(arm, random)
    assert joint_values is not None
    answer = told(arm, joint_values)
    assert len(answer.posture.lost_motion) == 1
    (lost,) = covectors(answer)
    of_joints = stepped_jacobian(arm, joint_values, AT_FLANGE)
    np.testing.assert_allclose(lost @ of_joints, 0.0, rtol=0.0, atol=1e-12)
    assert_is_a_limit_of_motions(arm, answer, joint_values, AT_FLANGE)


# --- travel, speed, findings --------------------------------------------------------------


@pytest.mark.parametrize("away", [0.01, -0.01, 1e-4])
def test_travel_to_by_hand(away: float) -> None:
    """Two links: the value is about q2 times a constant, so the travel is -q2."""
    travel_to = told(arm_of(*PLANAR), [0.3, away]).posture.travel_to
    assert travel_to is not None
    joint, value, unit = travel_to
    assert (joint, unit) == (2, "rad")
    assert value == pytest.approx(-away, rel=1e-3)


def test_travel_to_of_a_slide_is_exact() -> None:
    """A turn and a slide from its axis on: the value is the slide over L, a straight line."""
    arm = arm_of(revolute(alpha=QUARTER), prismatic(), characteristic_length=2.0)
    answer = told(arm, [0.7, 0.05])
    assert float(answer.judgement.smallest) == pytest.approx(0.025)
    assert answer.posture.travel_to == (2, pytest.approx(-0.05, rel=1e-14), "m")


def test_travel_to_counts_joints_and_not_rows() -> None:
    arm = arm_of(revolute(passive=True), *PLANAR)
    travel_to = told(arm, [0.3, 0.01]).posture.travel_to
    assert travel_to is not None
    assert travel_to[0] == 2


def test_nothing_is_said_of_travel_at_the_place_or_where_it_is_nowhere() -> None:
    assert told(arm_of(*PLANAR), [0.3, 0.0]).posture.travel_to is None
    assert told(arm_of(prismatic()), [0.3]).posture.travel_to is None


def test_tool_speed_by_hand() -> None:
    """One lever of 0.5 m at 2 rad/s: 1 m/s. A turn on its own axis: 2 rad/s."""
    lever = arm_of(revolute(a=0.5, top_speed=2.0))
    assert told(lever, [0.3]).posture.tool_speed == pytest.approx((1.0, 0.0))
    spindle = arm_of(revolute(top_speed=2.0))
    assert told(spindle, [0.3]).posture.tool_speed == pytest.approx((0.0, 2.0))
    lift = arm_of(prismatic(top_speed=0.2))
    assert told(lift, [0.3]).posture.tool_speed == pytest.approx((0.2, 0.0))
    assert told(arm_of(*PLANAR), [0.3, 1.0]).posture.tool_speed is None


def test_tool_speed_of_two_links_by_hand() -> None:
    """Links at right angles, both joints at 1 rad/s: along the short link joint 1 alone serves.

    Weakest is the direction that asks most of the joints; its speed is 1 / max |J^-1 u|.
    """
    rows = tuple(replace(row, top_speed=1.0) for row in PLANAR)
    answer = told(arm_of(*rows), [0.0, QUARTER])
    of_joints = np.array([[-0.31, -0.31], [0.42, 0.0]])
    left, _, _ = np.linalg.svd(of_joints)
    weakest = left[:, 1]
    expected = 1.0 / np.abs(np.linalg.solve(of_joints, weakest)).max()
    assert answer.posture.tool_speed == pytest.approx((expected, 0.0))


def test_at_a_singular_posture_the_weakest_direction_has_no_speed() -> None:
    rows = tuple(replace(row, top_speed=1.0) for row in PLANAR)
    speed = told(arm_of(*rows), [0.3, 0.0]).posture.tool_speed
    assert speed == pytest.approx((0.0, 0.0), abs=1e-15)


def test_findings_of_singular_and_near_postures() -> None:
    (near,) = told(arm_of(*PLANAR), [0.3, 0.001]).posture.findings
    assert (near.code, near.name) == (1, "near-singular")
    # The threshold is a share of the best sample posture's value: 0.36 for this arm.
    assert near.threshold == pytest.approx(NEAR_SINGULAR * 0.36, abs=NEAR_SINGULAR * 0.02)
    assert near.text().startswith("near singular (elbow, joints 1, 2): smallest singular value")
    (singular,) = told(arm_of(*PLANAR), [0.3, 0.0]).posture.findings
    assert (singular.code, singular.name, singular.threshold) == (2, "singular", ZERO)
    assert singular.text().startswith("singular (elbow and boundary, joints 1, 2): ")
    assert told(arm_of(*PLANAR), [0.3, 1.0]).posture.findings == ()


def test_the_position_alone_losing_a_direction_is_told_beside() -> None:
    """Three links in line: the pose drops to rank 2 of 3, and the position to 1 of 2."""
    three = arm_of(*PLANAR, revolute(a=0.2))
    names = [finding.name for finding in told(three, [0.3, 0.0, 0.0]).posture.findings]
    assert names == ["singular", "position-singular"]
    names = [finding.name for finding in told(three, [0.3, 0.0, 1.0]).posture.findings]
    assert names == ["singular"]
    # A task that was said is judged alone.
    told_task = told(three, [0.3, 0.0, 0.0], task="pose").posture
    assert [finding.name for finding in told_task.findings] == ["singular"]


def test_the_position_alone_losing_a_direction_of_a_regular_posture() -> None:
    """Three turns whose axes meet, with a hand out along z: turned so that z is axis 3 again.

    The hand's point moves on a sphere; with the hand on axis 1 it moves one way only.
    """
    arm = arm_of(*WRIST)
    answer = told(arm, [0.3, 0.0, 0.2])
    finding = answer.posture.findings[-1]
    assert (finding.code, finding.name) == (0, "position-singular")
    assert finding.measure < finding.threshold == 1e-9


def test_thresholds_of_the_arm_are_kept_to() -> None:
    wide = arm_of(*PLANAR, thresholds=SingularityThresholds(near=0.3, singular=0.01))
    assert told(wide, [0.3, 0.02]).posture.state == "singular"
    assert told(wide, [0.3, 0.5]).posture.state == "near"
    assert told(wide, [0.3, 0.5]).posture.findings[0].threshold == 0.3


# --- all arms, all tasks ---------------------------------------------------------------------

ALL = {
    "planar": PLANAR,
    "selective": SELECTIVE,
    "five": FIVE,
    "six": SIX,
    "seven": SEVEN,
    "six on a track": SIX_ON_A_TRACK,
    "nine": NINE,
    "twelve": TWELVE,
    "wrist": WRIST,
    "spindle": (revolute(),),
    "lift": (prismatic(),),
    "six of no length": (revolute(alpha=QUARTER),) * 6,
    "thirty-two": tuple(revolute(a=0.1, alpha=QUARTER * (k % 3)) for k in range(32)),
}


@pytest.mark.parametrize("name", ALL)
@pytest.mark.parametrize("task", [None, "pose", "position", "orientation", ["vx"], ["vy", "wz"]])
def test_every_arm_at_rest_and_elsewhere_is_told_in_finite_numbers(name: str, task: Any) -> None:
    rows = tuple(replace(row, top_speed=2.0) for row in ALL[name])
    arm = replace(arm_of(*rows), table=Table(arm_of(*rows).table.convention, rows))
    random = np.random.default_rng(1)
    postures = [np.zeros(arm.joint_count), *random_joint_values(random, arm, 1)]
    for joint_values in postures:
        answer = told(arm, joint_values, task=task)
        posture = answer.posture
        lost = covectors(answer)
        assert np.isfinite(lost).all()
        assert (posture.state == "regular") is (len(lost) == 0)
        assert (posture.state == "regular") is (not posture.kinds) is (not posture.joints)
        for number in (*(posture.tool_speed or ()), *(posture.travel_to or ())[1:2]):
            assert np.isfinite(number)
        expected = motion_of(arm, joint_values, AT_FLANGE).of_joints
        if posture.state == "singular":
            np.testing.assert_allclose(lost @ expected, 0.0, rtol=0.0, atol=1e-8)


@pytest.mark.parametrize("rails", [0, 1, 2, 3, 4])
def test_spare_rails_do_not_hide_the_joints_of_a_wrist(rails: int) -> None:
    """Rails along one axis move against each other and nothing; the wrist's joints are told.

    Source: by construction. A gantry along three axes carries a wrist of three meeting axes whose
    middle joint is at 0, so its first and last axes line up.
    """
    quarter = math.pi / 2
    slide = Row(JointKind.PRISMATIC, 0.0, 0.0, 0.0, 0.0)
    turned = replace(slide, alpha=-quarter, theta=-quarter)
    wrist = Row(JointKind.REVOLUTE, 0.0, -quarter, 0.0, 0.0)
    rows = [slide] * rails + [turned, turned, slide]
    rows += [wrist, replace(wrist, alpha=quarter), replace(wrist, alpha=0.0, d=0.1)]
    joint_values = np.full(len(rows), 0.3)
    joint_values[-2] = 0.0
    posture = told(arm_of(*rows), joint_values).posture
    assert (posture.state, posture.kinds) == ("singular", ("wrist",))
    assert posture.joints == (rails + 4, rails + 6)
