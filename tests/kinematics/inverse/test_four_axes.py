"""Arms that turn about one direction: every posture, tilts, edges of reach, free joints."""

from dataclasses import replace

import numpy as np
import pytest

from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.inverse.found import NO_STAGE, POSITION, REACH_ACROSS, TILT, Found
from kinematics.inverse.four_axes import FourAxes, four_axes_of
from kinematics.rotations import rotation_about
from kinematics.table import Coupling, Row, Travel
from tests.kinematics.example_arms import (
    AT_FLANGE,
    PLANAR,
    QUARTER,
    SELECTIVE,
    SEVEN,
    SIX,
    arm_of,
    prismatic,
    random_pose,
    revolute,
)
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.plain_chain import DIGITS, link_frames

LEVEL = (
    revolute(a=0.245, alpha=QUARTER, d=0.812),
    revolute(a=1.08, theta=QUARTER, direction=-1),
    revolute(a=1.165, theta=-QUARTER, direction=-1, couplings=(Coupling(2, 1.0),)),
    revolute(a=0.228, alpha=QUARTER, couplings=(Coupling(3, 1.0),), passive=True),
    revolute(d=0.187),
)
ACROSS = {
    "R R P R": SELECTIVE,
    "R R R P": (revolute(a=0.4), revolute(a=0.3, alpha=np.pi), revolute(a=0.1), prismatic()),
    "P R R R": (prismatic(a=0.2), revolute(a=0.5, d=0.1), revolute(a=0.3), revolute(a=0.05)),
    "R P R R": (revolute(a=0.5), prismatic(alpha=np.pi, a=0.1), revolute(a=0.3), revolute()),
    "R S P R": (revolute(alpha=QUARTER, a=0.1), prismatic(alpha=-QUARTER), prismatic(), revolute()),
    "S R P R": (
        prismatic(alpha=QUARTER, a=0.1),
        revolute(a=0.4),
        prismatic(a=0.1),
        revolute(a=0.2),
    ),
    "R R S P": (
        revolute(a=0.4),
        revolute(a=0.2, alpha=QUARTER),
        prismatic(alpha=-QUARTER),
        prismatic(),
    ),
    "S S P R": (
        prismatic(alpha=QUARTER, theta=0.1),
        prismatic(alpha=QUARTER, theta=QUARTER),
        prismatic(),
        revolute(a=0.2),
    ),
}
"""S stands for a slide across the axes, P for one along them."""
LENGTH_SHARE = 2e-15
"""Errors of closed forms, over the length."""


def solver_of(arm: Arm, tool: np.ndarray = AT_FLANGE, task: str = "pose") -> FourAxes:
    solver = four_axes_of(arm, tool, task)
    assert solver is not None
    return solver


def off(solver: FourAxes, found: Found, motions: np.ndarray) -> np.ndarray:
    """Return how far the nearest solution of each target is from motions (m, rows)."""
    apart = found.motions - motions[found.target]
    turned = (apart + np.pi) % (2 * np.pi) - np.pi
    apart = np.abs(np.where(solver.screws.prismatic, apart, turned)).max(axis=1)
    nearest = np.full(len(motions), np.inf)
    np.minimum.at(nearest, found.target, apart)
    return nearest


def drawn(random: np.random.Generator, arm: Arm, count: int) -> np.ndarray:
    half = np.where(arm.revolute_joints, np.pi, 0.4)
    return random.uniform(-half, half, (count, arm.joint_count))


@pytest.mark.parametrize("rows", [*ACROSS.values(), LEVEL], ids=[*ACROSS, "level"])
@pytest.mark.parametrize("tool", ["flange", "anyhow"])
def test_every_posture_is_found_again(rows: tuple[Row, ...], tool: str) -> None:
    random, arm = fresh(), arm_of(*rows)
    tool_in_flange = AT_FLANGE if tool == "flange" else random_pose(random)
    solver = solver_of(arm, tool_in_flange)
    assert solver.geometry.regime == "exact"
    joint_values = drawn(random, arm, 2500)
    targets = tool_in_base(arm, joint_values, tool_in_flange)
    found = solver.solve(targets)
    assert off(solver, found, arm.drive_map.motions(joint_values)).max() < 1e-6
    assert found.position_error.max() < LENGTH_SHARE * 10.0
    assert found.angle_error.max() < 1e-14
    assert not found.open.any()
    assert not found.stage.any()
    assert found.count_per_target().max() <= (4 if rows is LEVEL else 2)


