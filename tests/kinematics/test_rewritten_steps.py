"""Turns in other words, by hand and by where they lead, with forty digits.

Left out: where turns lead (test_rotation_steps), what holds for all turns (tests/properties).
"""

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from kinematics.rewritten_steps import rewritten
from kinematics.rotation_steps import turned
from kinematics.rotations import rotation_about
from tests.kinematics.turns import QUARTER, X, Y, Z, current, fixed, in_mpmath, random_steps, said


def test_no_turns_come_back_as_none() -> None:
    found = rewritten(rotation_about([1, 2, 3], 0.4), [])
    assert found.merged == found.all_fixed == found.all_current == ()


def test_neighbours_of_one_kind_are_made_one() -> None:
    found = rewritten(np.eye(3), [current(Z, 0.25), current(Z, 0.5), current(X, 0.1)])
    assert said(found.merged) == [("z", 0.75, False), ("x", 0.1, False)]


def test_the_other_kind_between_them_does_not_part_neighbours() -> None:
    steps = [current(Z, 0.25), fixed(X, 0.1), current(Z, 0.5), fixed(X, 0.2)]
    assert said(rewritten(np.eye(3), steps).merged) == [("z", 0.75, False), ("x", 0.3, True)]


def test_first_turns_of_both_kinds_are_neighbours_where_nothing_was_turned_before() -> None:
    found = rewritten(np.eye(3), [fixed(Z, 0.25), current(Z, 0.5), current(X, 0.1)])
    assert said(found.merged) == [("z", 0.75, True), ("x", 0.1, False)]


def test_first_turns_meet_where_the_start_carries_one_axis_into_the_other() -> None:
    start = rotation_about(Z, QUARTER)  # carries x into y
    steps = [current(X, 0.25), fixed(Y, 0.5)]
    found = rewritten(start, steps)
    assert said(found.merged) == [("x", 0.75, False)]
    against = rewritten(start, [current(Y, 0.25), fixed(X, 0.5)])  # carries y into -x
    assert said(against.merged) == [("y", -0.25, False)]
    for shorter, made in ((found, steps), (against, [current(Y, 0.25), fixed(X, 0.5)])):
        np.testing.assert_allclose(
            turned(start, shorter.merged), turned(start, made), rtol=0, atol=1e-15
        )


def test_first_turns_do_not_meet_elsewhere() -> None:
    start = rotation_about(Z, QUARTER)
    assert len(rewritten(start, [current(X, 0.25), fixed(X, 0.5)]).merged) == 2
    nearly = rotation_about(Z, QUARTER + 1e-12)
    assert len(rewritten(nearly, [current(X, 0.25), fixed(Y, 0.5)]).merged) == 2


def test_turns_that_cancel_bring_their_neighbours_together() -> None:
    steps = [current(X, 0.1), current(Z, 0.7), current(Z, -0.7), current(X, 0.2)]
    assert said(rewritten(np.eye(3), steps).merged) == [("x", 0.3, False)]
    across = [fixed(Z, 0.7), current(Z, -0.7), fixed(X, 0.2), current(X, 0.1)]
    assert said(rewritten(np.eye(3), across).merged) == [("x", 0.3, True)]


@pytest.mark.parametrize("angles", [(np.pi, np.pi), (2 * np.pi,), (0.1, 0.2, -0.3), (0.0,)])
def test_turns_that_come_to_nothing_are_left_out(angles: tuple[float, ...]) -> None:
    found = rewritten(np.eye(3), [fixed(Y, angle) for angle in angles])
    assert found.merged == found.all_fixed == found.all_current == ()


@pytest.mark.parametrize("angle", [1e-15, 1e-300, -1e-12, 6.2, 400.0])
def test_a_turn_of_its_own_stays_as_it_is(angle: float) -> None:
    (kept,) = rewritten(np.eye(3), [fixed(Y, angle)]).merged
    assert kept.angle == angle


def test_a_large_angle_does_not_cost_a_small_one_its_digits() -> None:
    steps = [fixed(Y, 1e8), fixed(Y, 0.1)]
    found = rewritten(np.eye(3), steps)
    assert -np.pi < found.merged[0].angle <= np.pi
    np.testing.assert_allclose(
        turned(np.eye(3), found.merged), in_mpmath(np.eye(3), steps), rtol=0, atol=1e-15
    )


def test_sums_come_out_in_one_turn() -> None:
    assert said(rewritten(np.eye(3), [fixed(Z, 3.0), fixed(Z, 3.0)]).merged) == [
        ("z", round(6.0 - 2 * np.pi, 12), True)
    ]
    (half,) = rewritten(np.eye(3), [fixed(Z, -QUARTER), fixed(Z, -QUARTER)]).merged
    assert half.angle == np.pi


def test_one_line_is_one_axis_whatever_its_length_and_sign() -> None:
    steps = [fixed([1, 2, -2], 0.5), fixed([-0.3, -0.6, 0.6], 0.2)]
    (one,) = rewritten(np.eye(3), steps).merged
    assert one.angle == pytest.approx(0.3, abs=1e-15)
    np.testing.assert_allclose(one.axis, [1 / 3, 2 / 3, -2 / 3], rtol=0, atol=1e-15)


def test_all_fixed_and_all_current_by_hand() -> None:
    start = rotation_about(X, QUARTER)  # its y stands along z, its z along -y
    found = rewritten(start, [current(Y, 0.3), fixed(X, 0.4), current(Z, 0.5)])
    assert said(found.all_fixed) == [("y", -0.5, True), ("z", 0.3, True), ("x", 0.4, True)]
    assert said(found.all_current) == [("x", 0.4, False), ("y", 0.3, False), ("z", 0.5, False)]


@pytest.mark.parametrize("seed", range(40))
def test_every_list_leads_to_the_same_orientation(seed: int) -> None:
    start = np.eye(3) if seed % 2 else Rotation.random(rng=seed).as_matrix()
    steps = random_steps(25, seed)
    found = rewritten(start, steps)
    goal = turned(start, steps)
    assert len(found.merged) == len(found.all_fixed) == len(found.all_current) < len(steps)
    assert all(step.about_fixed for step in found.all_fixed)
    assert not any(step.about_fixed for step in found.all_current)
    for made in (found.merged, found.all_fixed, found.all_current):
        np.testing.assert_allclose(turned(start, made), goal, rtol=0, atol=1e-13)
        # Shorter it does not get by the same rules.
        assert len(rewritten(start, made).merged) == len(made)
