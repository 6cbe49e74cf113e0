"""One joint of seven held still: at which values, and the other six brought onto a target there.

Idea: everything that follows from holding one row of an arm, worked out once. Row motions become
the one posture of their kind with the most room; postures at one held value are led to others
nearby by Newton's method on the six, which costs a tenth of finding all anew.

Source: none; bookkeeping around locked.py and polish.py.
Not covered: what is looked for along the held values (redundant_stretches.py).
"""

import numpy as np
from numpy.typing import NDArray

from kinematics.arm import Arm
from kinematics.inverse.descent_arrays import FAR
from kinematics.inverse.drive import INSIDE, drive_of
from kinematics.inverse.held_values import held_values
from kinematics.inverse.locked import SIX, Locked
from kinematics.inverse.polish import polish
from kinematics.inverse.tolerances import ACCEPTED, SAME_PATH
from kinematics.kernels.best_postures import preferred
from kinematics.kernels.compiler import for_kernel
from kinematics.table import FloatArray
from kinematics.tolerances import MOST_TURNS
from kinematics.travel_limits import beyond_travel, limits_of, travel_margin

_STEPS, _WORTH = 12, 1.0
"""Steps onto a target at another held value, two as a rule, a dozen where ways merge; and the gap,
over L and in rad, from which on nothing is tried."""


class HeldJoint:
    """An arm of seven joints, the first or the last of which is held.

    Attributes
    ----------
    arm, locked, drive : the arm, its six other rows, and joint values from row motions.
    number : 1-based, of the joint that is held; values : (g,), of its row, rad or m, ascending.
    turning : (joints,), angles of which a whole turn changes nothing else.
    bounds : (2, joints), least and largest joint values; far away where a joint turns endlessly.
    scale : (joints,), what differences between joint values are divided by.
    turns_endlessly : whether the values go around a whole turn that nothing bounds.
    """

    def __init__(self, arm: Arm, locked: Locked) -> None:
        self.arm, self.locked, self.drive = arm, locked, drive_of(arm)
        self.row = int(locked.held[0])
        self.number = self.row + 1
        self.values = held_values(arm, self.row)
        self.carried = locked.carried(self.values[:, None])
        # Whole turns of a joint that moves its own row alone change nothing else.
        matrix, limits = arm.drive_map.matrix, limits_of(arm)
        alone = (np.count_nonzero(matrix, axis=0) == 1) & (np.count_nonzero(matrix, axis=1) == 1)
        single = bool(alone.all() and (np.count_nonzero(limits.weights, axis=1) == 1).all())
        self._most_turns = 1 if single else MOST_TURNS
        self.turning = arm.revolute_joints & alone
        self.turns_endlessly = bool(self.drive.endless[self.row])
        endless = np.where(self.drive.endless, FAR, 0.0)
        self.bounds = for_kernel(self.drive.box + np.array([[-1.0], [1.0]]) * endless)
        self.scale = np.where(arm.revolute_joints, 1.0, locked.screws.length)
        self.scale[self.row] = FAR  # what is held is as far apart as the values are

    @property
    def step(self) -> float:
        """Between neighbouring values, rad or m."""
        return float(self.values[1] - self.values[0])

    @property
    def say(self) -> str:
        """What is held, at how many values, and what solves the rest, for people.

        How far they are apart is told in the asker's units, beside each answer.
        """
        return f"joint {self.number} held at {len(self.values)} values, for each: {self.locked.say}"

    def postures(
        self, motions: FloatArray, near: FloatArray | None
    ) -> tuple[FloatArray, FloatArray, NDArray[np.bool_]]:
        """Return joint values (k, joints), margins (k,) and whether within travel, one a motion.

        Parameters
        ----------
        motions : (k, rows). near : (joints,), whole turns are taken nearest to it.
        """
        postures = self.drive.postures(motions, near, most=self._most_turns)
        values, margin, source = postures.joint_values, postures.margin, postures.source
        inside = postures.flags & INSIDE != 0
        if len(source) != len(motions):
            order = np.lexsort((-margin, source))
            first = order[np.searchsorted(source[order], np.arange(len(motions)))]
            values, margin, inside = values[first], margin[first], inside[first]
        return for_kernel(values), margin, inside

    def scored(self, values: FloatArray, margin: FloatArray, near: FloatArray | None) -> FloatArray:
        """Return what is best is highest, for postures (..., joints) and their margins (...,).

        The margin, or within travel the nearness to ``near`` (joints,) instead, 0 to 1, as
        ``preferred`` counts them.
        """
        if near is not None:
            far = (np.abs(values - near) / self.drive.spans).max(axis=-1)
            margin = np.where(margin >= 0.0, 1.0 / (1.0 + far), margin)
        return preferred(margin, beyond_travel(self.arm, values))

    def brought(
        self, values: FloatArray, targets: FloatArray, held: FloatArray | None = None
    ) -> tuple[FloatArray, NDArray[np.bool_]]:
        """Return joint values (k, joints) brought onto targets (k, 4, 4), and which are there.

        Whole turns stay. So does the held row, unless its motions ``held`` (k,) are given.
        """
        locked, screws = self.locked, self.locked.screws
        motions = self.arm.drive_map.motions(values)
        if held is not None:
            motions[:, self.row] = held
        still = motions[:, locked.held]
        carried = for_kernel(screws.scaled(locked.targets(targets, still)))
        six = locked.six
        size = np.where(six.prismatic, screws.length, 1.0)
        inner = for_kernel(motions[:, locked.before : locked.before + SIX] / size)
        gaps, lines = np.empty((len(values), 2)), (six.axis, six.point, six.prismatic)
        at_zero = for_kernel(six.tool_at_zero)
        polish(*lines, at_zero, carried, np.arange(len(values)), _STEPS, _WORTH, inner, gaps)
        motions = locked.whole(inner * size, still)
        back = np.asarray(np.linalg.solve(self.arm.drive_map.matrix, motions.T).T, np.float64)
        return for_kernel(back), gaps.max(axis=1, initial=0.0) <= ACCEPTED

    def followed(
        self, postures: FloatArray, targets: FloatArray, held: FloatArray
    ) -> tuple[FloatArray, NDArray[np.bool_]]:
        """Return the postures (k, joints) at other held values (k,) that postures lead to.

        And which have one, (k,): where ways merge none goes on.
        """
        there, landed = self.brought(postures, targets, held)
        off = (np.abs(there - postures) / self.scale).max(axis=1, initial=0.0)
        return there, landed & (off <= SAME_PATH)

    def margins(self, values: FloatArray) -> FloatArray:
        """Return the margins of postures (..., joints), at most 1."""
        return np.minimum(travel_margin(self.arm, values), 1.0)
