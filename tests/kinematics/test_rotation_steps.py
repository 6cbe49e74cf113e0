"""Turns one after the other: by hand, by quaternions multiplied in mpmath, and by scipy.

Left out: the published cases (tests/published) and what holds for every input (tests/properties).
"""

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from kinematics.errors import InvalidOrientation, KinematicsError, NotFinite, OutOfRange
from kinematics.orientation_forms import FORMS, rotation_from, values_of
from kinematics.rotation_steps import (
    RotationStep,
    between,
    checked_step,
    refuse_too_many,
    turned,
)
from kinematics.rotations import rotation_about
from tests.kinematics.turns import EXACT, X, Y, Z, current, fixed, in_mpmath, random_steps

# --- where turns lead ----------------------------------------------------------------------


@pytest.mark.parametrize("seed", range(5))
def test_turns_agree_with_forty_digits(seed: int) -> None:
    start = Rotation.random(rng=seed).as_matrix()
    steps = random_steps(30, seed, named=0.4)
    np.testing.assert_allclose(turned(start, steps), in_mpmath(start, steps), rtol=0, atol=2e-14)


@pytest.mark.parametrize("seed", range(3))
def test_turns_agree_with_scipy(seed: int) -> None:
    steps = random_steps(20, 100 + seed, named=0.0)
    rotation = Rotation.identity()
    for step in steps:
        turn = Rotation.from_rotvec(np.array(step.axis) * step.angle)
        rotation = turn * rotation if step.about_fixed else rotation * turn
    np.testing.assert_allclose(turned(np.eye(3), steps), rotation.as_matrix(), rtol=0, atol=EXACT)


def test_a_thousand_turns_stay_a_rotation() -> None:
    reached = turned(np.eye(3), random_steps(1000, 7))
    assert np.abs(reached.T @ reached - np.eye(3)).max() < EXACT
    for form in FORMS:
        back = rotation_from(form, values_of(form, reached))
        np.testing.assert_allclose(back, reached, rtol=0, atol=EXACT)


def test_fixed_turns_are_current_turns_read_backwards() -> None:
    turns = [(X, 0.3), (Y, -1.1), (Z, 2.0), (X, 0.7)]
    forwards = turned(np.eye(3), [fixed(*turn) for turn in turns])
    backwards = turned(np.eye(3), [current(*turn) for turn in turns[::-1]])
    np.testing.assert_allclose(forwards, backwards, rtol=0, atol=1e-15)


def test_no_turns_leave_the_start() -> None:
    start = rotation_about([1, 2, 3], 0.4)
    assert np.array_equal(turned(start, []), start)


# --- the turn between two orientations -----------------------------------------------------


@pytest.mark.parametrize("seed", range(20))
def test_the_turn_between_leads_from_start_to_goal(seed: int) -> None:
    start, goal = Rotation.random(2, rng=seed).as_matrix()
    about_fixed, about_current = between(start, goal)
    np.testing.assert_allclose(about_fixed.rotation @ start, goal, rtol=0, atol=2e-15)
    np.testing.assert_allclose(start @ about_current.rotation, goal, rtol=0, atol=2e-15)
    assert about_fixed.angle == pytest.approx(about_current.angle, abs=1e-14)
    apart = (Rotation.from_matrix(goal) * Rotation.from_matrix(start).inv()).magnitude()
    assert about_fixed.angle == pytest.approx(apart, abs=1e-14)
    for turn, about in ((about_fixed, True), (about_current, False)):
        assert turn.axis is not None
        step = RotationStep(tuple(turn.axis.tolist()), turn.angle, about)  # type: ignore[arg-type]
        np.testing.assert_allclose(turned(start, [step]), goal, rtol=0, atol=1e-14)
    # The same axis, seen from outside and from the start.
    np.testing.assert_allclose(about_fixed.axis, start @ about_current.axis, rtol=0, atol=1e-12)


def test_nothing_turns_about_no_axis() -> None:
    start = rotation_about([1, 2, 3], 0.4)
    for turn in between(start, start):
        assert turn.axis is None
        assert turn.angle == pytest.approx(0.0, abs=2e-15)


def test_a_half_turn_is_called_so() -> None:
    assert [turn.is_half for turn in between(np.eye(3), np.diag([1.0, -1.0, -1.0]))] == [True] * 2
    assert not between(np.eye(3), rotation_about(X, np.pi - 1e-9))[0].is_half


# --- what is refused -----------------------------------------------------------------------


@pytest.mark.parametrize(
    ("axis", "angle", "error", "where"),
    [
        ([0, 0, 0], 1.0, InvalidOrientation, ("axis",)),
        ([0, 1], 1.0, InvalidOrientation, ("axis",)),
        ("x", 1.0, InvalidOrientation, ("axis",)),
        ([0, "1", 0], 1.0, InvalidOrientation, ("axis", 1)),
        ([0, np.nan, 0], 1.0, NotFinite, ("axis", 1)),
        ([2e9, 0, 0], 1.0, OutOfRange, ("axis", 0)),
        ([0, 0, 1], np.inf, NotFinite, ("angle",)),
        ([0, 0, 1], -2e9, OutOfRange, ("angle",)),
        ([0, 0, 1], [1.0], InvalidOrientation, ("angle",)),
        ([0, 0, 1], True, InvalidOrientation, ("angle",)),
    ],
)
def test_a_turn_that_is_none_is_refused(
    axis: object, angle: object, error: type[KinematicsError], where: tuple[str | int, ...]
) -> None:
    with pytest.raises(error) as caught:
        checked_step(axis, angle, about_fixed=True)
    assert caught.value.where == where
    assert caught.value.way_out


@pytest.mark.parametrize("size", [1e-300, 1e-9, 1.0, 1e9])
def test_an_axis_may_have_any_length(size: float) -> None:
    np.testing.assert_allclose(
        checked_step([size, 0, size], 1.0, about_fixed=True).axis, np.sqrt([0.5, 0, 0.5])
    )


def test_more_than_a_thousand_turns_are_refused() -> None:
    refuse_too_many(1000)
    with pytest.raises(KinematicsError, match="1001 steps") as caught:
        refuse_too_many(1001)
    assert caught.value.code == "too-large"
