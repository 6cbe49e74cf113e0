"""From what a solver found to ranked postures: whole turns, travel, errors, order, branch.

Each solution is a motion of the rows. It becomes the joint values that make it, within travel if
there are any; those of one target are put in order, the best first, and the best is the answer of
whoever asks for one. All of that is arrays and a few compiled walks over them: a thousand targets
cost little beyond their solutions, and one target some tens of microseconds.

Source: none. Not covered: what is made of it in words (reasons.py), and other solvers (checks.py).
"""

from functools import cached_property
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.inverse.drive import CLIPPED, WORKING, Postures, drive_of
from kinematics.inverse.found import Found
from kinematics.inverse.landing import gaps_to
from kinematics.inverse.screws import screws_of
from kinematics.jacobian import motion_of
from kinematics.kernels.best_postures import best_first, in_steps, preferred
from kinematics.kernels.decomposition import decompose
from kinematics.reach.branches import Branches
from kinematics.reach.targets import Targets
from kinematics.reach.tolerances import EXACT_REACH, MOST_LISTED
from kinematics.table import FloatArray
from kinematics.task_space import TaskSpace, task_space
from kinematics.tolerances import TRAVEL_EDGE


class Ranked(NamedTuple):
    """Postures of m targets, p in all, best first; those of target i from ``offsets[i]`` on.

    Attributes
    ----------
    joint_values : (p, joints); margin : (p,); outside_working : (p,).
    solution : (p,), index of the solution found.
    errors : (p, 2), metres and rad; None where they are those of the solutions, as none was put
        onto a limit.
    target : (k,), of each solution.
    inside : (m,), whether the target's postures are within travel; if not, none is.
    all_inside : whether every target's are; all_listed : and no posture is left out.
    seen : (k,), how many postures within travel each solution has; negative, less one, where not
        all were looked at.
    """

    offsets: NDArray[np.intp]
    joint_values: FloatArray
    margin: FloatArray
    outside_working: NDArray[np.bool_]
    solution: NDArray[np.int64]
    errors: FloatArray | None
    target: NDArray[np.intp]
    inside: NDArray[np.bool_]
    all_inside: bool
    all_listed: bool
    seen: FloatArray


