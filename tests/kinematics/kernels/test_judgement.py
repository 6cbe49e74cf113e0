"""What compiled code reads off a decomposition against the same formulas written with NumPy."""

from collections.abc import Sequence
from dataclasses import replace

import numpy as np
import pytest

from kinematics.arm import Arm, SingularityThresholds
from kinematics.jacobian import Motion, motion_of
from kinematics.kernels.judgement import MOVED, READINGS, SPEED_FACTOR, TRAVEL_JOINT, TURNED
from kinematics.lost_motion import travel_and_speed
from kinematics.number_checks import FloatArray
from kinematics.peak_demand import least_peak
from kinematics.singularity import NEAR, REGULAR, SINGULAR, Judgement, judge
from kinematics.table import Convention, Row, Table
from kinematics.task_space import Task, TaskSpace, task_space
from kinematics.tolerances import FURTHEST_STEP, LEVEL_VALUE, TRAVEL_TIE
from tests.kinematics.example_arms import (
    AT_FLANGE,
    FIVE,
    NINE,
    PLANAR,
    SELECTIVE,
    SEVEN,
    SIX,
    SIX_ON_A_TRACK,
    random_arm,
    random_joint_values,
    random_pose,
)

TABLES = {
    "planar": PLANAR,
    "selective": SELECTIVE,
    "five": FIVE,
    "six": SIX,
    "seven": SEVEN,
    "six on a track": SIX_ON_A_TRACK,
    "nine": NINE,
}


def with_speeds(rows: Sequence[Row]) -> tuple[Row, ...]:
    return tuple(
        row if row.passive else replace(row, top_speed=0.4 + 0.3 * (index % 4))
        for index, row in enumerate(rows)
    )


def change_of_form(motion: Motion, covector: FloatArray, rates: FloatArray) -> FloatArray:
    """Return d(covector^T J rates)/d(row variable), column by column as screws change."""
    of_rows = motion.of_rows
    count, _, rows = of_rows.shape
    change = np.zeros((count, rows))
    for moving in range(rows):
        for column in range(rows):
            linear, angular = of_rows[:, :3, column], of_rows[:, 3:, column]
            turn = of_rows[:, 3:, moving]
            if moving <= column:
                changed = np.hstack([np.cross(turn, linear), np.cross(turn, angular)])
            else:
                changed = np.hstack([np.cross(angular, of_rows[:, :3, moving]), 0.0 * angular])
            change[:, moving] += (covector * changed).sum(axis=1) * rates[:, column]
    return change


def check(arm: Arm, space: TaskSpace, motion: Motion, judgement: Judgement) -> None:
    rank, singular = space.generic_rank, arm.thresholds.singular
    scaled = space.scaled(motion.of_joints)
    values = np.linalg.svd(scaled, compute_uv=False)[:, :rank]
    np.testing.assert_allclose(judgement.values, values, rtol=0.0, atol=1e-13)
    smallest = judgement.values[:, -1]
    assert np.array_equal(judgement.smallest, smallest)
    expected = np.where(smallest <= singular, SINGULAR, np.where(smallest <= space.near, NEAR, 0))
    assert np.array_equal(judgement.state, expected)
    assert np.array_equal(judgement.rank, (judgement.values > singular).sum(axis=1))
    regular = judgement.state != SINGULAR
    np.testing.assert_allclose(
        judgement.condition[regular], judgement.values[regular, 0] / smallest[regular], rtol=1e-15
    )
    assert np.isinf(judgement.condition[~regular]).all()
    np.testing.assert_allclose(judgement.manipulability, judgement.values.prod(axis=1), rtol=1e-14)
    # Directions: what one joint motion of length 1 does is the value times its direction.
    done = scaled @ judgement.right
    np.testing.assert_allclose(
        done, judgement.left * judgement.values[:, None, :], rtol=0.0, atol=1e-12
    )
    check_step(arm, space, motion, judgement, regular)
    check_speed(arm, space, judgement)


def check_step(
    arm: Arm, space: TaskSpace, motion: Motion, judgement: Judgement, regular: np.ndarray
) -> None:
    covector = space.covector(judgement.left[..., -1])
    rates = (judgement.right[..., -1] * space.joint_scale) @ arm.drive_map.matrix.T
    of_variables = change_of_form(motion, covector, rates)
    gradient = (of_variables @ arm.drive_map.matrix) * space.joint_scale
    squared = (gradient**2).sum(axis=1)
    tellable = (squared > LEVEL_VALUE**2) & regular
    share = np.full(len(squared), np.nan)
    np.divide(-judgement.smallest, squared, out=share, where=tellable)
    step = share[:, None] * gradient * space.joint_scale
    length = np.nanmax(np.abs(step), axis=1, initial=0.0)[:, None]
    assert np.array_equal(np.isnan(judgement.step), np.isnan(step))
    # The gradient is a sum of terms up to some tens of times its size, or more where it is flat.
    slope = np.sqrt(np.where(tellable, squared, np.inf))[:, None]
    off = np.abs(judgement.step - step) / np.maximum(length, 1e-300)
    assert np.nanmax(off * np.minimum(slope, 1.0), initial=0.0) <= 1e-11

    pure = np.abs(judgement.step / space.joint_scale)
    for index, found in enumerate(judgement.readings[:, TRAVEL_JOINT]):
        if pure[index].max() <= FURTHEST_STEP:
            furthest = int(np.argmax(pure[index] >= pure[index].max() * (1.0 - TRAVEL_TIE)))
            assert found == furthest
        else:
            assert np.isnan(found)


