"""Three angles about three frame axes, fixed or current: all 24 orders by one set of formulas.

Left out: names such as ``zyx-current`` and the finding at gimbal lock (orientation_forms).
"""

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from kinematics.kernels.angles import angle_triples
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

    @property
    def of_kernel(self) -> tuple[tuple[int, int, int], int, bool, float, float]:
        """The order and the tolerances as kernels/angles.py takes them."""
        outermost, middle, innermost = self.as_current
        axes = outermost, middle, 3 - outermost - middle
        return axes, innermost, self.about_fixed, LOCK_EXACT, HALF_TURN_NOISE


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
    return angles_and_distance(order, rotation)[0]


def angles_and_distance(order: AxisOrder, rotation: ArrayLike) -> tuple[FloatArray, FloatArray]:
    """Return the angles of ``angles_of`` and the distance of ``distance_from_gimbal_lock``.

    Of poses (..., 4, 4) the rotations are taken.

    Examples
    --------
    >>> angles, distance = angles_and_distance(AxisOrder((2, 1, 2), False), np.eye(3))
    >>> angles, float(distance)
    (array([0., 0., 0.]), 0.0)
    """
    rotations = np.asarray(rotation, dtype=np.float64)
    batch = rotations.shape[:-2]
    count = math.prod(batch)
    angles, distance = np.empty((count, 3)), np.empty(count)
    matrices = for_kernel(rotations).reshape(count, *rotations.shape[-2:])
    angle_triples(matrices, *order.of_kernel, angles, distance)
    return angles.reshape(*batch, 3), distance.reshape(batch)


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
    return angles_and_distance(order, rotation)[1]


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
    outermost, _, innermost = order.as_current
    return np.asarray(np.asarray(rotation)[..., outermost, innermost] > 0.0)
