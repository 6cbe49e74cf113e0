"""Which method answers for which arm: closed forms, joints that are left out, searches."""

from itertools import pairwise

import numpy as np
import pytest

from kinematics.arm import CombinedTravel
from kinematics.chain import tool_in_base
from kinematics.inverse.measured import DIRECTION, POSE, POSITION
from kinematics.inverse.solve import method_of
from kinematics.table import Coupling, Travel
from tests.kinematics.example_arms import (
    AT_FLANGE,
    FIVE,
    SELECTIVE,
    SEVEN,
    SHOULDER_AND_ELBOW,
    SIX,
    WRIST,
    arm_of,
    random_arm,
    random_joint_values,
    revolute,
)
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.reach.arm_classes import CLASSES, postures_within_travel

OFFSET = np.eye(4)
OFFSET[0, 3] = 0.1


def rest(joints: int) -> np.ndarray:
    return np.full(joints, 0.25)


@pytest.mark.parametrize("name", CLASSES)
def test_every_class_has_a_closed_form_that_meets_its_own_poses(name: str) -> None:
    random = fresh()
    arm, tool, freedom = CLASSES[name](random)
    method = method_of(arm, tool, POSITION if freedom else POSE)
    assert method.complete
    targets = tool_in_base(arm, postures_within_travel(random, arm, 20), tool)
    found = method.solve(targets, rest(arm.joint_count))
    assert (found.count_per_target() > 0).all()


def test_six_joints_without_structure_are_left_to_an_elimination() -> None:
    arm = random_arm(fresh(), 6, prismatic_share=0.0)
    method = method_of(arm, AT_FLANGE)
    assert method.complete
    assert method.solver.proof == "elimination"
    assert method_of(arm, AT_FLANGE, POSITION).solver.proof == "search"
    assert not method_of(arm_of(*SEVEN), AT_FLANGE).complete


def test_axes_that_nearly_meet_are_solved_as_measured_too() -> None:
    """A measured wrist, 50 um and 0.1 mrad off: what a closed form may lose, an elimination has."""
    rows = list(SIX)
    rows[4] = revolute(alpha=np.pi / 2 + 1e-4, a=5e-5, d=2e-5)
    method = method_of(arm_of(*rows), AT_FLANGE)
    assert method.complete
    assert method.solver.proof == "elimination"
    assert "as measured" in method.say
    assert method_of(arm_of(*SIX), AT_FLANGE).solver.proof == "closed-form"


def test_last_joints_about_the_tool_point_are_left_out_of_a_place() -> None:
    """The tool point in the wrist centre: the first three joints alone bring it there."""
    arm = arm_of(*SHOULDER_AND_ELBOW[:2], revolute(a=0.37, alpha=np.pi / 2), *WRIST[:2], revolute())
    method = method_of(arm, AT_FLANGE, POSITION)
    assert method.idle.tolist() == [False] * 3 + [True] * 3
    target = tool_in_base(arm, np.array([[0.3, 0.4, 0.5, 0.6, 0.7, 0.8]]), AT_FLANGE)
    found = method.solve(target, rest(6))
    assert method.complete
    assert len(found.motions) == 4
    np.testing.assert_array_equal(found.motions[:, 3:], 0.25)
    assert method_of(arm, OFFSET, POSITION).idle.tolist() == [False] * 6


def test_a_joint_that_moves_others_too_is_not_left_out() -> None:
    rows = (*SHOULDER_AND_ELBOW[:2], revolute(alpha=np.pi / 2, couplings=(Coupling(4, 0.5),)))
    arm = arm_of(*rows, revolute())
    assert not method_of(arm, AT_FLANGE, POSITION).idle.any()


def test_a_last_joint_about_tool_z_is_left_out_of_a_direction() -> None:
    arm = arm_of(*SIX)
    method = method_of(arm, AT_FLANGE, DIRECTION)
    assert method.complete
    assert method.idle.tolist() == [False] * 5 + [True]
    assert not method_of(arm, OFFSET, DIRECTION).complete
    assert method_of(arm_of(*SELECTIVE), AT_FLANGE, DIRECTION).idle.tolist() == [False] * 3 + [True]


def test_five_joints_say_by_how_much_they_miss() -> None:
    random = fresh()
    arm = arm_of(*FIVE)
    method = method_of(arm, AT_FLANGE)
    assert "the turn that is missing" in method.say
    values = random_joint_values(random, arm, 30)
    targets = tool_in_base(arm, values, AT_FLANGE)
    found = method.solve(targets, rest(5))
    least = [found.angle_error[found.target == index].min() for index in range(30)]
    np.testing.assert_allclose(least, 0.0, atol=1e-7)
    off = 0.2
    tilt = np.eye(4)
    tilt[1:3, 1:3] = [[np.cos(off), -np.sin(off)], [np.sin(off), np.cos(off)]]
    found = method.solve(targets @ tilt, rest(5))
    # The place is met, but where a wrist is nearly in line and place and turn share what is missed.
    met = found.position_error < 1e-9
    assert met.mean() > 0.7
    # No turn of the arm makes up for all of the tilt, and some posture comes within it.
    assert found.angle_error[met].min() > 1e-4
    least = [
        found.angle_error[met & (found.target == index)].min(initial=9.0) for index in range(30)
    ]
    assert min(least) <= off + 1e-9


def test_order_of_targets_does_not_matter() -> None:
    random = fresh()
    arm = arm_of(*SIX)
    method = method_of(arm, AT_FLANGE)
    targets = tool_in_base(arm, random_joint_values(random, arm, 10), AT_FLANGE)
    together = method.solve(targets, rest(6))
    for index, (first, last) in enumerate(pairwise(np.searchsorted(together.target, range(11)))):
        alone = method.solve(targets[index : index + 1], rest(6))
        np.testing.assert_allclose(alone.motions, together.motions[first:last], atol=1e-9)


def test_a_joint_whose_sum_with_others_is_bounded_is_not_left_out() -> None:
    """Put anywhere within its own travel it would bring the sum out of bounds."""
    sum_of = (CombinedTravel({1: 1.0, 6: 1.0}, Travel(-0.5, 0.5)),)
    assert not method_of(arm_of(*SIX, combined_travel=sum_of), AT_FLANGE, DIRECTION).idle.any()
    rows = (*SHOULDER_AND_ELBOW[:2], revolute(a=0.37, alpha=np.pi / 2), *WRIST[:2], revolute())
    of_place = method_of(arm_of(*rows, combined_travel=sum_of), AT_FLANGE, POSITION)
    assert not of_place.idle[[0, 5]].any()
    of_three = (CombinedTravel({1: 1.0, 4: 1.0}, Travel(-0.5, 0.5)),)
    selective = (*SELECTIVE[:3], revolute())
    flat = arm_of(*selective, combined_travel=of_three)
    assert method_of(arm_of(*selective), AT_FLANGE, POSITION).idle.tolist() == [False] * 3 + [True]
    assert not method_of(flat, AT_FLANGE, POSITION).idle.any()
