"""Postures that bring the tool's point to its place and tool z into a cone, by search.

Idea: a cone is met anywhere within it, so each start is led to the direction in the cone that is
nearest to where it points: downhill to that direction, and, where the arm does not get there, once
more to the one nearest to where it got. That is going downhill in the distance from the cone, with
nothing new to differentiate. Starts within travel are tried one after the other, the ones that
already come near first; of the postures met the one with the best margin stays.

Source: alternating between the nearest point of a set and the nearest posture, after von Neumann's
alternating projections, 1933, applied here; the descent has its source in descent.py.
Not covered: a proof of a no; cones that a small part of travel alone leads into may be missed.
"""

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.arm import Arm
from kinematics.inverse.attempts import brought_home
from kinematics.inverse.descent import DIRECTION, POSITION, descend_all
from kinematics.inverse.descent_arrays import Room, desk_for, widened
from kinematics.inverse.iterative import Search
from kinematics.inverse.landing import land_all
from kinematics.inverse.starts import nearest_starts
from kinematics.inverse.tolerances import (
    SEARCH_ACCEPTS,
    SEARCH_STARTS,
    SEARCH_STEPS,
    SEARCH_TURN_SHARE,
    WITHIN_CONE,
)
from kinematics.kernels.best_postures import preferred
from kinematics.kernels.compiler import for_kernel
from kinematics.table import FloatArray
from kinematics.travel_limits import margin_and_outside

_AT_LEAST = 6
"""Starts made even if the first one gets there: the next may leave more of travel."""
_ROUNDS = 8
"""Directions that each start is led to, one after the other."""
_SAME_LINE = 1e-12
"""Sine of an angle between directions below which rounding would choose the way across."""


class MetCones(NamedTuple):
    """What was met: joint values (m, joints), the tool's poses there (m, 4, 4), and where, (m,)."""

    joint_values: FloatArray
    tool_in_base: FloatArray
    met: NDArray[np.bool_]


def towards(direction: FloatArray, axis: FloatArray, cone: FloatArray) -> FloatArray:
    """Return the unit directions (k, 3) nearest to given ones within cones about ``axis`` (k, 3).

    Parameters
    ----------
    direction, axis : (k, 3), unit. cone : (k,), half-angles, rad.

    Examples
    --------
    >>> up, across = np.array([[0.0, 0.0, 1.0]]), np.array([[1.0, 0.0, 0.0]])
    >>> towards(across, up, np.array([np.pi / 6])).round(6)
    array([[0.5     , 0.      , 0.866025]])
    """
    along = (direction * axis).sum(axis=1)
    across = direction - along[:, None] * axis
    size = np.linalg.norm(across, axis=1)
    angle = np.minimum(np.arctan2(size, along), cone)
    # Straight back from the axis any way is as near as another.
    least = axis[np.arange(len(axis)), np.abs(axis).argmin(axis=1)]
    other = -least[:, None] * axis
    other[np.arange(len(axis)), np.abs(axis).argmin(axis=1)] += 1.0
    across = np.where(size[:, None] > _SAME_LINE, across, other)
    across /= np.linalg.norm(across, axis=1)[:, None]
    nearest: FloatArray = np.cos(angle)[:, None] * axis + np.sin(angle)[:, None] * across
    return nearest


class ConeSearch:
    """Searches for postures within travel with tool z in a cone; of one arm with one tool."""

    def __init__(self, arm: Arm, tool_in_flange: FloatArray) -> None:
        search = Search(arm, tool_in_flange, "position+direction")
        self._arm, self._screws, self._lines = arm, search.screws, search.lines
        self._scale, self._starts = search.scale, search.within
        # What cannot be met exactly is met at the tool's point first.
        self._share = SEARCH_TURN_SHARE if search.relaxed else 1.0
        self._anywhere = widened(self._starts.room)

    def solve(self, targets: FloatArray, cones: FloatArray) -> MetCones:
        """Return a posture for each target (m, 4, 4), the tool in base, metres, and cone (m,)."""
        count, scaled = len(targets), for_kernel(self._screws.scaled(targets))
        best = MetCones(
            np.zeros((count, self._arm.joint_count)), targets.copy(), np.zeros(count, np.bool_)
        )
        scores = np.full(count, -np.inf)
        near = nearest_starts(self._starts.poses, scaled, DIRECTION, _AT_LEAST)
        for attempt in range(min(SEARCH_STARTS, len(self._starts.postures))):
            waiting = np.flatnonzero(~best.met) if attempt >= _AT_LEAST else np.arange(count)
            if not len(waiting):
                break
            first = (
                near[waiting, attempt] if attempt < _AT_LEAST else np.full(len(waiting), attempt)
            )
            q, poses, met = self._led(self._starts.postures[first], scaled[waiting], cones[waiting])
            values = q * self._scale
            score = preferred(*margin_and_outside(self._arm, values))
            better = met & (score >= 0.0) & (score > scores[waiting])
            which = waiting[better]
            scores[which], best.met[which] = score[better], True
            best.joint_values[which] = values[better]
            best.tool_in_base[which, :3, :3] = poses[better, :3, :3]
        return best

    def _led(
        self, starts: FloatArray, targets: FloatArray, cones: FloatArray
    ) -> tuple[FloatArray, FloatArray, NDArray[np.bool_]]:
        """Return where starts (k, joints) lead, the poses there, and which are in their cone."""
        q, met = starts.copy(), np.zeros(len(starts), np.bool_)
        poses, aimed = self._poses(q), targets.copy()
        axis, narrow = targets[:, :3, 2], WITHIN_CONE * cones
        for turn in range(_ROUNDS):
            left = np.flatnonzero(~met)
            if not len(left):
                break
            aimed[left, :3, 2] = towards(poses[left, :3, 2], axis[left], narrow[left])
            some, room = q[left], self._starts.room
            if not turn:
                self._downhill(self._anywhere, DIRECTION, self._share, aimed[left], some)
                some = brought_home(room, some)
            self._downhill(room, DIRECTION, self._share, aimed[left], some)
            squared = self._downhill(room, POSITION, 1.0, aimed[left], some)
            q[left], poses[left] = some, self._poses(some)
            inside = _angle(poses[left, :3, 2], axis[left]) <= cones[left]
            met[left] = inside & (squared <= SEARCH_ACCEPTS**2)
        return q, poses, met

    def _downhill(
        self, room: Room, task: int, share: float, targets: FloatArray, q: FloatArray
    ) -> FloatArray:
        """Bring scaled joint values (k, joints) downhill, in place; return squared gaps (k,)."""
        rows, joints = self._lines.drive.shape
        desk, squared = desk_for(rows, joints, len(room.least)), np.empty(len(q))
        of = np.arange(len(q))
        descend_all(self._lines, room, desk, task, share, targets, of, q, SEARCH_STEPS, 1, squared)
        return squared

    def _poses(self, q: FloatArray) -> FloatArray:
        """Return the tool at scaled joint values (k, joints), lengths as shares of the arm's."""
        lines, poses = self._lines, np.empty((len(q), 4, 4))
        motions = for_kernel(q @ lines.drive.T)
        land_all(lines.axis, lines.point, lines.prismatic, lines.tool_at_zero, motions, poses)
        return poses


def _angle(one: FloatArray, other: FloatArray) -> FloatArray:
    """Return the angles between unit directions (k, 3), (k,)."""
    across = np.linalg.norm(np.cross(one, other), axis=1)
    angle: FloatArray = np.arctan2(across, (one * other).sum(axis=1))
    return angle
