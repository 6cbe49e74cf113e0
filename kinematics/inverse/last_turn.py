"""Few joints of which the last turns: the others bring a point of its axis to its place.

Idea: turning about its axis a joint leaves the points of that axis where they are. So one of them
is carried by the joints before it alone, and where a target wants it is known: up to three joints
for a place, all ways in closed form (regional_arm.py). What turn is then left, the last joint makes
as well as it can, and how far that is off is measured. Four joints that turn about any axes are
answered so, three or two whose axes are parallel (planar arms, in any plane), and by the inverse
motion whoever has a turning joint first. Where the spin about tool z is left open, the point must
lie on tool z, too.

Source: Pieper 1968 does so with a wrist of three axes; with one axis derived here.
Not covered: arms that slide first and last (a search answers); poses that are met a little off
everywhere, which compromises.py finds from these.
"""

from dataclasses import dataclass, replace

import numpy as np

from kinematics.inverse.compromises import compromises, each_row
from kinematics.inverse.found import Found
from kinematics.inverse.landing import land_all
from kinematics.inverse.measured import DIRECTION, errors_of
from kinematics.inverse.regional_arm import RegionalArm, regional_of
from kinematics.inverse.screws import Screws
from kinematics.inverse.tolerances import SEARCH_RELAXED
from kinematics.kernels.compiler import for_kernel
from kinematics.table import FloatArray
from kinematics.tolerances import AXES_MEET, AXES_PARALLEL
from kinematics.transforms import inverse

_ALONG = (0.0, 0.3, -0.3)
"""Where on its axis a point is tried, from the foot of the tool, shares of the length: at the foot
what is off at the tool is least; but the joint before may have it on its own axis."""


@dataclass(frozen=True)
class LastTurnGeometry:
    """What the answers rest on, in words."""

    say: str


@dataclass(frozen=True, eq=False)
class LastTurn:
    """A solver for two to four rows of which the last turns; or the first, read backwards.

    Attributes
    ----------
    screws : the arm; chain : the same, or turned round. point : (3,), that is carried, over the
        length. inner : solves for it. task : as in measured.py.
    """

    screws: Screws
    chain: Screws
    backwards: bool
    point: FloatArray
    inner: RegionalArm
    task: str
    proof: str = "closed-form"

    @property
    def geometry(self) -> LastTurnGeometry:
        """What it rests on."""
        last = 1 if self.backwards else self.screws.rows
        return LastTurnGeometry(
            f"a point of axis {last} is brought to its place by the other joints in closed form, "
            f"and joint {last} turns what is left"
        )

    def solve(self, targets: FloatArray) -> Found:
        """Return all motions that bring the point to its place, errors measured by the task."""
        goals = self._goals(targets)
        found = self.inner.solve(self._places(goals))
        motions = self._turned(found.motions, goals[found.target])
        position, angle = errors_of(self.screws, motions, targets, found.target, self.task)
        return replace(
            found,
            motions=motions,
            position_error=position,
            angle_error=angle,
            # By how much the point falls short is not by how much the tool does.
            stage=np.zeros_like(found.stage),
            nearest=np.zeros((len(targets), self.screws.rows)),
        )

    def nearest(self, targets: FloatArray) -> FloatArray:
        """Return row motions (m, rows) that bring the tool near, downhill from the point's best."""
        goals = self._goals(targets)
        motions = self._turned(self.inner.nearest(self._places(goals)), goals)
        weights = np.tile([self.screws.length, 1.0], (len(motions), 1))
        every_row = each_row(self.screws.rows)
        return compromises(self.screws, every_row, motions, targets, weights, self.task)

    def _goals(self, targets: FloatArray) -> FloatArray:
        """Return what the product of the chain's motions must be, (m, 4, 4), lengths scaled."""
        motion: FloatArray = self.screws.scaled(targets) @ inverse(self.screws.tool_at_zero)
        return inverse(motion) if self.backwards else motion

    def _places(self, goals: FloatArray) -> FloatArray:
        """Return poses with the place of the point, (m, 4, 4), metres."""
        poses = goals.copy()
        poses[:, :3, 3] += goals[:, :3, :3] @ self.point
        poses[:, :3, 3] *= self.screws.length
        return poses

    def _turned(self, motions: FloatArray, goals: FloatArray) -> FloatArray:
        """Return motions (k, rows) of the arm: those of all but the last row, and its turn."""
        others, last = motions.shape[1], self.chain.axis[-1]
        poses = np.empty((len(motions), 4, 4))
        scale = np.where(self.chain.prismatic[:-1], self.chain.length, 1.0)
        land_all(
            for_kernel(self.chain.axis[:others]),
            for_kernel(self.chain.point[:others]),
            self.chain.prismatic[:others],
            np.eye(4),
            for_kernel(motions / scale),
            poses,
        )
        left = poses[:, :3, :3].transpose(0, 2, 1) @ goals[:, :3, :3]
        angles = self._spun(left) if self.task == DIRECTION else _about(last, left)
        whole = np.column_stack([motions, angles])
        return whole[:, ::-1] if self.backwards else whole

    def _spun(self, left: FloatArray) -> FloatArray:
        """Return the turn that brings tool z where the rotations left (k, 3, 3) bring it."""
        last, z = self.chain.axis[-1], self.screws.tool_at_zero[:3, 2]
        wanted = left @ z
        sine, cosine = wanted @ np.cross(last, z), wanted @ (z - (last @ z) * last)
        turned: FloatArray = np.arctan2(sine, cosine)
        return turned


