"""The polynomial against its derivatives by hand, and moves against what joints can do."""

import numpy as np
import pytest
from numpy.polynomial import Polynomial

from kinematics.motion_profiles import (
    PEAK_ACCELERATION,
    PEAK_SPEED,
    RAMP_S,
    USUAL_TOP_SPEEDS,
    on_the_way,
    progress,
    shortest_duration,
    top_speeds,
)
from kinematics.table import Coupling
from tests.kinematics.example_arms import arm_of, prismatic, revolute

FIFTH = Polynomial([0, 0, 0, 10, -15, 6])
SHARES = np.linspace(0.0, 1.0, 2001)


def test_it_is_the_polynomial_that_begins_and_ends_at_rest() -> None:
    assert [progress(share) for share in SHARES] == pytest.approx(FIFTH(SHARES), abs=1e-15)
    for order in (1, 2):
        assert FIFTH.deriv(order)(np.array([0.0, 1.0])) == pytest.approx([0.0, 0.0], abs=1e-12)
    assert (progress(-3.0), progress(0.0), progress(1.0), progress(3.0)) == (0.0, 0.0, 1.0, 1.0)


def test_peaks_are_those_of_its_derivatives() -> None:
    assert FIFTH.deriv(1)(SHARES).max() == pytest.approx(PEAK_SPEED, rel=1e-12)
    assert abs(FIFTH.deriv(2)(SHARES)).max() == pytest.approx(PEAK_ACCELERATION, rel=1e-6)
    at = (3.0 - np.sqrt(3.0)) / 6.0
    assert FIFTH.deriv(2)(at) == pytest.approx(PEAK_ACCELERATION, rel=1e-12)


def test_its_jerk_is_the_least_of_all_smooth_ways() -> None:
    """Any other way with the same ends is it plus one that vanishes there with two derivatives."""
    t = np.linspace(0.0, 1.0, 20_001)
    least = np.trapezoid(FIFTH.deriv(3)(t) ** 2, t)
    assert least == pytest.approx(720.0, rel=1e-6)
    ends = Polynomial([0, 0, 0, 1]) * Polynomial([1, -1]) ** 3
    for bump in (ends, ends * Polynomial([-0.5, 1]), -3.0 * ends * Polynomial([0.2, 1])):
        other = FIFTH + bump
        assert np.trapezoid(other.deriv(3)(t) ** 2, t) > least


@pytest.mark.parametrize(
    ("way", "speeds"), [([1.0], [0.5]), ([0.001, -0.02], [2.0, 0.1]), ([3.0, -1.0, 0.0], [1, 2, 3])]
)
def test_a_move_uses_what_the_slowest_joint_can_do_and_no_more(
    way: list[float], speeds: list[float]
) -> None:
    duration = shortest_duration(np.array(way), np.array(speeds, dtype=float))
    times = SHARES * duration
    postures = np.array([on_the_way(np.zeros(len(way)), np.array(way), share) for share in SHARES])
    rates = abs(np.gradient(postures, times, axis=0))
    assert (rates <= np.array(speeds) * (1.0 + 1e-9)).all()
    growth = abs(np.gradient(rates, times, axis=0)[5:-5])
    assert (growth <= np.array(speeds) / RAMP_S * (1.0 + 1e-2)).all()
    used = max((rates / speeds).max(), (growth * RAMP_S / speeds).max())
    assert used == pytest.approx(1.0, abs=0.01)


def test_a_move_to_where_the_arm_is_takes_no_time() -> None:
    assert shortest_duration(np.zeros(3), np.ones(3)) == 0.0
    assert shortest_duration(np.zeros(0), np.ones(0)) == 0.0


def test_top_speeds_are_those_of_driven_rows() -> None:
    arm = arm_of(
        revolute(top_speed=3.0), revolute(passive=True, couplings=(Coupling(1, -1.0),)), prismatic()
    )
    assert top_speeds(arm).tolist() == [3.0, USUAL_TOP_SPEEDS["m"]]
