"""Turns said in other words: fewer of them, all about fixed axes, all about current axes.

A fixed turn stands on the left of the product, a current one on the right, so turns of different
kinds never disturb each other: ``F2 F1 start C1 C2``, in whatever order they were mixed. All
rewriting follows from that. Left out: making the turns (rotation_steps).
"""

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import ArrayLike

from kinematics.number_checks import FloatArray
from kinematics.rotation_steps import RotationStep, settled
from kinematics.tolerances import HALF_TURN_NOISE, NO_TURN, SAME_AXIS

_EPSILON = float(np.finfo(np.float64).eps)


@dataclass(frozen=True, slots=True)
class RewrittenSteps:
    """Three ways to say the same turns; each leads from the same start to the same orientation.

    Attributes
    ----------
    merged : neighbours about one axis made one, turns by nothing left out.
    all_fixed, all_current : the merged ones, all about fixed or all about current axes.
    """

    merged: tuple[RotationStep, ...]
    all_fixed: tuple[RotationStep, ...]
    all_current: tuple[RotationStep, ...]


def rewritten(start: ArrayLike, steps: Sequence[RotationStep]) -> RewrittenSteps:
    """Return turns in fewer words, all about fixed axes and all about current axes.

    Turns of one kind with only turns of the other between them are neighbours, and so are the
    first fixed and the first current turn if ``start`` carries one axis into the other. Angles that
    were added come out in (-pi, pi].

    Parameters
    ----------
    start : (3, 3), the orientation before the first turn.
    steps : in the order they are made.

    Returns
    -------
    rewritten : each list leads from ``start`` to the same orientation within some 1e-15 a turn.

    Source
    ------
    ``R Rot(a) = Rot(R a) R``: a turn about a current axis is one about where the axis stands;
    Craig, Introduction to Robotics, chapter 2, on fixed and Euler angles.

    Examples
    --------
    >>> z, x = (0.0, 0.0, 1.0), (1.0, 0.0, 0.0)
    >>> turns = [(z, 0.5, False), (x, 0.2, True), (z, 0.25, False)]
    >>> found = rewritten(np.eye(3), [RotationStep(*turn) for turn in turns])
    >>> [(step.axis, step.angle) for step in found.merged]
    [((0.0, 0.0, 1.0), 0.75), ((1.0, 0.0, 0.0), 0.2)]
    >>> [step.axis for step in found.all_fixed], [step.axis for step in found.all_current]
    ([(0.0, 0.0, 1.0), (1.0, 0.0, 0.0)], [(1.0, 0.0, 0.0), (0.0, 0.0, 1.0)])
    """
    at_start = np.asarray(start, dtype=np.float64)
    numbered = [_Placed(place, step, abs(step.angle)) for place, step in enumerate(steps)]
    fixed = _joined(each for each in numbered if each.step.about_fixed)
    current = _joined(each for each in numbered if not each.step.about_fixed)
    _join_across(at_start, fixed, current)
    about_fixed = [each.step for each in fixed]
    about_current = [each.step for each in current]
    return RewrittenSteps(
        merged=tuple(each.step for each in sorted((*fixed, *current), key=_place_of)),
        # What was nearest to the start on its right is made first on its left, and so on outward.
        all_fixed=(
            *(_carried(at_start, step, True) for step in reversed(about_current)),
            *about_fixed,
        ),
        all_current=(
            *(_carried(at_start.T, step, False) for step in reversed(about_fixed)),
            *about_current,
        ),
    )


@dataclass(frozen=True, slots=True)
class _Placed:
    """A turn, the place it was first made at, and the size of all angles that went into it."""

    place: int
    step: RotationStep
    size: float

    @property
    def is_none(self) -> bool:
        """Whether nothing turns, but for the rounding of the angles that went into it."""
        return abs(_folded(self.step.angle)) <= min(_EPSILON * self.size, NO_TURN)

    def plus(self, other: "_Placed", sign: float) -> "_Placed":
        """This turn and another about the same line."""
        # Whole turns are taken off first: a large angle would cost a small one its digits.
        angle = _folded(_folded(self.step.angle) + sign * _folded(other.step.angle))
        return _Placed(self.place, replace(self.step, angle=angle), self.size + other.size)


def _place_of(each: _Placed) -> int:
    return each.place


def _joined(placed: Iterable[_Placed]) -> list[_Placed]:
    """Turns of one kind, neighbours about one line made one; what is left never meets another."""
    kept: list[_Placed] = []
    for each in placed:
        if kept and (sign := _same_line(kept[-1].step.axis, each.step.axis)):
            each = kept.pop().plus(each, sign)
        if not each.is_none:
            kept.append(each)
    return kept


def _join_across(start: FloatArray, fixed: list[_Placed], current: list[_Placed]) -> None:
    """Make one of the first turns of both kinds where the start carries one axis into the other."""
    while fixed and current:
        first, second = fixed[0], current[0]
        sign = _same_line(first.step.axis, tuple((start @ second.step.axis).tolist()))
        if not sign:
            return
        keeps, gives = (fixed, current) if first.place < second.place else (current, fixed)
        keeps[0] = keeps[0].plus(gives.pop(0), sign)
        if not keeps[0].is_none:
            return  # neighbours of one kind had different axes, so nothing else can meet it
        keeps.pop(0)


def _same_line(axis: Sequence[float], other: Sequence[float]) -> float:
    """1.0 for axes that are one, -1.0 for opposite ones, else 0.0."""
    (x, y, z), (u, v, w) = axis, other
    if math.hypot(y * w - z * v, z * u - x * w, x * v - y * u) > SAME_AXIS:
        return 0.0
    return 1.0 if x * u + y * v + z * w > 0.0 else -1.0


def _carried(into: FloatArray, step: RotationStep, about_fixed: bool) -> RotationStep:
    """The same turn about an axis told in other axes."""
    return settled(into @ step.axis, step.angle, about_fixed=about_fixed)


def _folded(angle: float) -> float:
    """The angle in (-pi, pi]; one that is there already stays to the last digit."""
    if -math.pi < angle <= math.pi:
        return angle
    folded = math.atan2(math.sin(angle), math.cos(angle))
    return math.pi if folded <= HALF_TURN_NOISE - math.pi else folded