class Ranking:
    """Ranks postures of one arm with one tool.

    Attributes
    ----------
    exact : whether solutions are held to 1e-9 of the length, or to the targets' tolerances.
    """

    def __init__(self, arm: Arm, tool_in_flange: FloatArray) -> None:
        self.arm, self.tool_in_flange = arm, tool_in_flange
        self.screws = screws_of(arm, tool_in_flange)
        self.exact = arm.joint_count >= 6
        self._drive = drive_of(arm)

    @cached_property
    def branches(self) -> Branches:
        """The arm's branches and their sentences."""
        return Branches(self.arm, self.screws)

    def accepted(self, found: Found, targets: Targets) -> NDArray[np.bool_]:
        """Return which solutions are near enough to their target, (k,).

        Six joints and more are held to 1e-9 of the length, fewer to what is ``allowed``.
        """
        if self.exact:
            close: NDArray[np.bool_] = found.position_error <= EXACT_REACH * self.screws.length
            return close & (found.angle_error <= EXACT_REACH)
        errors = np.stack([found.position_error, found.angle_error], axis=1)
        near: NDArray[np.bool_] = np.all(errors <= self.allowed(targets)[found.target], axis=1)
        return near

    def allowed(self, targets: Targets) -> FloatArray:
        """Return by how much few joints may miss each target, (m, 2), metres and rad.

        Its tolerances, but no less than six joints are held to: less is rounding.
        """
        stated = np.stack([targets.position_tolerance, targets.angle_tolerance], axis=1)
        least = EXACT_REACH * np.array([self.screws.length, 1.0])
        held: FloatArray = np.maximum(stated, least)
        return held

    def rank(
        self,
        found: Found,
        targets: Targets,
        near: FloatArray | None = None,
        most: int = MOST_LISTED,
        beyond: int = MOST_LISTED,
        still: NDArray[np.bool_] | None = None,
        angles_count: bool = True,
    ) -> Ranked:
        """Return the postures of what was found and accepted, the best first.

        Parameters
        ----------
        near : (joints,), rank by nearness to it, in shares of travel; by margin else. What is equal
            (to a step, ``ROUNDED``) is ranked by the margin, then those within working travel come
            first, then by the smallest singular value where nothing bounds the arm.
        most, beyond : how many are listed of a target with some within travel, and with none.
        still : (joints,), joints that are not turned by whole turns.
        angles_count : whether a posture put onto a limit must keep the target's orientation.
        """
        postures = self._drive.postures(found.motions, near, still=still)
        values, flags, margin = postures.joint_values, postures.flags, postures.margin
        outside_working = flags & WORKING != 0
        errors = None
        if postures.any_clipped:
            errors = np.stack([found.position_error, found.angle_error], 1)[postures.source]
            self._hold_clipped(postures, found, targets, errors, angles_count)
        if near is not None:
            # Of the turns that nothing bounds, those nearest to it.
            turns = np.round((near - values) / (2.0 * np.pi))
            values += 2.0 * np.pi * np.where(self._drive.endless, turns, 0.0)
            primary = in_steps(-self.distance(values, near))
            secondary = preferred(margin, outside_working)
        else:
            primary = preferred(margin, outside_working)
            secondary = self._smallest(values, margin)
        offsets, order, inside, all_inside = best_first(
            len(targets), found.target, postures.source, flags, primary, secondary, most, beyond
        )
        return Ranked(
            offsets,
            values[order],
            margin[order],
            outside_working[order],
            postures.source[order],
            None if errors is None else errors[order],
            found.target,
            inside,
            all_inside,
            all_inside and len(order) == len(flags),
            postures.seen,
        )

    def distance(self, values: FloatArray, near: FloatArray) -> FloatArray:
        """Return the largest difference of joint values, in shares of travel, (p,)."""
        shares = np.abs(values - near) / self._drive.spans
        furthest: FloatArray = shares.max(axis=1, initial=0.0)
        return furthest

    def _hold_clipped(
        self,
        postures: Postures,
        found: Found,
        targets: Targets,
        errors: FloatArray,
        angles_count: bool,
    ) -> None:
        """Hold postures that were put onto a limit against their target once more.

        Those that left it are beyond travel, by less than the edge. ``errors`` (p, 2) of the others
        are overwritten.
        """
        at = np.flatnonzero(postures.flags & CLIPPED)
        target = found.target[postures.source[at]]
        poses = tool_in_base(self.arm, postures.joint_values[at], self.tool_in_flange)
        gaps = np.empty((len(at), 2))
        gaps_to(poses, targets.tool_in_base, target.astype(np.float64), gaps)
        position, angle = self.allowed(targets)[target].T
        if self.exact:
            position = np.full(len(at), EXACT_REACH * self.screws.length)
            angle = np.full(len(at), EXACT_REACH)
        off = gaps[:, 0] > position
        if angles_count:
            off |= gaps[:, 1] > angle
            errors[at, 1] = gaps[:, 1]
        errors[at, 0] = gaps[:, 0]
        postures.flags[at[off]] = 0
        postures.margin[at[off]] = -TRAVEL_EDGE

    def _smallest(self, values: FloatArray, margin: FloatArray) -> FloatArray:
        """Return the smallest singular value, in steps, of postures no travel ranks, (p,).

        Of others the margin, which says no more than it did.
        """
        if not len(margin) or np.isfinite(margin[0]) or self._space is None:
            return margin
        space, joints = self._space, values.shape[1]
        rows, rank = space.row_map.shape[0], space.generic_rank
        smallest = np.empty((len(values), min(rows, joints)))
        of_joints = motion_of(self.arm, values, self.tool_in_flange).of_joints
        no_left, no_right = np.empty((0, rows, min(rows, joints))), np.empty((0, joints, joints))
        decompose(of_joints, space.row_map, space.joint_scale, no_left, smallest, no_right)
        return in_steps(smallest[:, rank - 1]) if rank else margin

    @cached_property
    def _space(self) -> TaskSpace | None:
        return task_space(self.arm, self.tool_in_flange)
