"""Verdicts of every freedom together, in their order; ranking; few joints; bad questions."""

import gc
import weakref

import numpy as np
import pytest

from kinematics.arm import Arm, CombinedTravel
from kinematics.chain import tool_in_base
from kinematics.errors import KinematicsError
from kinematics.jacobian import motion_of
from kinematics.reach.checks import Reacher
from kinematics.reach.targets import (
    BOUND,
    CLOSED_FORM,
    CONE,
    NONE,
    ORIENTATION,
    OUTSIDE_TRAVEL,
    REACHABLE,
    SPIN,
    UNREACHABLE,
    WITNESS,
    TakesLonger,
    Target,
    Targets,
)
from kinematics.rotations import rotation_about
from kinematics.singularity import judge
from kinematics.table import Travel
from kinematics.task_space import task_space
from kinematics.travel_limits import travel_margin
from tests.kinematics.example_arms import (
    AT_FLANGE,
    PLANAR,
    SELECTIVE,
    SIX,
    arm_of,
    random_pose,
    revolute,
)
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.reach.arm_classes import CLASSES, postures_within_travel, targets_at

NOT_FOLLOWED = "families-not-followed"


def limited(*travels: tuple[float, float] | None) -> Arm:
    """Return two links, 0.42 m and 0.31 m, with travel."""
    bounds = [None if travel is None else Travel(*travel) for travel in travels]
    return arm_of(*(revolute(a=row.a, travel=b) for row, b in zip(PLANAR, bounds, strict=True)))


def place(x: float, y: float) -> Target:
    pose = np.eye(4)
    pose[:2, 3] = x, y
    return Target(pose, ORIENTATION)


def elbow_of(x: float, y: float) -> float:
    """Return joint 2 of two links by the law of cosines."""
    return float(np.arccos((x * x + y * y - 0.42**2 - 0.31**2) / (2 * 0.42 * 0.31)))


def test_two_links_against_the_law_of_cosines() -> None:
    checks = Reacher(arm_of(*PLANAR), AT_FLANGE).check(Targets.of([place(0.5, 0.25)]))
    assert checks.verdict.tolist() == [REACHABLE]
    assert checks.proof.tolist() == [WITNESS]
    bent = elbow_of(0.5, 0.25)
    np.testing.assert_allclose(sorted(checks.joint_values[:, 1]), [-bent, bent], atol=1e-12)
    assert checks.margin.tolist() == [np.inf, np.inf]
    assert checks.reason_of(0) is None
    assert checks.families_of(0) == ()


def test_an_arm_without_joints_is_refused() -> None:
    with pytest.raises(KinematicsError, match="no joints"):
        Reacher(arm_of(), AT_FLANGE)


def test_no_targets_have_no_answers() -> None:
    checks = Reacher(arm_of(*SIX), AT_FLANGE).check(Targets.of([]))
    assert len(checks) == 0
    assert len(checks.joint_values) == 0


def test_freedoms_are_answered_in_the_order_of_the_targets() -> None:
    random = fresh()
    arm, tool = arm_of(*SIX), random_pose(random)
    poses = tool_in_base(arm, random.uniform(-2.0, 2.0, size=(12, 6)), tool)
    freedoms = [NONE, SPIN, ORIENTATION, CONE] * 3
    asked = [Target(pose, freedom, 0.2) for pose, freedom in zip(poses, freedoms, strict=True)]
    far = [Target(random_pose(random, 99.0) @ np.eye(4), freedom, 0.2) for freedom in freedoms[:4]]
    for target in far:
        target.tool_in_base[0, 3] = 9.0
    together = Reacher(arm, tool).check(Targets.of([*asked, *far]))
    assert together.verdict.tolist() == [REACHABLE] * 12 + [UNREACHABLE] * 4
    assert together.proof.tolist() == [WITNESS] * 12 + [BOUND] * 4
    for index, target in enumerate([*asked, *far]):
        alone = Reacher(arm, tool).check(Targets.of([target]))
        mine = together.solutions_of(index)
        np.testing.assert_allclose(together.joint_values[mine], alone.joint_values, atol=1e-6)
        np.testing.assert_allclose(together.margin[mine], alone.margin)
        assert together.found[index] == alone.found[0]
        reasons = together.reason_of(index), alone.reason_of(0)
        assert [r and r.code for r in reasons] in ([None, None], ["beyond-the-links"] * 2)
        # Of many targets of an arm with joints to spare not all families are followed.
        told = [finding for finding in together.findings_of(index) if finding.name != NOT_FOLLOWED]
        assert tuple(told) == alone.findings_of(0)


