"""The self-motions through a posture: as curves of postures that hold the tool where it is.

Idea: null directions of the Jacobian at the posture are where self-motions can begin. A joint
without any effect is one alone; else, with one null direction left, the curve is followed along it
both ways. Where there are more, joints are held until one is left: where curves cross each of them
keeps some joint still, as a rule, and of a surface of self-motions one curve is told.

Source: Burdick 1989, On the inverse kinematics of redundant manipulators: characterization of the
self-motion manifolds; following in kinematics/inverse/continuation.py.

Not covered: travel (kinematics/inverse/families.py); of curves that cross, those on which every
joint moves.
"""

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import combinations, islice

import numpy as np
from numpy.typing import NDArray

from kinematics.arm import Arm
from kinematics.inverse.continuation import CLOSED, corrected, follow
from kinematics.inverse.descent import gap_at
from kinematics.inverse.descent_arms import lines_of, no_bounds, slopes_of
from kinematics.inverse.descent_arrays import desk_for
from kinematics.inverse.screws import screws_of
from kinematics.inverse.tolerances import (
    FAMILY_MEETS,
    FAMILY_MOVES,
    FAMILY_NULL,
    SAME_FAMILY,
    SHORTEST_FAMILY,
)
from kinematics.kernels.compiler import for_kernel
from kinematics.table import FloatArray

_POINTS = 1500
"""Points along a curve, at most 0.1 apart: 24 whole turns of one joint."""
_CURVES = 12
"""Ways of holding joints that are tried where several self-motions cross."""


@dataclass(frozen=True)
class Curve:
    """Points (k, joints) of a self-motion, from its posture at ``start`` both ways.

    Closed curves end at their first point plus ``winding`` (joints,), whole turns.
    """

    points: FloatArray
    start: int
    closed: bool
    held: NDArray[np.bool_]
    moving: tuple[int, ...]

    @property
    def winding(self) -> FloatArray:
        """Whole turns that each joint makes along the curve, (joints,), rad."""
        winding: FloatArray = self.points[-1] - self.points[0]
        return winding

    def lies_on(self, other: "Curve", turning: NDArray[np.bool_]) -> bool:
        """Return whether this curve's posture is a point of another that moves the same joints.

        Postures whole turns apart are one; distance from the straight line between points.
        """
        if self.moving != other.moving or len(other.points) < 2:
            return False
        off = self.points[self.start] - other.points[:-1]
        off -= np.where(turning, 2.0 * np.pi * np.rint(off / (2.0 * np.pi)), 0.0)
        steps = np.diff(other.points, axis=0)
        share = np.clip((off * steps).sum(axis=1) / (steps * steps).sum(axis=1), 0.0, 1.0)
        return bool(np.linalg.norm(off - share[:, None] * steps, axis=1).min() < SAME_FAMILY)


class SelfMotions:
    """One arm, tool and target, and the curves that start from postures on it."""

    def __init__(self, arm: Arm, tool_in_flange: FloatArray, task: int, target: FloatArray) -> None:
        screws = screws_of(arm, tool_in_flange)
        self._task = task
        self.turning = arm.revolute_joints
        self.scale = np.where(self.turning, 1.0, screws.length)
        self._lines = lines_of(screws, arm)
        self._anywhere = no_bounds(arm)
        self._desk = desk_for(screws.rows, arm.joint_count, 0)
        self._asked = for_kernel(screws.scaled(target))
        self._target = self._asked

    def curves_from(self, q: FloatArray) -> Iterator[Curve]:
        """Yield the self-motions through scaled joint values (joints,)."""
        self._stand_at(q)
        slopes = self._slopes(q)
        idle = np.linalg.norm(slopes, axis=0) < FAMILY_NULL
        for joint in np.flatnonzero(idle):
            yield from self._curve(q, ~np.eye(len(q), dtype=bool)[joint])
        spare = _nullity(slopes[:, ~idle])
        if spare < 2:
            if spare:
                yield from self._curve(q, idle)
            return
        # Where more curves cross here than the arm has joints to spare, each is looked for; on a
        # surface of self-motions the first one stands for all.
        aside = q + 0.1 * np.cos(np.arange(1.0, len(q) + 1))
        crossing = spare > _nullity(self._slopes(aside)[:, ~idle])
        ways = combinations(np.flatnonzero(~idle)[::-1], spare - 1)
        for held_too in islice(ways, _CURVES):
            held = idle.copy()
            held[list(held_too)] = True
            if _nullity(slopes[:, ~held]) != 1:
                continue
            found = list(self._curve(q, held))
            yield from found
            if found and not crossing:
                return

    def _stand_at(self, q: FloatArray) -> None:
        """Take as target what is asked for, or the posture's own place where that is not met."""
        arguments = (self._lines, self._anywhere, self._desk, self._task, 1.0)
        off = gap_at(*arguments, self._asked, q)
        self._target = self._asked if off < FAMILY_MEETS**2 else self._desk.pose.copy()

    def _slopes(self, q: FloatArray) -> FloatArray:
        return slopes_of(self._lines, self._anywhere, self._task, q)

    def _curve(self, q: FloatArray, held: NDArray[np.bool_]) -> Iterator[Curve]:
        """Yield the curve on which the joints not held move, if there is one."""
        free = np.flatnonzero(~held)
        first = np.zeros(len(q))
        first[free] = np.linalg.svd(self._slopes(q)[:, free])[2][-1]
        ahead, end = self._follow(q, held, first)
        points, start = ahead, 0
        if end != CLOSED:
            behind, _ = self._follow(q, held, -first)
            points, start = np.concatenate([behind[:0:-1], ahead]), len(behind) - 1
        length = np.linalg.norm(np.diff(points, axis=0), axis=1).sum()
        if end != CLOSED and length < SHORTEST_FAMILY:
            return
        moving = tuple(int(j) for j in np.flatnonzero(np.ptp(points, axis=0) > FAMILY_MOVES))
        yield Curve(points, start, end == CLOSED, held, moving)

    def _follow(
        self, q: FloatArray, held: NDArray[np.bool_], first: FloatArray
    ) -> tuple[FloatArray, int]:
        points = np.empty((_POINTS, len(q)))
        points[0] = q
        arguments = (self._lines, self._anywhere, self._desk, self._task, self._target)
        count, end = follow(*arguments, held, first, points)
        return points[:count], end

    def between(
        self, curve: Curve, first: FloatArray, second: FloatArray, share: float
    ) -> FloatArray:
        """Return the point of a curve abreast of a point of the line between two of its points."""
        along = second - first
        size = np.linalg.norm(along)
        point = first + share * along
        if size > 0.0:
            arguments = (self._lines, self._anywhere, self._desk, self._task, self._target)
            corrected(*arguments, curve.held, along / size, point, np.empty_like(point))
        return point


def _nullity(slopes: FloatArray) -> int:
    """Return how many independent motions of the joints move nothing, to first order."""
    values = np.linalg.svd(slopes, compute_uv=False)
    return int(slopes.shape[1] - (values > FAMILY_NULL).sum())
