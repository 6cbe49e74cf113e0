"""The last proof of a no: travel is cut into boxes of joint values, none of which meets the target.

Idea: a search that finds nothing proves nothing. Bounds on how far the tool moves within a box of
joint values do (box_tests.py), once the boxes are small enough (boxes.py). It asks nothing of an
arm's structure: couplings, combined travel, few joints or many, places, directions and poses. And
where a target can be met after all, the boxes that stay lead there.

Source: as of boxes.py and box_tests.py.
Not covered: arms whose travel is no box: a slide without travel, and joints without travel that are
coupled by other than whole numbers or bounded in sums. Rounding, see box_tests.py. And time: with
more than six joints, or a hair beyond reach, a million boxes are seldom enough.
"""

from functools import cached_property
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.arm import Arm
from kinematics.inverse.boxes import COUNT, EMPTY, LOOKED_AT, SPENT, bench_for, explore
from kinematics.inverse.cut_chain import Chain, best_cut, open_chain
from kinematics.inverse.descent import descend_all
from kinematics.inverse.descent_arms import lines_of, room_of
from kinematics.inverse.descent_arrays import FAR, desk_for
from kinematics.inverse.iterative import TASKS
from kinematics.inverse.measured import POSE, errors_of
from kinematics.inverse.screws import screws_of
from kinematics.inverse.tolerances import (
    BOX_BUDGET,
    LARGEST_LEAF,
    RING_COARSER,
    SEARCH_STEPS,
    SMALLEST_LEAF,
)
from kinematics.kernels.compiler import for_kernel
from kinematics.table import FloatArray
from kinematics.travel_limits import travel_margin

_HALVINGS = 32
"""Boxes that may wait for each joint: halved so often, travel is 1e-9 wide."""
_LEAF_SHRINKS = 0.1
"""What a leaf's size is taken times after one from which the target was not met."""
_ONE = np.zeros(1, np.int64)
_TINY = 1e-300
"""Radians that a tolerance of none is taken for, so that lengths can be divided by it: the share is
then some 1e290, and the turn alone counts."""


class Outcome(NamedTuple):
    """What cutting travel into boxes came to.

    Attributes
    ----------
    proved : no posture within travel is within tolerance of the target.
    witness : (joints,), rad and metres, a posture that is, if one was met; else None.
    boxes : how many were looked at.
    """

    proved: bool
    witness: FloatArray | None
    boxes: int


