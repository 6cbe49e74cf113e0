"""Legs in joint values: arcs known by hand, and where travel ends them."""

import numpy as np
import pytest

from kinematics.arm import CombinedTravel
from kinematics.table import Travel
from kinematics.travel.in_joints import joint_trail
from kinematics.travel.moves import BEYOND_TRAVEL
from kinematics.travel.trails import WHOLE
from kinematics.travel_limits import travel_margin
from tests.kinematics.example_arms import PLANAR, arm_of, revolute
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.reach.arm_classes import postures_within_travel
from tests.kinematics.travel.bounded import FLANGE, bounded, offset_arm

ONE = np.ones(2)


def test_one_joint_draws_an_arc() -> None:
    arm = arm_of(revolute(a=0.42))
    trail = joint_trail(arm, FLANGE, ONE[:1], np.array([0.2]), np.array([1.7]))
    assert trail.kind == WHOLE
    assert trail.length == pytest.approx(0.42 * 1.5, rel=1e-4)
    assert trail.turn == pytest.approx(1.5)
    assert trail.fastest == pytest.approx(0.42 * 1.5)
    assert trail.distance(0.5) == pytest.approx(0.21 * 1.5, rel=1e-4)
    assert trail.at(np.array([0.0, 0.5, 1.0])).ravel() == pytest.approx([0.2, 0.95, 1.7])


def test_the_way_is_within_travel_if_its_ends_are() -> None:
    random, arm = fresh(), offset_arm()
    for start, end in postures_within_travel(random, arm, 20).reshape(10, 2, -1):
        trail = joint_trail(arm, FLANGE, np.ones(6), start, end)
        assert trail.kind == WHOLE
        margins = travel_margin(arm, trail.postures)
        assert margins.min() >= min(margins[0], margins[-1]) - 1e-12


def test_where_a_joint_leaves_its_travel() -> None:
    arm = bounded(PLANAR, (1.0, 2.0))
    trail = joint_trail(arm, FLANGE, ONE, np.array([0.5, 0.0]), np.array([2.5, 1.0]))
    assert (trail.kind, trail.limit, trail.share) == (BEYOND_TRAVEL, 0, pytest.approx(0.25))
    assert trail.last == pytest.approx([1.0, 0.25])
    # What is told of the whole leg is told of all of it.
    assert trail.length > trail.places[-1] > 0.0
    assert trail.at(np.array([0.9])).ravel() == pytest.approx([1.0, 0.25])


def test_a_sum_of_joints_may_end_it_first() -> None:
    combined = CombinedTravel({1: 1.0, 2: 1.0}, Travel(-1.0, 1.2))
    arm = bounded(PLANAR, (1.0, 2.0), combined_travel=(combined,))
    trail = joint_trail(arm, FLANGE, ONE, np.array([0.0, 0.2]), np.array([0.5, 1.7]))
    assert (trail.kind, trail.limit, trail.share) == (BEYOND_TRAVEL, 2, pytest.approx(0.5))


def test_a_start_beyond_travel_goes_nowhere() -> None:
    arm = bounded(PLANAR, (1.0, 2.0))
    trail = joint_trail(arm, FLANGE, ONE, np.array([1.1, 0.0]), np.array([0.0, 0.0]))
    assert (trail.kind, trail.limit, trail.share) == (BEYOND_TRAVEL, 0, 0.0)
    assert len(trail.postures) == 1
