"""Three angles about three frame axes, fixed or current: all 24 orders by one set of formulas.

Left out: names such as ``zyx-current`` and the finding at gimbal lock (orientation_forms).
"""

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from kinematics.kernels.angle_triples import angles_of_rotations
from kinematics.kernels.compiler import for_kernel
from kinematics.number_checks import FloatArray
from kinematics.rotations import elementary_rotation
from kinematics.tolerances import HALF_TURN_NOISE, LOCK_EXACT

BoolArray = NDArray[np.bool_]


@dataclass(frozen=True, slots=True)
class AxisOrder:
    """About which axes three angles turn, one after the other.

    Attributes
    ----------
    axes : indices 0, 1, 2 of the axes in the order of the angles; neighbours differ.
    about_fixed : True when each turn is about the axes that stand still (it pre-multiplies), False
        when about the axes as the turns before left them (it post-multiplies).

    Examples
    --------
    >>> AxisOrder((0, 1, 2), about_fixed=True).as_current
    (2, 1, 0)
    """

    axes: tuple[int, int, int]
    about_fixed: bool

    @property
    def as_current(self) -> tuple[int, int, int]:
        """The axes from left to right in the product of the three elementary rotations."""
        first, middle, last = self.axes
        return (last, middle, first) if self.about_fixed else (first, middle, last)

    @property
    def first_is_last(self) -> bool:
        """Whether the first and the last turn are about the same axis."""
        return self.axes[0] == self.axes[2]


def rotation_from_angles(order: AxisOrder, angles: ArrayLike) -> FloatArray:
    """Return the rotation that three turns make together.

    Parameters
    ----------
    order : the axes.
    angles : (..., 3), rad, in the order of ``order.axes``, any finite size.

    Returns
    -------
    rotation : (..., 3, 3), entries within a few 1e-16; non-finite angles give NaN.

    Source
    ------
    Craig, Introduction to Robotics, chapter 2: fixed turns pre-multiply, current post-multiply.

    Examples
    --------
    >>> fixed_zx = rotation_from_angles(AxisOrder((2, 0, 2), True), [np.pi / 2, np.pi / 2, 0])
    >>> fixed_zx[:, 0].round(12) + 0.0  # x goes to y, then y goes to z
    array([0., 0., 1.])
    """
    triples = np.asarray(angles, dtype=np.float64)
    if order.about_fixed:
        triples = triples[..., ::-1]
    with np.errstate(invalid="ignore"):
        left, middle, right = (
            elementary_rotation(axis, triples[..., place])
            for place, axis in enumerate(order.as_current)
        )
        return np.asarray(left @ middle @ right)


def angles_of(order: AxisOrder, rotation: ArrayLike) -> FloatArray:
    """Return the three angles of a rotation in their one canonical range.

    Within LOCK_EXACT of gimbal lock the middle angle is put on the lock and the last to 0.

    Parameters
    ----------
    order : the axes.
    rotation : (..., 3, 3).

    Returns
    -------
    angles : (..., 3), rad; first and last in (-pi, pi]; middle in [-pi/2, pi/2] for three different
        axes, in [0, pi] when the first is the last. They give the rotation back within 1e-12.

    Source
    ------
    The outer angle and the middle one from the column of the innermost axis; then the outer turn is
    undone and the inner angle read from what is left, as Paul, Robot Manipulators, 1981, chapter 3,
    does it. Near lock both outer angles are uncertain, but their determined combination is not.

    Examples
    --------
    >>> angles_of(AxisOrder((2, 1, 0), False), np.eye(3))
    array([0., 0., 0.])
    """
    rotations = np.asarray(rotation, dtype=np.float64)
    i, j, k, parity = _axes_and_parity(order)
    batch = rotations.shape[:-2]
    each = for_kernel(rotations).reshape(math.prod(batch), 3, 3)
    angles, locked = np.empty((len(each), 3)), np.empty(len(each))
    angles_of_rotations(each, i, j, k, parity, order.first_is_last, LOCK_EXACT, angles, locked)
    outer, inner = angles[:, 0].copy(), angles[:, 2].copy()
    if order.about_fixed:
        first, last = inner, outer
    else:  # at lock the inner angle holds what is determined; hand it to the first
        first = np.where(locked != 0.0, locked * inner, outer)
        last = np.where(locked != 0.0, 0.0, inner)
    angles[:, 0], angles[:, 2] = _folded(first), _folded(last)
    angles += 0.0  # -0.0 becomes 0.0
    _spoil(angles, each)
    return angles.reshape(*batch, 3)


def distance_from_gimbal_lock(order: AxisOrder, rotation: ArrayLike) -> FloatArray:
    """Return the angle between the middle angle and the nearer of its two locked values.

    Parameters
    ----------
    order : the axes.
    rotation : (..., 3, 3).

    Returns
    -------
    distance : (...), rad, 0 to pi/2; small distances keep their digits.

    Source
    ------
    Angle between the outermost and the innermost axis, less 0 or pi.

    Examples
    --------
    >>> float(distance_from_gimbal_lock(AxisOrder((2, 1, 0), False), np.eye(3)).round(12))
    1.570796326795
    """
    across_j, across_k, along = _innermost_axis(order, np.asarray(rotation, dtype=np.float64))
    return np.asarray(np.arctan2(np.hypot(across_j, across_k), np.abs(along)))


def sum_is_determined(order: AxisOrder, rotation: ArrayLike) -> BoolArray:
    """Return which combination stays determined at the nearer lock: the sum, or the difference.

    Parameters
    ----------
    order : the axes.
    rotation : (..., 3, 3).

    Returns
    -------
    determined : (...), True for first + last, False for first - last.

    Source
    ------
    At lock the innermost axis lies along the outermost (sum) or against it (difference).

    Examples
    --------
    >>> bool(sum_is_determined(AxisOrder((2, 1, 2), False), np.eye(3)))
    True
    """
    along = _innermost_axis(order, np.asarray(rotation, dtype=np.float64))[2]
    return np.asarray(along > 0.0)


def _axes_and_parity(order: AxisOrder) -> tuple[int, int, int, int]:
    """Outermost axis, middle axis, the third one, and +1 if they are right-handed in this order."""
    i, j, _ = order.as_current
    return i, j, 3 - i - j, 1 if (j - i) % 3 == 1 else -1


def _innermost_axis(
    order: AxisOrder, rotations: FloatArray
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Components of the turned innermost axis along the middle, the third and the outermost."""
    i, j, k, _ = _axes_and_parity(order)
    innermost = order.as_current[2]
    return rotations[..., j, innermost], rotations[..., k, innermost], rotations[..., i, innermost]


def _spoil(found: FloatArray, given: FloatArray) -> None:
    """Make NaN what was found for rows that are not finite, which compiled code takes amiss."""
    with np.errstate(invalid="ignore", over="ignore"):
        suspect = not np.isfinite(given.sum())
    if suspect:
        found[~np.isfinite(given.reshape(len(given), -1)).all(axis=1)] = np.nan


def _folded(angle: FloatArray) -> FloatArray:
    """Angles of arctan2 in (-pi, pi], with 0.0 for -0.0."""
    return np.where(angle <= HALF_TURN_NOISE - np.pi, np.pi, angle) + 0.0
