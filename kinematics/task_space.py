"""What an arm's tool is asked to do, and what the arm could do of it in its best postures.

A posture is singular when it can do less than that. Lengths are scaled, so that all singular
values are pure numbers. Left out: any judgement of a posture (singularity.py).
"""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from kinematics.arm import Arm
from kinematics.errors import KinematicsError
from kinematics.jacobian import ROW_NAMES, characteristic_length, motion_of
from kinematics.kernels.compiler import for_kernel
from kinematics.table import FloatArray
from kinematics.tolerances import GENERIC_RANK, NEAR_SINGULAR, SAMPLE_POSTURES

POSITION_ROWS = (0, 1, 2)
ORIENTATION_ROWS = (3, 4, 5)
POSE_ROWS = (0, 1, 2, 3, 4, 5)
NAMED_TASKS = {
    "pose": POSE_ROWS,
    "position": POSITION_ROWS,
    "orientation": ORIENTATION_ROWS,
}

Task = str | Sequence[str]


@dataclass(frozen=True)
class TaskSpace:
    """The rows a posture is judged by, for one arm with one tool.

    Attributes
    ----------
    task : ``pose``, ``position``, ``orientation``, or a list of row names.
    rows : indices into vx vy vz wx wy wz, base axes.
    length : characteristic length L, metres.
    joint_scale : (joints,), L for prismatic joints and 1 for revolute ones.
    generic_rank : rank of the rows in the best of the sample postures.
    pose_rank : the same for all six rows.
    near : smallest singular value that counts as near singular.
    basis : (rows, k), orthonormal; the motions that are possible in at least one posture.
    watched_position_rank : rank the linear rows must keep for the finding that they fell below
        it, or 0 where that is not asked.
    samples : (16, joints), the sample postures.
    """

    task: str | list[str]
    rows: tuple[int, ...]
    length: float
    joint_scale: FloatArray
    generic_rank: int
    pose_rank: int
    near: float
    basis: FloatArray
    watched_position_rank: int
    samples: FloatArray

    @property
    def row_scale(self) -> FloatArray:
        """1 / L for linear rows and 1 for angular ones, (rows,)."""
        return np.array([1.0 / self.length if row < 3 else 1.0 for row in self.rows])

    @cached_property
    def row_map(self) -> FloatArray:
        """Scaled task rows, reduced to the possible motions, from the six rows, (k, 6)."""
        full = np.zeros((self.basis.shape[1], 6))
        full[:, list(self.rows)] = self.basis.T * self.row_scale
        return full

    def scaled(self, of_joints: FloatArray) -> FloatArray:
        """Return the task's rows of Jacobians (..., 6, joints) as pure numbers."""
        rows = of_joints[..., list(self.rows), :]
        scaled: FloatArray = rows * self.row_scale[:, None] * self.joint_scale
        return scaled

    def covector(self, left: FloatArray) -> FloatArray:
        """Return scaled task directions (..., rows) as directions (..., 6) in metres and radians.

        ``left^T (scaled Jacobian) = 0`` becomes ``covector^T (Jacobian) = 0``.
        """
        full = np.zeros((*left.shape[:-1], 6))
        full[..., list(self.rows)] = left * self.row_scale
        return full


def task_space(arm: Arm, tool_in_flange: FloatArray, task: Task | None = None) -> TaskSpace | None:
    """Return the task space of an arm with a tool; None for an arm without joints.

    Without a ``task``: six joints or more are asked for the whole pose; as many joints as the
    position has ranks, for the position; an arm that cannot move its tool point, for the
    orientation; others for the pose, against the rank it has in general.

    Raises
    ------
    KinematicsError : an unknown task or row name.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = (Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0),) * 2
    >>> space = task_space(Arm("planar", Table(Convention.STANDARD, rows)), np.eye(4))
    >>> space.task, space.generic_rank, space.length
    ('position', 2, 0.8)
    """
    rows = None if task is None else rows_of(task)
    if arm.joint_count == 0:
        return None
    length = characteristic_length(arm, tool_in_flange)
    units = np.array(arm.joint_units)
    joint_scale = np.where(units == "m", length, 1.0)
    samples = sample_postures(arm, length)
    jacobians = motion_of(arm, samples, tool_in_flange).of_joints * joint_scale
    jacobians[:, :3] /= length
    name: str | list[str]
    watched = 0
    if task is None:
        position_rank = _generic_rank(jacobians[:, POSITION_ROWS, :])
        name = _default_task(arm.joint_count, position_rank)
        rows = NAMED_TASKS[name]
        watched = position_rank if name == "pose" and arm.joint_count < 6 else 0
    else:
        name = task if isinstance(task, str) else list(task)
    assert rows is not None
    task_jacobians = jacobians[:, rows, :]
    return TaskSpace(
        task=name,
        rows=rows,
        length=length,
        joint_scale=joint_scale,
        generic_rank=_generic_rank(task_jacobians),
        pose_rank=_generic_rank(jacobians),
        near=_near(arm, task_jacobians),
        basis=for_kernel(_possible_motions(task_jacobians)),
        watched_position_rank=watched,
        samples=samples,
    )


