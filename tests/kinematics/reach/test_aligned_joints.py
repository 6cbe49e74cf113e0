"""Families of joints in line in closed form, against curves that are followed."""

import numpy as np

from kinematics.arm import CombinedTravel
from kinematics.chain import tool_in_base
from kinematics.inverse.families import families_of
from kinematics.inverse.screws import screws_of
from kinematics.reach.aligned_joints import AlignedJoints
from kinematics.table import Travel
from kinematics.travel_limits import travel_margin
from tests.kinematics.example_arms import AT_FLANGE, SIX, arm_of, revolute
from tests.kinematics.inverse.seeds import fresh

WIDE = Travel(-5.0, 4.0)


def wrist_in_line(random: np.random.Generator, travel: Travel, **more: object) -> tuple:
    directions = random.choice([-1, 1], size=6).tolist()
    rows = [
        revolute(r.a, r.alpha, r.d, r.theta, direction=d, travel=travel)
        for r, d in zip(SIX, directions, strict=True)
    ]
    arm = arm_of(*rows, **more)
    values = random.uniform(travel.lower, travel.upper, 6)
    values[4] = 0.0
    return arm, values, tool_in_base(arm, values, AT_FLANGE)


def test_intervals_and_witnesses_are_those_of_the_curve() -> None:
    random = fresh()
    for _ in range(8):
        arm, values, pose = wrist_in_line(random, Travel(-2.5, 2.0))
        found = AlignedJoints(arm, screws_of(arm, AT_FLANGE)).families(values[None], pose)
        assert found is not None
        families, members = found
        assert members.tolist() == [True]
        (followed,) = families_of(arm, AT_FLANGE, "pose", pose, values[None])
        assert followed.relation is not None
        mine = [f for f in families if abs(f.measure - followed.relation.measure) < 1e-6]
        assert len(mine) == 1
        assert mine[0].free_joints == followed.free_joints == (4, 6)
        assert mine[0].relation == followed.relation.say
        np.testing.assert_allclose(mine[0].interval, followed.interval, atol=1e-6)
        margins = travel_margin(arm, np.array([mine[0].witness, followed.witness]))
        assert margins[0] >= margins[1] - 1e-6


def test_each_sum_within_travel_is_a_family() -> None:
    random = fresh()
    arm, values, pose = wrist_in_line(random, WIDE)
    found = AlignedJoints(arm, screws_of(arm, AT_FLANGE)).families(values[None], pose)
    assert found is not None
    families, _ = found
    assert len(families) >= 2
    steps = np.diff([family.measure for family in families])
    np.testing.assert_allclose(steps, 2.0 * np.pi)
    for family in families:
        ((low, high),) = family.interval
        sign = 1.0 if "+" in str(family.relation) else -1.0
        for fourth in np.linspace(low, high, 7):
            point = family.witness.copy()
            point[3], point[5] = fourth, sign * (family.measure - fourth)
            np.testing.assert_allclose(tool_in_base(arm, point, AT_FLANGE), pose, atol=1e-9)
            assert travel_margin(arm, point) >= -1e-9


def test_another_posture_of_the_same_family_is_a_member() -> None:
    random = fresh()
    arm, values, pose = wrist_in_line(random, WIDE)
    aligned = AlignedJoints(arm, screws_of(arm, AT_FLANGE))
    alone = aligned.families(values[None], pose)
    sign = -1.0 if "+" in str(alone and alone[0][0].relation) else 1.0
    other = values + np.array([0.0, 0.0, 0.0, 0.3, 0.0, sign * 0.3])
    both = aligned.families(np.array([values, other]), pose)
    assert alone is not None
    assert both is not None
    assert both[1].tolist() == [True, True]
    assert len(both[0]) == len(alone[0])


def test_what_is_not_of_two_joints_in_line_is_left_to_others() -> None:
    random = fresh()
    arm, values, pose = wrist_in_line(random, WIDE)
    values[4] = 0.5
    assert AlignedJoints(arm, screws_of(arm, AT_FLANGE)).families(values[None], pose) is None
    bounded = (CombinedTravel({4: 1.0, 6: 1.0}, Travel(-1.0, 1.0)),)
    arm, values, pose = wrist_in_line(random, WIDE, combined_travel=bounded)
    assert AlignedJoints(arm, screws_of(arm, AT_FLANGE)).families(values[None], pose) is None


def test_nearly_in_line_is_no_family() -> None:
    """1e-7 rad aside the tool turns by more than six joints are held to."""
    random = fresh()
    arm, values, _ = wrist_in_line(random, WIDE)
    values[4], values[3] = 1e-7, 3.9
    pose = tool_in_base(arm, values, AT_FLANGE)
    assert AlignedJoints(arm, screws_of(arm, AT_FLANGE)).families(values[None], pose) is None


def test_a_family_with_another_joint_beyond_travel_is_not_told() -> None:
    random = fresh()
    arm, values, pose = wrist_in_line(random, Travel(-2.5, 2.0))
    values[1] = 2.1
    pose = tool_in_base(arm, values, AT_FLANGE)
    found = AlignedJoints(arm, screws_of(arm, AT_FLANGE)).families(values[None], pose)
    assert found is not None
    families, members = found
    assert not families
    assert not members.any()
