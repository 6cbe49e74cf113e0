"""Margins and findings by hand, for joint values, passive rows and sums of joint values."""

import numpy as np
import pytest

from kinematics.arm import CombinedTravel
from kinematics.findings import OUTSIDE_TRAVEL, OUTSIDE_WORKING_TRAVEL
from kinematics.table import Coupling, Travel
from kinematics.travel_limits import (
    beyond_travel,
    travel_findings,
    travel_margin,
    working_margin,
)
from tests.kinematics.example_arms import PLANAR, arm_of, prismatic, revolute

DRESSED = revolute(
    travel=Travel(-2.0, 2.0), working_travel=Travel(-1.0, 1.5), working_reason="dress pack"
)
LIFT = prismatic(travel=Travel(0.0, 0.5))
# The hand's row has no motor: it turns back by joint 1, from 0.2 on, and may go to half a radian.
LEVEL = revolute(theta=0.2, passive=True, couplings=(Coupling(1, -1.0),), travel=Travel(-0.5, 0.5))


@pytest.mark.parametrize(
    ("value", "margin"),
    [(0.0, 0.5), (1.0, 0.25), (-2.0, 0.0), (2.0, 0.0), (3.0, -0.25), (-6.0, -1.0)],
)
def test_margin_is_the_share_of_travel_left(value: float, margin: float) -> None:
    assert float(travel_margin(arm_of(DRESSED), np.array([value]))) == margin


def test_the_smallest_margin_counts_and_working_travel_does_not() -> None:
    arm = arm_of(DRESSED, LIFT)
    assert float(travel_margin(arm, np.array([1.4, 0.25]))) == pytest.approx(0.15)
    assert float(travel_margin(arm, np.array([0.0, 0.45]))) == pytest.approx(0.1)
    working_only = arm_of(revolute(working_travel=Travel(-1.0, 1.0)))
    assert np.isinf(travel_margin(working_only, np.array([5.0])))


def test_without_limits_the_margin_is_infinite() -> None:
    assert np.isinf(travel_margin(arm_of(*PLANAR), np.zeros(2)))
    assert np.isinf(travel_margin(arm_of(), np.zeros(0)))
    assert travel_findings(arm_of(*PLANAR), np.full(2, 1e9)) == ()


@pytest.mark.parametrize(
    ("value", "margin"), [(0.25, 0.5), (1.0, 0.2), (-1.0, 0.0), (1.5, 0.0), (4.0, -1.0)]
)
def test_working_margin_is_the_share_of_working_travel_left(value: float, margin: float) -> None:
    assert float(working_margin(arm_of(DRESSED), np.array([value]))) == margin
    # Travel itself does not count, nor does a joint without working travel.
    with_lift = working_margin(arm_of(LIFT, DRESSED), np.array([[9.0, value], [0.0, value]]))
    assert with_lift.tolist() == [margin, margin]


def test_without_working_travel_its_margin_is_infinite() -> None:
    assert np.isinf(working_margin(arm_of(LIFT), np.array([9.0])))
    assert np.isinf(working_margin(arm_of(), np.zeros(0)))


def test_findings_name_joint_value_limit_and_reason() -> None:
    (finding,) = travel_findings(arm_of(DRESSED, LIFT), np.array([-1.25, 0.1]))
    assert finding.code == OUTSIDE_WORKING_TRAVEL == 3
    assert finding.name == "outside-working-travel"
    assert (finding.measure, finding.threshold, finding.unit) == (-1.25, -1.0, "rad")
    assert (finding.joint, finding.row) == (1, 1)
    assert (
        finding.text()
        == "joint 1 is at -1.25 rad, beyond its working travel limit -1 rad (dress pack)"
    )


def test_the_graver_of_two_limits_is_told_once() -> None:
    first, second = travel_findings(arm_of(DRESSED, LIFT), np.array([2.5, -0.1]))
    assert (first.code, first.threshold, first.joint) == (OUTSIDE_TRAVEL, 2.0, 1)
    assert (second.code, second.threshold, second.unit, second.joint) == (4, 0.0, "m", 2)


