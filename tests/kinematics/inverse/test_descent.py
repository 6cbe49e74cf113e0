"""One descent: its slopes by differences, its end by another fit."""

import numpy as np
import pytest
from scipy.optimize import least_squares

from kinematics.inverse.descent import DIRECTION, POSE, descend, gap_at, slopes_at
from kinematics.inverse.descent_arms import lines_of, no_bounds, room_of
from kinematics.inverse.descent_arrays import desk_for
from kinematics.inverse.screws import screws_of
from tests.kinematics.example_arms import (
    AT_FLANGE,
    FIVE,
    SIX,
    arm_of,
    random_pose,
)
from tests.kinematics.inverse.bounded_arms import COUPLED, bounded
from tests.kinematics.inverse.seeds import fresh


@pytest.mark.parametrize("task", [POSE, DIRECTION])
def test_slopes_are_those_of_the_gap(task: int) -> None:
    """By differences: with the target near, the gap changes by the slopes of the pose."""
    random, arm = fresh(), COUPLED
    lines, anywhere = lines_of(screws_of(arm, AT_FLANGE), arm), no_bounds(arm)
    desk, q = desk_for(6, 6, 0), random.uniform(-2.0, 2.0, 6)
    gap_at(lines, anywhere, desk, task, 1.0, np.eye(4), q)
    slopes_at(lines, anywhere, desk, task, 1.0)
    target, slopes = desk.pose.copy(), desk.of_joints.copy()
    for joint in range(6):
        # Halves of the difference both ways: the error is of the third order.
        ends = []
        for step in (1e-5, -1e-5):
            moved = q.copy()
            moved[joint] += step
            gap_at(lines, anywhere, desk, task, 1.0, target, moved)
            ends.append(desk.gap[:6].copy())
        change = (ends[1] - ends[0]) / 2e-5
        np.testing.assert_allclose(change, slopes[:, joint], rtol=0.0, atol=1e-8)


def test_an_opposite_direction_is_half_a_turn_away() -> None:
    arm = arm_of(*FIVE)
    lines, desk = lines_of(screws_of(arm, AT_FLANGE), arm), desk_for(5, 5, 0)
    q = np.zeros(5)
    gap_at(lines, no_bounds(arm), desk, DIRECTION, 1.0, np.eye(4), q)
    target = desk.pose.copy()
    target[:3, 1:3] *= -1.0
    squared = gap_at(lines, no_bounds(arm), desk, DIRECTION, 1.0, target, q)
    assert squared == pytest.approx(np.pi**2)


def test_a_descent_within_travel_ends_where_a_bounded_fit_does() -> None:
    """Against scipy's trust-region fit from the same start, the target out of reach."""
    random, agreed = fresh(), 0
    arm = bounded(SIX, *[(-1.5, 1.5)] * 6)
    lines, room = lines_of(screws_of(arm, AT_FLANGE), arm), room_of(arm, np.ones(6))
    desk, other = desk_for(6, 6, 0), desk_for(6, 6, 0)
    for _ in range(12):
        target = random_pose(random, 0.9)
        start = random.uniform(-1.5, 1.5, 6)

        def gap(q: np.ndarray, target: np.ndarray = target) -> np.ndarray:
            gap_at(lines, room, other, POSE, 1.0, target, np.ascontiguousarray(q))
            return other.gap[:6].copy()

        theirs = least_squares(gap, start, bounds=(-1.5, 1.5), xtol=1e-14, ftol=1e-14, gtol=1e-14)
        mine = start.copy()
        squared = descend(lines, room, desk, POSE, 1.0, target, mine, 400, 1)
        assert squared == pytest.approx(float((gap(mine) ** 2).sum()))
        assert np.abs(mine).max() <= 1.5
        # Some starts lead to another of several minima; none leads up.
        assert squared <= float((gap(start) ** 2).sum())
        agreed += squared == pytest.approx(2.0 * theirs.cost, rel=1e-3)
    assert agreed >= 4
