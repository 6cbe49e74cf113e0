"""What holds of every arm and target: no false no, and every posture told lands where it should.

Random arms of each class with fresh seeds, printed; drawn arms with couplings, passive rows and any
degenerate geometry that a plant's table may hold.
"""

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import HealthCheck, assume, given, settings
from hypothesis import strategies as st

from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.errors import KinematicsError
from kinematics.inverse.measured import POSE, POSITION, errors_of
from kinematics.reach.checks import Reacher
from kinematics.reach.targets import (
    CONE,
    NONE,
    ORIENTATION,
    OUTSIDE_TRAVEL,
    REACHABLE,
    SPIN,
    UNREACHABLE,
    Checks,
    Targets,
)
from kinematics.reach.tolerances import EXACT_REACH
from kinematics.table import Travel
from kinematics.tolerances import TARGET_ANGLE, TARGET_POSITION
from kinematics.travel_limits import travel_margin
from tests.kinematics.example_arms import AT_FLANGE
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.reach.arm_classes import CLASSES, postures_within_travel, targets_at
from tests.kinematics.reach.folds import folds
from tests.kinematics.reach.stretched import STRETCHED, hair_beyond
from tests.properties.arm_strategies import arms_and_postures

TELLING = 1e-6
"""Joint values within which a posture is the one that a target was made from."""


def assert_lands(reacher: Reacher, targets: Targets, checks: Checks) -> None:
    """Every posture told is on its target, through the chain, and within travel as said."""
    arm, values = reacher.arm, checks.joint_values
    of = np.repeat(np.arange(len(targets)), np.diff(checks.offsets))
    screws = reacher.answerer_of(NONE).ranking.screws
    task = POSITION if (targets.freedom == ORIENTATION).all() else POSE
    motions = arm.drive_map.motions(values)
    position, angle = errors_of(screws, motions, targets.tool_in_base, of, task)
    if arm.joint_count >= 6:
        assert position.max(initial=0.0) <= EXACT_REACH * screws.length + 1e-12
        assert angle.max(initial=0.0) <= EXACT_REACH + 1e-12
    else:
        assert position.max(initial=0.0) <= TARGET_POSITION + 1e-9
        assert angle.max(initial=0.0) <= TARGET_ANGLE + 1e-9
    np.testing.assert_allclose(checks.position_error, position, atol=2e-8)
    margin = travel_margin(arm, values)
    np.testing.assert_allclose(checks.margin, margin, atol=1e-9)
    inside = checks.verdict[of] == REACHABLE
    assert (margin[inside] >= -1e-9).all()
    assert (margin[~inside] < 1e-9).all()


@pytest.mark.parametrize("name", CLASSES)
def test_every_class_reaches_what_it_was_at(name: str) -> None:
    random = fresh()
    for _ in range(4):
        arm, tool, freedom = CLASSES[name](random)
        reacher, postures = Reacher(arm, tool), postures_within_travel(random, arm, 50)
        targets = targets_at(arm, tool, freedom, postures)
        checks = reacher.check(targets)
        assert checks.verdict.tolist() == [REACHABLE] * 50
        assert_lands(reacher, targets, checks)
        for index, posture in enumerate(postures):
            off = np.abs(checks.joint_values[checks.solutions_of(index)] - posture)
            assert off.max(axis=1).min() < TELLING or checks.families_of(index)


@pytest.mark.parametrize("name", CLASSES)
def test_every_class_reaches_what_it_was_at_where_ways_meet(name: str) -> None:
    random = fresh()
    for _ in range(2):
        arm, tool, freedom = CLASSES[name](random)
        postures = folds(random, arm, tool, 12)
        reacher, targets = Reacher(arm, tool), targets_at(arm, tool, freedom, postures)
        checks = reacher.check(targets)
        assert checks.verdict.tolist() == [REACHABLE] * len(postures)
        assert_lands(reacher, targets, checks)


@pytest.mark.parametrize("name", STRETCHED)
def test_the_boundary_is_reached_and_a_hair_beyond_is_not(name: str) -> None:
    random = fresh()
    for _ in range(4):
        arm, tool, freedom, postures, outward = STRETCHED[name](random, 25)
        reacher, targets = Reacher(arm, tool), targets_at(arm, tool, freedom, postures)
        assert reacher.check(targets).verdict.tolist() == [REACHABLE] * 25
        beyond = hair_beyond(arm, tool, targets, outward)
        assert reacher.check(beyond).verdict.tolist() == [UNREACHABLE] * 25


