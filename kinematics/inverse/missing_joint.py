"""Five joints solved as six: the joint that is missing is put in, and must not turn.

An arm of five joints cannot turn its tool as it likes. A sixth joint that does just the turn it
cannot do makes it one that can, with a closed form where three neighbouring axes meet or run
parallel. Solutions in which that joint stays at zero are poses the arm has; how far it turns is how
much the pose is missed by, and is all of the answer where that turn is left free. The joint is put
at the tool, about tool z; or, where the last axis is tool z itself, before the last, across both.

Where the joint put in lines up with one of the arm's, the closed form finds one of many solutions,
seldom the one with that joint at zero: it is followed there along the motion that leaves the tool.

Source: virtual joints for tasks of fewer rows are common; recalled, no book opened.
Not covered: compromises that miss the place a little to turn less (compromises.py).
"""

from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.compromises import compromises, each_once, each_row
from kinematics.inverse.found import Found, Geometry, Solver
from kinematics.inverse.landing import columns_of, jacobians_at, land
from kinematics.inverse.lost_rank import LostRank
from kinematics.inverse.measured import DIRECTION, errors_of, wrapped
from kinematics.inverse.screws import Screws
from kinematics.kernels.compiler import for_kernel
from kinematics.table import FloatArray
from kinematics.tolerances import (
    AXES_PARALLEL,
    GENERIC_RANK,
    LOST_RANK,
    NEARLY_ALIGNED,
    NEARLY_REACHED,
    TARGET_ANGLE,
    TARGET_POSITION,
    WORTH_COMPROMISING,
)


def with_missing_joint(screws: Screws) -> tuple[Screws, int] | None:
    """Return an arm of five rows with a sixth, and which that is, 0-based; None if none serves.

    Examples
    --------
    >>> axes = np.eye(3)[[2, 1, 1, 1, 2]]
    >>> points = np.array([[0.0, 0, 0], [0, 0, 0], [0, 0, 0.4], [0.3, 0, 0.4], [0.3, 0, 0.3]])
    >>> tool = np.diag([1.0, -1, -1, 1])
    >>> tool[:3, 3] = 0.3, 0.0, 0.2
    >>> with_missing_joint(Screws(axes, points, np.zeros(5, bool), tool, 1.0))[1]
    4
    """
    tool = screws.tool_at_zero
    across = np.cross(screws.axis[3], screws.axis[4])
    for place, direction in ((5, tool[:3, 2]), (4, across)):
        size = float(np.linalg.norm(direction))
        if size < AXES_PARALLEL:
            continue
        extended = replace(
            screws,
            axis=np.insert(screws.axis, place, direction / size, axis=0),
            point=np.insert(screws.point, place, tool[:3, 3], axis=0),
            prismatic=np.insert(screws.prismatic, place, False),
        )
        if _can_turn_freely(extended):
            return extended, place
    return None


def _can_turn_freely(screws: Screws) -> bool:
    """Tell whether six rows move the tool in all six ways, in some posture."""
    best = 0.0
    for posture in range(1, 9):
        # Angles far from each other and from quarter turns, the same on every machine.
        motions = np.sin(np.arange(1.0, 7.0) * (1.0 + 0.7 * posture)) * 2.0
        axis, point, pose = np.empty((6, 3)), np.empty((6, 3)), np.empty((4, 4))
        jacobian = np.empty((6, 6))
        land(
            screws.axis,
            screws.point,
            screws.prismatic,
            screws.tool_at_zero,
            motions,
            axis,
            point,
            pose,
        )
        columns_of(axis, point, screws.prismatic, pose, jacobian)
        best = max(best, float(np.linalg.svd(jacobian, compute_uv=False)[-1]))
    return best > GENERIC_RANK


@dataclass(frozen=True)
class _WithMissing:
    """The structure of an arm with a joint put in, in words."""

    whole: Geometry
    number: int

    @property
    def regime(self) -> object:
        """How exactly the table has it."""
        return getattr(self.whole, "regime", None)

    @property
    def say(self) -> str:
        """What is used, for people."""
        return f"with the turn that is missing put in as joint {self.number}, {self.whole.say}"


