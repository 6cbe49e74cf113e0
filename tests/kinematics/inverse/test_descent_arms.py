"""Bounds of joint values and of their sums as the descent takes them."""

import numpy as np
import pytest

from kinematics.arm import CombinedTravel
from kinematics.inverse.descent import POSE, gap_at
from kinematics.inverse.descent_arms import lines_of, room_of, start_box
from kinematics.inverse.descent_arrays import desk_for
from kinematics.inverse.screws import screws_of
from kinematics.table import Travel
from tests.kinematics.example_arms import (
    AT_FLANGE,
    QUARTER,
    arm_of,
    prismatic,
    revolute,
)
from tests.kinematics.inverse.bounded_arms import bounded


def test_sums_beyond_their_bounds_count_as_a_gap() -> None:
    rows = (prismatic(alpha=QUARTER), prismatic())
    arm = arm_of(*rows, combined_travel=(CombinedTravel({1: 3.0, 2: 4.0}, Travel(-5.0, 5.0)),))
    room = room_of(arm, np.array([2.0, 2.0]))
    np.testing.assert_allclose(room.weights, [[0.6, 0.8]])
    np.testing.assert_allclose([room.least[0], room.most[0]], [-0.5, 0.5])
    lines, desk = lines_of(screws_of(arm, AT_FLANGE), arm), desk_for(2, 2, 1)
    squared = gap_at(lines, room, desk, POSE, 1.0, np.eye(4), np.array([1.0, 1.0]))
    assert desk.gap[6] == pytest.approx(-0.9)
    assert squared == pytest.approx(float(desk.gap @ desk.gap))


def test_joints_with_turns_to_spare_start_within_one_of_them() -> None:
    arm = bounded((revolute(), revolute(), prismatic()), (-6.0, 8.0), (-1.0, 1.0), (0.0, 3.0))
    lower, upper = start_box(arm, room_of(arm, np.ones(3)))
    np.testing.assert_allclose(lower, [1.0 - np.pi, -1.0, 0.0])
    np.testing.assert_allclose(upper, [1.0 + np.pi, 1.0, 3.0])
