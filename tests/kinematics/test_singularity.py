"""Singular values against scipy, gradients against differences, tool speeds against programming."""

from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from scipy.linalg import svdvals
from scipy.optimize import brentq, linprog

from kinematics.arm import Arm, SingularityThresholds
from kinematics.jacobian import motion_of
from kinematics.singularity import NEAR, REGULAR, SINGULAR, Judgement, change_of_form, judge
from kinematics.table import Row, Table
from kinematics.task_space import TaskSpace, task_space
from tests.kinematics.example_arms import (
    AT_FLANGE,
    FIVE,
    NINE,
    PLANAR,
    QUARTER,
    SELECTIVE,
    SEVEN,
    SHOULDER_AND_ELBOW,
    SIX,
    SIX_ON_A_TRACK,
    TWELVE,
    WRIST,
    arm_of,
    prismatic,
    random_arm,
    random_joint_values,
    random_pose,
    revolute,
)
from tests.kinematics.plain_chain import link_frames, stepped_jacobian


def judged(
    arm: Arm, postures: np.ndarray, task: Any = None, tool: np.ndarray = AT_FLANGE
) -> tuple[TaskSpace, Judgement]:
    space = task_space(arm, tool, task)
    assert space is not None
    return space, judge(arm, space, motion_of(arm, postures, tool))


def with_top_speeds(arm: Arm, random: np.random.Generator) -> Arm:
    rows = tuple(
        row if row.passive else replace(row, top_speed=float(random.uniform(0.5, 4.0)))
        for row in arm.table.rows
    )
    return replace(arm, table=Table(arm.table.convention, rows))


def smallest_of(arm: Arm, space: TaskSpace, joint_values: np.ndarray) -> float:
    """Return the r-th singular value of the plain chain's Jacobian, by scipy."""
    scaled = space.scaled(stepped_jacobian(arm, joint_values, AT_FLANGE))
    return float(svdvals(scaled)[space.generic_rank - 1])


EXAMPLES: dict[str, tuple[Row, ...]] = {
    "planar": PLANAR,
    "selective": SELECTIVE,
    "shoulder and elbow": SHOULDER_AND_ELBOW,
    "wrist": WRIST,
    "five": FIVE,
    "six": SIX,
    "seven": SEVEN,
    "six on a track": SIX_ON_A_TRACK,
    "nine": NINE,
    "twelve": TWELVE,
}

# --- singular values -----------------------------------------------------------------------


@pytest.mark.parametrize("name", EXAMPLES)
def test_singular_values_against_scipy(name: str) -> None:
    arm = arm_of(*EXAMPLES[name])
    postures = random_joint_values(np.random.default_rng(1), arm, 10)
    space, judgement = judged(arm, postures)
    for index, joint_values in enumerate(postures):
        expected = svdvals(space.scaled(stepped_jacobian(arm, joint_values, AT_FLANGE)))
        kept = expected[: space.generic_rank]
        # Singular values move by no more than the matrix does: 1e-14 (Weyl).
        np.testing.assert_allclose(judgement.values[index], kept, rtol=0.0, atol=3e-14)
        assert judgement.smallest[index] == judgement.values[index, -1]
        np.testing.assert_allclose(judgement.manipulability[index], np.prod(kept), rtol=1e-10)
        np.testing.assert_allclose(judgement.condition[index], kept[0] / kept[-1], rtol=1e-9)
        assert judgement.rank[index] == space.generic_rank
        # What the task's rows have beyond the generic rank is zero to rounding.
        assert (expected[space.generic_rank :] < 1e-14).all()


@pytest.mark.parametrize("name", EXAMPLES)
def test_the_vectors_belong_to_the_values(name: str) -> None:
    arm = arm_of(*EXAMPLES[name])
    postures = random_joint_values(np.random.default_rng(2), arm, 5)
    space, judgement = judged(arm, postures)
    scaled = space.scaled(motion_of(arm, postures, AT_FLANGE).of_joints)
    moved = scaled @ judgement.right
    expected = judgement.left * judgement.values[:, None, :]
    np.testing.assert_allclose(moved, expected, rtol=0.0, atol=1e-14)
    assert judgement.rest.shape == (5, arm.joint_count, arm.joint_count - space.generic_rank)
    np.testing.assert_allclose(scaled @ judgement.rest, 0.0, rtol=0.0, atol=1e-14)


