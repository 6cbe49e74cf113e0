"""Conversions keep poses and Jacobians in the world, and every number of the rows."""

from dataclasses import replace

import numpy as np
import pytest

from kinematics.arm import Arm, CombinedTravel, NamedFrame, Tool
from kinematics.digests import digests_of
from kinematics.jacobian import in_axes, motion_of
from kinematics.table import Convention, Table, Travel
from kinematics.table_conversion import converted
from tests.kinematics.example_arms import (
    PLANAR,
    arm_of,
    random_arm,
    random_joint_values,
    random_pose,
    revolute,
)
from tests.kinematics.plain_chain import exact_tool_pose

# Positions of a few metres: measured 5e-15 at most.
ROUNDING = 1e-12


def other(convention: Convention) -> Convention:
    return Convention.MODIFIED if convention is Convention.STANDARD else Convention.STANDARD


def placed_arm(seed: int, **more: object) -> Arm:
    """Return a random arm with couplings and passive rows, and with a cell around it."""
    random = np.random.default_rng(seed)
    arm = random_arm(random, 6, coupled=True, passive=seed % 3, base_in_world=random_pose(random))
    tools = {"gripper": Tool(random_pose(random), number=1), "probe": Tool(random_pose(random))}
    frames = {
        "table": NamedFrame(random_pose(random)),
        "stand": NamedFrame(random_pose(random), parent="base", number=7),
        "part": NamedFrame(random_pose(random), parent="stand"),
    }
    return replace(arm, **({"tools": tools, "default_tool": "gripper", "frames": frames} | more))


def in_world(arm: Arm, joint_values: np.ndarray, tool: str) -> tuple[np.ndarray, np.ndarray]:
    motion = motion_of(arm, joint_values, arm.tool_in_flange(tool))
    of_joints = in_axes(motion.of_joints, arm.base_in_world[:3, :3])
    return arm.base_in_world @ motion.tool_in_base, of_joints


@pytest.mark.parametrize("seed", range(12))
def test_poses_and_jacobians_in_the_world(seed: int) -> None:
    arm = placed_arm(seed)
    turned = converted(arm, other(arm.table.convention))
    assert turned.table.convention is other(arm.table.convention)
    postures = random_joint_values(np.random.default_rng(seed), arm, 5)
    for tool in ("gripper", "probe"):
        for mine, theirs in zip(
            in_world(arm, postures, tool), in_world(turned, postures, tool), strict=True
        ):
            np.testing.assert_allclose(theirs, mine, rtol=0.0, atol=ROUNDING)
        # And both against 50 digits, so that they are not wrong together.
        exact = arm.base_in_world @ exact_tool_pose(arm, postures[0], arm.tool_in_flange(tool))
        posed = in_world(turned, postures, tool)[0][0]
        np.testing.assert_allclose(posed, exact, rtol=0.0, atol=ROUNDING)


@pytest.mark.parametrize("seed", range(12))
def test_rows_are_the_same_numbers_regrouped(seed: int) -> None:
    """Only a and alpha move, by one row, to the last bit; all else of a row stays with it."""
    arm = placed_arm(seed)
    turned = converted(arm, other(arm.table.convention))
    before = [(row.a, row.alpha) for row in arm.table.rows]
    after = [(row.a, row.alpha) for row in turned.table.rows]
    if arm.table.convention is Convention.STANDARD:
        assert after == [(0.0, 0.0), *before[:-1]]
    else:
        assert after == [*before[1:], (0.0, 0.0)]
    for row, converted_row in zip(arm.table.rows, turned.table.rows, strict=True):
        assert replace(converted_row, a=row.a, alpha=row.alpha) == row


@pytest.mark.parametrize("seed", range(12))
def test_frames_stay_where_they_are_in_the_world(seed: int) -> None:
    arm = placed_arm(seed)
    turned = converted(arm, other(arm.table.convention))
    for name in arm.frames:
        before, after = arm.frame_in_world(name), turned.frame_in_world(name)
        np.testing.assert_allclose(after, before, rtol=0.0, atol=ROUNDING)
        assert turned.frames[name].number == arm.frames[name].number
        assert turned.frames[name].parent == arm.frames[name].parent


@pytest.mark.parametrize("seed", range(12))
def test_there_and_back_gives_the_same_poses(seed: int) -> None:
    arm = placed_arm(seed)
    back = converted(converted(arm, other(arm.table.convention)), arm.table.convention)
    postures = random_joint_values(np.random.default_rng(seed), arm, 5)
    for tool in arm.tools:
        for mine, theirs in zip(
            in_world(arm, postures, tool), in_world(back, postures, tool), strict=True
        ):
            np.testing.assert_allclose(theirs, mine, rtol=0.0, atol=ROUNDING)


def test_to_its_own_convention_changes_nothing() -> None:
    arm = placed_arm(0)
    same = converted(arm, arm.table.convention)
    assert digests_of(same) == digests_of(arm)
    assert set(same.tools) == set(arm.tools)


@pytest.mark.parametrize("to", Convention)
def test_an_arm_without_rows_only_changes_its_word(to: Convention) -> None:
    arm = arm_of(tools={"probe": Tool(np.eye(4))})
    turned = converted(arm, to)
    assert turned.table == Table(to, ())
    assert turned.tools == arm.tools
    assert digests_of(turned).setup_digest == digests_of(arm).setup_digest


def test_the_former_flange_stays_reachable() -> None:
    """Without tools it is what a question without a tool means; with tools it is one of them."""
    arm = converted(arm_of(*PLANAR), Convention.MODIFIED)
    assert arm.default_tool == "former-flange"
    assert arm.tool_in_flange(None)[:3, 3].tolist() == [0.31, 0, 0]
    tools = {"probe": Tool(np.eye(4))}
    kept = converted(arm_of(*PLANAR, tools=tools, default_tool="probe"), Convention.MODIFIED)
    assert kept.default_tool == "probe"
    assert set(kept.tools) == {"probe", "former-flange"}
    unsaid = converted(arm_of(*PLANAR, tools=tools), Convention.MODIFIED)
    assert unsaid.default_tool is None
    meant = converted(arm_of(*PLANAR, tools=tools, default_tool="flange"), Convention.MODIFIED)
    assert meant.default_tool == "former-flange"


def test_the_former_flange_takes_a_name_that_is_free() -> None:
    arm = arm_of(
        *PLANAR,
        tools={"former-flange": Tool(np.eye(4))},
        frames={"former-flange-2": NamedFrame(np.eye(4))},
    )
    assert "former-flange-3" in converted(arm, Convention.MODIFIED).tools


def test_a_flange_that_does_not_move_needs_no_new_tool() -> None:
    arm = arm_of(revolute(a=0.4), revolute(d=0.1))
    assert converted(arm, Convention.MODIFIED).tools == {}


def test_what_stands_beside_the_rows_is_kept() -> None:
    combined = (CombinedTravel({1: 1.0}, Travel(-1.0, 1.0)),)
    arm = placed_arm(3, combined_travel=combined, characteristic_length=0.8)
    turned = converted(arm, other(arm.table.convention))
    assert turned.combined_travel == combined
    assert turned.characteristic_length == 0.8
    assert turned.thresholds == arm.thresholds
    assert turned.name == arm.name
    assert [tool.number for tool in turned.tools.values()][:2] == [1, None]