def test_the_errors_told_are_those_of_the_plain_chain() -> None:
    random, arm = fresh(), arm_of(*LEVEL)
    joint_values = drawn(random, arm, 5)
    targets = tool_in_base(arm, joint_values, AT_FLANGE)
    targets[:, :3, :3] = targets[:, :3, :3] @ rotation_about(np.array([1.0, 0, 0]), 0.01)
    found = solver_of(arm).solve(targets)
    for motions, index, position, angle in zip(
        found.motions, found.target, found.position_error, found.angle_error, strict=True
    ):
        # Passive rows may be whole turns off in the motions, which the pseudo-inverse would share.
        driven = motions[list(arm.drive_map.driven)]
        values = np.linalg.solve(arm.drive_map.matrix[list(arm.drive_map.driven)], driven)
        frame = np.array(link_frames(arm, values.tolist(), DIGITS)[-1], dtype=float)
        gap = frame[:3, 3] - targets[index, :3, 3]
        assert np.linalg.norm(gap) == pytest.approx(position, abs=1e-14)
        turn = frame[:3, :3].T @ targets[index, :3, :3]
        assert np.arccos((np.trace(turn) - 1) / 2) == pytest.approx(angle, abs=1e-7)


def test_the_closed_form_of_two_links_a_slide_and_a_turn() -> None:
    """cos t2 = (x^2 + y^2 - a1^2 - a2^2) / (2 a1 a2), Craig, section 4.4; the flange faces down."""
    x, y, z, yaw = 0.3, 0.45, -0.2, -0.6
    target = np.array(
        [
            [np.cos(yaw), np.sin(yaw), 0, x],
            [np.sin(yaw), -np.cos(yaw), 0, y],
            [0, 0, -1, z],
            [0, 0, 0, 1],
        ]
    )
    cosine = (x * x + y * y - 0.45**2 - 0.32**2) / (2 * 0.45 * 0.32)
    wanted = []
    for second in (np.arccos(cosine), -np.arccos(cosine)):
        first = np.arctan2(y, x) - np.arctan2(0.32 * np.sin(second), 0.45 + 0.32 * np.cos(second))
        wanted.append([first, second, -z - 0.08, first + second - yaw])
    found = solver_of(arm_of(*SELECTIVE)).solve(target[None]).motions
    np.testing.assert_allclose(sorted(found.tolist()), sorted(wanted), rtol=0.0, atol=1e-12)


def test_the_closed_form_of_the_level_wrist() -> None:
    """Waist by atan2 both ways, then the triangle of the links from shoulder to wrist."""
    arm, target = arm_of(*LEVEL), np.diag([1.0, -1.0, -1.0, 1.0])
    target[:3, 3] = [1.3, 0.7, 0.5]
    radius, height = np.hypot(1.3, 0.7), 0.5 + 0.187 - 0.812
    wanted = []
    for ahead, waist in ((radius, np.arctan2(0.7, 1.3)), (-radius, np.arctan2(0.7, 1.3) - np.pi)):
        reach = np.hypot(ahead - 0.245 - 0.228, height)
        if reach > 1.08 + 1.165:
            continue
        for bend in (1.0, -1.0):
            inner = np.arccos((1.08**2 + reach**2 - 1.165**2) / (2 * 1.08 * reach))
            upper = np.arctan2(height, ahead - 0.245 - 0.228) + bend * inner
            fore = np.arctan2(
                height - 1.08 * np.sin(upper), ahead - 0.245 - 0.228 - 1.08 * np.cos(upper)
            )
            wanted.append([waist, np.pi / 2 - upper, -fore])
    found = solver_of(arm).solve(target[None])
    driven = list(arm.drive_map.driven)
    values = np.linalg.solve(arm.drive_map.matrix[driven], found.motions[:, driven].T).T
    assert len(values) == len(wanted)
    for posture in wanted:
        apart = (values[:, :3] - posture + np.pi) % (2 * np.pi) - np.pi
        assert np.abs(apart).max(axis=1).min() < 1e-12


