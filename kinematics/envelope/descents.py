"""Brings the point of an arm to many places at once, or as near as it gets, within travel.

Idea: from each start a damped Gauss-Newton step in the joints that may move: one that stands at its
limit and would leave it is held, one that would cross a limit stops there, and where a combined
travel is met the step goes on along it. A step that does not come nearer is taken again, shorter.
Those that arrive or no longer come nearer are done; the others go on together.

Source: Levenberg 1944, Marquardt 1963; limits held as in Bertsekas 1982 (projected Newton). Not
covered: that no other start would have arrived.
"""

from dataclasses import dataclass
from typing import Protocol

import numpy as np

from kinematics.envelope.point_views import PointView
from kinematics.envelope.tolerances import (
    AT_LIMIT,
    FIRST_DAMPING,
    LEAST_DAMPING,
    LONGEST_STEP,
    MOST_DAMPING,
    MOST_STEPS,
    NO_NEARER,
)
from kinematics.number_checks import FloatArray
from kinematics.reach.sample_summary import FirstAxis
from kinematics.reach.travel_region import TravelRegion


@dataclass(frozen=True)
class Descents:
    """Where searches ended.

    Attributes
    ----------
    joint_values : (count, joints), within travel; off : (count,), m, distance left.
    """

    joint_values: FloatArray
    off: FloatArray


class Seeker(Protocol):
    """Whatever brings the point near places of a view."""

    @property
    def near(self) -> float:
        """Distance at which a place is reached, m."""

    def to(self, targets: FloatArray, starts: FloatArray) -> Descents:
        """Return how near to targets (count, m) searches from starts (count, joints) come."""


