"""One posture judged and told, as the tests of kinds and of lost motions ask for it."""

from typing import Any, NamedTuple

import numpy as np

from kinematics.arm import Arm
from kinematics.jacobian import Motion, motion_of
from kinematics.lost_motion import PostureSingularity, describe
from kinematics.singular_kinds import anatomy_of
from kinematics.singularity import Judgement, judge
from kinematics.task_space import TaskSpace, task_space


class Told(NamedTuple):
    posture: PostureSingularity
    space: TaskSpace
    judgement: Judgement
    motion: Motion


def told(
    arm: Arm,
    joint_values: Any,
    *,
    task: Any = None,
    tool: np.ndarray | None = None,
    base_in_frame: np.ndarray | None = None,
    frame: str = "base",
) -> Told:
    values = np.asarray(joint_values, dtype=np.float64)
    tool_in_flange = np.eye(4) if tool is None else tool
    space = task_space(arm, tool_in_flange, task)
    assert space is not None
    anatomy = anatomy_of(arm, space, tool_in_flange)
    motion = motion_of(arm, values, tool_in_flange)
    judgement = judge(arm, space, motion)
    axes = np.eye(3) if base_in_frame is None else base_in_frame
    posture = describe(arm, space, anatomy, values, tool_in_flange, motion, judgement, axes, frame)
    return Told(posture, space, judgement, motion)


def covectors(answer: Told) -> np.ndarray:
    """Return the lost motions as rows (count, 6), in the axes they were asked in."""
    told_ones = answer.posture.lost_motion
    return np.array([np.append(one.linear, one.angular) for one in told_ones]).reshape(-1, 6)