def test_the_best_has_most_travel_left() -> None:
    random = fresh()
    for name in ("upright arm with wrist", "RRPR", "level wrist", "place by RRR"):
        arm, tool, freedom = CLASSES[name](random)
        targets = targets_at(arm, tool, freedom, postures_within_travel(random, arm, 40))
        checks, best = (
            Reacher(arm, tool).check(targets, best_only=best_only) for best_only in (False, True)
        )
        np.testing.assert_allclose(checks.margin, travel_margin(arm, checks.joint_values))
        for index in range(40):
            margins = checks.margin[checks.solutions_of(index)]
            assert (np.diff(margins) <= 1e-9).all()
        np.testing.assert_array_equal(best.joint_values, checks.joint_values[checks.offsets[:-1]])
        np.testing.assert_array_equal(best.found, checks.found)


def test_without_travel_the_best_is_furthest_from_singular() -> None:
    random = fresh()
    arm = arm_of(*SIX)
    targets = targets_at(arm, AT_FLANGE, NONE, random.uniform(-2.0, 2.0, size=(20, 6)))
    checks = Reacher(arm, AT_FLANGE).check(targets)
    space = task_space(arm, AT_FLANGE)
    assert space is not None
    smallest = judge(arm, space, motion_of(arm, checks.joint_values, AT_FLANGE)).smallest
    for index in range(20):
        assert (np.diff(smallest[checks.solutions_of(index)]) <= 1e-9).all()


def test_near_joint_values_the_nearest_is_the_best() -> None:
    random = fresh()
    arm, tool, freedom = CLASSES["upright arm with wrist"](random)
    postures = postures_within_travel(random, arm, 20)
    spans = np.array([row.travel.upper - row.travel.lower for row in arm.table.rows if row.travel])
    for posture in postures:
        target = targets_at(arm, tool, freedom, posture[None])
        near = posture + random.uniform(-0.05, 0.05, 6)
        checks = Reacher(arm, tool).check(target, near=near)
        far = (np.abs(checks.joint_values - near) / spans).max(axis=1)
        assert (np.diff(far) >= -1e-9).all()
        # It may be that another lies nearer still.
        assert far[0] <= (np.abs(posture - near) / spans).max() + 1e-9


def test_whole_turns_are_told_and_their_number_is_found() -> None:
    turns = Travel(-2.9 * np.pi, 2.9 * np.pi)
    arm = arm_of(*(revolute(a=row.a, alpha=row.alpha, d=row.d, travel=turns) for row in SIX))
    targets = targets_at(arm, AT_FLANGE, NONE, np.full((1, 6), 0.4))
    checks = Reacher(arm, AT_FLANGE).check(targets)
    assert len(checks.joint_values) == 64
    assert checks.found[0] > 64
    (finding,) = checks.findings_of(0)
    assert finding.name == "more-postures"
    assert finding.text().startswith(("at least", str(checks.found[0])))
    assert (np.abs(checks.joint_values).max(axis=1) < 2.9 * np.pi).all()


def test_combined_travel_leaves_one_elbow() -> None:
    """Joints 1 and 2 together may not exceed 1 rad: the elbow that bends back remains."""
    bounds = CombinedTravel({1: 1.0, 2: 1.0}, Travel(-1.0, 1.0))
    arm = arm_of(*PLANAR, combined_travel=(bounds,))
    checks = Reacher(arm, AT_FLANGE).check(Targets.of([place(0.5, 0.25)]))
    (values,) = checks.joint_values
    assert values[1] < 0.0
    np.testing.assert_allclose(checks.margin, [(1.0 - abs(values.sum())) / 2.0])


def test_beyond_travel_all_ways_are_told_with_the_excess() -> None:
    arm = limited((-1.0, 1.0), (0.0, 2.6))
    checks = Reacher(arm, AT_FLANGE).check(Targets.of([place(-0.2, -0.4), place(0.5, 0.25)]))
    assert checks.verdict.tolist() == [OUTSIDE_TRAVEL, REACHABLE]
    assert checks.proof.tolist() == [CLOSED_FORM, WITNESS]
    assert checks.offsets.tolist() == [0, 2, 3]
    reason = checks.reason_of(0)
    assert reason is not None
    assert (reason.code, reason.stage, reason.unit) == ("outside-travel", "travel", "rad")
    excess = np.maximum(checks.joint_values - [1.0, 2.6], [-1.0, 0.0] - checks.joint_values)[:2]
    shares = (np.maximum(excess, 0.0) / [2.0, 2.6]).sum(axis=1)
    assert shares[0] <= shares[1]
    np.testing.assert_allclose(reason.shortfall, excess[0].max(), atol=1e-12)
    assert "exceeds travel" in reason.text()
    assert reason.nearest is not None


