"""Regions of travel: the smallest box around what all limits leave, against dense drawing."""

import numpy as np

from kinematics.arm import CombinedTravel
from kinematics.reach.travel_region import travel_region
from kinematics.table import Coupling, Travel
from kinematics.travel_limits import travel_margin
from tests.kinematics.example_arms import arm_of, prismatic, revolute


def test_the_box_is_the_smallest_one_around_what_limits_leave() -> None:
    """The passive row's variable is a sum too; its offset counts."""
    rows = [
        revolute(a=0.4, travel=Travel(-2.0, 2.0)),
        revolute(a=0.3, travel=Travel(-1.0, 3.0)),
        revolute(
            theta=0.5, passive=True, travel=Travel(-0.5, 2.0),
            couplings=(Coupling(1, 1.0), Coupling(2, 1.0)),
        ),
    ]  # fmt: skip
    arm = arm_of(*rows, combined_travel=(CombinedTravel({1: 2.0, 2: -1.0}, Travel(-4.0, 1.0)),))
    region = travel_region(arm)
    first, second = np.meshgrid(np.linspace(-2, 2, 801), np.linspace(-1, 3, 801))
    drawn = np.stack([first.ravel(), second.ravel()], axis=1)
    kept = drawn[travel_margin(arm, drawn) >= 0.0]
    np.testing.assert_allclose(region.lower, kept.min(axis=0), atol=0.011)
    np.testing.assert_allclose(region.upper, kept.max(axis=0), atol=0.011)
    inside = ((drawn >= region.lower) & (drawn <= region.upper)).all(axis=1)
    margin = travel_margin(arm, drawn)
    # Sums that lie on a limit to the last bit may round to either side.
    clear = np.abs(margin) > 1e-12
    np.testing.assert_array_equal((region.holds(drawn) & inside)[clear], margin[clear] > 0.0)


def test_a_slide_may_be_bounded_by_a_sum_alone() -> None:
    rows = prismatic(travel=Travel(0.0, 1.0)), prismatic()
    arm = arm_of(*rows, combined_travel=(CombinedTravel({1: 1.0, 2: 1.0}, Travel(0.0, 2.0)),))
    np.testing.assert_allclose(travel_region(arm).lower, [0.0, -1.0], atol=1e-12)
    np.testing.assert_allclose(travel_region(arm).upper, [1.0, 2.0], atol=1e-12)


def test_a_box_that_need_not_be_tight_is_that_of_single_joints() -> None:
    rows = (revolute(travel=Travel(-2.0, 2.0)),) * 2
    arm = arm_of(*rows, combined_travel=(CombinedTravel({1: 1.0, 2: 1.0}, Travel(1.0, 9.0)),))
    loose, tight = travel_region(arm, tight=False), travel_region(arm)
    np.testing.assert_allclose([loose.lower, loose.upper], [[-2.0] * 2, [2.0] * 2])
    np.testing.assert_allclose([tight.lower, tight.upper], [[-1.0] * 2, [2.0] * 2], atol=1e-12)
    drawn = np.array([[0.4, 0.5], [0.6, 0.5]])
    assert loose.holds(drawn).tolist() == tight.holds(drawn).tolist() == [False, True]
