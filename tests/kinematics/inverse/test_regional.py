"""Three joints and a point or plane: forwards to a goal, and every answer back.

Each case is made by carrying the start with known motions, so an answer is missing if none leads
near these. "Near" is 1e-5: a root of a double pair is known to half of the digits.
"""

import itertools

import numpy as np
import pytest

from kinematics.inverse.regional import regional
from kinematics.inverse.regional_pairs import PAIR, write_pair
from kinematics.inverse.regional_rows import FREE, MOST_ROWS_FOUND, NEAR_FREE, NONE_FREE
from tests.kinematics.inverse.regional_cases import (
    Cases,
    aimed,
    answered,
    apart,
    carried,
    cases_of,
    directions,
    least,
    misses,
    polished,
    square_to,
)
from tests.kinematics.inverse.seeds import fresh

FEW = 200
TURNS = (False, False, False)
POINTS = list(itertools.product([False, True], repeat=3))
PLANES = [slides for slides in POINTS if sum(slides) < 2]
PAIRS = ("", "parallel", "meet", "square")
NEAR = 1e-5


def can_be_answered(slides: tuple[bool, ...], special: str, is_plane: bool) -> bool:
    """Tell whether no two joints do the same: parallel slides; parallel turns of a normal."""
    if special != "parallel":
        return True
    return not (slides[0] and slides[1]) and not (is_plane and slides[2])


@pytest.mark.parametrize("special", PAIRS)
@pytest.mark.parametrize(
    ("slides", "is_plane"),
    [(slides, False) for slides in POINTS] + [(slides, True) for slides in PLANES],
)
def test_the_motions_a_goal_was_made_with_are_among_the_answers(
    slides: tuple[bool, ...], is_plane: bool, special: str
) -> None:
    cases = cases_of(fresh(), FEW, slides, special, is_plane)
    answers = answered(cases)
    if not can_be_answered(slides, special, is_plane):
        assert (answers.flags & FREE).all()
        return
    assert (apart(cases, answers) < NEAR).all()
    regular = answers.rows[:, 3] == NONE_FREE
    assert np.quantile(misses(cases, answers)[regular], 0.99) < 1e-12
    assert misses(cases, answers)[regular].max() < 1e-8


@pytest.mark.parametrize("off", [1e-12, 1e-10, 1e-9, 2e-9, 1e-8, 1e-7, 1e-6, 7e-6, 1e-4, 1e-2])
@pytest.mark.parametrize("special", ["parallel", "skewed", "meet", "square"])
@pytest.mark.parametrize("is_plane", [False, True])
def test_pairs_that_are_special_but_for_a_little(special: str, off: float, is_plane: bool) -> None:
    cases = cases_of(fresh(), FEW, TURNS, special, is_plane, off)
    answers = answered(cases)
    # Near 1e-9 one coordinate of the place is known to 1e-16 / 1e-9, before it is polished.
    assert least(answers.of, misses(cases, answers), FEW).max() < 1e-6
    assert (apart(cases, polished(cases, answers)) < NEAR).all()


@pytest.mark.parametrize("is_plane", [False, True])
def test_answers_are_apart_and_there_are_two_or_four(is_plane: bool) -> None:
    random = fresh()
    for special in PAIRS:
        answers = answered(cases_of(random, FEW, TURNS, special, is_plane))
        counts = np.bincount(answers.of, minlength=FEW)
        # An extremum within the slack of 0 gives one more, or three for what just misses.
        assert counts.min() >= 2
        assert counts.max() <= 6
        assert np.isin(counts, [2, 4]).mean() > 0.98
        for case in range(FEW):
            rows = np.exp(1j * answers.rows[answers.of == case, :3])
            gaps = np.abs(rows[:, None] - rows[None]).max(axis=2)
            assert gaps[~np.eye(len(rows), dtype=bool)].min() > 1e-9


def test_read_backwards_the_answers_are_the_same() -> None:
    cases = cases_of(fresh(), FEW)
    ahead = answered(cases)
    back = answered(
        cases._replace(
            axes=cases.axes[:, ::-1].copy(),
            points=cases.points[:, ::-1].copy(),
            starts=cases.goals,
            goals=cases.starts,
        )
    )
    for case in range(FEW):
        one = ahead.rows[ahead.of == case, :3]
        other = -back.rows[back.of == case, 2::-1]
        assert len(one) == len(other)
        gaps = np.abs(np.exp(1j * one)[:, None] - np.exp(1j * other)[None]).max(axis=2)
        assert gaps.min(axis=1).max() < NEAR


