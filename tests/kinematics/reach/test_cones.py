"""Tool z within a cone: directions spread evenly, postures that point into it."""

import numpy as np
import pytest

from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.reach.checks import Reacher
from kinematics.reach.cones import DIRECTIONS, directions_in
from kinematics.reach.targets import CLOSED_FORM, CONE, REACHABLE, UNREACHABLE, Targets
from kinematics.table import Travel
from tests.kinematics.example_arms import (
    AT_FLANGE,
    FIVE,
    PLANAR,
    SELECTIVE,
    SIX,
    arm_of,
    revolute,
)
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.reach.arm_classes import CLASSES, targets_at

CONES = (0.05, 0.5, 2.0, np.pi)


@pytest.mark.parametrize("cone", CONES)
def test_directions_lie_in_the_cone_and_fill_it(cone: float) -> None:
    turned = directions_in(cone)
    identity = np.swapaxes(turned, 1, 2) @ turned
    np.testing.assert_allclose(identity, np.stack([np.eye(3)] * DIRECTIONS), atol=1e-12)
    np.testing.assert_allclose(np.linalg.det(turned), 1.0)
    np.testing.assert_allclose(turned[0], np.eye(3), atol=1e-12)
    shown = turned[:, :, 2]
    angles = np.arctan2(np.hypot(shown[:, 0], shown[:, 1]), shown[:, 2])
    assert angles.max() <= cone + 1e-9
    # The caps cut off at any angle hold their share of the directions.
    for angle in np.linspace(0.2, 1.0, 5) * cone:
        share = (1.0 - np.cos(angle)) / (1.0 - np.cos(cone))
        assert abs((angles <= angle + 1e-9).mean() - share) < 0.04


def asked(arm: Arm, tool: np.ndarray, postures: np.ndarray, cone: float, off: float) -> Targets:
    """Return targets that postures point ``off`` beside the axis of."""
    targets = targets_at(arm, tool, CONE, postures)
    targets.cone[:] = cone
    tilt = np.eye(4)
    tilt[1:3, 1:3] = [[np.cos(off), -np.sin(off)], [np.sin(off), np.cos(off)]]
    targets.tool_in_base[:] = targets.tool_in_base @ tilt
    return targets


@pytest.mark.parametrize("rows", [SIX, FIVE, SELECTIVE], ids=["six", "five", "four"])
def test_postures_point_into_the_cone(rows: tuple[object, ...]) -> None:
    random = fresh()
    arm = arm_of(*rows)  # type: ignore[arg-type]
    postures = random.uniform(-1.5, 1.5, size=(10, arm.joint_count))
    targets = asked(arm, AT_FLANGE, postures, 0.3, 0.2)
    checks = Reacher(arm, AT_FLANGE).check(targets)
    assert checks.verdict.tolist() == [REACHABLE] * 10
    shown = tool_in_base(arm, checks.joint_values, AT_FLANGE)
    wanted = targets.tool_in_base[np.repeat(np.arange(10), np.diff(checks.offsets))]
    np.testing.assert_allclose(shown[:, :3, 3], wanted[:, :3, 3], atol=1e-5)
    off = np.arccos(np.clip((shown[:, :3, 2] * wanted[:, :3, 2]).sum(axis=1), -1.0, 1.0))
    assert (off <= 0.3 + 2e-4).all()
    assert checks.angle_error.max() <= 2e-4


def test_few_joints_are_held_against_the_cone_in_closed_form() -> None:
    """Tool z of four upright axes points straight down whatever they do."""
    arm = arm_of(*SELECTIVE)
    postures = fresh().uniform(-1.5, 1.5, size=(5, 4))
    reacher = Reacher(arm, AT_FLANGE)
    targets = asked(arm, AT_FLANGE, postures, 0.3, 0.31)
    assert reacher.methods(targets)[0].proof == CLOSED_FORM
    checks = reacher.check(targets)
    assert checks.verdict.tolist() == [UNREACHABLE] * 5
    reason = checks.reason_of(0)
    assert reason is not None
    np.testing.assert_allclose(reason.shortfall, 0.31, atol=1e-6)
    in_the_plane = asked(arm_of(*PLANAR), AT_FLANGE, postures[:, :2], 0.3, 0.2)
    assert Reacher(arm_of(*PLANAR), AT_FLANGE).check(in_the_plane).verdict.tolist() == [0] * 5


def test_a_cone_beyond_the_links_is_proved() -> None:
    targets = asked(arm_of(*SIX), AT_FLANGE, np.zeros((1, 6)), 1.0, 0.0)
    targets.tool_in_base[0, :3, 3] = 9.0
    checks = Reacher(arm_of(*SIX), AT_FLANGE).check(targets)
    assert checks.verdict.tolist() == [UNREACHABLE]


def test_a_no_says_what_was_tried_and_a_yes_how_far_off_it_is() -> None:
    random = fresh()
    arm, tool, _ = CLASSES["upright arm with wrist"](random)
    narrow = arm_of(
        *(
            revolute(r.a, r.alpha, r.d, r.theta, direction=r.direction, travel=Travel(0.5, 0.7))
            for r in arm.table.rows
        )
    )
    postures = np.full((1, 6), 0.6)
    reacher = Reacher(narrow, tool)
    yes = reacher.check(asked(narrow, tool, postures, 0.2, 0.0))
    (finding,) = [f for f in yes.findings_of(0) if f.name == "cone-open"]
    assert 0.0 <= finding.measure <= finding.threshold == 0.2
    no = reacher.check(asked(narrow, tool, postures, 0.2, 2.5))
    reason = no.reason_of(0)
    assert reason is not None
    assert reason.code == "not-found"
    assert "of 60 tried" in reason.text()
