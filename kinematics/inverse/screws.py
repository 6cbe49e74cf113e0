"""An arm as lines in space: where each row's axis lies at zero motion, and where the tool is then.

Every row turns about its axis or slides along it by its own row motion v, whatever the convention
of the table, so that E_1(v_1) ... E_n(v_n) tool_at_zero is the tool in the base: the product of
exponentials. Lengths are divided by one length of the arm, so that a residual of 1e-9 means the
same for a watchmaker's arm and for a crane, and a metre weighs about as much as a radian.

Source: Brockett, Robotic manipulators and the product of exponentials formula, 1984; Murray, Li
and Sastry, A Mathematical Introduction to Robotic Manipulation, 1994, section 3.2.
Not covered: how joint values drive the rows (drive_map.py), and travel.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from kinematics.arm import Arm
from kinematics.chain import walk
from kinematics.table import FloatArray
from kinematics.tolerances import SHORTEST_LENGTH


@dataclass(frozen=True, eq=False)
class Screws:
    """The axes of an arm and a tool at zero motion, in the base, lengths over ``length``; n rows.

    Attributes
    ----------
    axis : (n, 3), unit directions.
    point : (n, 3), a point on each axis, over ``length``.
    prismatic : (n,), whether the row slides along its axis instead of turning about it.
    tool_at_zero : (4, 4), tool in base where no row has moved, position over ``length``.
    length : metres; multiply a length here by it, and motions of prismatic rows.
    """

    axis: FloatArray
    point: FloatArray
    prismatic: NDArray[np.bool_]
    tool_at_zero: FloatArray
    length: float

    @property
    def rows(self) -> int:
        """Number of rows, n."""
        return len(self.prismatic)

    def scaled(self, targets: FloatArray) -> FloatArray:
        """Return poses (..., 4, 4) in metres with their positions over ``length``.

        Examples
        --------
        >>> screws = Screws(np.eye(3)[:1], np.zeros((1, 3)), np.array([False]), np.eye(4), 2.0)
        >>> screws.scaled(np.full((4, 4), 3.0))[0]
        array([3. , 3. , 3. , 1.5])
        """
        poses = np.array(targets, dtype=np.float64)
        poses[..., :3, 3] /= self.length
        return poses


def screws_of(arm: Arm, tool_in_flange: FloatArray) -> Screws:
    """Return the axes of an arm's rows, and its tool, at zero motion.

    Zero motion is the posture of joint values 0: every row at its offset. The length is that of
    the line through the axes' points to the tool, or 1 m for an arm without any.

    Parameters
    ----------
    tool_in_flange : (4, 4), metres.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = (Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0),) * 2
    >>> screws = screws_of(Arm("planar", Table(Convention.STANDARD, rows)), np.eye(4))
    >>> screws.length, screws.point[1]
    (0.8, array([0.5, 0. , 0. ]))
    """
    at_zero = walk(arm, np.zeros(arm.joint_count))
    tool = at_zero.flange_in_base @ tool_in_flange
    points = np.vstack([at_zero.axis_point, tool[:3, 3]])
    along = float(np.linalg.norm(np.diff(points, axis=0), axis=-1).sum())
    length = along if along > SHORTEST_LENGTH else 1.0
    tool[:3, 3] /= length
    return Screws(
        np.ascontiguousarray(at_zero.axis_direction),
        at_zero.axis_point / length,
        np.array([not row.is_revolute for row in arm.table.rows], dtype=bool),
        tool,
        length,
    )
