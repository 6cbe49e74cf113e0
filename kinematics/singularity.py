"""How near postures are to losing a direction of motion, many at once.

Judged by the rank of the scaled Jacobian's task rows against the rank the arm has in general.
Left out: names and words for one posture (lost_motion.py).
"""

import math
from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import NDArray

from kinematics.arm import Arm
from kinematics.jacobian import Motion
from kinematics.kernels.compiler import for_kernel
from kinematics.kernels.decomposition import decompose
from kinematics.kernels.jacobian import change_with_rows
from kinematics.peak_demand import least_peak
from kinematics.table import FloatArray
from kinematics.task_space import TaskSpace
from kinematics.tolerances import LEVEL_VALUE

REGULAR, NEAR, SINGULAR = 0, 1, 2
STATES = ("regular", "near", "singular")


@dataclass(frozen=True)
class Judgement:
    """The judgement of a batch of postures; r is the generic rank, k columns of the basis.

    Attributes
    ----------
    values : (..., r), singular values of the scaled task rows, largest first, pure numbers.
    left : (..., rows, r), directions in the scaled task rows; right : (..., joints, r).
    rest : (..., joints, joints - r), joint motions beyond the first r right vectors.
    state : (...,) of 0 regular, 1 near, 2 singular; rank : (...,).
    condition : (...,), infinite where singular; manipulability : (...,), their product.
    step : (..., joints), first-order joint motion to the singular place; rad or m; NaN where
        there is none to tell.
    speed_factor : (...,), tool speed along the weakest direction at full joint speeds, in scaled
        units per second; NaN where a top speed is not known.
    """

    values: FloatArray
    left: FloatArray
    right: FloatArray
    rest: FloatArray
    state: NDArray[np.int_]
    rank: NDArray[np.int_]
    condition: FloatArray
    manipulability: FloatArray
    step: FloatArray
    speed_factor: FloatArray

    @property
    def smallest(self) -> FloatArray:
        """The r-th singular value, (...,); 0 where the task asks nothing the arm can do."""
        if self.values.shape[-1] == 0:
            return np.zeros(self.values.shape[:-1])
        return self.values[..., -1]

    def of_posture(self, index: int) -> "Judgement":
        """Return one posture of a batch (count,), without the batch axis."""
        return Judgement(*(getattr(self, part.name)[index] for part in fields(self)))


def judge(arm: Arm, space: TaskSpace, motion: Motion) -> Judgement:
    """Judge a batch of postures (...,) by the task's rows.

    Source
    ------
    Rank definition: Siciliano, Sciavicco, Villani and Oriolo, section 3.3; manipulability:
    Yoshikawa 1985; derivative of a singular value: u^T dJ v.

    Examples
    --------
    >>> from kinematics.jacobian import motion_of
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> from kinematics.task_space import task_space
    >>> rows = (Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0),) * 2
    >>> arm = Arm("planar", Table(Convention.STANDARD, rows))
    >>> space = task_space(arm, np.eye(4))
    >>> judge(arm, space, motion_of(arm, np.array([[0.3, 0.0], [0.3, 1.5]]), np.eye(4))).state
    array([2, 0])
    """
    rank = space.generic_rank
    left, values, right = _decomposed(space, motion.of_joints)
    left = space.basis @ left[..., :rank]
    values = values[..., :rank]
    smallest = values[..., -1] if rank else np.full(values.shape[:-1], np.inf)
    state = np.where(
        smallest <= arm.thresholds.singular,
        SINGULAR,
        np.where(smallest <= space.near, NEAR, REGULAR),
    )
    condition = np.full(state.shape, np.inf)
    if rank:
        np.divide(values[..., 0], smallest, out=condition, where=state != SINGULAR)
    return Judgement(
        values=values,
        left=left,
        right=right[..., :rank],
        rest=right[..., rank:],
        state=state,
        rank=(values > arm.thresholds.singular).sum(axis=-1),
        condition=condition,
        manipulability=values.prod(axis=-1) if rank else np.zeros(state.shape),
        step=_step(arm, space, motion, left, right, smallest, state),
        speed_factor=_speed_factor(arm, space, right, smallest, rank),
    )


def change_of_form(of_rows: FloatArray, covector: FloatArray, rates: FloatArray) -> FloatArray:
    """Return d(covector^T J rates)/d(row variable), (..., rows), at constant rates (..., rows).

    Examples
    --------
    >>> of_rows = np.array([[0.0], [0.5], [0.0], [0.0], [0.0], [1.0]])  # turning about z
    >>> change_of_form(of_rows, np.array([1.0, 0, 0, 0, 0, 0]), np.array([1.0]))
    array([-0.5])
    """
    count, rows = math.prod(rates.shape[:-1]), rates.shape[-1]
    change = np.empty((count, rows))
    change_with_rows(
        for_kernel(of_rows).reshape(count, 6, rows),
        for_kernel(covector).reshape(count, 6),
        for_kernel(rates).reshape(count, rows),
        change,
    )
    return change.reshape(rates.shape)


def _decomposed(
    space: TaskSpace, of_joints: FloatArray
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return left vectors, singular values and all right vectors of the scaled task rows."""
    batch, joints = of_joints.shape[:-2], of_joints.shape[-1]
    count, rows = math.prod(batch), space.row_map.shape[0]
    fewer = min(rows, joints)
    left, values = np.empty((count, rows, fewer)), np.empty((count, fewer))
    right = np.empty((count, joints, joints))
    decompose(
        for_kernel(of_joints).reshape(count, 6, joints),
        space.row_map,
        space.joint_scale,
        left,
        values,
        right,
    )
    return (
        left.reshape(*batch, rows, fewer),
        values.reshape(*batch, fewer),
        right.reshape(*batch, joints, joints),
    )


def _step(
    arm: Arm,
    space: TaskSpace,
    motion: Motion,
    left: FloatArray,
    right: FloatArray,
    smallest: FloatArray,
    state: NDArray[np.int_],
) -> FloatArray:
    """Return s / |grad s| against the gradient, in scaled joint values, then unscaled."""
    rank = space.generic_rank
    if not rank:
        return np.full((*state.shape, arm.joint_count), np.nan)
    covector = space.covector(left[..., rank - 1])
    rates = (right[..., rank - 1] * space.joint_scale) @ arm.drive_map.matrix.T
    of_variables = change_of_form(motion.of_rows, covector, rates)
    gradient = (of_variables @ arm.drive_map.matrix) * space.joint_scale
    squared = (gradient**2).sum(axis=-1)
    # At the singular place itself the value has a kink and its gradient says nothing.
    tellable = (squared > LEVEL_VALUE**2) & (state != SINGULAR)
    share = np.full(state.shape, np.nan)
    np.divide(-smallest, squared, out=share, where=tellable)
    step: FloatArray = share[..., None] * gradient * space.joint_scale
    return step


def _speed_factor(
    arm: Arm, space: TaskSpace, right: FloatArray, smallest: FloatArray, rank: int
) -> FloatArray:
    """Return the largest f with joint speeds that produce f times the weakest direction."""
    rows = [arm.table.rows[index] for index in arm.drive_map.driven]
    top = np.array([np.nan if row.top_speed is None else row.top_speed for row in rows])
    if not rank or np.isnan(top).any():
        return np.full(smallest.shape, np.nan)
    weight = (space.joint_scale / top)[:, None]
    least = least_peak(right[..., rank - 1 : rank] * weight, right[..., rank:] * weight)
    # At the singular place the rounding left of the value is no speed.
    factor: FloatArray = np.where(smallest <= arm.thresholds.singular, 0.0, smallest / least)
    return factor