# --- where two answers become one ----------------------------------------------------------


def rates(cases: Cases) -> np.ndarray:
    """Return how goals change with the motions, by differences, on three coordinates, (n, 3, 3)."""
    found, step = np.zeros((len(cases.starts), 4, 3)), 1e-6
    for joint in range(3):
        off = np.zeros((len(cases.starts), 3))
        off[:, joint] = step
        ahead, behind = (carried(cases, cases.motions + sign * off) for sign in (1.0, -1.0))
        found[:, :, joint] = (ahead - behind) / (2.0 * step)
    if not cases.is_plane:
        return found[:, :3]
    one = square_to(cases.goals[:, :3], np.random.default_rng(1))
    other = np.cross(cases.goals[:, :3], one)
    across = [np.einsum("ni,nij->nj", way, found[:, :3]) for way in (one, other)]
    return np.stack([*across, found[:, 3]], axis=1)


def at_folds(cases: Cases) -> Cases:
    """Return the cases of which some value of joint c makes the determinant vanish, at that value.

    Found by halving, to the last digit.
    """

    def determinant(of_c: np.ndarray) -> np.ndarray:
        motions = cases.motions.copy()
        motions[:, 2] = of_c
        return np.linalg.det(rates(aimed(*cases[:5], motions)))

    grid = np.linspace(-np.pi, np.pi, 25)
    values = np.array([determinant(np.full(len(cases.starts), c)) for c in grid])
    changes = (values[:-1] > 0.0) != (values[1:] > 0.0)
    which, cell = changes.any(axis=0), changes.argmax(axis=0)
    low, high = grid[cell], grid[cell + 1]
    below = values[cell, np.arange(len(cell))] > 0.0
    for _ in range(55):
        middle = 0.5 * (low + high)
        same = (determinant(middle) > 0.0) == below
        low, high = np.where(same, middle, low), np.where(same, high, middle)
    motions = cases.motions.copy()
    motions[:, 2] = low
    return aimed(
        cases.slides,
        cases.axes[which],
        cases.points[which],
        cases.is_plane,
        cases.starts[which],
        motions[which],
    )


@pytest.mark.parametrize("special", PAIRS)
@pytest.mark.parametrize(
    ("slides", "is_plane"), [(TURNS, False), (TURNS, True), ((True, False, False), False)]
)
def test_a_goal_at_a_fold_has_an_answer(
    slides: tuple[bool, ...], is_plane: bool, special: str
) -> None:
    cases = at_folds(cases_of(fresh(), FEW, slides, special, is_plane))
    assert len(cases.starts) > FEW / 2
    answers = answered(cases)
    assert least(answers.of, misses(cases, answers), len(cases.starts)).max() < 1e-9
    # The fold itself was found by differences, to 1e-10 or so, and its root to the root of that.
    assert (apart(cases, answers) < 1e-4).all()


@pytest.mark.parametrize("is_plane", [False, True])
@pytest.mark.parametrize("special", PAIRS)
def test_goals_a_hair_from_a_fold_have_both_answers(special: str, is_plane: bool) -> None:
    """Both answers of a pair are met however close they are: each is made, and looked for."""
    cases = at_folds(cases_of(fresh(), FEW, TURNS, special, is_plane))
    for off in (1e-3, 1e-5, 1e-6):
        motions = cases.motions.copy()
        motions[:, 2] += off
        near = aimed(*cases[:5], motions)
        answers = polished(near, answered(near))
        gaps = np.abs(answers.rows[:, 2] - motions[answers.of, 2])
        gaps = np.minimum(gaps, np.abs(2.0 * np.pi - gaps))
        assert (least(answers.of, gaps, len(motions)) < max(3e-7, 0.01 * off)).all(), off


# --- where a joint is free -----------------------------------------------------------------


def with_free_joint(cases: Cases, joint: int, off: float, random: np.random.Generator) -> Cases:
    """Return cases in which what a joint carries lies on its axis, or beside it by ``off``."""
    count = len(cases.starts)
    axis, point = cases.axes[:, joint], cases.points[:, joint]
    carries = np.zeros((count, 4))
    if cases.is_plane:
        carries[:, :3] = axis + off * square_to(axis, random)
        carries[:, :3] /= np.linalg.norm(carries[:, :3], axis=1, keepdims=True)
        carries[:, 3] = random.uniform(-0.5, 0.5, size=count)
    else:
        along = random.uniform(-0.5, 0.5, size=(count, 1))
        carries[:, :3] = point + along * axis + off * square_to(axis, random)
    for behind in range(joint + 1, 3):
        back = np.zeros((count, 3))
        back[:, behind] = -cases.motions[:, behind]
        carries = carried(cases._replace(starts=carries), back)
    return aimed(*cases[:4], carries, cases.motions)


