"""Which solutions are near enough to their targets, and postures of few joints that are.

Six joints are held to the target itself. Fewer rarely have the pose that was typed, but often one
within its tolerance; a closed form that meets the place exactly leaves all the error to the turn.
So solutions that miss are led to where they miss least (inverse/compromises.py). Beside a fold a
typed target may have lost the solution to begin with; there a short search says where else.

Source: none. Not covered: ways lost beside a fold, of a target that has another within tolerance.
"""

from dataclasses import replace
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.compromises import Driven, compromised
from kinematics.inverse.found import Found, none_found
from kinematics.inverse.iterative import Search
from kinematics.inverse.measured import errors_of, wrapped
from kinematics.inverse.several import joined, picked
from kinematics.inverse.solve import Method
from kinematics.reach.targets import Targets
from kinematics.reach.tolerances import WORTH_LEADING
from kinematics.reach.verdicts import Ranking
from kinematics.table import FloatArray
from kinematics.tolerances import NEARLY_REACHED

_SEVERAL, _SHORT = 4, 16
"""Postures that a short search looks for, and its starts."""


class NearEnough:
    """Holds what a method found against tolerances; of one arm and task."""

    def __init__(self, ranking: Ranking, method: Method) -> None:
        self.ranking, self.method = ranking, method
        self.searches = method.closed and ranking.arm.joint_count == 5
        """Whether a target that is missed costs a short search."""

    def of(self, found: Found, targets: Targets, rest: FloatArray) -> Found:
        """Return the solutions within tolerance, and postures that miss a little of all instead.

        Parameters
        ----------
        rest : (joints,), values for joints that do not matter.
        """
        ranking = self.ranking
        if ranking.exact and self.method.closed:
            return found  # a closed form has held it against the target itself
        accepted = ranking.accepted(found, targets)
        near = picked(found, accepted)
        if not self.method.closed or (accepted.all() and near.count_per_target().all()):
            return near
        errors = np.stack([found.position_error, found.angle_error], axis=1)
        small = errors <= WORTH_LEADING * self.ranking.allowed(targets)[found.target]
        tried = picked(found, small.all(axis=1) & ~accepted)
        return self._led(near, self._with_efforts(tried, found, targets, rest), targets)

    def elsewhere(self, near: Found, targets: Targets, wanted: NDArray[np.bool_]) -> Found:
        """Return the same with what a short search finds for targets ``wanted`` (m,).

        Several postures each: what it takes for near may be more than a tolerance away.
        """
        left = np.flatnonzero(wanted)
        if not len(left):
            return near
        sought = self._short_search.solve(targets.tool_in_base[left])
        tried = replace(
            near,
            motions=sought.motions,
            target=left[sought.target],
            position_error=sought.position_error,
            angle_error=sought.angle_error,
        )
        return self._led(near, tried, targets)

    @cached_property
    def _short_search(self) -> Search:
        ranking = self.ranking
        return Search(ranking.arm, ranking.tool_in_flange, self.method.task, _SEVERAL, _SHORT)

    def _led(self, near: Found, tried: Found, targets: Targets) -> Found:
        """Return what is near enough with what was tried, where that can be led near enough.

        A target that something is near enough to is not open for what is not.
        """
        if not len(tried.target):
            return near
        of_arm, screws = self.ranking.arm.drive_map, self.ranking.screws
        drive = Driven(of_arm.matrix, np.array(of_arm.driven, np.intp))
        poses, tolerances = targets.tool_in_base, self.ranking.allowed(targets)
        tried = compromised(tried, screws, drive, poses, tolerances, self.method.task)
        accepted = picked(tried, self.ranking.accepted(tried, targets))
        met = near.count_per_target() > 0
        led = replace(accepted, open=np.where(met, near.open, accepted.open))
        return joined(near, led, np.arange(len(targets)))

    def _with_efforts(
        self, tried: Found, found: Found, targets: Targets, rest: FloatArray
    ) -> Found:
        """Return more to be tried: what comes nearest to targets that nearly have a solution."""
        slack = self.ranking.allowed(targets).max(axis=1)
        none = found.count_per_target() == 0
        left = np.flatnonzero(none & (found.shortfall <= NEARLY_REACHED * slack))
        if not len(left):
            return tried
        poses, one = targets.tool_in_base[left], np.arange(len(left))
        screws = self.ranking.screws
        motions = wrapped(self.method.nearest(poses, rest), screws.prismatic)
        position, angle = errors_of(screws, motions, poses, one, self.method.task)
        effort = replace(
            none_found(len(left), screws.rows),
            motions=motions,
            target=one,
            position_error=position,
            angle_error=angle,
            open=found.open[left],
            stage=found.stage[left],
            shortfall=found.shortfall[left],
        )
        return joined(tried, effort, left)