class BranchAndBound:
    """Proves that one arm with one tool does not get to targets, or finds how it does.

    Parameters
    ----------
    tool_in_flange : (4, 4), metres; task : what of a target is asked, as in measured.py.

    Examples
    --------
    Two links of 0.4 m, the elbow no further than 0.5 rad, do not get to 0.4 m before the shoulder.

    >>> from kinematics.table import Convention, JointKind, Row, Table, Travel
    >>> travels = Travel(-3.0, 3.0), Travel(-0.5, 0.5)
    >>> rows = tuple(Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0, travel=t) for t in travels)
    >>> arm = Arm("planar", Table(Convention.STANDARD, rows))
    >>> target = np.eye(4)
    >>> target[0, 3] = 0.4
    >>> BranchAndBound(arm, np.eye(4), "position").ask(target, np.array([1e-5, 0.0])).proved
    True
    """

    def __init__(self, arm: Arm, tool_in_flange: FloatArray, task: str) -> None:
        self.arm, self.task = arm, task
        self.screws = screws_of(arm, tool_in_flange)
        self._lines = lines_of(self.screws, arm)
        self._scale = np.where(arm.revolute_joints, 1.0, self.screws.length)
        self._room = room_of(arm, self._scale)

    @cached_property
    def _box(self) -> FloatArray | None:
        """Middle and half widths of all that joint values may be, (2, joints); None for no box."""
        room, whole = self._room, self._by_whole_turns()
        lower, upper = room.lower.copy(), room.upper.copy()
        endless = (lower <= -FAR) | (upper >= FAR)
        if (endless & ~whole).any():
            return None
        middle = np.where(endless, 0.0, (lower + upper) / 2.0)
        half = np.where(endless, np.pi, (upper - lower) / 2.0)
        return for_kernel(np.stack([middle, np.where(whole, np.minimum(half, np.pi), half)]))

    @property
    def applies(self) -> bool:
        """Whether all that the joint values may be is a box."""
        return self._box is not None

    def ask(
        self, target: FloatArray, tolerance: FloatArray, most_boxes: int = BOX_BUDGET
    ) -> Outcome:
        """Return whether a target is out of reach within travel, and how to get there if not.

        Parameters
        ----------
        target : (4, 4), the tool in base, metres; of a mere place the last column alone is read.
        tolerance : (2,), metres and rad, by which it may be missed.
        most_boxes : how many are looked at before it is given up.
        """
        if self._box is None:
            return Outcome(False, None, 0)
        room, rows, joints = self._room, self.screws.rows, self.arm.joint_count
        missed_by = tolerance / np.array([self.screws.length, 1.0])
        goal = for_kernel(self.screws.scaled(target))
        chain = self._chain(goal, missed_by)
        missed_by[0] += missed_by[1] * chain.aside
        bench = bench_for(rows, joints, len(room.least), chain.furthest)
        boxes = np.empty((_HALVINGS * joints + 1, 2, joints))
        boxes[0], counts = self._box, np.array([1, 0])
        leaf, asked = LARGEST_LEAF, (TASKS[self.task], chain.goal, missed_by)
        while leaf >= SMALLEST_LEAF:
            ended = explore(chain.lines, room, bench, *asked, boxes, counts, most_boxes, leaf)
            if ended in (EMPTY, SPENT):
                return Outcome(ended == EMPTY, None, int(counts[LOOKED_AT]))
            witness = self._near(boxes[counts[COUNT] - 1, 0], target, goal, tolerance)
            if witness is not None:
                return Outcome(False, witness, int(counts[LOOKED_AT]))
            leaf *= _LEAF_SHRINKS
        return Outcome(False, None, int(counts[LOOKED_AT]))

    def _chain(self, goal: FloatArray, missed_by: FloatArray) -> Chain:
        """Return the ring of arm and target, or the arm where its end would be too coarse.

        What turns may be off by moves the end of a ring the more, the further it is from the tool.
        """
        ways = self._ways
        if self.task == POSE and len(ways) > 1:
            ring = best_cut(self.screws, self._lines, goal, ways)
            if missed_by[1] * ring.aside <= RING_COARSER * missed_by[0]:
                return ring
        return open_chain(self._lines, goal, ways)

    @cached_property
    def _ways(self) -> FloatArray:
        """How far each row turns to either side, or slides from zero, at most, (rows,)."""
        middle, half = np.zeros((2, self.arm.joint_count)) if self._box is None else self._box
        drive = np.abs(self._lines.drive)
        ways: FloatArray = drive @ half
        return ways + np.where(self.screws.prismatic, drive @ np.abs(middle), 0.0)

    def _near(
        self, middle: FloatArray, target: FloatArray, goal: FloatArray, tolerance: FloatArray
    ) -> FloatArray | None:
        """Return a posture (joints,) within travel and tolerance downhill from a box, or None."""
        room = self._room
        desk = desk_for(self.screws.rows, self.arm.joint_count, len(room.least))
        # Turns count beside lengths as they are tolerated: then the larger excess is let down.
        share = float(tolerance[0] / self.screws.length / max(tolerance[1], _TINY))
        for weight in (1.0, share):
            q, squared = middle[None].copy(), np.empty(1)
            descend_all(
                self._lines, room, desk, TASKS[self.task], weight, goal[None], _ONE, q,
                SEARCH_STEPS, 1, squared,
            )  # fmt: skip
            values: FloatArray = q[0] * self._scale
            motions = self.arm.drive_map.motions(values)[None]
            missed = np.array(errors_of(self.screws, motions, target[None], _ONE, self.task))[:, 0]
            if (missed <= tolerance).all() and self._allowed(values):
                return values
        return None

    def _allowed(self, values: FloatArray) -> bool:
        return len(self._room.least) == 0 or bool(travel_margin(self.arm, values) >= 0.0)

    def _by_whole_turns(self) -> NDArray[np.bool_]:
        """Return which joints (joints,) lead to the same posture after a whole turn."""
        matrix, prismatic = self.arm.drive_map.matrix, self.screws.prismatic
        alone = (matrix == np.rint(matrix)).all(axis=0) & (matrix[prismatic] == 0.0).all(axis=0)
        unbounded = (self._room.weights == 0.0).all(axis=0)
        whole: NDArray[np.bool_] = self.arm.revolute_joints & alone & unbounded
        return whole
