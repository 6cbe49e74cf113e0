"""Has every kernel compiled ahead of the first question, by asking one of each kind.

In two parts that take about as long, so that two processes can compile at once for a third:
``python -m kinematics.warm_up PART``. Left out: when, and in which process (the service's
business).
"""

import sys
from collections.abc import Callable, Mapping

import numpy as np

from kinematics.angle_triples import AxisOrder, angles_of
from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.jacobian import Motion, motion_of, singular_values_of
from kinematics.kernels.compiler import is_kept
from kinematics.kernels.forward import tool_poses
from kinematics.kernels.judgement import judge_postures
from kinematics.rotations import quaternion_wxyz_of
from kinematics.singularity import judge
from kinematics.table import Convention, JointKind, Row, Table
from kinematics.task_space import TaskSpace
from kinematics.travel_limits import margin_and_outside

_ROW = Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0, top_speed=1.0)
_POSTURE = np.array([[0.3, 0.4]])


def _poses() -> None:
    arm, flange = _arm(), np.eye(4)
    tool = tool_in_base(arm, _POSTURE, flange)
    quaternion_wxyz_of(tool)
    angles_of(AxisOrder((2, 1, 0), False), tool[:, :3, :3])
    motion_of(arm, _POSTURE, flange)
    margin_and_outside(arm, _POSTURE)


def _judgements() -> None:
    # Made up, so that no kernel of the other part is needed.
    axes, jacobian, pose = np.zeros((1, 2, 3)), np.ones((1, 6, 2)), np.eye(4)[None].copy()
    motion = Motion(pose, pose, axes, axes, jacobian, jacobian)
    singular_values_of(jacobian)
    space = TaskSpace(
        task="position",
        rows=(0, 1, 2),
        length=1.0,
        joint_scale=np.ones(2),
        generic_rank=2,
        pose_rank=2,
        near=0.1,
        basis=np.eye(3),
        watched_position_rank=0,
        samples=_POSTURE,
    )
    judge(_arm(), space, motion)


PARTS: Mapping[str, Callable[[], None]] = {"poses": _poses, "judgements": _judgements}


def warm_up() -> None:
    """Compile, or load from the cache, every kernel of the core; some seconds when cold.

    Examples
    --------
    >>> warm_up()
    """
    for part in PARTS.values():
        part()


def would_be_kept() -> bool:
    """Return whether kernels must be compiled and what is compiled can be kept for others.

    Examples
    --------
    >>> warm_up()
    >>> would_be_kept()
    False
    """
    # The last kernel of each part, so that a part which was cut short counts as missing.
    return False in (is_kept(tool_poses), is_kept(judge_postures))


def _arm() -> Arm:
    return Arm("planar", Table(Convention.STANDARD, (_ROW, _ROW)))


if __name__ == "__main__":
    PARTS[sys.argv[1]]()
