"""Turns made one after the other, about axes that stand still or about those that move along.

Left out: the same turns in other words (rewritten_steps), forms of orientations
(orientation_forms).
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from kinematics.errors import InvalidOrientation, KinematicsError, TooManySteps
from kinematics.number_checks import FloatArray, checked_numbers
from kinematics.rotations import angle_of, rotation_about, rotation_vector_of
from kinematics.tolerances import HALF_TURN_NOISE, MOST_STEPS, SAME_AXIS


@dataclass(frozen=True, slots=True)
class RotationStep:
    """One turn.

    Attributes
    ----------
    axis : unit vector, in the axes that stand still or in those that move along.
    angle : rad.
    about_fixed : True when the axis is one of those that stand still (the turn pre-multiplies),
        False when it moves with what is turned (the turn post-multiplies).

    Examples
    --------
    >>> RotationStep((0.0, 0.0, 1.0), np.pi / 2, about_fixed=True).axis
    (0.0, 0.0, 1.0)
    """

    axis: tuple[float, float, float]
    angle: float
    about_fixed: bool


@dataclass(frozen=True, slots=True)
class Turn:
    """One rotation with its axis and angle.

    Attributes
    ----------
    rotation : (3, 3).
    axis : unit vector (3,), None where nothing turns.
    angle : rad, 0 to pi.
    """

    rotation: FloatArray
    axis: FloatArray | None
    angle: float

    @property
    def is_half(self) -> bool:
        """Whether it is a half turn, of which the axis against its direction does the same."""
        return self.angle >= np.pi - HALF_TURN_NOISE


def checked_step(axis: object, angle: object, *, about_fixed: bool) -> RotationStep:
    """Return one turn from outside.

    Parameters
    ----------
    axis : 3 numbers of any length but zero.
    angle : rad.
    about_fixed : see RotationStep.

    Returns
    -------
    step : its axis of length 1, exactly x, y or z where it is one of them within SAME_AXIS; the
        angle then turns about the positive axis.

    Raises
    ------
    InvalidOrientation : an axis of length zero, a wrong count, no number.
    NotFinite, OutOfRange : in axis or angle. ``where`` begins with ``axis`` or ``angle``.

    Source
    ------
    Euler's rotation theorem.

    Examples
    --------
    >>> checked_step([0, 0, -2], 0.5, about_fixed=True)
    RotationStep(axis=(0.0, 0.0, 1.0), angle=-0.5, about_fixed=True)
    """
    try:
        direction = checked_numbers(axis, (3,), "a rotation axis")
        longest = np.abs(direction).max()
        if longest == 0.0:
            raise InvalidOrientation(
                "a rotation axis has length zero",
                value=direction.tolist(),
                way_out="give a direction with at least one component that is not 0",
            )
    except KinematicsError as error:
        raise error.below("axis") from None
    try:
        turn = float(checked_numbers(angle, (), "an angle"))
    except KinematicsError as error:
        raise error.below("angle") from None
    return settled(direction / longest, turn, about_fixed=about_fixed)


def settled(direction: FloatArray, angle: float, *, about_fixed: bool) -> RotationStep:
    """Return a turn with an axis of length 1, named where it can be.

    Parameters
    ----------
    direction : (3,), of any length but zero.
    angle : rad.
    about_fixed : see RotationStep.

    Returns
    -------
    step : exactly about x, y or z where the direction is one of them, or opposite, within
        SAME_AXIS; the angle is then about the positive axis.

    Source
    ------
    A turn about an axis is the opposite turn about its opposite.

    Examples
    --------
    >>> settled(np.array([0.0, -3.0, 1e-16]), 0.5, about_fixed=False)
    RotationStep(axis=(0.0, 1.0, 0.0), angle=-0.5, about_fixed=False)
    """
    # A thousand turns come one by one, and for three numbers plain floats are ten times as fast.
    given = direction.tolist()
    length = math.hypot(*given)
    x, y, z = (part / length + 0.0 for part in given)
    large = [place for place, part in enumerate((x, y, z)) if abs(part) > SAME_AXIS]
    if len(large) == 1:
        angle = angle if (x, y, z)[large[0]] > 0.0 else -angle
        x, y, z = (float(place == large[0]) for place in range(3))
    return RotationStep((x, y, z), angle + 0.0, about_fixed)


def refuse_too_many(count: int) -> None:
    """Refuse more than MOST_STEPS turns.

    Raises
    ------
    TooManySteps

    Examples
    --------
    >>> refuse_too_many(1000)
    """
    if count > MOST_STEPS:
        raise TooManySteps(
            f"{count} steps",
            value=count,
            way_out=f"give at most {MOST_STEPS} steps; start from where the first of them end",
        )


def turned(start: ArrayLike, steps: Sequence[RotationStep]) -> FloatArray:
    """Return the orientation that turns lead to.

    Parameters
    ----------
    start : (3, 3), the orientation before the first turn.
    steps : in the order they are made, at most MOST_STEPS.

    Returns
    -------
    rotation : (3, 3); each turn adds some 1e-16.

    Source
    ------
    Craig, Introduction to Robotics, chapter 2: fixed turns pre-multiply, current post-multiply.

    Examples
    --------
    >>> x, z = (1.0, 0.0, 0.0), (0.0, 0.0, 1.0)
    >>> fixed = [RotationStep(axis, np.pi / 2, about_fixed=True) for axis in (z, x)]
    >>> turned(np.eye(3), fixed)[:, 0].round(12) + 0.0  # x goes to y, then y goes to z
    array([0., 0., 1.])
    """
    rotation = np.array(start, dtype=np.float64)
    if not steps:
        return rotation
    turns = rotation_about([step.axis for step in steps], [step.angle for step in steps])
    for step, turn in zip(steps, turns, strict=True):
        rotation = turn @ rotation if step.about_fixed else rotation @ turn
    return rotation


def between(start: ArrayLike, goal: ArrayLike) -> tuple[Turn, Turn]:
    """Return the one turn that leads from an orientation to another, about fixed or current axes.

    Parameters
    ----------
    start, goal : (3, 3).

    Returns
    -------
    fixed : ``goal = fixed.rotation @ start``.
    current : ``goal = start @ current.rotation``; the same angle, and the same axis as seen in
        the axes of ``start``.

    Source
    ------
    Euler's rotation theorem.

    Examples
    --------
    >>> fixed, current = between(rotation_about([0, 0, 1], 0.5), rotation_about([0, 0, 1], 0.75))
    >>> round(fixed.angle, 12), current.axis.round(12).tolist()
    (0.25, [0.0, 0.0, 1.0])
    """
    before, after = np.asarray(start, dtype=np.float64), np.asarray(goal, dtype=np.float64)
    return _turn(after @ before.T), _turn(before.T @ after)


def _turn(rotation: FloatArray) -> Turn:
    angle = float(angle_of(rotation))
    if angle <= HALF_TURN_NOISE:  # an axis read from rounding would be none
        return Turn(rotation, None, angle)
    vector = rotation_vector_of(rotation)
    return Turn(rotation, vector / np.linalg.norm(vector), angle)
