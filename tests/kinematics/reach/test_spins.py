"""The turn about tool z left open: best turns and stretches against scans by hand."""

import numpy as np
import pytest

from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.reach.checks import Reacher
from kinematics.reach.spins import RING, spun
from kinematics.reach.targets import NOT_FOUND, REACHABLE, SPIN, Targets
from kinematics.reach.ways import Asked
from kinematics.rotations import rotation_about
from tests.kinematics.example_arms import AT_FLANGE, FIVE, SIX, arm_of
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.reach.arm_classes import CLASSES, postures_within_travel, targets_at

_ANY = Asked()
BESIDE = np.eye(4)
BESIDE[:3, :3] = rotation_about(np.array([1.0, 0.0, 0.0]), 0.6)
BESIDE[:3, 3] = 0.05, 0.1, 0.15


def narrow_arm(random: np.random.Generator) -> Arm:
    """Return an arm of which some turns about tool z are out of travel."""
    return CLASSES["upright arm with wrist"](random)[0]


def turned(arm: Arm, tool: np.ndarray, postures: np.ndarray, angles: np.ndarray) -> Targets:
    targets = targets_at(arm, tool, SPIN, postures)
    targets.tool_in_base[:] = spun(targets.tool_in_base, angles)
    return targets


def test_spun_poses_keep_place_and_direction() -> None:
    random = fresh()
    pose = tool_in_base(arm_of(*SIX), random.uniform(-2, 2, 6), AT_FLANGE)
    several = spun(pose, np.array([0.3, -2.0]))
    np.testing.assert_allclose(several[:, :, 2:], np.stack([pose[:, 2:]] * 2), atol=1e-15)
    np.testing.assert_allclose(several[0, :3, 0] @ pose[:3, 0], np.cos(0.3))


@pytest.mark.parametrize("tool", [AT_FLANGE, BESIDE], ids=["axial", "beside"])
def test_whatever_the_turn_asked_for_the_place_is_reached(tool: np.ndarray) -> None:
    random = fresh()
    arm = narrow_arm(random)
    postures = postures_within_travel(random, arm, 10)
    targets = turned(arm, tool, postures, random.uniform(-3.0, 3.0, 10))
    checks = Reacher(arm, tool).check(targets)
    assert checks.verdict.tolist() == [REACHABLE] * 10
    shown = tool_in_base(arm, checks.joint_values, tool)
    of = np.repeat(np.arange(10), np.diff(checks.offsets))
    wanted = targets.tool_in_base[of]
    np.testing.assert_allclose(shown[:, :3, 2:], wanted[:, :3, 2:], atol=1e-9)
    assert (checks.margin >= 0.0).all()


def test_the_stretch_ends_where_travel_ends() -> None:
    random = fresh()
    told = 0
    for _ in range(4):
        arm = narrow_arm(random)
        reacher = Reacher(arm, BESIDE)
        targets = targets_at(arm, BESIDE, SPIN, postures_within_travel(random, arm, 5))
        checks = reacher.check(targets)
        poses = reacher.answerer_of(0)
        for index in range(5):
            (finding,) = [f for f in checks.findings_of(index) if f.name == "spin-open"]
            least, most = finding.measure, finding.threshold
            if "all around" in finding.say:
                assert most - least > 6.0
                continue
            told += 1
            angles = np.array([least - 1e-6, least + 1e-6, most - 1e-6, most + 1e-6])
            one = targets.only(np.full(4, index))
            one.tool_in_base[:] = spun(one.tool_in_base, angles)
            scores = poses.scores(one, _ANY)
            assert (scores >= 0.0).tolist() == [False, True, True, False]
    assert told >= 3


def test_the_best_turn_is_no_worse_than_any_of_the_ring_nor_than_turns_beside_it() -> None:
    random = fresh()
    arm = narrow_arm(random)
    reacher = Reacher(arm, BESIDE)
    targets = targets_at(arm, BESIDE, SPIN, postures_within_travel(random, arm, 5))
    checks = reacher.check(targets)
    for index in range(5):
        best = checks.offsets[index]
        ring = targets.only(np.full(RING, index))
        ring.tool_in_base[:] = spun(ring.tool_in_base, np.radians(360.0 / RING) * np.arange(RING))
        assert checks.margin[best] >= reacher.answerer_of(0).scores(ring, _ANY).max() - 1e-9
        beside = targets.only(np.full(2, index))
        shown = tool_in_base(arm, checks.joint_values[best], BESIDE)
        beside.tool_in_base[:] = spun(shown, np.radians([-0.03, 0.03]))
        assert checks.margin[best] >= reacher.answerer_of(0).scores(beside, _ANY).max() - 2e-3


def test_five_joints_have_the_turn_free_in_closed_form() -> None:
    random = fresh()
    arm = arm_of(*FIVE)
    postures = random.uniform(-2.0, 2.0, size=(20, 5))
    targets = turned(arm, AT_FLANGE, postures, random.uniform(-3.0, 3.0, 20))
    checks = Reacher(arm, AT_FLANGE).check(targets)
    assert checks.verdict.tolist() == [REACHABLE] * 20
    assert (checks.angle_error <= 1e-4 * np.pi).all()


def test_a_joint_about_tool_z_is_told_as_free() -> None:
    random = fresh()
    arm = narrow_arm(random)
    targets = targets_at(arm, AT_FLANGE, SPIN, postures_within_travel(random, arm, 3))
    checks = Reacher(arm, AT_FLANGE).check(targets)
    for index in range(3):
        families = checks.families_of(index)
        assert len(families) == checks.found[index]
        assert {family.free_joints for family in families} == {(6,)}
        travel = arm.table.rows[5].travel
        assert travel is not None
        assert families[0].interval == ((travel.lower, travel.upper),)


def test_a_no_says_what_was_tried() -> None:
    random = fresh()
    arm = narrow_arm(random)
    targets = targets_at(arm, BESIDE, SPIN, postures_within_travel(random, arm, 200))
    # Upside down at the same place: some of these no turn makes up for.
    targets.tool_in_base[:, :3, 1:3] *= -1.0
    checks = Reacher(arm, BESIDE).check(targets)
    missing = np.flatnonzero(checks.verdict == NOT_FOUND)
    assert len(missing)
    reason = checks.reason_of(int(missing[0]))
    assert reason is not None
    assert reason.code == "not-found"
    assert "72 tried 5 deg apart" in reason.text()
    assert not len(checks.joint_values[checks.solutions_of(int(missing[0]))])
