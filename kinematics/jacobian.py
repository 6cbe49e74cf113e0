"""The geometric Jacobian of the tool point: rows vx vy vz wx wy wz, one column per joint value.

Velocities and static loads by the matrix itself; what happens near singular postures is in
joint_speeds.py and singularity.py.
"""

import math
from typing import NamedTuple

import numpy as np

from kinematics.arm import Arm
from kinematics.chain import AxesRun, as_rows, walk
from kinematics.kernels.compiler import for_kernel
from kinematics.kernels.decomposition import decompose
from kinematics.kernels.jacobian import jacobians
from kinematics.table import FloatArray
from kinematics.tolerances import SHORTEST_LENGTH

ROW_NAMES = ("vx", "vy", "vz", "wx", "wy", "wz")
"""Order of the rows everywhere: velocity of the tool point first, then angular velocity."""


class Motion(NamedTuple):
    """Tool pose, axes and the two Jacobians of a batch of postures, in base axes.

    Attributes
    ----------
    tool_in_base, flange_in_base : (..., 4, 4).
    axis_direction, axis_point : (..., n, 3), as in ``chain.Walk``.
    of_rows : (..., 6, n), per motion of each row of the table.
    of_joints : (..., 6, joints), per joint value: ``of_rows @ C``.
    """

    tool_in_base: FloatArray
    flange_in_base: FloatArray
    axis_direction: FloatArray
    axis_point: FloatArray
    of_rows: FloatArray
    of_joints: FloatArray

    def of_posture(self, index: int) -> "Motion":
        """Return one posture of a batch (count,), without the batch axis."""
        return Motion(*(part[index] for part in self))


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
    batch, values = as_rows(joint_values)
    run = MotionRun(arm, values, tool_in_flange)
    run()
    if len(batch) == 1:
        return run.motion
    return Motion(*(part.reshape(batch + part.shape[1:]) for part in run.motion))


class MotionRun:
    """The arrays of so many postures and the kernels that fill them, again and again if asked.

    Attributes
    ----------
    motion : of the joint values that stood in ``joint_values`` (count, joints) at the last call.
    """

    def __init__(self, arm: Arm, joint_values: FloatArray, tool_in_flange: FloatArray) -> None:
        count, rows, joints = len(joint_values), len(arm.table.rows), arm.joint_count
        self._axes = AxesRun(arm, joint_values, every=False)
        flange = self._axes.frames.reshape(count, 4, 4)
        tool = np.empty((count, 4, 4))
        of_rows, of_joints = np.empty((count, 6, rows)), np.empty((count, 6, joints))
        direction, point = self._axes.direction, self._axes.point
        self._of_jacobians = (
            direction,
            point,
            flange,
            for_kernel(tool_in_flange),
            arm.table.chain.revolute,
            arm.drive_map.matrix,
            tool,
            of_rows,
            of_joints,
        )
        self.motion = Motion(tool, flange, direction, point, of_rows, of_joints)

    def __call__(self) -> None:
        """Work the motion out."""
        self._axes()
        jacobians(*self._of_jacobians)


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
    no_left, no_right = np.empty((0, 6, min(6, joints))), np.empty((0, joints, joints))
    decompose(matrices, np.eye(6), np.ones(joints), no_left, values, no_right)
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
