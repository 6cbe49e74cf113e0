"""From c to whole answers: both signs where a square is known, none where it is negative."""

import numpy as np
import pytest

from kinematics.inverse.kernel_numbers import NONE
from kinematics.inverse.regional_closing import (
    NO_TERM,
    close,
    fits,
    special_term,
    sum_of_squares,
    swing_of_goal,
)
from kinematics.inverse.regional_equations import A, B, write_equations, write_path
from kinematics.inverse.regional_pairs import PAIR, write_pair
from kinematics.inverse.regional_rows import NONE_FREE
from tests.kinematics.inverse.regional_cases import Cases, cases_of


def made(cases: Cases, case: int = 0) -> tuple[np.ndarray, np.ndarray]:
    """Return pair and equations."""
    pair, path, equations = np.zeros(PAIR), np.zeros((3, 4)), np.zeros((5, 6))
    axes, points, slides = cases.axes[case], cases.points[case], cases.slides
    write_pair(slides, axes, points, pair)
    write_path(slides[2], axes[2], points[2], cases.is_plane, cases.starts[case], path)
    write_equations(pair, path, cases.is_plane, cases.goals[case], 1e-9, equations)
    return pair, equations


@pytest.mark.parametrize(("special", "term"), [("", NO_TERM), ("meet", A), ("parallel", B)])
def test_the_motions_come_back_from_their_c(special: str, term: int) -> None:
    cases = cases_of(np.random.default_rng(3), 20, special=special)
    for case in range(20):
        pair, equations = made(cases, case)
        assert special_term(pair) == term
        c, out = cases.motions[case, 2], np.zeros((8, 4))
        swing = np.cos(c), np.sin(c)
        goal = cases.goals[case]
        count, flags = close(pair, False, goal, equations, term, c, *swing, NONE_FREE, out, NONE)
        assert count == (1 if term == NO_TERM else 2)
        assert flags == 0
        off = out[:count, :3] - cases.motions[case]
        off -= 2.0 * np.pi * np.round(off / (2.0 * np.pi))
        assert np.abs(off).max(axis=1).min() < 1e-9
        value, slack = sum_of_squares(equations, *swing)
        assert abs(value) < 1e-14
        assert 0.0 < slack < 1e-7
        assert fits(equations, term, *swing, 0.0)
        assert not fits(equations, term, np.cos(c + 0.3), np.sin(c + 0.3), 0.0)


def test_links_that_do_not_reach_have_no_answer() -> None:
    """Parallel axes 0.3 apart, the start 0.2 from the second: no place is 0.6 from the first."""
    slides, axes = np.zeros(3, bool), np.array([[0.0, 0, 1], [0, 0, 1], [1, 0, 0]])
    points = np.array([[0.0, 0, 0], [0.3, 0, 0], [0, 0, 0]])
    starts = np.array([[0.5, 0.0, 0, 0]])
    for away, count in ((0.6, 0), (0.4, 2), (0.05, 0)):
        goals = np.array([[0.0, away, 0, 0]])
        cases = Cases(slides, axes[None], points[None], False, starts, np.zeros((1, 3)), goals)
        pair, equations = made(cases)
        out = np.zeros((8, 4))
        of = pair, False, goals[0], equations, B, 0.0, 1.0, 0.0, NONE_FREE, out, NONE
        assert close(*of)[0] == count


def test_how_far_joint_a_swings_the_goal() -> None:
    pair = np.zeros(PAIR)
    axes, points = np.array([[0.0, 0, 1], [0, 1, 0]]), np.array([[1.0, 0, 0], [0, 0, 0]])
    write_pair(np.zeros(2, bool), axes, points, pair)
    assert swing_of_goal(pair, False, np.array([1.0, 0.25, 9, 0])) == pytest.approx(0.25)
    assert swing_of_goal(pair, True, np.array([0.6, 0.0, 0.8, 5])) == pytest.approx(0.6)
    write_pair(np.array([True, False]), axes, points, pair)
    assert swing_of_goal(pair, False, np.array([1.0, 0.0, 9, 0])) == 1.0
