"""Families: joint motions that leave the tool where it is, as intervals within travel.

Idea: at a singular posture, or with joints to spare, a posture may be one of a continuum. From it
the curve is followed both ways (continuation.py) until it closes; what of it lies within travel is
one or more stretches, whose ends are refined to the last digits. A joint whose axis passes through
the tool's point, where only the point counts, is a family of its own. A fold, where two solutions
merge, has a null direction too, but no curve follows it: it gives none.

Source: Burdick 1989, On the inverse kinematics of redundant manipulators: characterization of the
self-motion manifolds.

Not covered: with two or more joints to spare the self-motions are a surface; one curve on it is
told, the last of the spare joints held, so its interval is what is reached at least. Slides without
travel that move against each other have no end; they are followed for some hundred lengths.
"""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from kinematics.arm import Arm
from kinematics.inverse.descent_arms import room_of
from kinematics.inverse.descent_arrays import FAR
from kinematics.inverse.iterative import TASKS
from kinematics.inverse.self_motions import Curve, SelfMotions
from kinematics.inverse.tolerances import FAMILY_RELATION, FAMILY_TRAVEL
from kinematics.kernels.best_postures import preferred
from kinematics.table import FloatArray
from kinematics.travel_limits import margin_and_outside

Stretch = list[float]

MOST_ROUNDS = 20
"""Whole turns along a curve either way, beyond the longest travel in plants."""
HALVINGS = 60
"""Of the way between two points, 0.1 apart, to find an end or a best posture on it."""


@dataclass(frozen=True)
class Relation:
    """A sum of joint values that stays the same all along a family.

    Attributes
    ----------
    say : a sentence with ``{measure}`` for the sum, so that the edge can print it in its units.
    measure : the sum, in ``unit``, rad or m.

    Examples
    --------
    >>> Relation("joint 4 + joint 6 = {measure}", 0.5, "rad").text()
    'joint 4 + joint 6 = 0.5 rad'
    """

    say: str
    measure: float
    unit: str

    def text(self) -> str:
        """Return the sentence with its value in SI units."""
        return self.say.format(measure=f"{self.measure:.6g} {self.unit}")


@dataclass(frozen=True)
class Family:
    """A continuum of solutions of one target.

    Attributes
    ----------
    free_joints : 1-based numbers of the joints that move, ascending.
    interval : from and to of the first free joint, within travel, rad or m; a whole turn where
        nothing bounds it.
    witness : (joints,), the posture with the best margin on it.
    relation : what stays the same where two joints move in proportion, else None.
    """

    free_joints: tuple[int, ...]
    interval: tuple[tuple[float, float], ...]
    witness: FloatArray
    relation: Relation | None


def families_of(
    arm: Arm,
    tool_in_flange: FloatArray,
    task: str,
    target: FloatArray,
    joint_values: FloatArray,
) -> list[Family]:
    """Return the self-motions that postures on a target belong to, each once.

    Postures may be beyond travel: what is told of their families is within it, or nothing.

    Parameters
    ----------
    task : a name of ``iterative.TASKS``.
    target : (4, 4), the tool in base, metres. A posture further from it than 1e-9 of the length
        keeps its own place instead: arms with few joints meet targets within a tolerance.
    joint_values : (k, joints), rad or m.

    Examples
    --------
    Two equal links folded back, the tool point on axis 1.

    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = (Row(JointKind.REVOLUTE, 0.3, 0.0, 0.0, 0.0),) * 2
    >>> arm = Arm("planar", Table(Convention.STANDARD, rows))
    >>> folded = np.array([[0.5, np.pi]])
    >>> family, = families_of(arm, np.eye(4), "position", np.eye(4), folded)
    >>> family.free_joints, np.degrees(family.interval).round(6)
    ((1,), array([[-180.,  180.]]))
    """
    if arm.joint_count == 0:
        return []
    motions = SelfMotions(arm, tool_in_flange, TASKS[task], target)
    stretches = _Stretches(arm, motions)
    families: list[Family] = []
    curves: list[Curve] = []
    for values in np.reshape(joint_values, (-1, arm.joint_count)):
        for curve in motions.curves_from(values / motions.scale):
            if any(curve.lies_on(known, motions.turning) for known in curves):
                continue
            curves.append(curve)
            family = stretches.told(curve)
            if family is not None:
                families.append(family)
    return families


