"""Has every kernel compiled ahead of the first question, by asking one of each kind.

Left out: when and in which thread (the service's business).
"""

import numpy as np

from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.frames import FrameGraph
from kinematics.jacobian import motion_of, singular_values_of
from kinematics.orientation_batches import checked_rotations
from kinematics.orientation_forms import values_of
from kinematics.pose_batches import poses_as_given
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
    for form in ("xyz-fixed", "rotation-vector"):
        values_of("xyz-fixed", checked_rotations(form, np.zeros((1, 3))).rotation)
    given = poses_as_given("xyz-fixed", np.zeros((2, 3)), np.zeros((2, 3)))
    assert given is not None
    FrameGraph(["a", "a"], ["b", "b"], given).ways(["a"], ["b"])
    motion = motion_of(arm, posture, flange)
    singular_values_of(motion.of_joints)
    space = task_space(arm, flange)
    assert space is not None
    judge(arm, space, motion)