@pytest.mark.parametrize("rows", [SELECTIVE, LEVEL], ids=["R R P R", "level"])
def test_typed_poses_come_out_with_what_the_typing_left(rows: tuple[Row, ...]) -> None:
    """Four decimals of a metre and of each entry: point met exactly, the turn to the tilt."""
    random, arm = fresh(), arm_of(*rows)
    solver = solver_of(arm)
    joint_values = 0.5 * drawn(random, arm, 500)
    targets = tool_in_base(arm, joint_values, AT_FLANGE)
    # As a table of positions and yaw angles is read: the turn is a rotation all the same.
    typed = targets.round(4)
    left, _, right = np.linalg.svd(typed[:, :3, :3])
    typed[:, :3, :3] = left @ right
    tilted = rotation_about(np.array([1.0, 1.0, 0.0]), 5e-5)
    typed[:, :3, :3] = tilted @ typed[:, :3, :3]
    found = solver.solve(typed)
    inside = found.count_per_target() > 0
    assert inside.mean() > 0.98
    assert np.median(found.position_error) < 1e-14
    assert found.position_error.max() < 1e-3 * solver.screws.length
    assert found.angle_error.max() < 1.5e-4
    np.testing.assert_allclose(found.angle_error.max(), 5e-5, rtol=0.01)
    assert set(found.stage) <= {TILT, REACH_ACROSS, POSITION}


def test_a_tilt_is_told_and_the_point_met() -> None:
    arm = arm_of(*SELECTIVE)
    target = tool_in_base(arm, np.array([0.3, 0.8, 0.1, 0.2]), AT_FLANGE)
    for degrees in (10.0, 90.0, 179.0):
        tilted = target.copy()
        tilted[:3, :3] = (
            rotation_about(np.array([0.6, 0.8, 0.0]), np.radians(degrees)) @ (target[:3, :3])
        )
        found = solver_of(arm).solve(tilted[None])
        assert found.stage[0] == TILT
        assert np.degrees(found.shortfall[0]) == pytest.approx(degrees)
        np.testing.assert_allclose(np.degrees(found.angle_error), degrees)
        assert found.position_error.max() < 1e-15
    straight = solver_of(arm).solve(target[None])
    assert (straight.stage[0], straight.shortfall[0]) == (NO_STAGE, 0.0)


def test_out_of_reach_tells_how_far_and_what_is_nearest() -> None:
    arm = arm_of(*SELECTIVE)
    solver = solver_of(arm)
    over = np.diag([1.0, -1.0, -1.0, 1.0])
    for distance, lacking in ((0.9, 0.13), (0.1, 0.03)):
        target = over.copy()
        target[:3, 3] = [distance, 0.0, -0.2]
        found = solver.solve(target[None])
        assert len(found.motions) == 0
        assert found.stage[0] == REACH_ACROSS
        assert found.shortfall[0] == pytest.approx(lacking)
        assert not found.open[0]
        nearest = tool_in_base(arm, found.nearest[0], AT_FLANGE)
        assert np.linalg.norm(nearest[:3, 3] - target[:3, 3]) == pytest.approx(lacking)
        np.testing.assert_allclose(solver.nearest(target[None]), found.nearest)


