"""A question about many postures of one arm, answered a piece at a time and in three shapes.

Items are for JSON, bare numbers for NPY, columns for CSV. Left out: printing them (wire), and in
which thread or process a piece is worked on (bulk).
"""

from abc import ABC, abstractmethod
from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Any, ClassVar, Protocol

import numpy as np
from numpy.typing import NDArray

from kinematics.arm import BASE
from kinematics.findings import (
    ANGLES_NOT_UNIQUE,
    INPUT_REPAIRED,
    NEAR,
    OUTSIDE_TRAVEL,
    OUTSIDE_WORKING_TRAVEL,
    SINGULAR,
)
from kinematics.jacobian import Motion, in_axes, motion_of
from kinematics.rotations import quaternion_wxyz_of
from kinematics.singularity import STATES
from kinematics.table import FloatArray
from kinematics.tolerances import LOCK_NOTICE
from kinematics.travel_limits import limits_exceeded, travel_margin
from service.convert import jacobians_out, pose_orientations_out
from service.operations.jacobians import Wanted, base_in_axes_of, jacobian_items
from service.operations.joint_rows import JointRows
from service.operations.poses import placed, plain_poses, pose_item, pose_items
from service.operations.questions import Question
from service.operations.singularities import judged
from service.problems import KINDS
from service.wire.csv_text import Columns

BoolArray = NDArray[np.bool_]
NO_STATE = "none"
"""Stands for the state of an arm without joints, which has none."""


class Rows(Protocol):
    """Joint vectors that give themselves in pieces."""

    @property
    def count(self) -> int:
        """Joint vectors in all."""

    def piece(self, begin: int, end: int) -> JointRows:
        """Return vectors ``begin`` ... ``end``."""


@dataclass(frozen=True)
class Many(ABC):
    """A question with its joint vectors.

    ``names``, if there are any, is one for each vector; it goes back beside the answer.
    """

    question: Question
    rows: Rows
    singularity: bool
    names: Sequence[str] | None = None

    key: ClassVar[str]

    @abstractmethod
    def items(self, begin: int, end: int) -> list[dict[str, object]]:
        """Return vectors ``begin`` ... ``end`` answered as in a nested answer."""

    def plain(self, begin: int, end: int) -> tuple[FloatArray, FloatArray] | None:
        """Return positions and orientations, where that is all there is to tell; else None."""
        return None

    @property
    @abstractmethod
    def shape(self) -> tuple[int, ...]:
        """Shape of the bare numbers of one vector's answer."""

    @abstractmethod
    def _bare(self, values: FloatArray) -> FloatArray:
        """Return the bare numbers (count, *shape) for joint values in SI."""

    @abstractmethod
    def _told(self, values: FloatArray) -> tuple[FloatArray, Motion | None, BoolArray]:
        """Return numbers in the form asked for, the motion if needed, and where lock is near."""

    def numbers(self, begin: int, end: int) -> tuple[FloatArray, int]:
        """Return the bare numbers of vectors ``begin`` ... ``end``, and how many are refused.

        A refused vector is all NaN.
        """
        rows = self.rows.piece(begin, end)
        bare = self._bare(rows.values)
        return _scattered(bare, rows, np.nan), len(rows.refused)

    def columns(self, begin: int, end: int) -> Columns:
        """Return what a line for each of the vectors ``begin`` ... ``end`` says."""
        rows = self.rows.piece(begin, end)
        arm = self.question.arm
        numbers, motion, is_near_lock = self._told(rows.values)
        working, travel = limits_exceeded(arm, rows.values)
        applying = {
            OUTSIDE_WORKING_TRAVEL: working,
            OUTSIDE_TRAVEL: travel,
            ANGLES_NOT_UNIQUE: is_near_lock,
            INPUT_REPAIRED: np.full(len(rows.values), bool(self.question.repaired)),
        }
        states: Sequence[str] | None = None
        conditions: FloatArray | None = None
        if motion is not None:
            found = judged(self.question, rows.values, motion)
            if found is None:
                states = [NO_STATE] * len(rows.values)
                conditions = np.zeros(len(rows.values))
            else:
                _, judgement = found.whole()
                state, conditions = judgement.state, judgement.condition
                states = [STATES[index] for index in state.tolist()]
                applying[NEAR], applying[SINGULAR] = state == 1, state == 2
        codes = np.zeros(len(rows.values), dtype=np.int64)
        for code in sorted(applying):
            codes[applying[code]] = code
        columns = Columns(
            numbers,
            codes,
            applying,
            states,
            conditions,
            travel_margin(arm, rows.values),
        )
        return _with_refused(columns, rows) if rows.refused else columns


