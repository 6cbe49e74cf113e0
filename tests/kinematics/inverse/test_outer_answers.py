"""Each stage of a special triple against the chain: what outer joints are asked, what is left."""

import numpy as np
import pytest

from kinematics.inverse.closing import MOST_PER_ANSWER, close_answers, take_off_outer
from kinematics.inverse.geometry import geometry_of
from kinematics.inverse.outer_answers import (
    ask,
    nearest_answers,
    outer_answers,
    take_off_tool,
)
from kinematics.inverse.peel import FIRST, IS_PLANE, WAYS, Peeled, peeled
from kinematics.inverse.regional_nearest import carry
from kinematics.inverse.regional_rows import FREE, MOST_ROWS_FOUND
from kinematics.inverse.screws import Screws, screws_of
from tests.kinematics.inverse.triple_arms import FAMILIES, MORE_FAMILIES, random_motions
from tests.kinematics.inverse.triple_sets import tools_at, turn_between

ALL = {**FAMILIES, **MORE_FAMILIES}
ROUNDING = 1e-13


def taken_apart(family: str, seed: int) -> tuple[Screws, Peeled, np.ndarray]:
    """Return an arm, without its triple, and motions over L."""
    random = np.random.default_rng(seed)
    arm = ALL[family](random)
    screws = screws_of(arm, np.eye(4))
    triple = geometry_of(screws).triples[0]
    apart = peeled(screws, triple.solved, triple.first, triple.parallel, triple.residual)
    motions = random_motions(random, arm, 20) / np.where(screws.prismatic, screws.length, 1.0)
    return screws, apart, motions


def targets_of(screws: Screws, motions: np.ndarray) -> np.ndarray:
    """Return the targets of motions, all over L."""
    in_metres = motions * np.where(screws.prismatic, screws.length, 1.0)
    return screws.scaled(tools_at(screws, in_metres))


def outer_of(apart: Peeled, motions: np.ndarray) -> np.ndarray:
    """Return a, b, c as the outer problem has them."""
    return motions[apart.rows] * apart.sign


def test_each_way_names_the_joints_outside_the_triple() -> None:
    assert sorted(WAYS) == [0, 1, 2, 3]
    for first, ways in WAYS.items():
        for way in ways:
            assert set(way.rows) == set(range(6)) - {first, first + 1, first + 2}


@pytest.mark.parametrize("family", ALL)
def test_generating_motions_answer_what_is_asked(family: str) -> None:
    screws, apart, motions = taken_apart(family, 1)
    start, goal, moved = np.zeros(4), np.zeros(4), np.zeros((4, 4))
    axes, points = apart.axes.copy(), apart.points.copy()
    for target, own in zip(targets_of(screws, motions), motions, strict=True):
        take_off_tool(target, apart.tool_inverse, moved)
        ask(apart.how, apart.axes, apart.points, apart.fixed, moved, axes, points, start, goal)
        at, is_plane = start.copy(), bool(apart.how[IS_PLANE])
        if not is_plane:
            at[3] = goal[3] = 1.0
        values = outer_of(apart, own)
        for joint in (2, 1, 0):
            line = apart.slides[joint], axes[joint], points[joint]
            carry(*line, is_plane, values[joint], at, at)
        np.testing.assert_allclose(at, goal, rtol=0.0, atol=ROUNDING)


@pytest.mark.parametrize("family", ALL)
def test_generating_motions_are_among_the_answers_however_little_room(family: str) -> None:
    screws, apart, motions = taken_apart(family, 2)
    targets = targets_of(screws, motions)
    begin, seen, flags = 0, 0, np.zeros(len(targets), np.int64)
    while begin < len(targets):
        answers, of = np.empty((MOST_ROWS_FOUND + 9, 4)), np.empty(MOST_ROWS_FOUND + 9, np.int64)
        done = begin
        begin, rows = outer_answers(
            apart.how,
            apart.slides,
            apart.axes,
            apart.points,
            apart.pair,
            apart.fixed,
            apart.tool_inverse,
            apart.slack,
            targets,
            begin,
            answers,
            of,
            flags,
        )
        assert begin > done
        for target in range(done, begin):
            off = answers[:rows][of[:rows] == target, :3] - outer_of(apart, motions[target])
            turned = np.abs((off + np.pi) % (2 * np.pi) - np.pi)
            assert np.where(apart.slides, np.abs(off), turned).max(axis=1).min() < 1e-6
            seen += 1
    assert seen == len(targets)
    assert not flags.any()


