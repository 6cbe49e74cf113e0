"""An arm set up to follow lines: what of a line counts for it, and its bounds, for compiled code.

Idea: six joints and more hold the whole pose of the tool; fewer hold what they can, within a
tolerance, in least squares. The equations are those of the motions that the arm can make at all, so
that an arm of four upright joints has four of them and a determinant. Where there are still more
equations than joints, places weigh against turns as their usual tolerances do; where equations may
depend on each other, as those of a turn that is left open do, a little damping parts them.

Source: none; a layout. Not covered: following a line (straight.py).
"""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from kinematics.arm import Arm
from kinematics.inverse.descent_arms import lines_of, room_of
from kinematics.inverse.descent_arrays import FAR, Lines
from kinematics.inverse.screws import Screws, screws_of
from kinematics.kernels.compiler import for_kernel
from kinematics.reach.targets import NONE, ORIENTATION
from kinematics.table import FloatArray
from kinematics.task_space import TaskSpace, task_space
from kinematics.tolerances import TARGET_ANGLE, TARGET_POSITION, TRAVEL_EDGE
from kinematics.travel.extremes import Bounds
from kinematics.travel.lines import StraightLine
from kinematics.travel.on_line import POSE, POSITION, SPIN_FREE, Line
from kinematics.travel.tolerances import DEPENDENT_DAMPING
from kinematics.travel_limits import limits_of


@dataclass(frozen=True, eq=False)
class ArmOnLines:
    """An arm with a tool, set up to follow lines.

    Attributes
    ----------
    left : what targets leave open (reach/targets.py) to arms with fewer than six joints; the others
        hold the whole pose.
    """

    arm: Arm
    tool_in_flange: FloatArray
    left: int = NONE

    @cached_property
    def screws(self) -> Screws:
        """The axes, lengths as shares of the arm's."""
        return screws_of(self.arm, self.tool_in_flange)

    @cached_property
    def space(self) -> TaskSpace:
        """The rows that postures on the way are judged by."""
        task = "position" if self._counts == POSITION else None
        space = task_space(self.arm, self.tool_in_flange, task)
        assert space is not None
        return space

    @cached_property
    def scale(self) -> FloatArray:
        """What joint values are divided by, (joints,): 1 for angles, the arm's length else."""
        return np.where(self.arm.revolute_joints, 1.0, self.screws.length)

    @property
    def few(self) -> bool:
        """Whether the arm is held to tolerances: it has fewer than six joints."""
        return self.arm.joint_count < 6

    @property
    def spare(self) -> int:
        """How many joints more there are than the line asks for."""
        return max(self.arm.joint_count - len(self._row_map[0]), 0)

    @cached_property
    def bounds(self) -> Bounds:
        """What bounds joint values as they stand in tracks."""
        limits = limits_of(self.arm)
        weights = for_kernel(limits.weights * self.scale)
        return Bounds(weights, limits.constants, limits.lower, limits.upper, limits.working)

    @cached_property
    def for_kernels(self) -> Lines:
        """The arm as compiled code takes it."""
        return lines_of(self.screws, self.arm)

    @cached_property
    def _counts(self) -> int:
        if not self.few or self.left == NONE:
            return POSE
        return POSITION if self.left == ORIENTATION else SPIN_FREE

    @cached_property
    def _row_map(self) -> tuple[FloatArray, float]:
        """What of a gap is worked on, (k, 6), and the damping where rows may be dependent."""
        joints, space = self.arm.joint_count, self.space
        # The basis is of lengths over the characteristic one, the lines over another.
        rows = for_kernel(space.row_map * np.repeat([self.screws.length, 1.0], 3))
        possible = len(rows)
        if possible > joints or self._counts == SPIN_FREE:
            turn = TARGET_POSITION / (self.screws.length * TARGET_ANGLE)
            rows = np.diag(np.repeat([1.0, turn], 3))
        dependent = self._counts == SPIN_FREE or space.generic_rank < min(possible, joints)
        return rows, DEPENDENT_DAMPING if dependent else 0.0

    @cached_property
    def _room(self) -> tuple[FloatArray, FloatArray]:
        """Return joint values that are beyond their own limits for sure, (joints,) twice."""
        with np.errstate(over="ignore"):  # of ratios that nobody's linkage has
            room = room_of(self.arm, self.scale)
        edge = 2.0 * TRAVEL_EDGE / self.scale
        return np.maximum(room.lower - edge, -FAR), np.minimum(room.upper + edge, FAR)

    def line_for(self, way: StraightLine) -> Line:
        """Return a line for compiled code, all joints free."""
        basis, damping = self._row_map
        return Line(
            for_kernel(self.screws.scaled(way.start)),
            np.concatenate([way.shift / self.screws.length, way.turn]),
            basis,
            self._counts,
            damping,
            *self._room,
            np.ones(self.arm.joint_count),
        )
