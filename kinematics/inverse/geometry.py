"""Which three neighbouring axes of an arm meet in a point or run parallel, and how exactly.

Drawing boards know axes that meet; tables know decimals; measured arms know neither. Each three
neighbours are held against both structures on the table as it is, and what is left falls into one
of three regimes: exact (rounding), rounded (what typed decimals leave, alpha = 1.5708), calibrated
(nearly special: solutions start from the special arm nearby, but some may be lost beside folds).
For the last two, that arm nearby is given too: the same with those three axes moved into place.

Source: the point nearest to lines in squares, a 3 x 3 linear system; the regimes by what tables of
degrees, radians and millimetres with three to five decimals leave, tried out.
Not covered: arms that turn about one direction only (four_axes.py), and special places of the other
three axes, which regional.py takes as they are.
"""

from dataclasses import dataclass, replace
from enum import StrEnum

import numpy as np

from kinematics.inverse.screws import Screws
from kinematics.inverse.tolerances import (
    EXACT_AXES,
    NEARLY_SPECIAL,
    NEIGHBOURS_PARALLEL,
    ROUNDED_ANGLE,
    ROUNDED_LENGTH,
)
from kinematics.table import FloatArray


class Regime(StrEnum):
    """How exactly a table has a structure."""

    EXACT = "exact"
    ROUNDED = "rounded"
    CALIBRATED = "calibrated"


@dataclass(frozen=True, eq=False)
class Triple:
    """Three neighbouring turning axes that meet or run parallel, or nearly so.

    Attributes
    ----------
    first : index of the first of the three rows.
    parallel : whether they are parallel; otherwise they meet.
    residual : largest distance of an axis from the point, over the length; or largest angle from
        the common direction, rad.
    regime : what that residual is.
    solved : the arm with these three axes moved into place, and all else as it is.
    """

    first: int
    parallel: bool
    residual: float
    regime: Regime
    solved: Screws

    @property
    def say(self) -> str:
        """What it is, in words: 'axes 4, 5 and 6 meet in a point: a spherical wrist'."""
        one, two, three = (self.first + number for number in (1, 2, 3))
        axes = f"axes {one}, {two} and {three}"
        if self.parallel:
            said, meant, size = f"{axes} are parallel", "parallel", _angle_said(self.residual)
        else:
            wrist = three == self.solved.rows
            meant = "a spherical wrist" if wrist else "meeting"
            if self.first == 0:
                meant = "a spherical shoulder"
            said, size = f"{axes} meet in a point", _length_said(self.residual * self.solved.length)
        if self.regime is Regime.EXACT:
            return said if meant in ("parallel", "meeting") else f"{said}: {meant}"
        if self.regime is Regime.ROUNDED:
            return f"{said} within {size}: treated as {meant}"
        return f"{said} but for {size}: nearly {meant}, some solutions may be missed"


@dataclass(frozen=True)
class Geometry:
    """The structures of an arm's axes that closed forms rest on.

    Attributes
    ----------
    triples : the special ones, exact before rounded before calibrated, then by residual.
    """

    triples: tuple[Triple, ...]

    @property
    def regime(self) -> Regime | None:
        """How exactly the table has the best of the structures; None without any."""
        return self.triples[0].regime if self.triples else None

    @property
    def residual(self) -> float:
        """By how much the best of the structures is off; 0 without any."""
        return self.triples[0].residual if self.triples else 0.0

    @property
    def say(self) -> str:
        """Which structure is used, for people."""
        if not self.triples:
            return "no three neighbouring axes meet in a point or are parallel"
        return self.triples[0].say


def geometry_of(screws: Screws) -> Geometry:
    """Return the special triples of an arm.

    A triple whose neighbours lie in one line, or point one way where the axes meet, is none: two
    of its joints would do the same.

    Examples
    --------
    >>> axes, points = np.eye(3)[[2, 1, 1, 2, 1, 2]], np.zeros((6, 3))
    >>> points[2, 2], points[3:, 2] = 0.5, 0.9
    >>> screws = Screws(axes, points, np.zeros(6, dtype=bool), np.eye(4), 1.0)
    >>> geometry_of(screws).say
    'axes 4, 5 and 6 meet in a point: a spherical wrist'
    """
    found = []
    for first in range(screws.rows - 2):
        if not screws.prismatic[first : first + 3].any():
            for tried in (_meeting, _parallel):
                triple = tried(screws, first)
                if triple is not None:
                    found.append(triple)
    return Geometry(tuple(sorted(found, key=_rank)))


def _rank(triple: Triple) -> tuple[int, float, int]:
    # Residuals of exact ones are rounding, and must not choose: the last of them, the wrist.
    residual = 0.0 if triple.regime is Regime.EXACT else triple.residual
    return list(Regime).index(triple.regime), residual, -triple.first


def meeting_point(axis: FloatArray, point: FloatArray) -> FloatArray:
    """Return the point (3,) nearest to lines with directions and points (k, 3), in squares.

    Examples
    --------
    >>> meeting_point(np.eye(3)[:2], np.array([[5.0, 1, 0], [0, 7, 0]])) + 0.0
    array([0., 1., 0.])
    """
    across = np.eye(3) - axis[:, :, None] * axis[:, None, :]
    # From the middle of the points, so that an arm far from its base loses no digits.
    middle = point.mean(axis=0)
    pulls = (across @ (point - middle)[:, :, None]).sum(axis=0)
    nearest: FloatArray = middle + np.linalg.solve(across.sum(axis=0), pulls)[:, 0]
    return nearest


def _meeting(screws: Screws, first: int) -> Triple | None:
    three = slice(first, first + 3)
    axis, point = screws.axis[three], screws.point[three]
    if np.linalg.norm(np.cross(axis[:-1], axis[1:]), axis=1).min() < NEIGHBOURS_PARALLEL:
        return None
    met = meeting_point(axis, point)
    residual = float(np.linalg.norm(np.cross(point - met, axis), axis=1).max())
    regime = _regime(residual, ROUNDED_LENGTH)
    if regime is None:
        return None
    points = screws.point.copy()
    points[three] = met
    return Triple(first, False, residual, regime, replace(screws, point=points))


def _parallel(screws: Screws, first: int) -> Triple | None:
    three = slice(first, first + 3)
    axis, point = screws.axis[three], screws.point[three]
    signs = np.sign(axis @ axis[1])[:, None]
    common = (axis * signs).sum(axis=0)
    common /= np.linalg.norm(common)
    residual = float(np.linalg.norm(np.cross(axis, common), axis=1).max())
    regime = _regime(residual, ROUNDED_ANGLE)
    links = np.linalg.norm(np.cross(np.diff(point, axis=0), common), axis=1)
    if regime is None or links.min() < NEIGHBOURS_PARALLEL:
        return None
    axes = screws.axis.copy()
    axes[three] = signs * common
    return Triple(first, True, residual, regime, replace(screws, axis=axes))


def _regime(residual: float, rounded: float) -> Regime | None:
    if residual <= EXACT_AXES:
        return Regime.EXACT
    if residual <= rounded:
        return Regime.ROUNDED
    return Regime.CALIBRATED if residual <= NEARLY_SPECIAL else None


def _length_said(metres: float) -> str:
    return f"{1e3 * metres:.2g} mm" if metres >= 1e-4 else f"{1e6 * metres:.2g} um"


def _angle_said(radians: float) -> str:
    return f"{1e3 * radians:.2g} mrad" if radians >= 1e-4 else f"{1e6 * radians:.2g} urad"