@pytest.mark.parametrize("value", [-2.0, 2.0, 1.5, -1.0])
def test_at_the_limit_is_inside(value: float) -> None:
    arm = arm_of(revolute(travel=Travel(value, value + 1.0)))
    assert travel_findings(arm, np.array([value])) == ()
    assert not beyond_travel(arm, np.array([value]))
    assert beyond_travel(arm, np.array([np.nextafter(value, -9.0)]))


def test_limits_of_a_passive_row_bound_its_variable() -> None:
    arm = arm_of(revolute(), LEVEL)
    assert travel_findings(arm, np.array([0.6])) == ()
    (finding,) = travel_findings(arm, np.array([0.9]))
    assert finding.measure == pytest.approx(-0.7)
    assert (finding.threshold, finding.joint, finding.row) == (-0.5, None, 2)
    assert finding.text().startswith("passive row 2 is at -0.7 rad")
    assert float(travel_margin(arm, np.array([0.4]))) == pytest.approx(0.3)


def test_the_numbers_of_joints_leave_passive_rows_out() -> None:
    arm = arm_of(revolute(passive=True), LIFT)
    (finding,) = travel_findings(arm, np.array([0.75]))
    assert (finding.joint, finding.row) == (1, 2)


def test_combined_travel_by_hand() -> None:
    """q2 + 0.5 q3 within -1 and 1.5 although each alone is free."""
    combined = CombinedTravel({2: 1.0, 3: 0.5}, Travel(-1.0, 1.5))
    arm = arm_of(*PLANAR, revolute(), combined_travel=(combined,))
    assert travel_findings(arm, np.array([9.0, 1.0, 1.0])) == ()
    assert float(travel_margin(arm, np.array([9.0, 1.0, 0.0]))) == pytest.approx(0.2)
    (finding,) = travel_findings(arm, np.array([9.0, 1.0, 2.0]))
    assert (finding.code, finding.measure, finding.threshold) == (4, 2.0, 1.5)
    assert (finding.joint, finding.row, finding.unit) == (None, None, "rad")
    assert finding.text() == (
        "combined travel 1 (1 x row 2 + 0.5 x row 3) is at 2 rad, beyond its travel limit 1.5 rad"
    )


def test_combined_travel_of_rows_behind_a_passive_one() -> None:
    """Numbers in ``ratios`` are those of rows: row 3 is the second joint value here."""
    combined = CombinedTravel({3: 1.0}, Travel(-1.0, 1.0))
    arm = arm_of(revolute(), LEVEL, revolute(), combined_travel=(combined,))
    assert [f.measure for f in travel_findings(arm, np.array([0.0, 1.25]))] == [1.25]
    assert travel_findings(arm, np.array([0.5, 0.0])) == ()


def test_braces_in_a_reason_stay_as_they_are() -> None:
    row = revolute(working_travel=Travel(-1.0, 1.0), working_reason="hose {A}")
    (finding,) = travel_findings(arm_of(row), np.array([2.0]))
    assert finding.text().endswith("(hose {A})")


@pytest.mark.parametrize("batch", [(), (0,), (5,), (2, 3)])
def test_batches_equal_loops(batch: tuple[int, ...]) -> None:
    combined = CombinedTravel({1: 1.0, 3: -1.0}, Travel(-0.5, 0.5))
    arm = arm_of(DRESSED, LEVEL, revolute(), LIFT, combined_travel=(combined,))
    postures = np.random.default_rng(1).uniform(-2.5, 2.5, size=(*batch, 3))
    margins, beyond = travel_margin(arm, postures), beyond_travel(arm, postures)
    assert margins.shape == beyond.shape == batch
    for index in np.ndindex(*batch):
        assert float(margins[index]) == float(travel_margin(arm, postures[index]))
        assert bool(beyond[index]) == bool(travel_findings(arm, postures[index]))
        outside = any(f.code == 4 for f in travel_findings(arm, postures[index]))
        assert (float(margins[index]) < 0.0) is outside