@dataclass(frozen=True)
class InView:
    """What is searched: a view of a point within travel.

    Attributes
    ----------
    scales : (joints,), how far each joint may go in one step of length 1; rad or m.
    near : m, distance from the place asked for at which it is reached; steps : of a search at most.
    """

    view: PointView
    limits: TravelRegion
    scales: FloatArray
    near: float
    steps: int = MOST_STEPS

    def to(self, targets: FloatArray, starts: FloatArray) -> Descents:
        """Return how near to targets (count, m) searches from starts (count, joints) come."""
        found, off = starts.copy(), np.full(len(starts), np.inf)
        going = np.arange(len(starts))
        joint_values = starts.copy()
        places, jacobians = self.view(joint_values)
        wanted = targets.copy()
        damping = np.full(len(starts), FIRST_DAMPING)
        stalled = np.zeros(len(starts), dtype=np.int64)
        missing = wanted - places
        squares = (missing * missing).sum(axis=1)
        for _ in range(self.steps):
            done = (squares <= self.near**2) | (damping > MOST_DAMPING) | (stalled >= 2)
            if done.any():
                found[going[done]], off[going[done]] = joint_values[done], np.sqrt(squares[done])
                left = ~done
                going, joint_values, jacobians = going[left], joint_values[left], jacobians[left]
                wanted, missing, squares = wanted[left], missing[left], squares[left]
                damping, stalled = damping[left], stalled[left]
            if not len(going):
                break
            steps = self._steps(joint_values, jacobians, missing, damping)
            tried = self._within(joint_values, steps)
            places, tried_jacobians = self.view(tried)
            tried_missing = wanted - places
            tried_squares = (tried_missing * tried_missing).sum(axis=1)
            nearer = tried_squares < squares
            stalled = np.where(
                nearer,
                np.where(tried_squares > (1.0 - NO_NEARER) * squares, stalled + 1, 0),
                stalled,
            )
            damping = np.where(nearer, np.maximum(0.2 * damping, LEAST_DAMPING), 8.0 * damping)
            joint_values = np.where(nearer[:, None], tried, joint_values)
            jacobians = np.where(nearer[:, None, None], tried_jacobians, jacobians)
            missing = np.where(nearer[:, None], tried_missing, missing)
            squares = np.where(nearer, tried_squares, squares)
        found[going], off[going] = joint_values, np.sqrt(squares)
        return Descents(found, off)

    def _steps(
        self,
        joint_values: FloatArray,
        jacobians: FloatArray,
        missing: FloatArray,
        damping: FloatArray,
    ) -> FloatArray:
        limits = self.limits
        pull = (missing[:, None, :] @ jacobians)[:, 0]
        slack = AT_LIMIT * self.scales
        held = ((joint_values <= limits.lower + slack) & (pull <= 0.0)) | (
            (joint_values >= limits.upper - slack) & (pull >= 0.0)
        )
        weights = np.where(held, 0.0, self.scales**2)
        ways = weights[:, :, None] * np.swapaxes(jacobians, 1, 2)
        if not limits.is_box:
            ways = self._along_cuts(joint_values, ways, weights, missing)
        square = jacobians @ ways
        size = np.trace(square, axis1=1, axis2=2)
        # Where all joints are held nothing moves, whatever the little that is added then.
        shift = np.maximum(damping * size, 1e-30)
        damped = square + shift[:, None, None] * np.eye(square.shape[1])
        steps: FloatArray = (ways @ np.linalg.solve(damped, missing[:, :, None]))[:, :, 0]
        lengths = np.abs(steps / self.scales).max(axis=1)
        steps *= np.minimum(1.0, LONGEST_STEP / np.maximum(lengths, 1e-300))[:, None]
        return steps

    def _along_cuts(
        self,
        joint_values: FloatArray,
        ways: FloatArray,
        weights: FloatArray,
        missing: FloatArray,
    ) -> FloatArray:
        """Return the ways (count, joints, m) without what would leave a combined travel."""
        limits = self.limits
        for _ in range(2):  # the second time for what the first brings into another one
            for cut, least, most in zip(
                limits.weights, limits.cut_lower, limits.cut_upper, strict=True
            ):
                slack = AT_LIMIT * float(np.abs(cut) @ self.scales)
                sums = joint_values @ cut
                going = (ways @ missing[:, :, None])[:, :, 0] @ cut
                met = ((sums >= most - slack) & (going > 0.0)) | (
                    (sums <= least + slack) & (going < 0.0)
                )
                across = weights * cut
                size = np.maximum(across @ cut, 1e-300)
                share = (cut @ ways) / size[:, None]
                ways = np.where(
                    met[:, None, None], ways - across[:, :, None] * share[:, None, :], ways
                )
        return ways

    def _within(self, joint_values: FloatArray, steps: FloatArray) -> FloatArray:
        """Return the postures after steps, which stop where they would leave travel."""
        limits = self.limits
        tried = np.clip(joint_values + steps, limits.lower, limits.upper)
        if limits.is_box:
            return tried
        sums, tried_sums = joint_values @ limits.weights.T, tried @ limits.weights.T
        rise = tried_sums - sums
        room = np.where(rise > 0.0, limits.cut_upper - sums, sums - limits.cut_lower)
        share = np.where(
            np.abs(rise) > 0.0, np.maximum(room, 0.0) / np.maximum(np.abs(rise), 1e-300), 1.0
        )
        part = np.minimum(1.0, share.min(axis=1))[:, None]
        inside: FloatArray = joint_values + part * (tried - joint_values)
        return inside


@dataclass(frozen=True)
class AboutAxis:
    """Searches in radius and height; places on the axis itself are searched in all three
    coordinates, since the radius does not tell which way it is to the axis.

    Attributes
    ----------
    of_both : seeks radius and height; in_space : seeks the base's coordinates.
    axis : about which.
    """

    of_both: InView
    in_space: InView
    axis: FirstAxis

    @property
    def near(self) -> float:
        """Distance at which a place is reached, m."""
        return self.of_both.near

    def to(self, targets: FloatArray, starts: FloatArray) -> Descents:
        """Return how near to targets (count, 2) searches from starts (count, joints) come."""
        on_axis = targets[:, 0] == 0.0
        if not on_axis.any():
            return self.of_both.to(targets, starts)
        up = self.axis.direction
        foot = self.axis.point - (self.axis.point @ up) * up
        places = foot + targets[on_axis, 1:] * up
        there = self.in_space.to(places, starts[on_axis])
        if on_axis.all():
            return there
        beside = self.of_both.to(targets[~on_axis], starts[~on_axis])
        joint_values, off = starts.copy(), np.empty(len(starts))
        joint_values[on_axis], off[on_axis] = there.joint_values, there.off
        joint_values[~on_axis], off[~on_axis] = beside.joint_values, beside.off
        return Descents(joint_values, off)
