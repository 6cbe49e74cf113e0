"""How near axis 1 and how far from it a point can be at all: proved by cutting travel into boxes.

Idea: from the middle of a box of joint values the point moves as its Jacobian says, but for a rest
that the squares of the box's widths bound. So no posture of the box is farther from the axis than
that allows. Boxes that cannot reach beyond the best posture known are done with, the others are
halved, those first that promise most. What is left when the time is over is how far the proof and
the posture are apart; it is told, not hidden.

Source: bounds of first and second order on boxes, as in inverse/box_tests.py: the second derivative
of a point by joints s <= r is no longer than its distance from axis r (1 for a slide r, 0 where s
slides); best first as in Land and Doig 1960. Not covered: rounding, some 1e-15 of the arm.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from kinematics.envelope.pair_of_arm import PointMotion
from kinematics.jacobian import motion_of
from kinematics.number_checks import FloatArray
from kinematics.reach.bounds import shortest_way
from kinematics.reach.sample_summary import FirstAxis

BOXES = 2**18
"""Looked at for each of the two radii, in a third of a second, unless they are proved before: an
arm that can stretch out takes one, two joints some thousands, five that cannot stretch out all."""

_ROUNDING = 1e-3
"""Share of a slack: what is proved to it is off by it, and rounding."""

_AT_ONCE = 2048
"""Boxes halved together: their arrays stay within a processor's fast memory."""


@dataclass(frozen=True)
class ProvedRadii:
    """Radii that a point reaches, and those it is proved not to pass; m.

    Attributes
    ----------
    least, greatest : reached. below, above : no posture within travel has a radius less than the
        one, or greater than the other.
    """

    least: float
    greatest: float
    below: float
    above: float

    @property
    def gap(self) -> float:
        """What is neither reached nor ruled out, m: the wider of both."""
        return max(self.least - self.below, self.above - self.greatest)

    def told_resolution(self, slack: float) -> float | None:
        """Return the gap as the resolution of a view, m; None of one that is no wider than slack.

        Examples
        --------
        >>> ProvedRadii(1.0, 2.0, 1.0, 2.25).told_resolution(1e-9)
        0.25
        """
        return None if self.gap <= slack * (1.0 + _ROUNDING) else self.gap


class AskedRadii:
    """The proof of radii that are reached: it follows from these alone, and has no pieces.

    Examples
    --------
    >>> from kinematics.arm import Arm
    >>> from kinematics.envelope.inquiry import inquiry_of
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = [Row(JointKind.REVOLUTE, a, 0.0, 0.0, 0.0) for a in (0.5, 0.3)]
    >>> inquiry = inquiry_of(Arm("flat", Table(Convention.STANDARD, tuple(rows))), np.eye(4))
    >>> asked = AskedRadii(inquiry.motion, inquiry.axis, (0.2, 0.8), 1e-9)
    >>> asked.told([]).gap < 1e-9, asked.unasked().gap
    (True, 0.0)
    """

    pieces, places = 0, 0

    def __init__(
        self, motion: PointMotion, axis: FirstAxis, reached: tuple[float, float], slack: float
    ) -> None:
        self._motion, self._axis, self._reached, self._slack = motion, axis, reached, slack

    def piece(self, number: int) -> None:
        """There is none."""
        raise IndexError(number)

    def told(self, _pieces: Sequence[None]) -> ProvedRadii:
        """Return what is proved of the radii reached."""
        return proved_radii(self._motion, self._axis, self._reached, self._slack)

    def unasked(self) -> ProvedRadii:
        """Return the radii as if they were proved."""
        return ProvedRadii(*self._reached, *self._reached)


