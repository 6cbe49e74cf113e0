"""The chain: where links, flange and tool are for given joint values, many postures at once.

One walk ``X0 Z1 X1 ... Zn Xn`` serves both conventions; only the place where frame i is read off
differs. Left out: velocities (jacobian.py).
"""

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from kinematics.arm import Arm
from kinematics.errors import NotFinite, OutOfRange, WrongJointCount
from kinematics.kernels.compiler import for_kernel
from kinematics.kernels.forward import frames_and_axes, tool_poses
from kinematics.table import Convention, FloatArray, JointKind
from kinematics.tolerances import LARGEST_MAGNITUDE

MOST_JOINTS_LISTED = 12
"""In a refusal; a controller's display shows no more."""


@dataclass(frozen=True)
class Walk:
    """All that one walk along the chain meets, in the base frame; n rows.

    Attributes
    ----------
    axis_direction : (..., n, 3), unit vector of each row's joint axis.
    axis_point : (..., n, 3), origin of the frame the row turns from, a point on that axis.
    link_in_base : (..., n + 1, 4, 4), frames 0 ... n of the table's convention.
    flange_in_base : (..., 4, 4), the last frame of the table.
    """

    axis_direction: FloatArray
    axis_point: FloatArray
    link_in_base: FloatArray
    flange_in_base: FloatArray

    def of_posture(self, index: int) -> "Walk":
        """Return one posture of a batch (count,), without the batch axis."""
        return Walk(
            self.axis_direction[index],
            self.axis_point[index],
            self.link_in_base[index],
            self.flange_in_base[index],
        )


def joints_in_words(arm: Arm, *, length: str = "m", angle: str = "rad") -> str:
    """Return how many joint values the arm takes and what each of them is, the first twelve.

    Parameters
    ----------
    length, angle : names of the units of prismatic and of revolute rows.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = (Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0, passive=True),
    ...         Row(JointKind.PRISMATIC, 0.0, 0.0, 0.1, 0.0))
    >>> joints_in_words(Arm("lift", Table(Convention.STANDARD, rows)))
    '1 values, one for each driven row: row 2 prismatic (m)'
    """
    driven = arm.drive_map.driven
    said = [
        f"row {index + 1} {kind} ({angle if kind is JointKind.REVOLUTE else length})"
        for index in driven[:MOST_JOINTS_LISTED]
        for kind in (arm.table.rows[index].joint,)
    ]
    more = len(driven) - len(said)
    if more:
        said.append(f"and {more} more")
    return f"{len(driven)} values, one for each driven row: {', '.join(said) or 'there is none'}"


def checked_joint_values(arm: Arm, joint_values: ArrayLike) -> FloatArray:
    """Return joint values as a float array (..., joints), or refuse them.

    Raises
    ------
    WrongJointCount : the last axis is not one value per driven row.
    NotFinite, OutOfRange : ``where`` leads to the first such value.

    Examples
    --------
    >>> from kinematics.table import Convention, Table
    >>> checked_joint_values(Arm("empty", Table(Convention.STANDARD, ())), []).shape
    (0,)
    """
    values = np.asarray(joint_values, dtype=np.float64)
    given = values.shape[-1] if values.ndim else 0
    if values.ndim == 0 or given != arm.joint_count:
        raise WrongJointCount(
            f"{given} joint values for an arm of {arm.joint_count} joints",
            value=given,
            way_out=f"give {joints_in_words(arm)}",
        )
    usable = np.abs(values) <= LARGEST_MAGNITUDE
    if not usable.all():
        where = tuple(int(index) for index in np.argwhere(~usable)[0])
        value = float(values[where])
        if np.isfinite(value):
            raise OutOfRange(
                f"joint value {value:.6g} is beyond 1e9 metres or radians",
                where=where,
                value=value,
                way_out="check the units",
            )
        raise NotFinite(
            f"joint value {value} is not a finite number",
            where=where,
            value=value,
            way_out="give a number",
        )
    return values