@dataclass(frozen=True, eq=False)
class FiveJoints:
    """A solver for five rows, by a solver for them with the missing one.

    Attributes
    ----------
    inner : for six rows; whole : these rows; place : which of them, 0-based, the arm does not have.
    screws : the arm of five; task : what of a target is asked, as in measured.py.
    """

    inner: Solver
    whole: Screws
    place: int
    screws: Screws
    task: str

    @property
    def proof(self) -> str:
        return self.inner.proof

    @property
    def geometry(self) -> Geometry:
        return _WithMissing(self.inner.geometry, self.place + 1)

    @cached_property
    def _alignment(self) -> LostRank:
        return LostRank(self.whole, NEARLY_ALIGNED)

    def solve(self, targets: FloatArray) -> Found:
        """Return all motions (k, 5) of targets (m, 4, 4), errors measured without the sixth."""
        of_six = self.inner.solve(targets)
        found = self._measured(of_six, np.delete(of_six.motions, self.place, axis=1), targets)
        aligned = None if self.task == DIRECTION else self._alignment.of(of_six.motions)
        if aligned is None:
            return found
        missed = np.flatnonzero(aligned & (found.angle_error > TARGET_ANGLE))
        if not len(missed):
            return found
        of, motions = found.target[missed], found.motions.copy()
        led, lost = self._with_missing_at_zero(of_six.motions[missed], targets[of])
        off = errors_of(self.screws, led, targets, of, self.task)[1]
        near = off < WORTH_COMPROMISING * TARGET_ANGLE
        # What is led nowhere near stays where place and tool z are met, and the spin is off.
        motions[missed[near]] = led[near]
        found, is_open = self._measured(found, motions, targets), found.open.copy()
        is_open[of[lost | near]] = True
        is_open[found.target[found.angle_error <= TARGET_ANGLE]] = False
        return each_once(replace(found, open=is_open | of_six.open), self.screws.prismatic)

    def _measured(self, found: Found, motions: FloatArray, targets: FloatArray) -> Found:
        position, angle = errors_of(self.screws, motions, targets, found.target, self.task)
        nearest = found.nearest
        if nearest.shape[1] != self.screws.rows:
            nearest = np.delete(nearest, self.place, axis=1)
        return replace(
            found, motions=motions, position_error=position, angle_error=angle, nearest=nearest
        )

    def _with_missing_at_zero(
        self, motions: FloatArray, targets: FloatArray
    ) -> tuple[FloatArray, NDArray[np.bool_]]:
        """Return motions (k, 5) near targets (k, 4, 4) from aligned ones (k, 6) that are on them.

        Along the motion that leaves the tool where it is, until the missing joint is at zero. And
        which of those (k,) are in line altogether.
        """
        scale = np.where(self.whole.prismatic, self.whole.length, 1.0)
        jacobians = np.empty((len(motions), 6, 6))
        lines = for_kernel(self.whole.axis), for_kernel(self.whole.point), self.whole.prismatic
        tool_at_zero = for_kernel(self.whole.tool_at_zero)
        jacobians_at(*lines, tool_at_zero, for_kernel(motions / scale), jacobians)
        _, values, right = np.linalg.svd(jacobians)
        still, smallest = right[:, -1], values[:, -1]
        share, turned = still[:, self.place], motions[:, self.place]
        # Where the missing joint has no part in that motion, there is nothing to be gained; nor
        # where it turns further than what a target is off by makes it turn.
        worth = np.abs(share) > GENERIC_RANK
        worth &= np.abs(turned) * smallest < NEARLY_REACHED * TARGET_ANGLE
        far = -turned[worth] / share[worth]
        there = motions.copy()
        there[worth] += far[:, None] * still[worth] * scale
        there = np.delete(there, self.place, axis=1)
        tolerances = np.tile([TARGET_POSITION, TARGET_ANGLE], (len(far), 1))
        every_row = each_row(self.screws.rows)
        led = compromises(
            self.screws, every_row, there[worth], targets[worth], tolerances, self.task
        )
        there[worth] = wrapped(led, self.screws.prismatic)
        return there, smallest < LOST_RANK

    def nearest(self, targets: FloatArray) -> FloatArray:
        """Return row motions (m, 5) near the target, the sixth joint let go."""
        return np.delete(self.inner.nearest(targets), self.place, axis=1)