def test_a_hair_beyond_reach_is_among_the_solutions_with_its_error() -> None:
    arm, target = arm_of(*SELECTIVE), np.diag([1.0, -1.0, -1.0, 1.0])
    target[:3, 3] = [0.77 + 1e-6, 0.0, -0.2]
    found = solver_of(arm).solve(target[None])
    assert found.stage[0] == REACH_ACROSS
    np.testing.assert_allclose([found.shortfall[0], found.position_error[0]], 1e-6, rtol=1e-6)
    assert len(found.motions) == 1


def test_a_level_wrist_out_of_reach() -> None:
    arm, target = arm_of(*LEVEL), np.diag([1.0, -1.0, -1.0, 1.0])
    target[:3, 3] = [3.0, 0.0, 0.812 - 0.187]
    found = solver_of(arm).solve(target[None])
    lacking = 3.0 - 0.245 - 0.228 - 1.08 - 1.165
    assert found.stage[0] == POSITION
    assert found.shortfall[0] == pytest.approx(lacking)
    values = np.linalg.lstsq(arm.drive_map.matrix, found.nearest[0], rcond=None)[0]
    nearest = tool_in_base(arm, values, AT_FLANGE)
    assert np.linalg.norm(nearest[:3, 3] - target[:3, 3]) == pytest.approx(lacking)


@pytest.mark.parametrize("bend", [0.0, 1e-12, 1e-8, 1e-5])
def test_stretched_arms_are_reached(bend: float) -> None:
    arm, random = arm_of(*SELECTIVE), fresh()
    joint_values = drawn(random, arm, 200)
    joint_values[:, 1] = bend
    found = solver_of(arm).solve(tool_in_base(arm, joint_values, AT_FLANGE))
    assert (found.count_per_target() > 0).all()
    assert found.position_error.max() < 1e-14


def test_a_tool_point_on_axis_1_leaves_it_free() -> None:
    rows = (revolute(a=0.4), revolute(a=0.4), prismatic(), revolute())
    limited = (replace(rows[0], travel=Travel(2.0, 2.2)), *rows[1:])
    for table in (rows, limited):
        arm = arm_of(*table)
        target = tool_in_base(arm, np.array([2.1, np.pi, 0.1, 0.2]), AT_FLANGE)
        found = solver_of(arm).solve(target[None])
        assert found.open[0]
        assert found.position_error.max() < 1e-15
        assert found.angle_error.max() < 1e-14
        firsts = np.sort(found.motions[:, 0])
        assert np.diff([*firsts, firsts[0] + 2 * np.pi]).max() < 0.53
    assert ((firsts > 2.0) & (firsts < 2.2)).sum() >= 12


def test_a_wrist_above_the_waist_leaves_it_free() -> None:
    arm = arm_of(replace(LEVEL[0], travel=Travel(-0.1, 0.1)), *LEVEL[1:])
    target = np.diag([1.0, -1.0, -1.0, 1.0])
    target[2, 3] = 1.4
    found = solver_of(arm).solve(target[None])
    assert found.open[0]
    assert found.position_error.max() < 1e-14
    assert (np.abs(found.motions[:, 0]) < 0.1).sum() >= 12
    # Front and back are the same way here, with the links turned over.
    assert len(found.motions) > 24


@pytest.mark.parametrize("rows", [SELECTIVE, LEVEL], ids=["R R P R", "level"])
def test_points_alone_where_the_last_turn_leaves_them(rows: tuple[Row, ...]) -> None:
    random, arm = fresh(), arm_of(*rows)
    solver = solver_of(arm, task="position")
    joint_values = drawn(random, arm, 300)
    targets = tool_in_base(arm, joint_values, AT_FLANGE)
    targets[:, :3, :3] = np.eye(3)
    found = solver.solve(targets)
    assert found.position_error.max() < 1e-14
    assert found.angle_error.max() < 1e-14
    before = arm.drive_map.motions(joint_values)
    apart = np.abs((found.motions - before[found.target] + np.pi) % (2 * np.pi) - np.pi)
    apart[:, solver.screws.prismatic] = 0.0
    nearest = np.full(300, np.inf)
    np.minimum.at(nearest, found.target, apart[:, :-1].max(axis=1))
    assert nearest.max() < 1e-6
    aside = np.eye(4)
    aside[0, 3] = 0.05
    assert four_axes_of(arm, aside, "position") is None