def walk(arm: Arm, joint_values: FloatArray) -> Walk:
    """Walk the chain for postures (..., joints) and return every axis and frame in the base.

    A table without rows gives the base itself.

    Parameters
    ----------
    joint_values : (..., joints), radians or metres, as the controller shows them.

    Source
    ------
    Product of link transforms: Craig, chapter 3; regrouped to ``X0 Z1 X1 ... Zn Xn`` here.

    Examples
    --------
    >>> from kinematics.table import JointKind, Row, Table
    >>> rows = (Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0),) * 2
    >>> arm = Arm("planar", Table(Convention.STANDARD, rows))
    >>> walk(arm, np.array([0.0, np.pi / 2])).flange_in_base[:3, 3].round(12)
    array([0.4, 0.4, 0. ])
    """
    batch, values = as_rows(joint_values)
    rows = len(arm.table.rows)
    run = AxesRun(arm, values, every=True)
    run()
    frames = run.frames.reshape(*batch, rows + 2, 4, 4)
    return Walk(
        run.direction.reshape(*batch, rows, 3),
        run.point.reshape(*batch, rows, 3),
        frames[..., :-1, :, :],
        frames[..., -1, :, :],
    )


class AxesRun:
    """The arrays of a walk along so many postures and the kernel that fills them.

    Parameters
    ----------
    joint_values : (count, joints), as ``as_rows`` gives them; read at each call.
    every : whether all frames are wanted, or the flange alone.

    Attributes
    ----------
    direction, point : (count, n, 3), of the axes, in the base.
    frames : links 0 ... n and flange, (count, n + 2, 4, 4), or the flange, (count, 1, 4, 4).

    Examples
    --------
    >>> from kinematics.table import Table
    >>> run = AxesRun(Arm("empty", Table(Convention.STANDARD, ())), np.empty((1, 0)), every=False)
    >>> run()
    >>> run.frames[0, 0, 2]
    array([0., 0., 1., 0.])
    """

    def __init__(self, arm: Arm, joint_values: FloatArray, *, every: bool) -> None:
        chain = arm.table.chain
        count, rows = len(joint_values), len(arm.table.rows)
        self.direction, self.point = np.empty((count, rows, 3)), np.empty((count, rows, 3))
        self.frames = np.empty((count, rows + 2 if every else 1, 4, 4))
        self._of_kernel = (
            joint_values,
            arm.drive_map.matrix,
            chain.first,
            chain.offset_terms,
            chain.link_terms,
            chain.revolute,
            arm.table.convention is Convention.STANDARD,
            self.direction,
            self.point,
            self.frames,
        )

    def __call__(self) -> None:
        """Walk."""
        frames_and_axes(*self._of_kernel)


def tool_in_base(
    arm: Arm,
    joint_values: FloatArray,
    tool_in_flange: FloatArray,
    out: FloatArray | None = None,
) -> FloatArray:
    """Return the pose of the tool in the base, (..., 4, 4) for postures (..., joints).

    Parameters
    ----------
    tool_in_flange : (4, 4).
    out : where to write, (count, 4, 4) in C order, for a batch (count, joints); saves asking the
        system for fresh memory, which takes longer than the kinematics.

    Examples
    --------
    >>> from kinematics.table import Table
    >>> arm = Arm("empty", Table(Convention.STANDARD, ()))
    >>> bool((tool_in_base(arm, np.empty((3, 0)), np.eye(4)) == np.eye(4)).all())
    True
    """
    chain = arm.table.chain
    batch, values = as_rows(joint_values)
    poses = np.empty((len(values), 4, 4)) if out is None else out
    tool_poses(
        values,
        arm.drive_map.matrix,
        chain.first,
        chain.offset_terms,
        chain.link_terms,
        chain.revolute,
        for_kernel(tool_in_flange),
        poses,
    )
    return poses.reshape(*batch, 4, 4)


def as_rows(joint_values: FloatArray) -> tuple[tuple[int, ...], FloatArray]:
    """Return the batch shape, and the postures one under the other as the kernels take them.

    Examples
    --------
    >>> as_rows(np.zeros((2, 3, 6)))[1].shape
    (6, 6)
    """
    batch = joint_values.shape[:-1]
    rows = for_kernel(joint_values)
    if len(batch) == 1:
        return batch, rows
    return batch, rows.reshape(math.prod(batch), joint_values.shape[-1])
