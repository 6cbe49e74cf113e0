"""Three joints drawn at random, what they carry where, and answers held against that.

The joints' motions are written out here once more, by Rodrigues' formula on arrays of cases.
"""

from typing import NamedTuple

import numpy as np

from kinematics.inverse.regional import regional
from kinematics.inverse.regional_nearest import downhill
from kinematics.inverse.regional_pairs import PAIR, write_pair
from kinematics.inverse.regional_rows import MOST_ROWS_FOUND

Array = np.ndarray


class Cases(NamedTuple):
    """Cases of the regional problem, n of them, made forwards.

    slides (3,); axes, points (n, 3, 3); starts, goals (n, 4); motions (n, 3), that lead there.
    """

    slides: Array
    axes: Array
    points: Array
    is_plane: bool
    starts: Array
    motions: Array
    goals: Array


def directions(random: np.random.Generator, count: int) -> Array:
    drawn = random.normal(size=(count, 3))
    return drawn / np.linalg.norm(drawn, axis=1, keepdims=True)


def square_to(axes: Array, random: np.random.Generator) -> Array:
    """Return directions square to axes (n, 3)."""
    square = np.cross(axes, directions(random, len(axes)))
    return square / np.linalg.norm(square, axis=1, keepdims=True)


def carried(cases: Cases, motions: Array) -> Array:
    """Return what motions (n, 3) make of the starts, (n, 4)."""
    at = cases.starts.copy()
    for joint in (2, 1, 0):
        axis, point = cases.axes[:, joint], cases.points[:, joint]
        motion = motions[:, joint : joint + 1]
        vector = at[:, :3] if cases.is_plane else at[:, :3] - point
        if cases.slides[joint]:
            if cases.is_plane:
                at[:, 3] += motion[:, 0] * np.sum(vector * axis, axis=1)
            else:
                at[:, :3] += motion * axis
            continue
        along = np.sum(vector * axis, axis=1, keepdims=True) * axis
        turned = along + np.cos(motion) * (vector - along)
        turned = turned + np.sin(motion) * np.cross(axis, vector)
        if cases.is_plane:
            at[:, 3] += np.sum((turned - vector) * point, axis=1)
            at[:, :3] = turned
        else:
            at[:, :3] = turned + point
    return at


def cases_of(
    random: np.random.Generator,
    count: int,
    slides: tuple[bool, ...] = (False, False, False),
    special: str = "",
    is_plane: bool = False,
    off: float = 0.0,
) -> Cases:
    """Return cases whose first two axes are ``parallel``, ``meet`` or are ``square``, but for off.

    Parallel ones are tilted about their common normal, as an angle of a table tilts them, or, if
    ``skewed``, any way.
    """
    axes = directions(random, 3 * count).reshape(count, 3, 3)
    points = random.uniform(-0.5, 0.5, size=(count, 3, 3))
    if special in ("parallel", "skewed"):
        axes[:, 1] = axes[:, 0] * random.choice([-1.0, 1.0], size=(count, 1))
        tilt = square_to(axes[:, 0], random)
        if special == "parallel":
            apart = points[:, 1] - points[:, 0]
            tilt = np.cross(axes[:, 0], apart)
            tilt /= np.linalg.norm(tilt, axis=1, keepdims=True)
        axes[:, 1] += off * tilt
    elif special == "meet":
        slid = random.uniform(-0.5, 0.5, size=(count, 1)) * axes[:, 0]
        normal = np.cross(axes[:, 0], axes[:, 1])
        normal /= np.linalg.norm(normal, axis=1, keepdims=True)
        points[:, 0] = points[:, 1] + slid + off * normal
    elif special == "square":
        axes[:, 1] = square_to(axes[:, 0], random) + off * axes[:, 0]
    axes /= np.linalg.norm(axes, axis=2, keepdims=True)
    starts = np.zeros((count, 4))
    starts[:, :3] = directions(random, count)
    if is_plane:
        starts[:, 3] = random.uniform(-0.5, 0.5, size=count)
    else:
        starts[:, :3] *= random.uniform(0.1, 1.0, size=(count, 1))
    half = np.where(slides, 0.5, np.pi)
    motions = random.uniform(-half, half, size=(count, 3))
    return aimed(np.array(slides), axes, points, is_plane, starts, motions)


def aimed(
    slides: Array, axes: Array, points: Array, is_plane: bool, starts: Array, motions: Array
) -> Cases:
    """Return cases whose goals are where the motions lead."""
    cases = Cases(slides, axes, points, is_plane, starts, motions, starts)
    return cases._replace(goals=carried(cases, motions))


class Answers(NamedTuple):
    """What was answered to cases: one row for each answer of each.

    rows (k, 4): a, b, c and which is free; of (k,), of which case; flags (n,), of each case.
    """

    rows: Array
    of: Array
    flags: Array


def answered(cases: Cases, slack: float = 1e-9) -> Answers:
    """Return the answers to all cases."""
    pair, out = np.zeros(PAIR), np.zeros((MOST_ROWS_FOUND, 4))
    rows, of, flags = [np.empty((0, 4))], [np.empty(0, int)], []
    for case in range(len(cases.starts)):
        axes, points = cases.axes[case], cases.points[case]
        write_pair(cases.slides, axes, points, pair)
        count, flag = regional(
            pair,
            cases.slides,
            axes,
            points,
            cases.is_plane,
            cases.starts[case],
            cases.goals[case],
            slack,
            out,
        )
        rows.append(out[:count].copy())
        of.append(np.full(count, case))
        flags.append(flag)
    return Answers(np.concatenate(rows), np.concatenate(of), np.array(flags))


def polished(cases: Cases, answers: Answers) -> Answers:
    """Return the answers moved downhill, as whoever asks does with them."""
    rows = answers.rows.copy()
    for row, case in zip(rows, answers.of, strict=True):
        motions = row[:3].copy()
        downhill(
            cases.slides,
            cases.axes[case],
            cases.points[case],
            cases.is_plane,
            cases.starts[case],
            cases.goals[case],
            motions,
        )
        row[:3] = motions
    return answers._replace(rows=rows)


def misses(cases: Cases, answers: Answers) -> Array:
    """Return by how much each answer misses its goal, (k,)."""
    of = answers.of
    picked = Cases(
        cases.slides,
        cases.axes[of],
        cases.points[of],
        cases.is_plane,
        cases.starts[of],
        cases.motions[of],
        cases.goals[of],
    )
    return np.abs(carried(picked, answers.rows[:, :3]) - picked.goals).max(axis=1, initial=0.0)


def least(of: Array, values: Array, count: int) -> Array:
    """Return the least value of each case, infinite where there is none, (count,)."""
    found = np.full(count, np.inf)
    np.minimum.at(found, of, values)
    return found


def apart(cases: Cases, answers: Answers) -> Array:
    """Return how far the nearest answer of each case is from the motions it was made with, (n,)."""
    off = answers.rows[:, :3] - cases.motions[answers.of]
    turning = ~cases.slides
    off[:, turning] -= 2.0 * np.pi * np.round(off[:, turning] / (2.0 * np.pi))
    return least(answers.of, np.abs(off).max(axis=1, initial=0.0), len(cases.starts))
