"""Searches within travel, against closed forms of two links and of slides tied together."""

from dataclasses import replace

import numpy as np

from kinematics.arm import CombinedTravel
from kinematics.envelope.descents import AboutAxis, InView
from kinematics.envelope.point_views import about, along
from kinematics.reach.sample_summary import first_axis
from kinematics.reach.travel_region import travel_region
from kinematics.table import Travel
from tests.kinematics.example_arms import AT_FLANGE, PLANAR, QUARTER, SIX, arm_of, prismatic


def test_two_links_reach_their_ring_and_stop_at_its_edges() -> None:
    arm = arm_of(*PLANAR)
    ends = np.full(2, np.inf)
    open_ = replace(travel_region(arm), lower=-ends, upper=ends)
    seeker = InView(along(arm, AT_FLANGE, np.eye(3)[:2]), open_, np.ones(2), 1e-12)
    random = np.random.default_rng(3)
    targets = random.uniform(-0.9, 0.9, (400, 2))
    found = seeker.to(targets, random.uniform(-1.0, 1.0, (400, 2)))
    distance = np.hypot(*targets.T)
    short = np.maximum(distance - 0.73, 0.0) + np.maximum(0.11 - distance, 0.0)
    # Beyond the ring the nearest place is straight ahead, and is come to within a slow last part.
    assert (found.off >= short - 1e-12).all()
    reached = found.off <= 1e-12
    assert (reached == (short == 0.0)).mean() > 0.98
    assert (found.off[~reached] < short[~reached] + 2e-2).mean() > 0.95


def test_tied_slides_go_on_along_what_ties_them() -> None:
    """The nearest place of a triangle: its slanted side holds the sum of both slides."""
    rows = (
        prismatic(alpha=-QUARTER, travel=Travel(0.0, 1.0)),
        prismatic(travel=Travel(0.0, 1.0)),
    )
    arm = arm_of(*rows, combined_travel=(CombinedTravel({1: 1.0, 2: 1.0}, Travel(0.0, 1.0)),))
    view = along(arm, AT_FLANGE, np.eye(3))
    jacobian = view(np.zeros((1, 2)))[1][0]
    seeker = InView(view, travel_region(arm), np.ones(2), 1e-12)
    wanted = np.array([[0.9, 0.5], [0.2, 0.3], [1.8, -0.4]])
    found = seeker.to(wanted @ jacobian.T, np.full((3, 2), 0.1))
    expected = np.array([[0.7, 0.3], [0.2, 0.3], [1.0, 0.0]])
    np.testing.assert_allclose(found.joint_values, expected, atol=1e-6)
    assert (found.joint_values.sum(axis=1) <= 1.0 + 1e-12).all()


def test_places_on_the_axis_are_reached_exactly() -> None:
    arm = arm_of(*SIX)
    axis, limits = first_axis(arm), travel_region(arm)
    assert axis is not None
    of_both = InView(about(arm, AT_FLANGE, axis), limits, np.ones(6), 1e-11)
    in_space = InView(along(arm, AT_FLANGE, np.eye(3)), limits, np.ones(6), 1e-11)
    targets = np.array([[0.0, 0.9], [0.0, 0.7], [0.3, 0.6]])
    starts = np.random.default_rng(1).uniform(-1.0, 1.0, (3, 6))
    found = AboutAxis(of_both, in_space, axis).to(targets, starts)
    assert (found.off <= 1e-11).all()
    places = of_both.view(found.joint_values)[0]
    np.testing.assert_allclose(places, targets, atol=1e-10)
