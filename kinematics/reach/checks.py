"""Whether an arm gets to targets, whatever each of them leaves open.

``Reacher`` is made once for an arm with a tool; what its geometry asks for is looked at when the
first target of a freedom comes. Targets are sorted by freedom, each kind is answered together, and
the answers are put back in the order of the targets. All it does is in arrays, so that a single
target of a controller and ten thousand of a planner take the same way.

Source: none. Not covered: how each kind is answered (answers.py, spins.py).
"""

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from kinematics.arm import Arm
from kinematics.errors import KinematicsError
from kinematics.findings import Finding
from kinematics.inverse.measured import DIRECTION, POSE, POSITION
from kinematics.kernels.compiler import for_kernel
from kinematics.reach.answers import Answerer
from kinematics.reach.cones import cone_of
from kinematics.reach.one_target import OneTarget
from kinematics.reach.spins import spin_of
from kinematics.reach.targets import (
    CONE,
    FREEDOMS,
    NONE,
    ORIENTATION,
    SPIN,
    Checks,
    Family,
    Reason,
    Targets,
)
from kinematics.reach.verdicts import Ranking
from kinematics.reach.ways import Asked, Basis, Way
from kinematics.table import FloatArray


class Reacher:
    """Tells whether targets can be reached by one arm with one tool.

    Answers name sides as seen in the world, so that arms whose bases are turned differently need
    one each. Safe to be used by several threads.

    Raises
    ------
    KinematicsError : the arm has none.

    Examples
    --------
    >>> from kinematics.reach.targets import Target
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> turning, sliding = (Row(kind, 0.3, 0.0, 0.0, 0.0) for kind in JointKind)
    >>> arm = Arm("four", Table(Convention.STANDARD, (turning, turning, sliding, turning)))
    >>> pose = np.eye(4)
    >>> pose[:3, 3] = [0.9, 0.3, 0.1]
    >>> checks = Reacher(arm, np.eye(4)).check(Targets.of([Target(pose)]))
    >>> for branch in sorted(checks.branch):
    ...     print(checks.branches[branch])
    elbow to the left, seen from above
    elbow to the right, seen from above
    """

    def __init__(self, arm: Arm, tool_in_flange: FloatArray) -> None:
        if not arm.joint_count:
            raise KinematicsError(
                "the arm has no joints, so it reaches one place only",
                where=("arm",),
                value=arm.name,
                way_out="ask for its pose",
            )
        self.arm, self.tool_in_flange = arm, for_kernel(tool_in_flange)
        self._ranking = Ranking(arm, self.tool_in_flange)
        self._answerers: dict[str, Answerer] = {}

    def check(
        self,
        targets: Targets,
        *,
        best_only: bool = False,
        near: FloatArray | None = None,
        at_once: bool = False,
    ) -> Checks:
        """Return verdicts and solutions of targets, in their order.

        Parameters
        ----------
        best_only : tell the best posture alone of each target within travel.
        near : (joints,), rank postures by nearness to these joint values instead of by margin.
        at_once : give up rather than take milliseconds, as singular targets do.

        Raises
        ------
        TakesLonger : it was given up.
        """
        asked = Asked(best_only, near, at_once)
        freedoms = set(targets.freedom.tolist()) or {NONE}
        if len(freedoms) == 1:
            return self._of_freedom(freedoms.pop(), targets, asked)
        parts = []
        for freedom in sorted(freedoms):
            which = np.flatnonzero(targets.freedom == freedom)
            parts.append((which, self._of_freedom(freedom, targets.only(which), asked)))
        return _put_together(parts)

    @cached_property
    def one_target(self) -> OneTarget | None:
        """What answers for one pose at once where that is plain; None for most arms."""
        return self._answerer(POSE).one_target

    def methods(self, targets: Targets) -> tuple[Basis, ...]:
        """Return what answers to targets rest on, one for each freedom that occurs."""
        return tuple(self._way(freedom).basis for freedom in sorted(set(targets.freedom.tolist())))

    def estimated_seconds(self, targets: Targets) -> float:
        """Return about how long ``check`` takes, where one target in ten is out of reach."""
        counts = np.bincount(targets.freedom, minlength=len(FREEDOMS)).tolist()
        return math.fsum(
            count * self._way(freedom).seconds for freedom, count in enumerate(counts) if count
        )

    def answerer_of(self, freedom: int) -> Answerer:
        """Return what answers for poses, or for places (ORIENTATION), without any scan."""
        return self._answerer(POSITION if freedom == ORIENTATION else POSE)

    def _answerer(self, task: str) -> Answerer:
        answerer = self._answerers.get(task)
        if answerer is None:
            answerer = self._answerers.setdefault(task, Answerer(self._ranking, task))
        return answerer

    @cached_property
    def _way_of_spin(self) -> Way:
        """A closed form that leaves the turn free, a ring of poses, or a search."""
        free, poses = self._answerer(DIRECTION), self._answerer(POSE)
        return spin_of(poses, free)

    @cached_property
    def _way_of_cone(self) -> Way:
        return cone_of(self._answerer(POSE), self._answerer(DIRECTION), self._way_of_spin)

    def _way(self, freedom: int) -> Way:
        if freedom == SPIN:
            return self._way_of_spin
        if freedom == CONE:
            return self._way_of_cone
        return self.answerer_of(freedom)

    def _of_freedom(self, freedom: int, targets: Targets, asked: Asked) -> Checks:
        return self._way(freedom).answer(targets, asked)