@pytest.mark.parametrize("name", CLASSES)
def test_targets_anywhere_are_answered_as_one_by_one(name: str) -> None:
    """Beyond travel, out of reach and within it, together and alone."""
    random = fresh()
    arm, tool, freedom = CLASSES[name](random)
    anywhere = random.uniform(-3.0, 3.0, size=(25, arm.joint_count))
    targets = targets_at(arm, tool, freedom, anywhere)
    targets.tool_in_base[::5, :3, 3] *= 2.0
    reacher = Reacher(arm, tool)
    checks = reacher.check(targets)
    assert_lands(reacher, targets, checks)
    for index in range(25):
        one = reacher.check(targets.only(np.array([index])))
        assert one.verdict[0] == checks.verdict[index]
        assert one.found[0] == checks.found[index]
        assert (checks.reason_of(index) is None) == (checks.verdict[index] == REACHABLE)


def is_refused(reacher: Reacher, targets: Targets) -> bool:
    try:
        reacher.check(targets)
    except KinematicsError as error:
        return error.where[-1:] == ("travel",)
    return False


@settings(
    max_examples=25,
    deadline=None,
    suppress_health_check=[HealthCheck.too_slow, HealthCheck.data_too_large],
)
@given(arms_and_postures(most=3), st.sampled_from([NONE, ORIENTATION]))
def test_no_arm_whatever_is_told_that_it_cannot_be_where_it_is(
    drawn: tuple[Arm, np.ndarray], freedom: int
) -> None:
    """A search may miss it; but nothing may prove that it is not there."""
    arm, postures = drawn
    reacher, targets = Reacher(arm, AT_FLANGE), targets_at(arm, AT_FLANGE, freedom, postures)
    endless = any(row.travel is None and not row.is_revolute for row in arm.table.rows)
    # A joint to spare that slides without end has no stretch to be told.
    assume(not (endless and arm.joint_count > 6 and is_refused(reacher, targets)))
    checks = reacher.check(targets)
    assert not np.isin(checks.verdict, [UNREACHABLE, OUTSIDE_TRAVEL]).any()
    assert_lands(reacher, targets, checks)
    shown = tool_in_base(arm, checks.joint_values, AT_FLANGE)
    assert np.isfinite(shown).all()


@pytest.mark.parametrize("freedom", [NONE, SPIN, CONE])
def test_the_last_digit_of_a_question_decides_nothing(freedom: int) -> None:
    """Postures that share a margin are told apart by working travel, not by rounding."""
    random = fresh()
    arm, _, _ = CLASSES["upright arm with wrist"](random)
    # The outer axes bound the margin, and turns of tool z, and of wrists twice around, share it.
    wide = {"travel": Travel(-7.0, 7.0), "working_travel": Travel(-2.0, 2.0)}
    rows = [*arm.table.rows[:3], *(replace(row, **wide) for row in arm.table.rows[3:])]
    arm = Arm("worked", replace(arm.table, rows=tuple(rows)))
    targets = targets_at(arm, AT_FLANGE, freedom, postures_within_travel(random, arm, 20))
    targets.cone[:] = 0.3
    reacher = Reacher(arm, AT_FLANGE)
    told = reacher.check(targets, best_only=True)
    for _ in range(3):
        beside = targets.tool_in_base.copy()
        beside[:, :3, 3] += 1e-12 * random.uniform(-1.0, 1.0, size=(20, 3))
        again = reacher.check(replace(targets, tool_in_base=beside), best_only=True)
        np.testing.assert_array_equal(again.verdict, told.verdict)
        np.testing.assert_array_equal(again.outside_working, told.outside_working)
        np.testing.assert_allclose(again.joint_values, told.joint_values, atol=1e-6)
    alone = [reacher.check(targets.only(np.array([i])), best_only=True) for i in range(20)]
    np.testing.assert_array_equal(
        [one.outside_working[0] for one in alone], told.outside_working.tolist()
    )
    if freedom == NONE:
        every = reacher.check(targets)
        of = np.repeat(np.arange(20), np.diff(every.offsets))
        as_good = ~every.outside_working & (every.margin > told.margin[of] - 1e-10)
        assert not told.outside_working[of[as_good]].any()
        assert as_good.any()
