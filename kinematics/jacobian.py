"""The geometric Jacobian of the tool point: rows vx vy vz wx wy wz, one column per joint value.

Velocities and static loads by the matrix itself; what happens near singular postures is in
joint_speeds.py and singularity.py.
"""

import math
from dataclasses import dataclass

import numpy as np

from kinematics.arm import Arm
from kinematics.chain import Walk, walk
from kinematics.kernels.compiler import for_kernel
from kinematics.kernels.decomposition import singular_values
from kinematics.kernels.jacobian import jacobians
from kinematics.table import FloatArray
from kinematics.tolerances import SHORTEST_LENGTH

ROW_NAMES = ("vx", "vy", "vz", "wx", "wy", "wz")
"""Order of the rows everywhere: velocity of the tool point first, then angular velocity."""


@dataclass(frozen=True)
class Motion:
    """Tool pose and the two Jacobians of a batch of postures, in base axes.

    Attributes
    ----------
    tool_in_base : (..., 4, 4).
    of_rows : (..., 6, n), per motion of each row of the table.
    of_joints : (..., 6, joints), per joint value: ``of_rows @ C``.
    walk : the axes and frames it was made from.
    """

    tool_in_base: FloatArray
    of_rows: FloatArray
    of_joints: FloatArray
    walk: Walk

    def of_posture(self, index: int) -> "Motion":
        """Return one posture of a batch (count,), without the batch axis."""
        return Motion(
            self.tool_in_base[index],
            self.of_rows[index],
            self.of_joints[index],
            self.walk.of_posture(index),
        )


def motion_of(arm: Arm, joint_values: FloatArray, tool_in_flange: FloatArray) -> Motion:
    """Return tool pose and Jacobian of the tool point in base axes for postures (..., joints).

    A revolute column is ``[z x (tool - point); z]``, a prismatic one ``[z; 0]``.

    Source
    ------
    Whitney 1972; Spong, Hutchinson and Vidyasagar, chapter 4.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> arm = Arm("one", Table(Convention.STANDARD, (Row(JointKind.REVOLUTE, 0.5, 0, 0, 0),)))
    >>> motion_of(arm, np.array([0.0]), np.eye(4)).of_joints.ravel()
    array([0. , 0.5, 0. , 0. , 0. , 1. ])
    """
    walked = walk(arm, joint_values)
    tool_in_base = walked.flange_in_base @ tool_in_flange
    batch, rows, joints = joint_values.shape[:-1], len(arm.table.rows), arm.joint_count
    count = math.prod(batch)
    of_rows, of_joints = np.empty((count, 6, rows)), np.empty((count, 6, joints))
    jacobians(
        walked.axis_direction.reshape(count, rows, 3),
        walked.axis_point.reshape(count, rows, 3),
        tool_in_base.reshape(count, 4, 4),
        arm.table.chain.revolute,
        arm.drive_map.matrix,
        of_rows,
        of_joints,
    )
    return Motion(
        tool_in_base,
        of_rows.reshape(*batch, 6, rows),
        of_joints.reshape(*batch, 6, joints),
        walked,
    )


def in_axes(of_joints: FloatArray, base_in_axes: FloatArray) -> FloatArray:
    """Return a Jacobian or twist matrix (..., 6, k) written in other axes; the point stays.

    Parameters
    ----------
    base_in_axes : (..., 3, 3), rotation of the base in the axes asked for.

    Examples
    --------
    >>> quarter = np.array([[0.0, -1, 0], [1, 0, 0], [0, 0, 1]])
    >>> in_axes(np.array([[1.0], [0], [0], [0], [0], [0]]), quarter).ravel()
    array([0., 1., 0., 0., 0., 0.])
    """
    turned: FloatArray = np.concatenate(
        [base_in_axes @ of_joints[..., :3, :], base_in_axes @ of_joints[..., 3:, :]], axis=-2
    )
    return turned


def singular_values_of(of_joints: FloatArray) -> FloatArray:
    """Return the singular values of Jacobians (..., 6, joints) as they stand, largest first.

    Unscaled: metres and radians mixed, (..., min(6, joints)).

    Examples
    --------
    >>> singular_values_of(np.array([[0.0], [0.75], [0], [0], [0], [1.0]]))
    array([1.25])
    """
    batch, joints = of_joints.shape[:-2], of_joints.shape[-1]
    values = np.empty((math.prod(batch), min(6, joints)))
    matrices = for_kernel(of_joints).reshape(len(values), 6, joints)
    singular_values(matrices, np.eye(6), np.ones(joints), values)
    return values.reshape(*batch, min(6, joints))


def tool_twist(of_joints: FloatArray, joint_speeds: FloatArray) -> FloatArray:
    """Return the tool's twist (..., 6) for joint speeds (..., joints), in the Jacobian's axes.

    Examples
    --------
    >>> tool_twist(np.array([[0.0], [0.5], [0], [0], [0], [1.0]]), np.array([2.0]))
    array([0., 1., 0., 0., 0., 2.])
    """
    twist: FloatArray = (of_joints @ joint_speeds[..., None])[..., 0]
    return twist


def joint_efforts(of_joints: FloatArray, load: FloatArray) -> FloatArray:
    """Return the efforts (..., joints) by which the joints exert a load at the tool point.

    ``load`` is [fx fy fz mx my mz], N and Nm, in the Jacobian's axes: what the tool exerts on
    its surroundings, so a hanging weight is held by a load that points up. Efforts in Nm for
    revolute and N for prismatic joints. Weight of the links and friction are left out.

    Source
    ------
    ``J^T f`` by virtual work: Craig, chapter 5.

    Examples
    --------
    >>> arm_out = np.array([[0.0], [0.5], [0], [0], [0], [1.0]])
    >>> joint_efforts(arm_out, np.array([0.0, 10, 0, 0, 0, 0]))
    array([5.])
    """
    efforts: FloatArray = (np.swapaxes(of_joints, -1, -2) @ load[..., None])[..., 0]
    return efforts


def characteristic_length(arm: Arm, tool_in_flange: FloatArray) -> float:
    """Return the length, metres, that linear rows are divided by and prismatic columns times.

    The arm's own where it states one; else the distances between the origins of successive
    axes' frames plus the tool's distance from the last one, at zero joint values; 1 m if that
    is 0. The frames are those each row turns from, so both conventions give the same length.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = (Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0),) * 2
    >>> characteristic_length(Arm("planar", Table(Convention.STANDARD, rows)), np.eye(4))
    0.8
    """
    if arm.characteristic_length is not None:
        return arm.characteristic_length
    if not arm.table.rows:
        return 1.0
    walked = walk(arm, np.zeros(arm.joint_count))
    tool_point = (walked.flange_in_base @ tool_in_flange)[:3, 3]
    points = np.vstack([walked.axis_point, tool_point])
    length = float(np.linalg.norm(np.diff(points, axis=0), axis=-1).sum())
    return length if length >= SHORTEST_LENGTH else 1.0
