"""Why a way breaks, found out and put into words.

Idea: a branch that can be followed no further is singular there. At a fold (folds.py), as a
stretched elbow is one, two ways of the arm merge and neither goes on: the branch ends. Elsewhere
the joints could go on only by turning about at once, or onto another branch: the way is called
singular, and whether another goes on is open.

Source: none; words. Not covered: where a way breaks (straight.py).
"""

from functools import cached_property

import numpy as np

from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.jacobian import motion_of
from kinematics.lost_motion import PostureSingularity, describe
from kinematics.reach.targets import NOT_FOUND as NOT_FOUND_VERDICT
from kinematics.reach.targets import OUTSIDE_TRAVEL, UNREACHABLE, Checks, Reason
from kinematics.singular_kinds import Anatomy, anatomy_of
from kinematics.singularity import judge
from kinematics.table import FloatArray
from kinematics.task_space import TaskSpace
from kinematics.travel.folds import fold_at
from kinematics.travel.moves import (
    BEYOND_TRAVEL,
    BRANCH_ENDS,
    BREAKS,
    NO_END,
    NO_START,
    OFF_LINE,
    Break,
)
from kinematics.travel_limits import Limit, limits_of


class Breaks:
    """Names the breaks of one arm with one tool.

    Attributes
    ----------
    space : the rows that postures are judged by.
    """

    def __init__(self, arm: Arm, tool_in_flange: FloatArray, space: TaskSpace) -> None:
        self._arm, self._tool_in_flange, self.space = arm, tool_in_flange, space

    def ends(self, posture: FloatArray) -> bool:
        """Tell whether a branch that stalls at a posture (joints,) ends there, at a fold."""
        fold = fold_at(self._arm, self._tool_in_flange, self.space, posture)
        return fold is not None and fold.ends

    def singularity(self, posture: FloatArray) -> PostureSingularity:
        """Return what the singularity at or beside a posture (joints,) is called."""
        arm, tool = self._arm, self._tool_in_flange
        motion = motion_of(arm, posture[None], tool)
        judged = judge(arm, self.space, motion).of_posture(0)
        one = motion.of_posture(0)
        space, anatomy = self.space, self._anatomy
        return describe(arm, space, anatomy, posture, tool, one, judged, np.eye(3), "base")

    def of_limit(
        self, leg: int, share: float, distance: float, posture: FloatArray, limit: int
    ) -> Break:
        """Return the break at a limit of travel, by its index among the arm's limits."""
        exceeded = limits_of(self._arm).each[limit]
        value = float(exceeded.weights @ posture + exceeded.constant)
        reason = _at_limit(exceeded, value, self._tool_at(posture))
        posture, joint = posture.copy(), exceeded.joint
        return Break(
            BEYOND_TRAVEL, leg, share, distance, reason, posture, joint, (), OUTSIDE_TRAVEL
        )

    def of_branch(
        self, kind: int, leg: int, share: float, distance: float, posture: FloatArray
    ) -> Break:
        """Return the break at a singular posture: SINGULAR, or BRANCH_ENDS."""
        told = self.singularity(posture)
        joints = ", ".join(map(str, told.joints))
        where = f" ({' and '.join(told.kinds)}; joints {joints})" if told.kinds else ""
        if kind == BRANCH_ENDS:
            say = f"the branch ends here{where}: two ways of the arm merge and neither goes on"
            verdict = UNREACHABLE
        else:
            say = (
                f"the posture is singular here{where}: to go on, joints would have to turn about "
                "at once, or the arm to change its branch"
            )
            verdict = NOT_FOUND_VERDICT
        reason = Reason(BREAKS[kind], say, "branch", 0.0, "", nearest=self._tool_at(posture))
        return Break(kind, leg, share, distance, reason, posture.copy(), None, told.kinds, verdict)

    def of_line(
        self,
        leg: int,
        share: float,
        distance: float,
        posture: FloatArray,
        gap: tuple[float, float],
        allowed: tuple[float, float],
    ) -> Break:
        """Return the break of an arm that would leave the line by a gap (m, rad)."""
        by_angle = gap[1] * allowed[0] > gap[0] * allowed[1]
        what, unit, place = ("the orientation", "rad", 1) if by_angle else ("the place", "m", 0)
        say = (
            f"with {self._arm.joint_count} joints the tool cannot keep {what} of the line from "
            "here on: off by {measure}, allowed is {threshold}"
        )
        reason = Reason(
            BREAKS[OFF_LINE], say, "line", max(gap[place] - allowed[place], 0.0), unit,
            gap[place], allowed[place], self._tool_at(posture),
        )  # fmt: skip
        return Break(OFF_LINE, leg, share, distance, reason, posture.copy(), None, (), UNREACHABLE)

    def _tool_at(self, posture: FloatArray) -> FloatArray:
        return tool_in_base(self._arm, posture, self._tool_in_flange)

    @cached_property
    def _anatomy(self) -> Anatomy:
        return anatomy_of(self._arm, self.space, self._tool_in_flange)


def out_of_reach(checks: Checks, leg: int, *, at_start: bool) -> Break:
    """Return the break where no posture gets to the start of a course, or to the end of a leg."""
    kind = NO_START if at_start else NO_END
    reason = checks.reason_of(0)
    if reason is None:
        where = "start" if at_start else "end"
        reason = Reason(BREAKS[kind], f"no posture was found for the {where}", "", 0.0, "")
    return Break(kind, leg, 0.0, 0.0, reason, verdict=int(checks.verdict[0]))


def _at_limit(limit: Limit, value: float, nearest: FloatArray) -> Reason:
    """Return the reason of a break at a limit that a value has just reached."""
    lower, upper = limit.travel.lower, limit.travel.upper
    end = lower if abs(value - lower) < abs(value - upper) else upper
    say = f"{limit.subject} would leave its travel at {{threshold}}"
    excess = max(lower - value, value - upper, 0.0)
    return Reason(BREAKS[BEYOND_TRAVEL], say, "travel", excess, limit.unit, value, end, nearest)