@pytest.mark.parametrize("family", ALL)
def test_what_is_left_is_what_the_triple_did(family: str) -> None:
    screws, apart, motions = taken_apart(family, 3)
    first, moved, rest = int(apart.how[FIRST]), np.zeros((4, 4)), np.zeros((4, 4))
    inner = Screws(
        screws.axis[first : first + 3],
        screws.point[first : first + 3],
        screws.prismatic[first : first + 3],
        np.eye(4),
        1.0,
    )
    for target, own in zip(targets_of(screws, motions), motions, strict=True):
        take_off_tool(target, apart.tool_inverse, moved)
        lines = apart.solved_axis, apart.solved_point, apart.prismatic
        take_off_outer(*lines, first, moved, own, rest)
        expected = tools_at(inner, own[None, first : first + 3])[0]
        np.testing.assert_allclose(rest[:3], expected[:3], rtol=0.0, atol=ROUNDING)


def test_a_free_joint_gets_values_at_which_the_links_reach() -> None:
    screws, apart, motions = taken_apart("three parallel, right angles", 4)
    # Axis 6 along axes 2 to 4: any of its values answers what the outer joints are asked.
    motions[:, 4] = turn_between(screws, 4, screws.axis[3], screws.axis[5])
    targets = targets_of(screws, motions)
    answers = np.array([[*outer_of(apart, own), 1.0] for own in motions])
    # The given value is put out of the way.
    answers[:, 1] += 0.5
    many, excess = MOST_PER_ANSWER * len(answers), np.full(len(targets), 9.0)
    found, of = np.empty((many, 6)), np.empty(many, np.int64)
    count = close_answers(
        apart.solved_axis,
        apart.solved_point,
        apart.prismatic,
        apart.tool_inverse,
        apart.how,
        apart.rows,
        apart.sign,
        apart.triple,
        apart.slack,
        targets,
        answers,
        np.arange(len(targets)),
        np.full(len(targets), FREE),
        found,
        of,
        excess,
    )
    # Six values from the interval, each with the elbow on either side.
    assert (np.bincount(of[:count]) >= 12).all()
    assert not excess.any()
    np.testing.assert_allclose(
        targets_of(screws, found[:count]), targets[of[:count]], rtol=0.0, atol=1e-12
    )


def test_out_of_reach_the_nearest_answers_tell_by_how_much() -> None:
    screws, apart, motions = taken_apart("elbow without offsets", 5)
    targets = targets_of(screws, motions)
    outer = apart.how, apart.slides, apart.axes, apart.points, apart.fixed, apart.tool_inverse
    answers, misses = np.empty((len(targets), 4)), np.empty(len(targets))
    nearest_answers(*outer, targets, answers, misses)
    assert misses.max() < 1e-9
    # The wrist centre, straight up, further than both links together.
    shoulder, elbow, centre = screws.point[1], screws.point[2], apart.fixed[:3]
    reach = np.linalg.norm(elbow - shoulder) + np.linalg.norm(centre - elbow)
    for target in targets:
        at = target @ np.linalg.inv(screws.tool_at_zero) @ np.append(centre, 1.0)
        target[:3, 3] += shoulder + np.array([0.0, 0.0, reach + 0.2]) - at[:3]
    nearest_answers(*outer, targets, answers, misses)
    np.testing.assert_allclose(misses, 0.2, rtol=1e-4)
