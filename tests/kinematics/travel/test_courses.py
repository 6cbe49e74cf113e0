"""Courses: ways from every posture, legs one after the other, what is said where none arrives."""

import numpy as np
import pytest

from kinematics.chain import tool_in_base
from kinematics.errors import KinematicsError
from kinematics.reach.checks import Reacher
from kinematics.reach.targets import (
    CONE,
    NOT_FOUND,
    ORIENTATION,
    REACHABLE,
    SPIN,
    UNREACHABLE,
    Target,
    Targets,
)
from kinematics.table import Travel
from kinematics.travel.courses import Courses
from kinematics.travel.lines import line_between
from kinematics.travel.moves import (
    BEYOND_TRAVEL,
    BRANCH_ENDS,
    IN_JOINTS,
    NO_END,
    NO_START,
    SINGULAR,
    Approach,
    Course,
    Leg,
    Place,
)
from kinematics.travel.to_targets import approached, back_along
from tests.kinematics.example_arms import PLANAR, SEVEN, arm_of, prismatic
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.reach.arm_classes import postures_within_travel
from tests.kinematics.travel.bounded import (
    FLANGE,
    bounded,
    offset_arm,
    selective_arm,
    upright_arm,
)
from tests.kinematics.travel.dense import ARRIVES, BruteForce

START = np.array([0.4, 0.9, -0.9, 0.5, 0.8, -0.3])


def courses_of(arm, tool: np.ndarray = FLANGE) -> Courses:  # noqa: ANN001
    return Courses(Reacher(arm, tool))


def test_every_posture_at_the_start_is_followed_as_brute_force_does() -> None:
    random, arm = fresh(), offset_arm()
    courses, brute = courses_of(arm), BruteForce(arm, FLANGE)
    seen = 0
    for posture in postures_within_travel(random, arm, 10):
        target = Target(tool_in_base(arm, posture, FLANGE))
        approach = Approach(0.15, random.normal(size=3))
        start = back_along(target, approach, "approach")
        course = approached(target, approach)
        followed = courses.follow(course)
        checks = courses.reacher.check(Targets.of([start]))
        reached = checks.verdict[0] == REACHABLE
        assert followed.started == (checks.found[0] if reached else 0)
        line = line_between(start.tool_in_base, target.tool_in_base)
        for way in followed.ways:
            dense = brute.follow(line, way.start, 5e-4)
            assert way.done == (dense.how == ARRIVES)
            assert way.legs[0].gone == pytest.approx(0.15 * dense.share, abs=2e-5)
            seen += 1
        done = [way.done for way in followed.ways]
        assert done == sorted(done, reverse=True)
        margins = [way.margin for way in followed.ways if way.done]
        assert margins == sorted(margins, reverse=True)
        assert (followed.broken is None) == any(done)
    assert seen >= 6


def test_to_a_target_and_away_along_another_way() -> None:
    arm = offset_arm()
    target = Target(tool_in_base(arm, START, FLANGE))
    retract = Approach(0.05, np.array([0.0, 0.0, -2.0]), speed=0.5)
    course = approached(target, Approach(0.1, speed=0.1), retract, samples=3)
    followed = courses_of(arm).follow(course)
    assert followed.done
    way = next(way for way in followed.ways if np.allclose(way.legs[0].end, START, atol=1e-6))
    there, back = way.legs
    assert there.end == pytest.approx(back.start, abs=1e-12)
    assert (there.duration, back.duration) == (pytest.approx(1.0), pytest.approx(0.1))
    away = tool_in_base(arm, back.end, FLANGE)
    assert away[:3, 3] - target.tool_in_base[:3, 3] == pytest.approx([0.0, 0.0, 0.05], abs=1e-9)
    middle = tool_in_base(arm, there.samples[1], FLANGE)
    expected = target.tool_in_base[:3, 3] - 0.05 * target.tool_in_base[:3, 2]
    assert middle[:3, 3] == pytest.approx(expected, abs=1e-9)
    assert there.shares.tolist() == [0.0, 0.5, 1.0]


def test_the_second_leg_may_break() -> None:
    arm = selective_arm()
    start = np.array([0.3, 0.8, 0.0, 0.2])
    target = Target(tool_in_base(arm, start, FLANGE))
    # Tool z points down: the retract upwards is more than the slide has.
    course = approached(target, Approach(0.1), Approach(0.25))
    followed = courses_of(arm).follow(course)
    assert not followed.done
    assert followed.broken is not None
    assert (followed.broken.kind, followed.broken.leg) == (BEYOND_TRAVEL, 1)
    assert followed.broken.distance == pytest.approx(0.2, abs=1e-6)
    assert followed.broken.joint == 3
    assert [len(way.legs) for way in followed.ways] == [2] * len(followed.ways)
    nearest = followed.broken.reason.nearest
    assert nearest is not None
    assert nearest[2, 3] == pytest.approx(target.tool_in_base[2, 3] + 0.2, abs=1e-6)


def test_a_start_and_an_end_out_of_reach() -> None:
    arm = offset_arm()
    courses, far = courses_of(arm), np.eye(4)
    far[0, 3] = 5.0
    nowhere = courses.follow(Course(Place(target=Target(far)), (Leg(Place(START)),)))
    assert nowhere.broken is not None
    assert (nowhere.broken.kind, nowhere.broken.verdict) == (NO_START, UNREACHABLE)
    assert nowhere.ways == ()
    assert nowhere.started == 0
    to_joints = Leg(Place(target=Target(far)), IN_JOINTS)
    stuck = courses.follow(Course(Place(START), (to_joints,)))
    assert stuck.broken is not None
    assert (stuck.broken.kind, stuck.broken.leg) == (NO_END, 0)
    assert stuck.ways[0].legs == ()
    straight = courses.follow(Course(Place(START), (Leg(Place(target=Target(far))),)))
    assert straight.broken is not None
    assert straight.broken.kind in (BRANCH_ENDS, BEYOND_TRAVEL)