def proved_radii(
    motion: PointMotion,
    axis: FirstAxis,
    reached: tuple[float, float],
    slack: float,
    boxes: int = BOXES,
) -> ProvedRadii:
    """Return within which radii about axis 1 a point is proved to stay.

    Parameters
    ----------
    motion : of an arm whose joint 1 turns row 1 alone.
    reached : the least and the greatest radius known to be reached, m.
    slack : m, to which it is enough to prove them; boxes : how many may be looked at for each.

    Examples
    --------
    Links of 0.5 and 0.3 m that turn level.

    >>> from kinematics.arm import Arm
    >>> from kinematics.envelope.pair_of_arm import point_motion
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = [Row(JointKind.REVOLUTE, a, 0.0, 0.0, 0.0) for a in (0.5, 0.3)]
    >>> arm = Arm("flat", Table(Convention.STANDARD, tuple(rows)))
    >>> axis = FirstAxis(np.zeros(3), np.array([0.0, 0.0, 1.0]))
    >>> proved = proved_radii(point_motion(arm, np.eye(4)), axis, (0.2, 0.8), 1e-9)
    >>> bool(0.8 <= proved.above <= 0.8 + 1e-9), bool(0.2 - 1e-9 <= proved.below <= 0.2)
    (True, True)
    """
    far = _Radius(motion, axis, 1.0)
    near = _Radius(motion, axis, -1.0)
    least, greatest = reached
    below = least if least <= slack else -near.bound(-least, slack, boxes)
    above = far.bound(greatest, slack, boxes)
    return ProvedRadii(least, greatest, min(max(below, 0.0), least), max(above, greatest))