def test_planar_values_by_hand() -> None:
    """The product of the two values is l1 l2 |sin q2| / L^2 (Yoshikawa 1985)."""
    turn = np.linspace(-3.0, 3.0, 25)
    _, judgement = judged(arm_of(*PLANAR), np.stack([np.full(25, 0.4), turn], axis=-1))
    expected = 0.42 * 0.31 * np.abs(np.sin(turn)) / 0.73**2
    np.testing.assert_allclose(judgement.manipulability, expected, rtol=0.0, atol=1e-15)


# --- states --------------------------------------------------------------------------------


def test_states_at_and_around_the_thresholds() -> None:
    """One sliding joint across one turning one: the value is the slide over L."""
    rows = (revolute(alpha=QUARTER), prismatic())
    thresholds = SingularityThresholds(near=0.25, singular=0.125)
    arm = arm_of(*rows, characteristic_length=1.0, thresholds=thresholds)
    below, above = 1.0 - 1e-14, 1.0 + 1e-14
    slides = np.array([0.1, 0.125 * below, 0.125 * above, 0.25 * below, 0.25 * above, 0.5])
    _, judgement = judged(arm, np.stack([np.zeros(6), slides], axis=-1))
    np.testing.assert_allclose(judgement.smallest, slides, rtol=1e-15)
    assert judgement.state.tolist() == [SINGULAR, SINGULAR, NEAR, NEAR, REGULAR, REGULAR]
    assert judgement.rank.tolist() == [1, 1, 2, 2, 2, 2]
    assert np.isinf(judgement.condition).tolist() == [True, True, False, False, False, False]
    np.testing.assert_allclose(judgement.condition[2:], 1.0 / slides[2:], rtol=1e-15)


@pytest.mark.parametrize(
    ("away", "state"), [(0.0, SINGULAR), (1e-10, SINGULAR), (1e-7, NEAR), (0.01, NEAR)]
)
def test_the_default_thresholds_about_a_stretched_arm(away: float, state: int) -> None:
    _, judgement = judged(arm_of(*PLANAR), np.array([0.3, away]))
    assert int(judgement.state) == state


def test_what_an_arm_never_does_is_no_posture_s_trouble() -> None:
    """A selective arm turns about z alone: rank 4 of 6 everywhere, and regular."""
    _, judgement = judged(arm_of(*SELECTIVE), np.array([0.3, 1.2, 0.1, 0.0]), "pose")
    assert int(judgement.state) == REGULAR
    assert judgement.values.shape == (4,)
    # Asked for an orientation, slides alone offer nothing: nothing can be lost.
    space, judgement = judged(arm_of(prismatic()), np.zeros((2, 1)), "orientation")
    assert space.generic_rank == 0
    assert judgement.state.tolist() == [REGULAR, REGULAR]
    assert judgement.smallest.tolist() == judgement.manipulability.tolist() == [0.0, 0.0]
    assert np.isnan(judgement.step).all()
    # All it can do is of no effect there.
    _, judgement = judged(arm_of(prismatic(), prismatic()), np.zeros((2, 2)), "orientation")
    assert judgement.right.shape == (2, 2, 0)
    np.testing.assert_array_equal(judgement.rest, [np.eye(2), np.eye(2)])


def test_spare_joints_keep_an_aligned_wrist_regular() -> None:
    """Seven joints: axes 5 and 7 fall together at q6 = 0, and no rank is lost."""
    arm = arm_of(*SEVEN)
    joint_values = np.array([0.2, 0.6, -0.4, 1.3, 0.7, 0.0, 0.1])
    walked = motion_of(arm, joint_values, AT_FLANGE)
    np.testing.assert_allclose(np.cross(*walked.axis_direction[[4, 6]]), 0.0, rtol=0, atol=1e-15)
    space, judgement = judged(arm, joint_values)
    assert int(judgement.state) == REGULAR
    assert smallest_of(arm, space, joint_values) > 0.02
    # With the upper arm along axis 1 as well the shoulder has nothing to spare.
    folded = joint_values * np.array([1, 0, 1, 1, 1, 1, 1]) + [0, 0, 0, 0, QUARTER - 0.7, 0, 0]
    space, judgement = judged(arm, folded)
    singular = smallest_of(arm, space, folded) < 1e-9
    assert (int(judgement.state) == SINGULAR) is singular


def shoulder_height(lift: float) -> float:
    """Distance of the wrist point from axis 1 in the arm's plane: the rows of SIX by hand."""
    fold = 0.4
    out = 0.06 + 0.43 * np.cos(lift) + 0.05 * np.cos(lift + fold)
    return float(out + 0.41 * np.sin(lift + fold))