def rows_of(task: Task) -> tuple[int, ...]:
    """Return the row indices of a task, in the order of the Jacobian's rows.

    Examples
    --------
    >>> rows_of(["wz", "vx"])
    (0, 5)
    """
    if isinstance(task, str):
        if task in NAMED_TASKS:
            return NAMED_TASKS[task]
        raise KinematicsError(
            f"there is no task {task!r}",
            where=("task",),
            value=task,
            way_out=f"one of: {', '.join(NAMED_TASKS)}, or a list of {' '.join(ROW_NAMES)}",
        )
    for index, row in enumerate(task):
        if row not in ROW_NAMES:
            raise KinematicsError(
                f"there is no row {row!r}",
                where=("task", index),
                value=row,
                way_out=f"rows are: {' '.join(ROW_NAMES)}",
            )
    if not task or len(set(task)) != len(task):
        raise KinematicsError(
            "a task names at least one row, and each row once",
            where=("task",),
            value=list(task),
            way_out=f"rows are: {' '.join(ROW_NAMES)}",
        )
    return tuple(sorted(ROW_NAMES.index(row) for row in task))


def sample_postures(arm: Arm, length: float) -> FloatArray:
    """Return 16 fixed postures spread evenly over travel, (16, joints).

    Without travel a revolute joint takes one turn and a prismatic one ``length`` both ways.

    Source
    ------
    Additive recurrence on the generalised golden ratio, the root of x^(d+1) = x + 1.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table, Travel
    >>> row = Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0, travel=Travel(0.0, 1.0))
    >>> sample_postures(Arm("one", Table(Convention.STANDARD, (row,))), 1.0)[:2].ravel().round(3)
    array([0.118, 0.736])
    """
    root = 1.5
    for _ in range(60):
        root = (1.0 + root) ** (1.0 / (arm.joint_count + 1))
    shares = np.arange(1, SAMPLE_POSTURES + 1)[:, None] * root ** -np.arange(
        1.0, arm.joint_count + 1
    )
    shares = (0.5 + shares) % 1.0
    bounds = []
    for index in arm.drive_map.driven:
        row = arm.table.rows[index]
        half = np.pi if row.is_revolute else length
        bounds.append(row.travel or (-half, half))
    lower, upper = np.array(bounds).reshape(-1, 2).T
    postures: FloatArray = lower + shares * (upper - lower)
    return postures


def _default_task(joint_count: int, position_rank: int) -> str:
    if joint_count >= 6:
        return "pose"
    if position_rank == 0:
        return "orientation"
    return "position" if joint_count <= position_rank else "pose"


def _generic_rank(jacobians: FloatArray) -> int:
    values = np.linalg.svd(jacobians, compute_uv=False)
    largest = values.max(initial=0.0)
    return int((values > GENERIC_RANK * largest).sum(axis=-1).max(initial=0)) if largest else 0


def _near(arm: Arm, jacobians: FloatArray) -> float:
    """Return the arm's own threshold, or a share of the smallest value of its best sample."""
    if arm.thresholds.near is not None:
        return arm.thresholds.near
    rank = _generic_rank(jacobians)
    if not rank:
        return arm.thresholds.singular
    best = np.linalg.svd(jacobians, compute_uv=False)[:, rank - 1].max()
    return max(NEAR_SINGULAR * float(best), arm.thresholds.singular)


def _possible_motions(jacobians: FloatArray) -> FloatArray:
    """Return an orthonormal basis (rows, k) of what the sample postures together can produce.

    Held against the largest value of a single posture, as the generic rank is, so that k is never
    below it: side by side no singular value is smaller than alone.
    """
    largest = np.linalg.svd(jacobians, compute_uv=False).max(initial=0.0)
    side_by_side = np.concatenate(list(jacobians), axis=1)
    left, values, _ = np.linalg.svd(side_by_side, full_matrices=False)
    return left[:, values > GENERIC_RANK * largest] if largest else left[:, :0]