class _Radius:
    """Bounds on the radius in boxes of joint values.

    Parameters
    ----------
    sign : 1 for how great it is at most, -1 for how small at least, told negative.
    """

    def __init__(self, motion: PointMotion, axis: FirstAxis, sign: float) -> None:
        self._motion, self._axis, self._sign = motion, axis, sign
        rows = motion.arm.table.rows
        self._turns = np.array([row.is_revolute for row in rows])
        self._drive = np.abs(motion.arm.drive_map.matrix)
        up = axis.direction
        self._across = np.eye(3) - np.outer(up, up)
        # Axis 1 and what does not move the point across it change no radius.
        self._movers = [joint for joint in motion.movers(self._across) if joint]
        limits = motion.limits
        self._middle = 0.5 * (limits.lower + limits.upper)
        self._half = np.zeros_like(self._middle)
        self._half[self._movers] = 0.5 * (limits.upper - limits.lower)[self._movers]
        self._furthest = self._links()

    def bound(self, known: float, slack: float, boxes: int) -> float:
        """Return what the radius, times the sign, is at most.

        Parameters
        ----------
        known : such a value that is reached.
        """
        middles, halves = self._middle[None], self._half[None]
        bounds, shares = self._most(middles, halves)
        looked = 1
        while True:
            open_ = bounds > known + slack
            middles, halves = middles[open_], halves[open_]
            bounds, shares = bounds[open_], shares[open_]
            if not len(bounds):
                return known + slack
            if looked >= boxes:
                return float(bounds.max())
            order = np.argsort(-bounds, kind="stable")
            chosen, left = order[:_AT_ONCE], order[_AT_ONCE:]
            new_middles, new_halves = _halved(middles[chosen], halves[chosen], shares[chosen])
            inside = self._allowed(new_middles, new_halves)
            new_middles, new_halves = new_middles[inside], new_halves[inside]
            new_bounds, new_shares = self._most(new_middles, new_halves)
            looked += len(new_bounds)
            middles = np.concatenate([middles[left], new_middles])
            halves = np.concatenate([halves[left], new_halves])
            bounds = np.concatenate([bounds[left], new_bounds])
            shares = np.concatenate([shares[left], new_shares])

    def _allowed(self, middles: FloatArray, halves: FloatArray) -> NDArray[np.bool_]:
        """Return which boxes combined travel does not rule out whole."""
        limits = self._motion.limits
        sums = middles[:, self._movers] @ limits.weights[:, self._movers].T
        around = halves[:, self._movers] @ np.abs(limits.weights[:, self._movers]).T
        # Other joints of a sum may be anywhere in their travel.
        others = np.delete(np.arange(len(limits.lower)), self._movers)
        weights = limits.weights[:, others]
        ends = limits.lower[others], limits.upper[others]
        low = (np.where(weights > 0.0, *ends) * weights).sum(axis=1)
        high = (np.where(weights > 0.0, *ends[::-1]) * weights).sum(axis=1)
        within = (sums - around + low <= limits.cut_upper) & (
            sums + around + high >= limits.cut_lower
        )
        return np.asarray(within.all(axis=1))

    def _most(self, middles: FloatArray, halves: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return what the radius, times the sign, is at most in boxes, (count,), and how much of
        that each joint brings, (count, joints)."""
        moved = motion_of(self._motion.arm, middles, self._motion.tool_in_flange)
        points = moved.tool_in_base[:, :3, 3]
        widths = halves @ self._drive.T
        reaches = self._reaches(points, moved.axis_direction, moved.axis_point, widths)
        arms = (points - self._axis.point) @ self._across
        radii = np.sqrt((arms * arms).sum(axis=1))
        outward = arms / np.maximum(radii, 1e-300)[:, None]
        sideways = np.cross(self._axis.direction, outward)
        linear = moved.of_joints[:, :3]
        along = np.abs((outward[:, None] @ linear)[:, 0]) * halves
        aside = (np.abs((sideways[:, None] @ linear)[:, 0]) * halves).sum(axis=1)
        each = self._rests(widths, reaches)
        rest, ahead = each.sum(axis=1), along.sum(axis=1)
        first_order = _moved(widths, reaches, self._turns).sum(axis=1)
        if self._sign > 0.0:
            straight = np.hypot(radii + ahead, aside) + rest
        else:
            straight = rest + ahead - radii
        bounds = np.minimum(straight, self._sign * radii + first_order)
        if self._sign > 0.0:
            bounds = np.minimum(bounds, self._furthest[0])
        return bounds, along + halves * (each @ self._drive)

    def _reaches(
        self, points: FloatArray, directions: FloatArray, places: FloatArray, widths: FloatArray
    ) -> FloatArray:
        """Return how far the point is from each row's axis at most, anywhere in boxes; 1 of slides.

        A row's own turn does not change that distance; those beyond it bring the point no farther
        than they move it, nor than all links in line.
        """
        arms = points[:, None] - places
        off = arms - (arms * directions).sum(axis=-1)[..., None] * directions
        reaches = np.where(self._turns, np.sqrt((off * off).sum(axis=-1)), 1.0)
        beyond = np.zeros(len(points))
        for row in range(reaches.shape[1] - 1, -1, -1):
            if self._turns[row]:
                reaches[:, row] = np.minimum(reaches[:, row] + beyond, self._furthest[row])
            part = slice(row, row + 1)
            beyond += _moved(widths[:, part], reaches[:, part], self._turns[part])[:, 0]
        return reaches

    def _links(self) -> FloatArray:
        """Return how far the point is from each row's axis with all links in line; 1 of slides."""
        moved = motion_of(self._motion.arm, self._middle, self._motion.tool_in_flange)
        axes, places, goal = moved.axis_direction, moved.axis_point, moved.tool_in_base[:3, 3]
        slid = np.where(self._turns, 0.0, self._drive @ self._half)
        furthest = np.ones(len(self._turns))
        for row in np.nonzero(self._turns)[0].tolist():
            beyond = row + np.nonzero(self._turns[row:])[0]
            steps = np.diff(shortest_way(axes[beyond], places[beyond], goal), axis=0)
            furthest[row] = np.sqrt((steps * steps).sum(axis=1)).sum() + slid[row:].sum()
        return furthest

    def _rests(self, widths: FloatArray, reaches: FloatArray) -> FloatArray:
        """Return by how much the point is off its straight motion at most, as each row's part."""
        turning = np.where(self._turns, widths, 0.0)
        before = np.cumsum(turning, axis=1) - turning
        parts: FloatArray = widths * reaches * (before + 0.5 * turning)
        return parts


def _moved(widths: FloatArray, reaches: FloatArray, turns: NDArray[np.bool_]) -> FloatArray:
    """Return how far rows move a point at most: along a chord, and no farther than across."""
    chords = 2.0 * np.sin(0.5 * np.minimum(widths, np.pi))
    moved: FloatArray = np.where(turns, chords, widths) * reaches
    return moved


def _halved(
    middles: FloatArray, halves: FloatArray, shares: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Return boxes cut in two across the joint that brings most."""
    lines, joints = np.arange(len(middles)), shares.argmax(axis=1)
    narrow = halves.copy()
    narrow[lines, joints] *= 0.5
    steps = np.zeros_like(middles)
    steps[lines, joints] = narrow[lines, joints]
    return np.concatenate([middles - steps, middles + steps]), np.concatenate([narrow, narrow])