def test_a_track_frees_an_arm_from_its_shoulder_singularity() -> None:
    """The wrist point above axis 1: singular on a fixed base; on a track along the lost
    direction regular, and across it as singular as before.
    """
    lift = brentq(shoulder_height, 1.6, 3.0, xtol=1e-15)
    others = np.array([lift, 0.4, 0.7, -0.9, 0.2])
    alone = arm_of(*SIX)
    _, judgement = judged(alone, np.append(0.3, others))
    assert int(judgement.state) == SINGULAR
    on_track = arm_of(*SIX_ON_A_TRACK)
    states = []
    for first in (0.0, QUARTER):
        joint_values = np.concatenate([[0.1, first], others])
        lost_by_six = motion_of(on_track, joint_values, AT_FLANGE).axis_direction[2]
        along_track = abs(lost_by_six[2])
        space, judgement = judged(on_track, joint_values)
        states.append((round(float(along_track), 12), int(judgement.state)))
        singular = smallest_of(on_track, space, joint_values) < 1e-9
        assert (int(judgement.state) == SINGULAR) is singular
    assert sorted(states) == [(0.0, SINGULAR), (1.0, REGULAR)]


# --- travel to the singular place ----------------------------------------------------------


@pytest.mark.parametrize("count", [2, 4, 5, 6, 7, 8])
@pytest.mark.parametrize(
    "kind", [{}, {"coupled": True, "passive": 2}, {"prismatic_share": 0.0}], ids=str
)
def test_the_step_follows_the_gradient(kind: dict[str, Any], count: int) -> None:
    """Against central differences of scipy's smallest singular value of the plain chain.

    Their error is about h^2 (1e-10) times third derivatives, plus 1e-16 / h, relative to
    gradients of about 0.1.
    """
    random, step = np.random.default_rng([count, len(kind)]), 1e-5
    for _ in range(3):
        arm = random_arm(random, count, **kind)
        (joint_values,) = random_joint_values(random, arm, 1)
        space, judgement = judged(arm, joint_values)
        if space.generic_rank > 1 and np.diff(judgement.values[-2:])[0] > -0.01:
            continue  # two values about to cross: third derivatives are large there
        gradient = np.empty(count)
        for joint in range(count):
            aside = np.zeros(count)
            aside[joint] = step * space.joint_scale[joint]
            after, before = (
                smallest_of(arm, space, joint_values + sign * aside) for sign in (1, -1)
            )
            gradient[joint] = (after - before) / (2 * step)
        smallest = float(judgement.smallest)
        expected = -smallest * gradient / (gradient @ gradient) * space.joint_scale
        size = np.abs(expected).max()
        np.testing.assert_allclose(judgement.step, expected, rtol=0.0, atol=1e-5 * size)


def test_gradients_are_compared_in_enough_arms() -> None:
    """The skipping above leaves most of the random arms in."""
    kept = 0
    for count in (2, 4, 5, 6, 7, 8):
        random = np.random.default_rng([count, 0])
        for _ in range(3):
            arm = random_arm(random, count)
            (joint_values,) = random_joint_values(random, arm, 1)
            space, judgement = judged(arm, joint_values)
            kept += space.generic_rank < 2 or np.diff(judgement.values[-2:])[0] <= -0.01
    assert kept >= 12


@pytest.mark.parametrize(
    ("name", "singular_at"),
    [
        ("planar", [0.3, 0.0]),
        ("selective", [0.4, np.pi, 0.1, 0.2]),
        ("six", [0.3, 0.5, -0.4, 0.9, 0.0, 1.2]),
        ("six on a track", [0.1, 0.3, 0.5, -0.4, 0.9, 0.0, 1.2]),
        ("seven", [0.2, 0.6, -0.4, 0.0, 0.7, 0.8, 0.1]),
    ],
)
@pytest.mark.parametrize("away", [0.01, 0.001])
def test_following_the_step_leads_to_a_singular_posture(
    name: str, singular_at: list[float], away: float
) -> None:
    """Like Newton's method: what is left falls with the square of what there was."""
    arm = arm_of(*EXAMPLES[name])
    random = np.random.default_rng(7)
    _, there = judged(arm, np.array(singular_at))
    assert there.state == SINGULAR or name == "six on a track"
    joint_values = np.array(singular_at) + away * random.uniform(-1.0, 1.0, arm.joint_count)
    space, judgement = judged(arm, joint_values)
    smallest = [float(judgement.smallest)]
    for _ in range(6):
        if int(judgement.state) == SINGULAR:
            break
        joint_values = joint_values + judgement.step
        _, judgement = judged(arm, joint_values)
        smallest.append(float(judgement.smallest))
    if name == "six on a track":
        assert smallest[-1] < smallest[0]
        return
    assert int(judgement.state) == SINGULAR
    assert len(smallest) <= 5
    # One step: from s to less than 10 s^2, for gradients of 0.1 to 1 and curvatures of about 1.
    assert smallest[1] <= 10.0 * smallest[0] ** 2
    assert smallest_of(arm, space, joint_values) < 1e-9


