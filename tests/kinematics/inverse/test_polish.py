"""Damped steps onto a target, solutions told apart, and the other one beside a fold."""

import numpy as np
import pytest

from kinematics.inverse.polish import keep_distinct, polish, solve_damped
from kinematics.inverse.screws import Screws, screws_of
from kinematics.inverse.tolerances import ACCEPTED
from kinematics.inverse.twins import twins_of
from tests.kinematics.example_arms import SEVEN, SIX, arm_of
from tests.kinematics.inverse.triple_sets import tools_at

QUARTER = np.pi / 2


def lines_of(screws: Screws) -> tuple[np.ndarray, np.ndarray, np.ndarray, np.ndarray]:
    return screws.axis, screws.point, screws.prismatic, screws.tool_at_zero


def polished(
    screws: Screws, targets: np.ndarray, motions: np.ndarray, steps: int = 60
) -> tuple[np.ndarray, np.ndarray]:
    moved, gaps = motions.copy(), np.empty((len(motions), 2))
    of = np.arange(len(motions))
    polish(*lines_of(screws), screws.scaled(targets), of, steps, 1e9, moved, gaps)
    return moved, gaps


@pytest.mark.parametrize("rows", [SIX, SEVEN], ids=["six", "seven"])
def test_motions_nearby_come_onto_the_target(rows: tuple[object, ...]) -> None:
    random = np.random.default_rng(1)
    screws = screws_of(arm_of(*rows), np.eye(4))  # type: ignore[arg-type]
    motions = random.uniform(-2.0, 2.0, (40, len(rows)))
    targets = tools_at(screws, motions)
    moved, gaps = polished(screws, targets, motions + 1e-3 * random.normal(size=motions.shape))
    assert gaps.max() < 2e-14
    np.testing.assert_allclose(tools_at(screws, moved), targets, rtol=0.0, atol=1e-13)


def test_at_a_stretched_elbow_it_still_arrives() -> None:
    screws = screws_of(arm_of(*SIX), np.eye(4))
    motions = np.random.default_rng(2).uniform(-2.0, 2.0, (40, 6))
    # The forearm of 0.41, after an offset of 0.05 along the elbow's frame, in line.
    motions[:, 2] = QUARTER - np.arctan2(0.05, 0.41)
    _, gaps = polished(screws, tools_at(screws, motions), motions + 1e-3)
    # Two solutions fall together there: digits are lost in the motions, not on the target.
    assert gaps.max() <= ACCEPTED
    assert np.median(gaps) < 1e-14


def test_what_is_out_of_reach_stays_out_and_what_is_far_is_left_alone() -> None:
    screws = screws_of(arm_of(*SIX), np.eye(4))
    motions = np.full((1, 6), 0.5)
    target = tools_at(screws, motions)
    target[:, :3, 3] += 3.0
    _, gaps = polished(screws, target, motions, 200)
    # Three metres along each axis, less what the arm can stretch.
    assert gaps.max() * screws.length > 3.0
    moved, gaps = motions.copy(), np.empty((1, 2))
    of = np.zeros(1, np.int64)
    polish(*lines_of(screws), screws.scaled(target), of, 9, 0.1, moved, gaps)
    np.testing.assert_array_equal(moved, motions)
    assert gaps[0, 0] == pytest.approx(np.sqrt(27.0) / screws.length)


def test_damped_steps_solve_their_equations() -> None:
    random = np.random.default_rng(3)
    jacobian, slope = random.normal(size=(6, 5)), random.normal(size=5)
    step = np.empty(5)
    assert solve_damped(jacobian, slope, 0.3, np.empty((5, 5)), step)
    expected = np.linalg.solve(jacobian.T @ jacobian + 0.3 * np.eye(5), slope)
    np.testing.assert_allclose(step, expected, rtol=1e-12)
    jacobian[:, 1] = jacobian[:, 0] = 0.0
    assert not solve_damped(jacobian, slope, 0.0, np.empty((5, 5)), step)


def kept_of(motions: list[list[float]], gaps: list[float], of: list[int]) -> tuple[list[bool], ...]:
    rows, both = np.array(motions), np.array([[gap, 0.0] for gap in gaps])
    kept, left = np.empty(len(rows), np.bool_), np.full(max(of) + 1, 9.0)
    slides = np.array([False, True])
    keep_distinct(slides, np.array(of), 2e-7, rows, both, kept, left)
    return kept.tolist(), left.tolist()


def test_solutions_are_kept_once_up_to_whole_turns_of_turning_joints() -> None:
    turn = 2 * np.pi
    kept, left = kept_of(
        [[0.1, 0.2], [0.1 + turn, 0.2], [0.1, 0.2 + turn], [0.1, 0.2]],
        [0.0, 0.0, 0.0, 2 * ACCEPTED],
        [0, 0, 0, 0],
    )
    assert kept == [True, False, True, False]
    assert left == [2 * ACCEPTED]
    # The same motions for another target are another solution; left is each target's own.
    assert kept_of([[0.1, 0.2], [0.1, 0.2]], [0.0, 0.0], [0, 1]) == ([True, True], [9.0, 9.0])


def test_what_stopped_between_two_solutions_is_not_one() -> None:
    # Two solutions 1e-5 apart, and the ridge between them, where the gap is some 1e-11.
    kept, _ = kept_of([[5e-6, 0.0], [0.0, 0.0], [1e-5, 0.0]], [2e-11, 1e-15, 1e-15], [0, 0, 0])
    assert kept == [False, True, True]


def test_the_twin_beside_a_fold_is_the_elbow_on_the_other_side() -> None:
    screws = screws_of(arm_of(*SIX), np.eye(4))
    random = np.random.default_rng(4)
    motions = random.uniform(0.4, 1.2, (20, 6))
    motions[:, 2] = QUARTER - np.arctan2(0.05, 0.41) + random.uniform(0.01, 0.03, 20)
    twins, rows = twins_of(lines_of(screws), motions, 0.02)
    assert len(rows) >= 10
    moved, gaps = polished(screws, tools_at(screws, motions[rows]), twins)
    assert gaps.max() < 1e-12
    # As far beyond stretched as the given one is before it.
    bent = motions[rows, 2] - QUARTER + np.arctan2(0.05, 0.41)
    other = moved[:, 2] - QUARTER + np.arctan2(0.05, 0.41)
    np.testing.assert_allclose(other, -bent, atol=1e-9)