def check_speed(arm: Arm, space: TaskSpace, judgement: Judgement) -> None:
    weakest = judgement.left[..., -1] / space.row_scale
    linear, angular = (
        [place for place, row in enumerate(space.rows) if (row < 3) == is_linear]
        for is_linear in (True, False)
    )
    for column, part in ((MOVED, linear), (TURNED, angular)):
        expected = np.linalg.norm(weakest[:, part], axis=1)
        np.testing.assert_allclose(judgement.readings[:, column], expected, rtol=0.0, atol=1e-14)
    rows = [arm.table.rows[index] for index in arm.drive_map.driven]
    if any(row.top_speed is None for row in rows):
        assert np.isnan(judgement.speed_factor).all()
        return
    top_speeds = np.array([float(row.top_speed or 0.0) for row in rows])
    weight = (space.joint_scale / top_speeds)[:, None]
    least = least_peak(judgement.right[..., -1:] * weight, judgement.rest * weight)
    singular = judgement.smallest <= arm.thresholds.singular
    expected = np.where(singular, 0.0, judgement.smallest / least)
    np.testing.assert_allclose(judgement.speed_factor, expected, rtol=1e-12)


def checked(arm: Arm, tool: FloatArray, values: FloatArray, task: Task | None = None) -> Judgement:
    space, motion = task_space(arm, tool, task), motion_of(arm, values, tool)
    assert space is not None
    judgement = judge(arm, space, motion)
    assert judgement.readings.shape == (len(values), READINGS)
    check(arm, space, motion, judgement)
    return judgement


@pytest.mark.parametrize("name", TABLES)
@pytest.mark.parametrize("fast", [True, False], ids=["speeds", "no speeds"])
@pytest.mark.parametrize("convention", ["standard", "modified"])
def test_arms_made_by_hand(name: str, fast: bool, convention: str) -> None:
    rows = with_speeds(TABLES[name]) if fast else TABLES[name]
    arm = Arm(name, Table(Convention(convention), rows))
    random = np.random.default_rng(len(rows))
    values = random_joint_values(random, arm, 60)
    # Postures of quarter turns: many singular, with values that are tied.
    values[:20] = np.round(values[:20] / (np.pi / 2)) * (np.pi / 2)
    judgement = checked(arm, AT_FLANGE, values)
    if convention == "standard" and name in ("six", "seven", "nine", "planar"):
        assert {REGULAR, SINGULAR} <= set(judgement.state.tolist())


@pytest.mark.parametrize("task", ["position", "orientation", "pose", ["vx", "vz", "wy"]])
@pytest.mark.parametrize("name", ["five", "six", "seven"])
def test_tasks(name: str, task: Task) -> None:
    arm = Arm(name, Table(Convention.STANDARD, with_speeds(TABLES[name])))
    random = np.random.default_rng(5)
    checked(arm, random_pose(random), random_joint_values(random, arm, 40), task)


@pytest.mark.parametrize("seed", range(24))
def test_any_arm(seed: int) -> None:
    random = np.random.default_rng(seed)
    arm = random_arm(
        random, int(random.integers(1, 9)), coupled=seed % 2 == 1, passive=seed % 3 % 2
    )
    if seed % 4:
        arm = Arm("fast", Table(arm.table.convention, with_speeds(arm.table.rows)))
    values = random_joint_values(random, arm, 50)
    # Coupled rows may be long lists of turns; the first postures are all at zero or near it.
    values[:5] *= 10.0 ** -np.arange(3, 8)[:, None]
    checked(arm, random_pose(random), values)


def test_thresholds_are_the_arms_own() -> None:
    rows = with_speeds(SIX)
    given = SingularityThresholds(singular=0.03, near=0.1)
    arm = Arm("careful", Table(Convention.STANDARD, rows), thresholds=given)
    values = random_joint_values(np.random.default_rng(9), arm, 200)
    states = checked(arm, AT_FLANGE, values).state
    assert np.bincount(states, minlength=3).min() > 5


def test_in_words_as_before() -> None:
    """The joint that travels and the tool's speed, as told from the numbers of a posture."""
    arm = Arm("six", Table(Convention.STANDARD, with_speeds(SIX)))
    judgement = checked(arm, AT_FLANGE, random_joint_values(np.random.default_rng(3), arm, 30))
    for index in range(30):
        one = judgement.of_posture(index)
        readings = one.readings.tolist()
        travel, speed = travel_and_speed(arm, readings, one.step.tolist())
        assert speed == (
            readings[SPEED_FACTOR] * readings[MOVED],
            readings[SPEED_FACTOR] * readings[TURNED],
        )
        if travel is not None:
            joint, value, unit = travel
            assert (value, unit) == (one.step[joint - 1], "rad")
    nothing = [np.nan] * READINGS
    assert travel_and_speed(arm, nothing, [np.nan] * 6) == (None, None)
