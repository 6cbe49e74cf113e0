"""Extremes against links laid end to end, and corners of travel."""

import numpy as np
import pytest

from kinematics.arm import Arm, CombinedTravel
from kinematics.envelope.search import search_of
from kinematics.reach.sample_summary import first_axis
from kinematics.table import Travel
from kinematics.travel_limits import travel_margin
from tests.kinematics.example_arms import AT_FLANGE, QUARTER, SIX, arm_of, revolute

# Links of 430 and of 410 with 50 across, stood on 60 and 400, and a flange 90 beyond.
FORE = float(np.hypot(0.41, 0.05))


def told(arm: Arm) -> dict[tuple[str, bool], float]:
    search, axis = search_of(arm, AT_FLANGE), first_axis(arm)
    assert axis is not None
    extremes = search.extremes(("radius", "height"), search.about(axis)[0])
    for one in extremes:
        margin = float(travel_margin(arm, one.joint_values))
        assert margin > -1e-12 or np.isinf(margin)
    return {(one.measure, one.greatest): one.value for one in extremes}


def test_six_joints_stretched_out_and_up() -> None:
    found = told(arm_of(*SIX))
    # Upper arm and forearm in line, the flange straight on: the wrist turns any way.
    farthest = 0.43 + FORE + 0.09
    assert found["radius", True] == pytest.approx(0.06 + farthest, abs=1e-9)
    assert found["height", True] == pytest.approx(0.4 + farthest, abs=1e-9)
    assert found["height", False] == pytest.approx(0.4 - farthest, abs=1e-9)
    assert found["radius", False] == pytest.approx(0.0, abs=1e-9)


def test_limits_hold_the_extremes_back() -> None:
    arm = arm_of(
        revolute(alpha=QUARTER),
        revolute(a=0.5, travel=Travel(0.2, 1.0)),
        revolute(a=0.3, travel=Travel(0.1, 0.9)),
    )
    found = told(arm)
    farthest = 0.5 * np.cos(0.2) + 0.3 * np.cos(0.3)
    assert found["radius", True] == pytest.approx(farthest, abs=1e-12)
    lowest = 0.5 * np.sin(0.2) + 0.3 * np.sin(0.3)
    assert found["height", False] == pytest.approx(lowest, abs=1e-12)
    highest = 0.5 * np.sin(1.0) + 0.3 * np.sin(QUARTER)
    assert found["height", True] == pytest.approx(highest, abs=1e-9)


def test_a_combined_travel_holds_them_back_too() -> None:
    links = (
        revolute(alpha=QUARTER),
        revolute(a=0.5, travel=Travel(-1.0, 1.0)),
        revolute(a=0.3, travel=Travel(-1.0, 1.0)),
    )
    tied = CombinedTravel({2: 1.0, 3: 1.0}, Travel(0.5, 0.8))
    found = told(arm_of(*links, combined_travel=(tied,)))
    # The forearm leans by their sum; the upper arm lies level.
    assert found["radius", True] == pytest.approx(0.5 + 0.3 * np.cos(0.5), abs=1e-9)
    assert found["height", True] == pytest.approx(0.5 * np.sin(1.0) + 0.3 * np.sin(0.8), abs=1e-9)