@dataclass(frozen=True)
class _Along:
    """A joint's value in a posture, or its negative."""

    joint: int
    sign: float

    def __call__(self, posture: FloatArray) -> float:
        return float(self.sign * posture[self.joint])


class _Stretches:
    """What of the curves of one arm, tool and target lies within travel."""

    def __init__(self, arm: Arm, motions: SelfMotions) -> None:
        self._arm, self._motions = arm, motions
        self._bounds = room_of(arm, motions.scale)

    def told(self, curve: Curve) -> Family | None:
        """Return what of a curve lies within travel, or None."""
        points = self._unrolled(curve)
        inside = self._room_left(points) >= -FAMILY_TRAVEL
        if not inside.any():
            return None
        first = curve.moving[0]
        turns = bool(curve.closed and abs(curve.winding[first]) > 1.0)
        if turns and inside.all():
            stretches = [[-np.pi, np.pi]]
        else:
            runs = self._runs(curve, points, inside)
            stretches = [self._extent(curve, run, first) for run in runs]
        if turns and self._bounds.upper[first] - self._bounds.lower[first] >= FAR:
            stretches = [_within_a_turn(stretch) for stretch in stretches]
        interval = tuple(
            (float(low * self._motions.scale[first]), float(high * self._motions.scale[first]))
            for low, high in _merged(stretches)
        )
        return Family(
            free_joints=tuple(joint + 1 for joint in curve.moving),
            interval=interval,
            witness=self._witness(curve, points[inside]) * self._motions.scale,
            relation=self._relation(curve),
        )

    def _unrolled(self, curve: Curve) -> FloatArray:
        """Return a curve's points: around again for each whole turn there is travel for, or once
        around from a point beyond travel, so that no piece within travel is cut in two."""
        if not curve.closed:
            return curve.points
        bounds, winding = self._bounds, curve.winding
        spans = np.concatenate([bounds.upper - bounds.lower, bounds.most - bounds.least])
        gained = np.abs(np.concatenate([winding, bounds.weights @ winding]))
        bounded = (gained > 1.0) & (spans < FAR)
        if bounded.any():
            turns = int(np.ceil((spans[bounded] / gained[bounded]).min())) + 1
            turns = min(turns, MOST_ROUNDS)
            rounds = [curve.points[:-1] + k * winding for k in range(-turns, turns)]
            return np.concatenate([*rounds, curve.points[:1] + turns * winding])
        begin = int(np.argmin(self._room_left(curve.points)))
        return np.concatenate([curve.points[begin:-1], curve.points[: begin + 1] + winding])

    def _room_left(self, q: FloatArray) -> FloatArray:
        """Return how far scaled joint values (..., joints) are from the next bound, (...,)."""
        bounds = self._bounds
        sums = q @ bounds.weights.T
        parts = (q - bounds.lower, bounds.upper - q, sums - bounds.least, bounds.most - sums)
        left: FloatArray = np.concatenate(parts, axis=-1).min(axis=-1)
        return left

    def _runs(
        self, curve: Curve, points: FloatArray, inside: NDArray[np.bool_]
    ) -> list[FloatArray]:
        """Return the pieces of a curve within travel, with ends on its bounds."""
        padded = np.concatenate([[False], inside, [False]])
        begins, ends = (
            np.flatnonzero(~padded[:-1] & padded[1:]),
            np.flatnonzero(padded[:-1] & ~padded[1:]),
        )
        runs = []
        for begin, end in zip(begins, ends, strict=True):
            piece = [points[begin:end]]
            if begin > 0:
                piece.insert(0, self._edge(curve, points[begin], points[begin - 1])[None])
            if end < len(points):
                piece.append(self._edge(curve, points[end - 1], points[end])[None])
            runs.append(np.concatenate(piece))
        return runs

    def _edge(self, curve: Curve, within: FloatArray, beyond: FloatArray) -> FloatArray:
        """Return the last point within travel between two points of a curve, by halving."""
        low, high, last = 0.0, 1.0, within
        for _ in range(HALVINGS):
            middle = 0.5 * (low + high)
            point = self._motions.between(curve, within, beyond, middle)
            if self._room_left(point) >= 0.0:
                low, last = middle, point
            else:
                high = middle
        return last

    def _best(
        self, curve: Curve, points: FloatArray, value: Callable[[FloatArray], float], at: int
    ) -> FloatArray:
        """Return the point between the neighbours of ``points[at]`` with the largest value."""
        before, after = points[max(at - 1, 0)], points[min(at + 1, len(points) - 1)]
        low, high = 0.0, 1.0
        for _ in range(HALVINGS):
            shares = (low + (high - low) / 3.0, high - (high - low) / 3.0)
            left, right = (
                value(self._motions.between(curve, before, after, share)) for share in shares
            )
            low, high = (low, shares[1]) if left > right else (shares[0], high)
        best = self._motions.between(curve, before, after, 0.5 * (low + high))
        return best if value(best) > value(points[at]) else points[at]

    def _extent(self, curve: Curve, run: FloatArray, first: int) -> Stretch:
        """Return the least and the largest value of a joint along a piece of a curve."""
        ends = []
        for sign in (-1.0, 1.0):
            at = int(np.argmax(sign * run[:, first]))
            point = run[at]
            if 0 < at < len(run) - 1 and len(curve.moving) > 1:
                point = self._best(curve, run, _Along(first, sign), at)
            ends.append(float(point[first]))
        return ends

    def _witness(self, curve: Curve, points: FloatArray) -> FloatArray:
        """Return the posture with the best margin among points within travel, or the first one."""
        scale = self._motions.scale
        margins, outside = margin_and_outside(self._arm, points * scale)
        if not np.isfinite(margins).any():
            posture: FloatArray = curve.points[curve.start]
            return posture

        def score(q: FloatArray) -> float:
            return float(preferred(*margin_and_outside(self._arm, q * scale)))

        return self._best(curve, points, score, int(np.argmax(preferred(margins, outside))))

    def _relation(self, curve: Curve) -> Relation | None:
        """Return what stays the same where two joints move in proportion."""
        if len(curve.moving) != 2:
            return None
        one, other = curve.moving
        values = curve.points[:, [one, other]] * self._motions.scale[[one, other]]
        share = -np.ptp(values[:, 0]) / np.ptp(values[:, 1])
        share *= np.sign((values[-1] - values[0]).prod())
        sums = values[:, 0] + share * values[:, 1]
        units = self._arm.joint_units[one], self._arm.joint_units[other]
        if np.ptp(sums) > FAMILY_RELATION or units[0] != units[1]:
            return None
        size = "" if abs(abs(share) - 1.0) < FAMILY_RELATION else f"{abs(share):.6g} x "
        sign = "+" if share > 0.0 else "-"
        say = f"joint {one + 1} {sign} {size}joint {other + 1} = {{measure}}"
        return Relation(say, float(sums[curve.start]), units[0])


def _within_a_turn(stretch: Stretch) -> Stretch:
    """Return an interval of a joint without travel, its middle in (-pi, pi]."""
    turns = np.ceil((0.5 * (stretch[0] + stretch[1]) - np.pi) / (2.0 * np.pi))
    return [float(end - 2.0 * np.pi * turns) for end in stretch]


def _merged(stretches: list[Stretch]) -> list[Stretch]:
    """Return intervals in rising order, those that overlap as one."""
    merged: list[Stretch] = []
    for low, high in sorted(stretches):
        if merged and low <= merged[-1][1] + FAMILY_TRAVEL:
            merged[-1][1] = max(merged[-1][1], high)
        else:
            merged.append([low, high])
    return merged
