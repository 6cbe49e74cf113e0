"""What holds for every table in the two conventions: the same poses, Jacobians and judgements."""

from dataclasses import replace

import numpy as np
from hypothesis import given, settings

from kinematics.arm import Arm, NamedFrame, Tool
from kinematics.jacobian import characteristic_length, in_axes, motion_of
from kinematics.singularity import judge
from kinematics.table import Convention
from kinematics.table_conversion import converted
from kinematics.task_space import task_space
from tests.properties.arm_strategies import arms_and_postures, poses

thorough = settings(deadline=None, max_examples=60)
ROUNDING = 1e-12


def other(convention: Convention) -> Convention:
    return Convention.MODIFIED if convention is Convention.STANDARD else Convention.STANDARD


def with_cell(arm: Arm, tool: np.ndarray, frame: np.ndarray) -> Arm:
    frames = {"stand": NamedFrame(frame, parent="base"), "table": NamedFrame(frame)}
    return replace(arm, tools={"probe": Tool(tool)}, default_tool="probe", frames=frames)


@thorough
@given(arms_and_postures(min_rows=0), poses, poses)
def test_poses_and_jacobians_in_the_world_agree(
    drawn: tuple[Arm, np.ndarray], tool: np.ndarray, frame: np.ndarray
) -> None:
    arm, postures = drawn
    arm = with_cell(arm, tool, frame)
    turned = converted(arm, other(arm.table.convention))
    found = []
    for each in (arm, turned):
        motion = motion_of(each, postures, each.tool_in_flange(None))
        of_joints = in_axes(motion.of_joints, each.base_in_world[:3, :3])
        found.append((each.base_in_world @ motion.tool_in_base, of_joints))
    for mine, theirs in zip(*found, strict=True):
        np.testing.assert_allclose(theirs, mine, rtol=0.0, atol=ROUNDING)
    for name in arm.frames:
        np.testing.assert_allclose(
            turned.frame_in_world(name), arm.frame_in_world(name), rtol=0.0, atol=ROUNDING
        )


@thorough
@given(arms_and_postures(), poses)
def test_lengths_and_singular_values_agree(drawn: tuple[Arm, np.ndarray], tool: np.ndarray) -> None:
    """For the whole pose: its values do not know how the base is turned."""
    arm, postures = drawn
    arm = with_cell(arm, tool, np.eye(4))
    found = []
    for each in (arm, converted(arm, other(arm.table.convention))):
        in_flange = each.tool_in_flange(None)
        space = task_space(each, in_flange, "pose")
        assert space is not None
        judgement = judge(each, space, motion_of(each, postures, in_flange))
        found.append((characteristic_length(each, in_flange), judgement.values))
    np.testing.assert_allclose(found[0][0], found[1][0], rtol=1e-13)
    # Both leave out, in the same way, what is below 1e-4 in all sample postures.
    np.testing.assert_allclose(found[0][1], found[1][1], rtol=0.0, atol=10 * ROUNDING)


@thorough
@given(arms_and_postures(min_rows=0), poses)
def test_there_and_back(drawn: tuple[Arm, np.ndarray], tool: np.ndarray) -> None:
    arm, postures = drawn
    arm = with_cell(arm, tool, np.eye(4))
    there = converted(arm, other(arm.table.convention))
    back = converted(there, arm.table.convention)
    before = arm.base_in_world @ motion_of(arm, postures, tool).tool_in_base
    in_flange = back.tool_in_flange(None)
    after = back.base_in_world @ motion_of(back, postures, in_flange).tool_in_base
    np.testing.assert_allclose(after, before, rtol=0.0, atol=ROUNDING)
    assert back.default_tool == "probe"
    for row, returned in zip(arm.table.rows, back.table.rows, strict=True):
        assert (returned.d, returned.theta, returned.couplings) == (
            row.d,
            row.theta,
            row.couplings,
        )