def test_at_the_singular_place_there_is_no_step() -> None:
    _, judgement = judged(arm_of(*PLANAR), np.array([[0.3, 0.0], [0.3, 0.1]]))
    assert np.isnan(judgement.step[0]).all()
    assert np.isfinite(judgement.step[1]).all()


def test_where_nothing_changes_the_value_there_is_no_step() -> None:
    """Slides alone: the Jacobian is the same everywhere."""
    _, judgement = judged(arm_of(prismatic(alpha=QUARTER), prismatic()), np.zeros(2))
    assert np.isnan(judgement.step).all()


@pytest.mark.parametrize("posture", [[0.3, 1.7], [0.4, 2.2], [1.1, 1.3]])
def test_a_level_value_leads_nowhere(posture: list[float]) -> None:
    """Out beyond L the slide itself is weakest, with the value 1 everywhere around.

    Rounding makes that a slope of 1e-16, whose step would be 1e16 rad.
    """
    rows = (revolute(alpha=QUARTER, theta=0.3), prismatic(theta=0.2, alpha=0.7))
    _, judgement = judged(arm_of(*rows, characteristic_length=1.0), np.array(posture))
    assert float(judgement.smallest) == pytest.approx(1.0)
    assert np.isnan(judgement.step).all()


def columns(arm: Arm, joint_values: list[complex]) -> np.ndarray:
    """Return the rows' Jacobian by cross products in complex numbers (analytic: no conjugate)."""
    frames = np.array(link_frames(arm, joint_values))
    point = frames[-1][:3, 3]
    found = []
    for index, row in enumerate(arm.table.rows):
        frame = frames[index + (arm.table.convention == "modified")]
        axis, origin = frame[:3, 2], frame[:3, 3]
        turns = row.joint == "revolute"
        linear = np.cross(axis, point - origin) if turns else axis
        found.append([*linear, *(axis if turns else 0.0 * axis)])
    return np.array(found).T


@pytest.mark.parametrize("count", [1, 2, 5, 7])
def test_the_derivative_of_the_jacobian_against_complex_steps(count: int) -> None:
    random, step = np.random.default_rng(count), 1e-30
    for _ in range(5):
        arm = random_arm(random, count)
        (joint_values,) = random_joint_values(random, arm, 1)
        covector, rates = random.normal(size=6), random.normal(size=count)
        of_rows = motion_of(arm, joint_values, AT_FLANGE).of_rows
        expected = []
        for row in range(count):
            values = [complex(value) for value in joint_values]
            values[row] += 1j * step
            direction = arm.table.rows[row].direction
            slope = (covector @ columns(arm, values) @ rates).imag / step
            expected.append(direction * slope)
        form = change_of_form(of_rows, covector, rates)
        np.testing.assert_allclose(form, expected, rtol=0.0, atol=1e-13)


def test_the_derivative_of_the_jacobian_in_batches() -> None:
    random = np.random.default_rng(9)
    of_rows, covectors = random.normal(size=(2, 3, 6, 4)), random.normal(size=(2, 3, 6))
    rates = random.normal(size=(2, 3, 4))
    forms = change_of_form(of_rows, covectors, rates)
    assert forms.shape == (2, 3, 4)
    for index in np.ndindex(2, 3):
        alone = change_of_form(of_rows[index], covectors[index], rates[index])
        np.testing.assert_allclose(forms[index], alone, rtol=0.0, atol=1e-14)


# --- tool speed along the worst direction --------------------------------------------------