def test_a_move_in_joint_values_keeps_the_branch_if_it_can() -> None:
    arm = upright_arm()
    courses = courses_of(arm)
    end = START + 0.2
    target = Target(tool_in_base(arm, end, FLANGE))
    followed = courses.follow(Course(Place(START), (Leg(Place(target=target), IN_JOINTS),)))
    leg = followed.ways[0].legs[0]
    assert leg.branch_kept
    assert leg.end == pytest.approx(end, abs=1e-9)
    assert "elbow" in leg.branch_at_start
    flipped = START * [1.0, 1.0, 1.0, 1.0, -1.0, 1.0]
    other = courses.follow(Course(Place(START), (Leg(Place(flipped), IN_JOINTS),)))
    assert other.done
    assert not other.ways[0].legs[0].branch_kept
    assert other.ways[0].legs[0].findings[0].name == "singular"


def test_a_start_in_a_singular_posture_breaks_at_once() -> None:
    arm = upright_arm()
    lined_up = START * [1.0, 1.0, 1.0, 1.0, 0.0, 1.0]
    end = back_along(Target(tool_in_base(arm, lined_up, FLANGE)), Approach(0.1), "approach")
    followed = courses_of(arm).follow(Course(Place(lined_up), (Leg(Place(target=end)),)))
    assert followed.broken is not None
    assert (followed.broken.kind, followed.broken.share) == (SINGULAR, 0.0)
    assert followed.broken.kinds == ("wrist",)
    assert followed.broken.verdict == NOT_FOUND


def test_an_approach_may_end_and_a_retract_begin_at_a_stretched_elbow() -> None:
    arm = upright_arm()
    stretched = START * [1.0, 1.0, 0.0, 1.0, 1.0, 1.0]
    tool = tool_in_base(arm, stretched, FLANGE)
    out = tool[:3, 3] - 0.1 * tool[:3, 2] - [0.0, 0.0, 0.4]
    there = back_along(Target(tool), Approach(0.1, out), "approach")
    away = courses_of(arm).follow(Course(Place(stretched), (Leg(Place(target=there)),)))
    assert away.done
    leg = away.ways[0].legs[0]
    assert leg.singular_value.distance == 0.0
    assert [finding.name for finding in leg.findings] == ["singular"]
    straight = Leg(Place(target=Target(tool)))
    back = courses_of(arm).follow(Course(Place(leg.end), (straight,)))
    assert back.done
    assert back.ways[0].legs[0].end == pytest.approx(stretched, abs=3e-3)


@pytest.mark.parametrize("freedom", [SPIN, ORIENTATION, CONE])
def test_what_a_target_leaves_open_is_taken_from_each_posture(freedom: int) -> None:
    arm = offset_arm()
    target = Target(tool_in_base(arm, START, FLANGE), freedom, 0.3)
    course = approached(target, Approach(0.02, np.array([0.0, 0.0, -1.0])))
    followed = courses_of(arm).follow(course)
    assert followed.done
    for way in followed.ways:
        if not way.done:
            continue
        (leg,) = way.legs
        before, after = tool_in_base(arm, np.stack([leg.start, leg.end]), FLANGE)
        assert after[:3, 3] == pytest.approx(target.tool_in_base[:3, 3], abs=1e-8)
        assert after[:3, :3] == pytest.approx(before[:3, :3], abs=1e-8)


def test_few_and_many_joints_say_how_they_are_followed() -> None:
    assert "least squares" in courses_of(selective_arm()).say
    seven = courses_of(bounded(SEVEN, (2.9,) * 7))
    assert "a spare joint" in seven.say
    start = np.array([0.1, 0.5, 0.2, -1.2, 0.3, 0.9, 0.1])
    end = back_along(Target(tool_in_base(seven.arm, start, FLANGE)), Approach(0.1), "approach")
    followed = seven.follow(Course(Place(start), (Leg(Place(target=end)),)))
    assert followed.done
    assert [finding.name for finding in followed.findings] == ["spare-joints"]
    assert courses_of(offset_arm()).say == courses_of(upright_arm()).say


def test_an_arm_without_travel_has_no_margin() -> None:
    arm = arm_of(*PLANAR, prismatic(travel=Travel(-0.5, 0.5)))
    loose = arm_of(*PLANAR)
    for tested, margin in ((arm, 0.5), (loose, float("inf"))):
        start = np.array([0.2, 0.9, 0.0])[: tested.joint_count]
        place = Target(tool_in_base(tested, start, FLANGE), ORIENTATION)
        end = back_along(place, Approach(0.05, np.array([1.0, 0.0, 0.0])), "approach")
        followed = courses_of(tested).follow(Course(Place(start), (Leg(Place(target=end)),)))
        assert followed.done
        assert followed.ways[0].margin == pytest.approx(margin)


@pytest.mark.parametrize("name", ["speed", "turn_speed"])
def test_a_speed_of_zero_leads_to_its_leg(name: str) -> None:
    legs = (Leg(Place(START)), Leg(Place(START), **{name: 0.0}))
    with pytest.raises(KinematicsError) as refused:
        courses_of(offset_arm()).follow(Course(Place(START), legs))
    assert refused.value.where == ("legs", 1, name)


def test_estimates_grow_with_what_is_asked() -> None:
    courses = courses_of(offset_arm())
    target = Target(tool_in_base(courses.arm, START, FLANGE))
    one = Course(Place(START), (Leg(Place(target=target)),))
    both = approached(target, Approach(0.1), Approach(0.1))
    assert 0.0 < courses.estimated_seconds(one) < courses.estimated_seconds(both)
