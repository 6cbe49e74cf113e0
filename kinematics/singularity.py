"""How near postures are to losing a direction of motion, many at once.

Judged by the rank of the scaled Jacobian's task rows against the rank the arm has in general.
Left out: names and words for one posture (lost_motion.py).
"""

import math
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.arm import Arm
from kinematics.jacobian import Motion
from kinematics.kernels.compiler import for_kernel
from kinematics.kernels.decomposition import decompose
from kinematics.kernels.jacobian import change_with_rows
from kinematics.kernels.judgement import (
    CONDITION,
    MANIPULABILITY,
    READINGS,
    SMALLEST,
    SPEED_FACTOR,
    judge_postures,
)
from kinematics.peak_demand import least_peak
from kinematics.table import FloatArray
from kinematics.task_space import TaskSpace
from kinematics.tolerances import FURTHEST_STEP, LEVEL_VALUE, TRAVEL_TIE

REGULAR, NEAR, SINGULAR = 0, 1, 2
_NONE = np.empty(0)
_OF_NO_RANK = (0.0, np.inf, 0.0)
"""Smallest value, condition and manipulability where the task asks nothing the arm can do."""
STATES = ("regular", "near", "singular")


class Judgement(NamedTuple):
    """The judgement of a batch of postures; r is the generic rank, k columns of the basis.

    Attributes
    ----------
    values : (..., r), singular values of the scaled task rows, largest first, pure numbers.
    left : (..., rows, r), directions in the scaled task rows; right : (..., joints, r).
    rest : (..., joints, joints - r), joint motions beyond the first r right vectors.
    state : (...,) of 0 regular, 1 near, 2 singular; rank : (...,).
    step : (..., joints), first-order joint motion to the singular place; rad or m; NaN where
        there is none to tell.
    readings : (..., READINGS), numbers of each posture by the columns of kernels/judgement.py.
    """

    values: FloatArray
    left: FloatArray
    right: FloatArray
    rest: FloatArray
    state: NDArray[np.int64]
    rank: NDArray[np.int64]
    step: FloatArray
    readings: FloatArray

    @property
    def smallest(self) -> FloatArray:
        """The r-th singular value, (...,); 0 where the task asks nothing the arm can do."""
        return self.readings[..., SMALLEST]

    @property
    def condition(self) -> FloatArray:
        """Largest singular value over the r-th, (...,); infinite where singular."""
        return self.readings[..., CONDITION]

    @property
    def manipulability(self) -> FloatArray:
        """Product of the singular values, (...,)."""
        return self.readings[..., MANIPULABILITY]

    @property
    def speed_factor(self) -> FloatArray:
        """Tool speed along the weakest direction at full joint speeds, (...,).

        In scaled units per second; NaN where a top speed is not known.
        """
        return self.readings[..., SPEED_FACTOR]

    def of_posture(self, index: int) -> "Judgement":
        """Return one posture of a batch (count,), without the batch axis."""
        return Judgement(*(part[index] for part in self))


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
    batch = motion.of_joints.shape[:-2]
    run = JudgementRun(arm, space, motion)
    run()
    if len(batch) == 1:
        return run.judgement
    return Judgement._make(part.reshape(batch + part.shape[1:]) for part in run.judgement)


class JudgementRun:
    """The arrays of so many postures' judgement and the kernels that fill them.

    Attributes
    ----------
    judgement : of the motion, as it was at the last call; one batch axis, (count, ...).
    """

    def __init__(self, arm: Arm, space: TaskSpace, motion: Motion) -> None:
        joints, rank, space_rows = arm.joint_count, space.generic_rank, space.row_map.shape[0]
        count, fewer = math.prod(motion.of_joints.shape[:-2]), min(space_rows, joints)
        left, values = np.empty((count, space_rows, fewer)), np.empty((count, fewer))
        right = np.empty((count, joints, joints))
        of_joints = for_kernel(motion.of_joints).reshape(count, 6, joints)
        self._of_svd = (of_joints, space.row_map, space.joint_scale, left, values, right)
        state, ranks = np.empty(count, dtype=np.int64), np.empty(count, dtype=np.int64)
        directions = np.empty((count, len(space.rows), rank))
        readings, step = np.empty((count, READINGS)), np.empty((count, joints))
        self._shared_speeds = arm.top_speeds if rank < joints else None
        self._arm, self._space = arm, space
        self._of_kernel = (
            values,
            left,
            right,
            for_kernel(motion.of_rows).reshape(count, 6, len(arm.table.rows)),
            space.row_map,
            space.length,
            space.joint_scale,
            arm.drive_map.matrix,
            _NONE if rank < joints or arm.top_speeds is None else arm.top_speeds,
            rank,
            (arm.thresholds.singular, space.near, LEVEL_VALUE, FURTHEST_STEP, TRAVEL_TIE),
            space.basis,
            state,
            ranks,
            directions,
            readings,
            step,
        )
        self._right = right
        self.judgement = Judgement(
            values[:, :rank],
            directions,
            right[:, :, :rank],
            right[:, :, rank:],
            state,
            ranks,
            step,
            readings,
        )

    def __call__(self) -> None:
        """Judge."""
        decompose(*self._of_svd)
        judgement = self.judgement
        if not self._space.generic_rank:
            # The task asks nothing the arm can do: nothing can be lost, and each joint is free.
            self._right[:] = np.eye(self._right.shape[-1])
            judgement.state[:], judgement.rank[:] = REGULAR, 0
            judgement.readings[:], judgement.step[:] = np.nan, np.nan
            judgement.readings[:, : MANIPULABILITY + 1] = _OF_NO_RANK
            return
        judge_postures(*self._of_kernel)
        if self._shared_speeds is not None:
            judgement.readings[:, SPEED_FACTOR] = _shared_speed_factor(
                self._arm, self._space, self._shared_speeds, self._right, judgement.smallest
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


def _shared_speed_factor(
    arm: Arm, space: TaskSpace, top_speeds: FloatArray, right: FloatArray, smallest: FloatArray
) -> FloatArray:
    """Return the largest f with joint speeds that produce f times the weakest direction.

    Spare joints share the work.
    """
    rank, weight = space.generic_rank, (space.joint_scale / top_speeds)[:, None]
    least = least_peak(right[..., rank - 1 : rank] * weight, right[..., rank:] * weight)
    factor: FloatArray = np.where(smallest <= arm.thresholds.singular, 0.0, smallest / least)
    return factor