@dataclass(frozen=True)
class ManyPoses(Many):
    """Tool poses: bare, x y z and a quaternion, scalar first."""

    links: bool = False
    key = "poses"
    shape = (7,)

    def items(self, begin: int, end: int) -> list[dict[str, object]]:
        """Return the items of a nested answer."""
        rows = self.rows.piece(begin, end)
        if rows.count == 1 and len(rows.values) == 1 and self.singularity and not self.links:
            return pose_item(self.question, rows.values[0].tolist()).items
        return pose_items(self.question, rows, singularity=self.singularity, links=self.links).items

    def plain(self, begin: int, end: int) -> tuple[FloatArray, FloatArray] | None:
        """Return positions and orientations as arrays, of vectors that are not judged."""
        if self.singularity or self.links:
            return None
        return plain_poses(self.question, self.rows.piece(begin, end))

    def _bare(self, values: FloatArray) -> FloatArray:
        tool_in_frame = placed(self.question, values, None)
        bare = np.empty((len(values), 7))
        bare[:, :3] = self.question.units.length_out(tool_in_frame[:, :3, 3])
        bare[:, 3:] = quaternion_wxyz_of(tool_in_frame)
        return bare

    def _told(self, values: FloatArray) -> tuple[FloatArray, Motion | None, BoolArray]:
        question, motion = self.question, None
        if self.singularity:
            motion = motion_of(question.arm, values, question.tool.tool_in_flange)
        tool_in_frame = placed(question, values, motion)
        position = question.units.length_out(tool_in_frame[:, :3, 3])
        values, from_lock = pose_orientations_out(question.units, question.form, tool_in_frame)
        return np.hstack([position, values]), motion, from_lock <= LOCK_NOTICE


@dataclass(frozen=True)
class ManyJacobians(Many):
    """Jacobians, rows vx vy vz wx wy wz."""

    wanted: Wanted = field(default_factory=Wanted)
    key = "jacobians"

    @property
    def shape(self) -> tuple[int, ...]:
        """Six rows, one column for each joint."""
        return (6, self.question.arm.joint_count)

    def items(self, begin: int, end: int) -> list[dict[str, object]]:
        """Return the items of a nested answer."""
        rows = self.rows.piece(begin, end)
        # Speeds, twists and loads come in the same body as lists of joint vectors.
        span = self.rows.usable_within(begin, end) if isinstance(self.rows, JointRows) else (0, 0)
        wanted = self.wanted.piece(*span)
        return jacobian_items(self.question, rows, wanted, singularity=self.singularity).items

    def _bare(self, values: FloatArray) -> FloatArray:
        question = self.question
        motion = motion_of(question.arm, values, question.tool.tool_in_flange)
        return self._matrices(motion)

    def _told(self, values: FloatArray) -> tuple[FloatArray, Motion | None, BoolArray]:
        motion = motion_of(self.question.arm, values, self.question.tool.tool_in_flange)
        numbers = self._matrices(motion).reshape(len(values), 6 * self.question.arm.joint_count)
        return numbers, motion if self.singularity else None, np.zeros(len(values), dtype=bool)

    def _matrices(self, motion: Motion) -> FloatArray:
        question, of_joints = self.question, motion.of_joints
        if question.frame != BASE:
            of_joints = in_axes(of_joints, base_in_axes_of(question, motion))
        return jacobians_out(question.arm, question.units, of_joints)


def _scattered(usable: NDArray[Any], rows: JointRows, between: object) -> NDArray[Any]:
    """Return what was found for the usable vectors at their places, ``between`` at the others."""
    if not rows.refused:
        return usable
    found = np.full((rows.count, *usable.shape[1:]), between, dtype=usable.dtype)
    found[rows.places] = usable
    return found


def _with_refused(columns: Columns, rows: JointRows) -> Columns:
    codes = _scattered(columns.codes, rows, 0)
    for place, detail in rows.refused.items():
        codes[place] = KINDS[detail.code].number
    states: list[str] | None = None
    if columns.states is not None:
        states = [""] * rows.count
        for place, state in zip(rows.places.tolist(), columns.states, strict=True):
            states[place] = state
    return Columns(
        _scattered(columns.numbers, rows, np.nan),
        codes,
        {code: _scattered(where, rows, False) for code, where in columns.applying.items()},
        states,
        None if columns.conditions is None else _scattered(columns.conditions, rows, np.nan),
        _scattered(columns.margins, rows, np.nan),
    )