@pytest.mark.parametrize("off", [0.0, 1e-14, 1e-12, 1e-9, 1e-8, 1e-7, 1e-6, 1e-4])
@pytest.mark.parametrize("joint", [0, 1, 2])
@pytest.mark.parametrize("is_plane", [False, True])
def test_what_lies_on_an_axis_is_answered_or_said_to_be_open(
    is_plane: bool, joint: int, off: float
) -> None:
    random = fresh()
    for special in PAIRS:
        cases = with_free_joint(cases_of(random, 60, TURNS, special, is_plane), joint, off, random)
        answers = polished(cases, answered(cases))
        found = least(answers.of, misses(cases, answers), 60) < 1e-9
        open_ = answers.flags != 0
        assert (found | open_).all(), special
        # A goal next to axis a, or a normal along two parallel axes, leaves c a double root that
        # is known to 1e-8, from where not every one is polished.
        least_share = 0.5 if special == "parallel" and is_plane else 0.8
        assert found.mean() > least_share, special
        if off <= 1e-8:
            assert open_.all()
        # Of parallel axes that a normal lies along both are free, and one is named.
        if off == 0.0 and not (special == "parallel" and is_plane):
            assert (answers.rows[:, 3] == joint).any()
        if off > 1e-6:
            assert not open_.any()
            # Answers are polished to 1e-9, and so little a turn of what is 1e-4 off its axis moves.
            assert (apart(cases, answers) < 1e-9 / off * 10.0).all()


def test_a_free_joint_is_sampled_all_around() -> None:
    random = fresh()
    cases = with_free_joint(cases_of(random, 20), 2, 0.0, random)
    answers = answered(cases)
    free = answers.rows[:, 3] == 2
    for case in range(20):
        values = np.sort(answers.rows[free & (answers.of == case), 2])
        assert len(values) >= 12
        assert np.diff(values).max() < 0.6
    assert misses(cases, answers)[free].max() < 1e-9


# --- what cannot be ------------------------------------------------------------------------


@pytest.mark.parametrize("slides", [TURNS, (True, False, False), (False, True, False)])
def test_goals_a_hair_beyond_reach_have_no_answer_that_meets_them(slides: tuple[bool, ...]) -> None:
    """A hair is 1e-6. Beyond reach: the goal is moved outwards from the fold it is on."""
    cases = at_folds(cases_of(fresh(), FEW, slides))
    outwards = np.linalg.svd(rates(cases))[0][:, :, 2]
    met = []
    for sign in (-1.0, 1.0):
        goals = cases.goals.copy()
        goals[:, :3] += sign * 1e-6 * outwards
        moved = cases._replace(goals=goals)
        answers = polished(moved, answered(moved))
        met.append(least(answers.of, misses(moved, answers), len(goals)) < 1e-9)
    # From an outermost fold, one way leads out; from one within reach, both may lead on.
    assert not met[0].all()
    assert not met[1].all()
    assert (met[0] | met[1]).mean() > 0.99


def test_far_goals_have_none_and_that_is_proved() -> None:
    cases = cases_of(fresh(), FEW)
    goals = cases.goals.copy()
    goals[:, :3] = 9.0 * directions(np.random.default_rng(0), FEW)
    answers = answered(cases._replace(goals=goals))
    assert len(answers.rows) == 0
    assert not answers.flags.any()


def test_joints_that_do_the_same_are_flagged() -> None:
    """Two slides along one line; a plane with two slides; two turns about one line."""
    pair, out = np.zeros(PAIR), np.zeros((MOST_ROWS_FOUND, 4))
    axes, points = np.eye(3)[[2, 2, 0]], np.zeros((3, 3))
    start, goal = np.array([1.0, 0, 0, 0]), np.array([0.0, 1, 0, 0])
    for slides, is_plane in (
        ((True, True, False), False),
        ((True, True, False), True),
        ((False, False, False), False),
    ):
        write_pair(np.array(slides), axes, points, pair)
        of = pair, np.array(slides), axes, points, is_plane, start, goal, 1e-9, out
        assert regional(*of) == (0, FREE)


def test_flags_tell_nearly_free_from_free() -> None:
    random = fresh()
    for off, flag in ((0.0, FREE), (1e-8, NEAR_FREE)):
        cases = with_free_joint(cases_of(random, 50), 2, off, random)
        assert (answered(cases).flags & flag).all()