@dataclass(frozen=True, eq=False)
class _Words:
    """What is said of targets that were answered in parts: part, and place in it, of each."""

    parts: tuple[Checks, ...]
    part: NDArray[np.intp]
    place: NDArray[np.intp]

    def reason(self, index: int) -> Reason | None:
        return self.parts[int(self.part[index])].reason_of(int(self.place[index]))

    def families(self, index: int) -> tuple[Family, ...]:
        return self.parts[int(self.part[index])].families_of(int(self.place[index]))

    def findings(self, index: int) -> tuple[Finding, ...]:
        return self.parts[int(self.part[index])].findings_of(int(self.place[index]))


def _put_together(parts: list[tuple[NDArray[np.intp], Checks]]) -> Checks:
    """Return the answers of all parts in the order of their targets."""
    which = np.concatenate([which for which, _ in parts])
    order = np.argsort(which, kind="stable")
    all_of = [checks for _, checks in parts]
    sizes = np.concatenate([np.diff(checks.offsets) for checks in all_of])
    starts = np.concatenate([[0], np.cumsum(sizes)])[:-1]
    offsets = np.concatenate([[0], np.cumsum(sizes[order])]).astype(np.intp)
    # Solution p of target i stands at its start among all, further by p.
    within = np.arange(offsets[-1]) - np.repeat(offsets[:-1], sizes[order])
    at = np.repeat(starts[order], sizes[order]) + within

    words = _Words(
        tuple(all_of),
        np.concatenate([np.full(len(checks), p) for p, checks in enumerate(all_of)])[order],
        np.concatenate([np.arange(len(checks)) for checks in all_of])[order],
    )
    return Checks(
        np.concatenate([checks.verdict for checks in all_of])[order],
        np.concatenate([checks.proof for checks in all_of])[order],
        offsets,
        np.concatenate([checks.found for checks in all_of])[order],
        np.concatenate([checks.joint_values for checks in all_of])[at],
        np.concatenate([checks.margin for checks in all_of])[at],
        np.concatenate([checks.outside_working for checks in all_of])[at],
        np.concatenate([checks.position_error for checks in all_of])[at],
        np.concatenate([checks.angle_error for checks in all_of])[at],
        np.concatenate([checks.branch for checks in all_of])[at],
        all_of[0].branches,
        words,
    )
