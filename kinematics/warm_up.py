"""Has every kernel compiled ahead of the first question, by asking one of each kind.

Left out: when and in which thread (the service's business).
"""

import numpy as np

from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.jacobian import motion_of, singular_values_of
from kinematics.rotations import quaternion_wxyz_of
from kinematics.singularity import judge
from kinematics.table import Convention, JointKind, Row, Table
from kinematics.task_space import task_space


def warm_up() -> None:
    """Compile, or load from the cache, every kernel of the core; some seconds when cold.

    Examples
    --------
    >>> warm_up()
    """
    row = Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0, top_speed=1.0)
    arm = Arm("planar", Table(Convention.STANDARD, (row, row)))
    flange, posture = np.eye(4), np.array([0.3, 0.4])
    quaternion_wxyz_of(tool_in_base(arm, posture, flange)[:3, :3])
    motion = motion_of(arm, posture, flange)
    singular_values_of(motion.of_joints)
    space = task_space(arm, flange)
    assert space is not None
    judge(arm, space, motion)