def programmed_speed(arm: Arm, space: TaskSpace, scaled: np.ndarray, worst: np.ndarray) -> float:
    """Return max f with scaled Jacobian times speeds = f worst, |speed_i| <= top_i."""
    top = [arm.table.rows[index].top_speed for index in arm.drive_map.driven]
    bounds = [(-t / s, t / s) for t, s in zip(top, space.joint_scale, strict=True)]  # type: ignore[operator]
    result = linprog(
        c=[0.0] * arm.joint_count + [-1.0],
        A_eq=np.hstack([scaled, -worst[:, None]]),
        b_eq=np.zeros(len(scaled)),
        bounds=[*bounds, (0.0, None)],
        method="highs",
    )
    assert result.status == 0
    return float(-result.fun)


@pytest.mark.parametrize(
    "name", ["planar", "selective", "five", "six", "seven", "six on a track", "nine", "twelve"]
)
def test_tool_speed_against_linear_programming(name: str) -> None:
    """Square arms, and arms with one, three and six spare joints."""
    random = np.random.default_rng(3)
    arm = with_top_speeds(arm_of(*EXAMPLES[name]), random)
    postures = random_joint_values(random, arm, 6)
    space, judgement = judged(arm, postures)
    scaled = space.scaled(motion_of(arm, postures, AT_FLANGE).of_joints)
    for index in range(len(postures)):
        # In coordinates of the directions that are possible here, so that no row is a mere 0 = 0.
        left = judgement.left[index]
        worst = np.zeros(space.generic_rank)
        worst[-1] = 1.0
        expected = programmed_speed(arm, space, left.T @ scaled[index], worst)
        assert judgement.speed_factor[index] == pytest.approx(expected, rel=1e-6)


@pytest.mark.parametrize("spare", [0, 1, 2])
@pytest.mark.parametrize("seed", range(4))
def test_tool_speed_of_random_arms_against_linear_programming(seed: int, spare: int) -> None:
    random = np.random.default_rng([seed, spare])
    arm = with_top_speeds(random_arm(random, 6 + spare, coupled=True, passive=1), random)
    postures = random_joint_values(random, arm, 4)
    space, judgement = judged(arm, postures)
    assert space.generic_rank == 6
    scaled = space.scaled(motion_of(arm, postures, AT_FLANGE).of_joints)
    for index in range(len(postures)):
        worst = judgement.left[index][:, -1]
        expected = programmed_speed(arm, space, scaled[index], worst)
        assert judgement.speed_factor[index] == pytest.approx(expected, rel=1e-6)


def test_one_joint_without_a_top_speed_leaves_it_open() -> None:
    rows = (revolute(a=0.42, top_speed=2.0), revolute(a=0.31))
    _, judgement = judged(arm_of(*rows), np.zeros((3, 2)))
    assert np.isnan(judgement.speed_factor).all()


# --- batches -------------------------------------------------------------------------------


@pytest.mark.parametrize("name", EXAMPLES)
@pytest.mark.parametrize("batch", [(), (0,), (3,), (2, 2)])
def test_shapes(name: str, batch: tuple[int, ...]) -> None:
    random = np.random.default_rng(0)
    arm = with_top_speeds(arm_of(*EXAMPLES[name]), random)
    postures = random.uniform(-1.0, 1.0, size=(*batch, arm.joint_count))
    space, judgement = judged(arm, postures, tool=random_pose(random))
    rank, count = space.generic_rank, arm.joint_count
    assert judgement.values.shape == (*batch, rank)
    assert judgement.left.shape == (*batch, len(space.rows), rank)
    assert judgement.right.shape == (*batch, count, rank)
    assert judgement.rest.shape == (*batch, count, count - rank)
    assert judgement.step.shape == (*batch, count)
    for part in ("state", "rank", "condition", "manipulability", "smallest", "speed_factor"):
        assert getattr(judgement, part).shape == batch


@pytest.mark.parametrize("name", ["planar", "five", "six", "nine"])
@pytest.mark.parametrize("count", [63, 64, 65, 200])
def test_long_batches_equal_loops(name: str, count: int) -> None:
    """Matrices are decomposed in blocks of 64: none is lost or mixed up where blocks meet."""
    arm = arm_of(*EXAMPLES[name])
    postures = random_joint_values(np.random.default_rng(count), arm, count)
    postures[count // 2] = 0.0  # one singular posture in the midst of the others
    _, batch = judged(arm, postures)
    for index in range(count):
        _, alone = judged(arm, postures[index])
        np.testing.assert_allclose(batch.values[index], alone.values, rtol=0.0, atol=1e-14)
        assert int(batch.state[index]) == int(alone.state)