def test_a_table_with_typed_angles_is_settled_to_the_last_digit() -> None:
    random = fresh()
    for exact in (SELECTIVE, LEVEL):
        arm = arm_of(*(replace(row, alpha=round(row.alpha, 4)) for row in exact))
        solver = solver_of(arm)
        assert solver.geometry.regime == "rounded"
        assert 1e-6 < solver.geometry.residual < 1e-5
        assert "settled on the table" in solver.geometry.say
        joint_values = drawn(random, arm, 2000)
        found = solver.solve(tool_in_base(arm, joint_values, AT_FLANGE))
        # At a fold a posture is good to the root of what settling leaves, 1e-13.
        assert off(solver, found, arm.drive_map.motions(joint_values)).max() < 1e-5
        assert np.quantile(found.position_error, 0.99) < 1e-12
        assert found.position_error.max() < 1e-9 * solver.screws.length
        assert found.angle_error.max() < 3e-5


@pytest.mark.parametrize("distance", [1e-8, 1e-6, 1e-5, 1e-4, 1e-3])
def test_a_typed_table_is_reached_beside_axis_1(distance: float) -> None:
    """Links of one length folded back: there the table's last digits turn joint 1 anywhere."""
    random = fresh()
    rows = (revolute(a=0.4), revolute(a=0.4, alpha=3.1416), prismatic(), revolute(d=0.1))
    arm = arm_of(*rows)
    solver = solver_of(arm)
    joint_values = drawn(random, arm, 300)
    joint_values[:, 1] = np.pi - distance / 0.4
    found = solver.solve(tool_in_base(arm, joint_values, AT_FLANGE))
    on_it = np.zeros(300, bool)
    on_it[found.target[found.position_error < 1e-9]] = True
    assert on_it.all()
    if distance > 1e-5:
        assert off(solver, found, arm.drive_map.motions(joint_values)).max() < 1e-5


def test_a_table_measured_off_parallel_proves_no_no() -> None:
    arm = arm_of(revolute(a=0.4), revolute(a=0.3, alpha=5e-5), prismatic(), revolute())
    solver = solver_of(arm)
    assert solver.geometry.regime == "calibrated"
    target = np.eye(4)
    target[0, 3] = 2.0
    assert solver.solve(target[None]).open.all()


def test_arms_of_other_kinds_are_left_to_other_methods() -> None:
    coupled = (*LEVEL[:3], replace(LEVEL[3], couplings=(Coupling(3, 0.9),)), LEVEL[4])
    leaning = (replace(LEVEL[0], alpha=1.2), *LEVEL[1:4], replace(LEVEL[4], a=0.1))
    one_axis = (revolute(a=0.3), revolute(), prismatic(), revolute(a=0.1))
    oblique = (revolute(a=0.3), revolute(a=0.3, alpha=0.3), prismatic(alpha=-0.3), revolute())
    for rows in (PLANAR, SIX, SEVEN, coupled, leaning, one_axis, oblique, (prismatic(),) * 4):
        assert four_axes_of(arm_of(*rows), AT_FLANGE) is None


def test_many_targets_are_as_many_single_ones() -> None:
    random, arm = fresh(), arm_of(*LEVEL)
    solver = solver_of(arm)
    targets = tool_in_base(arm, drawn(random, arm, 2000), AT_FLANGE)
    targets[::7, 0, 3] += 4.0
    found = solver.solve(targets)
    assert (np.diff(found.target) >= 0).all()
    for index in (0, 1, 7, 999, 1999):
        alone = solver.solve(targets[index][None])
        mine = found.target == index
        np.testing.assert_array_equal(found.motions[mine], alone.motions)
        assert (found.stage[index], found.shortfall[index]) == (alone.stage[0], alone.shortfall[0])
    assert len(solver.solve(targets[:0]).motions) == 0
