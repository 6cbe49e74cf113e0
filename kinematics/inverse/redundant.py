"""Arms with a joint to spare: it is held at one value after the next, and the other six solved.

Idea: seven joints meet a pose in a continuum of postures. With the first or the last row held still
six remain, of which three neighbouring axes often meet or are parallel: a closed form finds all
postures at each of some hundred held values (locked.py, held_joint.py). What of them hangs together
within travel is a stretch, and its best posture stands for it (redundant_stretches.py). Where no
value has a posture within travel, the stretches that miss it by least are bettered likewise, and a
search with all joints free comes last.

Source: scanning the redundant joint: Burdick 1989; arms with a shoulder and a wrist: Shimizu and
others, Analytical inverse kinematic computation for 7-DOF redundant manipulators with joint limits
and its application to redundancy resolution, 2008.
Not covered: a proof of a no; stretches narrower than the step, which are met only by the search;
arms with passive rows, with more to spare, or whose other six have no closed form: these are
searched for.
"""

from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from kinematics.arm import Arm
from kinematics.inverse.found import Found, none_found
from kinematics.inverse.held_joint import HeldJoint
from kinematics.inverse.held_values import refuse_unbounded_slides
from kinematics.inverse.iterative import Search
from kinematics.inverse.locked import SIX, lockings_of
from kinematics.inverse.measured import POSE, errors_of, wrapped
from kinematics.inverse.redundant_stretches import best_of, nodes_of, stretches_of
from kinematics.inverse.screws import screws_of
from kinematics.inverse.several import joined
from kinematics.table import FloatArray

_TOGETHER = 32
"""Targets whose held values are solved together: their arrays stay in the cache."""


@dataclass(frozen=True)
class RedundantGeometry:
    """What is held, in which steps, and what solves the rest, in words."""

    say: str


class Redundant:
    """A solver for poses of arms with one joint more than six; made by ``redundant_of``.

    Solutions are the best posture of each stretch within travel, or where there is none the posture
    that exceeds travel least.

    Attributes
    ----------
    joint : the one that is held, and at which values.
    """

    proof = "search"

    def __init__(self, arm: Arm, tool_in_flange: FloatArray, joint: HeldJoint) -> None:
        self.arm, self.tool_in_flange, self.joint = arm, tool_in_flange, joint

    @property
    def geometry(self) -> RedundantGeometry:
        """What is held, in which steps, and what solves the rest."""
        return RedundantGeometry(self.joint.say)

    @cached_property
    def _search(self) -> Search:
        return Search(self.arm, self.tool_in_flange, POSE)

    def solve(self, targets: FloatArray, near: FloatArray | None = None) -> Found:
        """Return the best posture of each stretch, for targets (m, 4, 4), the tool in base, metres.

        Parameters
        ----------
        near : (joints,), best is what is nearest to these joint values, instead of what has the
            most margin.
        """
        found = none_found(len(targets), self.joint.locked.screws.rows)
        for begin in range(0, len(targets), _TOGETHER):
            which = np.arange(begin, min(begin + _TOGETHER, len(targets)))
            found = joined(found, self._met(targets[which], near), which)
        found = replace(found, open=np.ones(len(targets), np.bool_))
        missing = np.flatnonzero(~self._within(found))
        if not len(missing):
            return found
        return joined(found, self._search.solve(targets[missing]), missing)

    def nearest(self, targets: FloatArray) -> FloatArray:
        """Return row motions (m, rows) within travel that bring the tool nearest to targets."""
        return self._search.nearest(targets)

    def _within(self, found: Found) -> NDArray[np.bool_]:
        """Return which targets have a posture within travel, (m,)."""
        within = np.zeros(len(found.open), np.bool_)
        within[found.target[self.joint.postures(found.motions, None)[2]]] = True
        return within

    def _met(self, targets: FloatArray, near: FloatArray | None) -> Found:
        """Return the best posture of each stretch of some targets (m, 4, 4)."""
        screws = self.joint.locked.screws
        nodes, found = nodes_of(self.joint, targets, near), none_found(len(targets), screws.rows)
        if not len(nodes.score):
            return found
        stretches = stretches_of(self.joint, nodes)
        best = best_of(self.joint, stretches, targets, near)
        order = np.lexsort((-best.score, stretches.target))
        target, inside = stretches.target[order], best.inside[order]
        some = np.zeros(len(targets), np.bool_)
        some[target[inside]] = True
        # Of a target without a posture within travel one is told: what exceeds it least.
        first = np.concatenate([[True], target[1:] != target[:-1]])
        kept = np.where(some[target], inside, first)
        values, target = best.joint_values[order[kept]], target[kept]
        motions = wrapped(self.arm.drive_map.motions(values), screws.prismatic)
        position, angle = errors_of(screws, motions, targets, target, POSE)
        return replace(
            found, motions=motions, target=target, position_error=position, angle_error=angle
        )


def redundant_of(arm: Arm, tool_in_flange: FloatArray) -> Redundant | None:
    """Return the solver for poses of an arm with one joint more than six, or None for any other.

    Raises
    ------
    KinematicsError : an arm of more than six joints has a slide without travel.

    Examples
    --------
    Six joints of which the last three axes meet, on a track:

    >>> from kinematics.table import Convention, JointKind, Row, Table, Travel
    >>> track = Row(JointKind.PRISMATIC, 0.0, 1.5708, 0.0, 0.0, travel=Travel(0.0, 2.0))
    >>> numbers = ((0, 1.5708, 0.4), (0.5, 0, 0), (0, 1.5708, 0), (0, -1.5708, 0.5), (0, 1.5708, 0))
    >>> rows = [Row(JointKind.REVOLUTE, a, alpha, d, 0.0) for a, alpha, d in (*numbers, (0, 0, 0))]
    >>> arm = Arm("on a track", Table(Convention.STANDARD, (track, *rows)))
    >>> redundant_of(arm, np.eye(4)).geometry.say[:40]
    'joint 1 held at 121 values, for each: ax'
    """
    if arm.joint_count <= SIX:
        return None
    refuse_unbounded_slides(arm)
    screws = screws_of(arm, tool_in_flange)
    if screws.rows != arm.joint_count or screws.rows != SIX + 1:
        return None
    ways = lockings_of(screws)
    return Redundant(arm, tool_in_flange, HeldJoint(arm, ways[0])) if ways else None
