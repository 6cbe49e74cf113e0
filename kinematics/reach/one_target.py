"""The best posture for one pose, where nothing about it is out of the ordinary.

Idea: a controller asks for one pose at every cycle, and mostly the answer is plain: reachable, the
best posture well within travel. One compiled walk tells (inverse/at_once.py); whatever it leaves
undecided, and every no, is answered the way that many targets take.

Source: none. Not covered: arms without an exact special triple, or without any travel; more than
the best posture.
"""

from typing import NamedTuple

import numpy as np

from kinematics.inverse.at_once import (
    ANGLE_ERROR,
    BRANCH,
    MARGIN,
    POSITION_ERROR,
    TOLD,
    answer_at_once,
)
from kinematics.inverse.drive import drive_of
from kinematics.inverse.special_triple import SpecialTriple
from kinematics.inverse.tolerances import EXACT_SLACK
from kinematics.kernels.compiler import for_kernel
from kinematics.reach.verdicts import Ranking
from kinematics.table import FloatArray
from kinematics.tolerances import LOST_RANK


class Best(NamedTuple):
    """The best posture of a target that is reachable, within travel and working travel.

    Attributes
    ----------
    joint_values : rad or m. margin : smallest share of travel left.
    position_error, angle_error : metres and radians.
    branch : in words; empty where the arm is of no class with names, and where not asked for.
    found : how many postures there are.
    """

    joint_values: list[float]
    margin: float
    position_error: float
    angle_error: float
    branch: str
    found: int


class OneTarget:
    """Answers for one pose of one arm with one tool; see ``one_target_of``.

    Safe to be used by several threads.
    """

    def __init__(self, ranking: Ranking, solver: SpecialTriple) -> None:
        drive = drive_of(ranking.arm)
        self._drive, self._branches = drive, ranking.branches
        self._triple, self._length = tuple(solver.parts[0]), solver.screws.length
        self._usual, self._spans = drive.for_kernel(), for_kernel(drive.spans)
        self._endless = bool(drive.endless.any())
        self._branch = ranking.branches.for_kernel()

    def best(
        self,
        frame_in_base: FloatArray,
        tool_in_frame: FloatArray,
        near: FloatArray | None,
        *,
        named: bool,
    ) -> Best | None:
        """Return the best posture for a pose (1, 4, 4) in a frame; None where that takes more.

        Parameters
        ----------
        near : (6,), rank by nearness to it instead of by margin; rad or m.
        named : whether its branch is wanted.
        """
        if near is not None and self._endless:
            return None  # joints that nothing bounds are turned towards it
        told = np.empty(TOLD)
        found = answer_at_once(
            self._triple,
            self._usual if near is None else self._drive.for_kernel(near),
            self._branch,
            self._length,
            LOST_RANK,
            self._spans,
            self._spans if near is None else for_kernel(near),
            near is not None,
            named,
            for_kernel(frame_in_base),
            tool_in_frame,
            told,
        )
        if not found:
            return None
        values = told.tolist()
        branch = int(values[BRANCH])
        return Best(
            values[:MARGIN],
            values[MARGIN],
            values[POSITION_ERROR],
            values[ANGLE_ERROR],
            "" if branch < 0 else self._branches.sentences[branch],
            found,
        )


def one_target_of(ranking: Ranking, solver: object) -> OneTarget | None:
    """Return what answers for one pose at once, None for arms that need more than one walk.

    Examples
    --------
    >>> from kinematics.arm import Arm
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = (Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0),) * 2
    >>> one_target_of(Ranking(Arm("planar", Table(Convention.STANDARD, rows)), np.eye(4)), None)
    """
    if not isinstance(solver, SpecialTriple) or ranking.arm.joint_count != 6:
        return None
    # Two solutions of a rounded table may be lost beside a fold, and are looked for elsewhere.
    return None if solver.parts[0].slack > EXACT_SLACK else OneTarget(ranking, solver)
