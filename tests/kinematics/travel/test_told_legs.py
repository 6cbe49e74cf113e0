"""Numbers of legs against dense sampling: speeds, margins, singular values, durations."""

import numpy as np
import pytest

from kinematics.chain import tool_in_base
from kinematics.findings import NEAR, OUTSIDE_WORKING_TRAVEL, SINGULAR
from kinematics.jacobian import motion_of
from kinematics.reach.checks import Reacher
from kinematics.reach.targets import Target
from kinematics.singularity import judge
from kinematics.table import Travel
from kinematics.task_space import task_space
from kinematics.transforms import pose
from kinematics.travel.courses import Courses
from kinematics.travel.moves import IN_JOINTS, Course, Gone, Leg, Place
from kinematics.travel.straight import OnLines
from kinematics.travel_limits import travel_margin
from tests.kinematics.example_arms import PLANAR, arm_of, revolute
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.reach.arm_classes import postures_within_travel
from tests.kinematics.travel.bounded import FLANGE, SPEEDS, along, bounded, offset_arm, parallel_arm

DENSE = np.linspace(0.0, 1.0, 4001)


def gone(arm, start: np.ndarray, leg: Leg, samples: int = 0) -> tuple[Gone, bool]:  # noqa: ANN001
    (way,) = (
        Courses(Reacher(arm, FLANGE)).follow(Course(Place(start), (leg,), samples=samples)).ways
    )
    return way.legs[0], way.done


def to(end: np.ndarray, **more: float) -> Leg:
    return Leg(Place(target=Target(end)), **more)


@pytest.mark.parametrize("make", [offset_arm, parallel_arm])
def test_numbers_of_straight_legs_are_those_of_dense_sampling(make) -> None:  # noqa: ANN001
    random, arm = fresh(), make()
    lines, space, whole = OnLines(arm, FLANGE), task_space(arm, FLANGE), 0
    assert space is not None
    for start in postures_within_travel(random, arm, 16):
        at = tool_in_base(arm, start, FLANGE)
        way = along(at, random.normal(scale=0.1, size=3))
        leg, done = gone(arm, start, to(way.at(1.0), speed=0.25))
        if not done or leg.singular_value.value < 1e-2:
            continue  # beside a singular posture joints swing within less than a dense step
        whole += 1
        run = lines.run(way, start, (0.0, 0.0))
        postures = lines.postures(run, DENSE).values
        rates = np.abs(np.gradient(postures, DENSE, axis=0, edge_order=2)).max(axis=0)
        assert leg.duration == pytest.approx(way.length / 0.25)
        assert leg.peak_speeds == pytest.approx(rates / leg.duration, rel=1e-3, abs=1e-6)
        assert leg.margin.value == pytest.approx(travel_margin(arm, postures).min(), abs=3e-6)
        values = judge(arm, space, motion_of(arm, postures, FLANGE)).smallest
        assert leg.singular_value.value == pytest.approx(values.min(), rel=1e-4, abs=1e-6)
        place = leg.singular_value.distance / way.length
        assert np.interp(place, DENSE, values) == pytest.approx(values.min(), rel=1e-3, abs=1e-5)
        shares = rates / np.array(SPEEDS[:6])
        assert leg.shortest == pytest.approx(shares.max(), rel=1e-3)
        assert leg.top_speed == pytest.approx(way.length / shares.max(), rel=1e-3)
        assert leg.peak_share is not None
        assert leg.peak_share.joint == int(shares.argmax()) + 1
        assert leg.peak_share.value == pytest.approx(shares.max() / leg.duration, rel=1e-3)
        assert leg.gone == leg.length == pytest.approx(way.length)
    assert whole >= 3


def test_a_planar_arm_by_hand() -> None:
    """Joint 1 alone turns the stretched arm: the tool goes 0.73 m times the angle."""
    arm = bounded(PLANAR, (2.0, 2.0))
    start, end = np.array([0.0, 0.5]), np.array([1.0, 0.5])
    radius = float(np.linalg.norm(tool_in_base(arm, start, FLANGE)[:2, 3]))
    leg, _ = gone(arm, start, Leg(Place(end), IN_JOINTS, speed=0.5), samples=3)
    assert leg.length == pytest.approx(radius, rel=1e-4)
    assert leg.duration == pytest.approx(radius / 0.5)
    assert leg.peak_speeds == pytest.approx([0.5 / radius, 0.0])
    assert leg.shortest == pytest.approx(0.5)
    assert leg.top_speed == pytest.approx(2.0 * radius)
    assert leg.samples.tolist() == [[0.0, 0.5], [0.5, 0.5], [1.0, 0.5]]
    assert leg.branch_kept
    assert (leg.margin.value, leg.margin.joint) == (0.25, 1)


def test_a_leg_in_joint_values_through_a_stretched_elbow_is_told() -> None:
    arm = bounded(PLANAR, (2.0, 2.0))
    leg, done = gone(arm, np.array([0.0, 0.5]), Leg(Place(np.array([0.2, -0.7])), IN_JOINTS))
    assert done
    assert not leg.branch_kept
    assert [finding.code for finding in leg.findings] == [SINGULAR]
    assert leg.peak_speeds is None
    assert leg.duration is None
    assert leg.singular_value.distance == pytest.approx(leg.length * 5 / 12, rel=0.03)


def test_what_turns_and_does_not_move_takes_a_turn_speed() -> None:
    arm = bounded(
        (revolute(alpha=np.pi / 2), revolute(alpha=-np.pi / 2), revolute(d=0.1)), (2.0, 2.0, 3.0)
    )
    tool = pose(np.eye(3), [0.0, 0.0, -0.1])
    courses = Courses(Reacher(arm, tool))
    start = np.array([0.3, 0.8, 0.1])
    end = tool_in_base(arm, start + 0.6 * np.eye(3)[2], tool)
    turning = Leg(Place(target=Target(end)), speed=0.2, turn_speed=0.3)
    (way,) = courses.follow(Course(Place(start), (turning,))).ways
    leg = way.legs[0]
    assert way.done
    assert (leg.length, leg.turn) == (pytest.approx(0.0, abs=1e-15), pytest.approx(0.6))
    assert leg.duration == pytest.approx(2.0)
    assert leg.peak_speeds == pytest.approx([0.0, 0.0, 0.3], abs=1e-9)
    assert leg.top_speed is None


def test_working_travel_and_nearness_are_findings() -> None:
    arm = arm_of(
        revolute(a=0.42, travel=Travel(-2.0, 2.0), working_travel=Travel(-1.0, 1.0)),
        revolute(a=0.31, travel=Travel(-2.0, 2.0)),
    )
    leg, done = gone(arm, np.array([0.9, 0.1]), Leg(Place(np.array([1.4, 0.02])), IN_JOINTS))
    assert done
    codes = {finding.code: finding for finding in leg.findings}
    assert set(codes) == {NEAR, OUTSIDE_WORKING_TRAVEL}
    beyond = codes[OUTSIDE_WORKING_TRAVEL]
    assert (beyond.joint, beyond.measure, beyond.threshold) == (1, pytest.approx(1.4), 1.0)


def test_half_a_turn_is_told() -> None:
    arm = bounded((revolute(a=0.3),), (3.5,))
    leg, _ = gone(arm, np.array([-1.5]), Leg(Place(np.array([-1.5 + np.pi])), IN_JOINTS))
    assert "half-turn" in [finding.name for finding in leg.findings]