def _about(axis: FloatArray, left: FloatArray) -> FloatArray:
    """Return the angles about an axis nearest to rotations (k, 3, 3): the largest trace."""
    pairs = ((2, 1), (0, 2), (1, 0))
    skew = np.stack([left[:, i, j] - left[:, j, i] for i, j in pairs], axis=1)
    along = np.einsum("i,kij,j->k", axis, left, axis)
    angles: FloatArray = np.arctan2(skew @ axis, np.trace(left, axis1=1, axis2=2) - along)
    return angles


def last_turn_of(screws: Screws, task: str) -> LastTurn | None:
    """Return the solver for an arm's poses, or places and directions; None where none serves.

    Examples
    --------
    A planar arm of three joints, in the plane of x and y.

    >>> axes = np.tile([0.0, 0.0, 1.0], (3, 1))
    >>> points, tool = np.array([[0.0, 0, 0], [0.4, 0, 0], [0.8, 0, 0]]), np.eye(4)
    >>> tool[0, 3] = 1.0
    >>> solver = last_turn_of(Screws(axes, points, np.zeros(3, bool), tool, 1.0), "pose")
    >>> target = np.eye(4)[None]
    >>> target[0, :2, 3] = 0.6, 0.4
    >>> np.degrees(solver.solve(target).motions).round(6) + 0.0
    array([[ 90., -90.,   0.],
           [  0.,  90., -90.]])
    """
    if not 2 <= screws.rows <= 4:
        return None
    for backwards in (False, True):
        if backwards and task == DIRECTION:
            break  # where tool z is at the other end says nothing of the first axis's points
        chain = _turned_round(screws) if backwards else screws
        if chain.prismatic[-1]:
            continue
        for point in _points(chain, screws, task):
            carried = np.eye(4)
            carried[:3, 3] = point
            inner = regional_of(_without_last(chain, carried))
            if inner is not None:
                relaxed = replace(inner, slack=SEARCH_RELAXED)
                return LastTurn(screws, chain, backwards, point, relaxed, task)
    return None


def _turned_round(screws: Screws) -> Screws:
    """Return the rows of the inverse motion: from the last to the first, each the other way."""
    return Screws(
        np.ascontiguousarray(-screws.axis[::-1]),
        np.ascontiguousarray(screws.point[::-1]),
        np.ascontiguousarray(screws.prismatic[::-1]),
        np.eye(4),
        screws.length,
    )


def _without_last(chain: Screws, tool: FloatArray) -> Screws:
    return Screws(chain.axis[:-1], chain.point[:-1], chain.prismatic[:-1], tool, chain.length)


def _points(chain: Screws, screws: Screws, task: str) -> list[FloatArray]:
    """Return points of the last axis whose place a target tells."""
    axis, on_axis = chain.axis[-1], chain.point[-1]
    tool, z = screws.tool_at_zero[:3, 3], screws.tool_at_zero[:3, 2]
    if task != DIRECTION:
        foot = on_axis + ((tool - on_axis) @ axis) * axis
        return [foot + far * axis for far in _ALONG]
    across = np.cross(axis, z)
    size, away = float(across @ across), tool - on_axis
    if size < AXES_PARALLEL**2 or abs(away @ across) > AXES_MEET * np.sqrt(size):
        return []
    return [on_axis + axis * float(np.cross(away, z) @ across) / size]