def test_a_typed_pose_of_four_axes_is_met_within_tolerance() -> None:
    """Two decimals of a millimetre and of a degree: the tool axis is not quite upright."""
    arm = arm_of(*SELECTIVE)
    pose = tool_in_base(arm, np.array([0.3, 0.9, 0.12, 0.4]), AT_FLANGE)
    typed = pose.copy()
    typed[:3, :3] = rotation_about(np.array([1.0, 0.0, 0.0]), np.radians(0.006)) @ pose[:3, :3]
    typed[:3, 3] = np.round(pose[:3, 3], 5)
    checks = Reacher(arm, AT_FLANGE).check(
        Targets.of([Target(typed), Target(typed, NONE, 0.0, 1e-5, 1e-5)])
    )
    assert checks.verdict.tolist() == [REACHABLE, UNREACHABLE]
    assert (checks.angle_error <= np.radians(0.0061)).all()
    assert (checks.angle_error >= np.radians(0.0059)).all()
    reason = checks.reason_of(1)
    assert reason is not None
    np.testing.assert_allclose(reason.shortfall, np.radians(0.006), rtol=1e-3)


def test_a_typed_place_at_the_edge_of_reach_is_met_within_tolerance() -> None:
    arm = arm_of(*PLANAR)
    checks = Reacher(arm, AT_FLANGE).check(Targets.of([place(0.730005, 0.0), place(0.73002, 0.0)]))
    assert checks.verdict.tolist() == [REACHABLE, UNREACHABLE]
    np.testing.assert_allclose(checks.position_error, 5e-6, rtol=1e-3)


def test_one_and_many_are_answered_alike() -> None:
    random = fresh()
    arm, tool, freedom = CLASSES["2, 3 and 4 parallel"](random)
    postures = random.uniform(-4.0, 4.0, size=(30, 6))
    targets = targets_at(arm, tool, freedom, postures)
    reacher = Reacher(arm, tool)
    many = reacher.check(targets)
    for index in range(30):
        one = reacher.check(targets.only(np.array([index])))
        assert one.verdict[0] == many.verdict[index]
        mine = many.solutions_of(index)
        np.testing.assert_allclose(one.joint_values, many.joint_values[mine], atol=1e-9)
        np.testing.assert_array_equal(one.branch, many.branch[mine])


def test_an_arm_nobody_has_any_more_is_forgotten() -> None:
    arm = arm_of(*SIX)
    reacher = Reacher(arm, AT_FLANGE)
    for freedom in (NONE, SPIN, ORIENTATION, CONE):
        reacher.check(Targets.of([Target(np.eye(4), freedom, 0.1)]))
    gone = weakref.ref(arm)
    del arm, reacher
    gc.collect()
    assert gone() is None


def test_what_answers_rest_on_is_said() -> None:
    reacher = Reacher(arm_of(*SIX), AT_FLANGE)
    asked = Targets.of([Target(np.eye(4)), Target(np.eye(4), SPIN)])
    pose, spin = reacher.methods(asked)
    assert pose.proof == spin.proof == CLOSED_FORM
    assert "spherical wrist" in pose.say
    assert reacher.estimated_seconds(asked) < 1e-3
    cones = Targets.of([Target(np.eye(4), CONE, 0.1)] * 1000)
    assert reacher.estimated_seconds(cones) > 0.5


def test_what_takes_milliseconds_is_given_up_by_who_asks_at_once() -> None:
    reacher, elbow = Reacher(arm_of(*PLANAR), AT_FLANGE), Targets.of([place(0.5, 0.25)])
    at_once = reacher.check(elbow, at_once=True)
    np.testing.assert_array_equal(at_once.joint_values, reacher.check(elbow).joint_values)
    # Two equal links, and the place on axis 1: joint 1 is free, and its family is to be followed.
    equal = Reacher(arm_of(revolute(a=0.3), revolute(a=0.3)), AT_FLANGE)
    on_axis = Targets.of([place(0.0, 0.0)])
    with pytest.raises(TakesLonger):
        equal.check(on_axis, at_once=True)
    assert equal.check(on_axis).families_of(0)[0].free_joints == (1,)


def test_joints_that_turn_without_bounds_stay_in_the_turn_they_are_near() -> None:
    arm = arm_of(revolute(a=0.1), revolute(a=0.1, travel=Travel(-6.0, 6.0)))
    near = np.radians([725.0, -270.0])
    checks = Reacher(arm, AT_FLANGE).check(Targets.of([place(0.1, 0.1)]), near=near)
    # Elbow 90 deg: (0, 90), or -270 of it, and (90, -90); the first is two turns on already.
    np.testing.assert_allclose(np.degrees(checks.joint_values[0]), [720.0, -270.0], atol=1e-9)
    assert (np.abs(checks.joint_values[:, 0] - near[0]) <= np.pi).all()
