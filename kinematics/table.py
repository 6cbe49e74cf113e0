"""The Denavit-Hartenberg table: rows, the two conventions, and the one chain both are read as.

Left out: how joint values drive the rows (drive_map.py) and where the arm stands (arm.py).
"""

from collections.abc import Sequence
from dataclasses import dataclass, field
from enum import StrEnum
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.errors import InvalidArm, NotFinite, OutOfRange, TooManyRows
from kinematics.tolerances import (
    LARGEST_MAGNITUDE,
    MOST_ROWS,
    NARROWEST_TRAVEL,
    SLOWEST_SPEED,
)

FloatArray = NDArray[np.float64]


class Convention(StrEnum):
    """Which of the two conventions a table is written in; never a default."""

    STANDARD = "standard"
    MODIFIED = "modified"


class JointKind(StrEnum):
    """What a joint does along its axis."""

    REVOLUTE = "revolute"
    PRISMATIC = "prismatic"


class Travel(NamedTuple):
    """Closed interval a joint value may lie in; radians or metres."""

    lower: float
    upper: float


@dataclass(frozen=True, slots=True)
class Coupling:
    """Another row's joint value that moves this row too: ``ratio`` times ``q_axis``.

    ``axis`` is the 1-based number of a driven row; ``ratio`` is this row's SI unit per the other's.
    """

    axis: int
    ratio: float


@dataclass(frozen=True, slots=True)
class Row:
    """One row of a table, SI units.

    In a standard table the row holds a_i, alpha_i, d_i, theta_i; in a modified one a_(i-1),
    alpha_(i-1), d_i, theta_i. ``theta`` is the offset of a revolute joint, ``d`` of a prismatic.

    Attributes
    ----------
    a, d : metres; alpha, theta : radians.
    direction : 1 or -1, how the joint value counts along the axis; does not multiply couplings.
    travel, working_travel : bounds of the joint value, or of the variable of a passive row.
    top_speed : largest joint speed, rad/s or m/s.
    passive : the row has no joint value of its own; its couplings alone move it.
    """

    joint: JointKind
    a: float
    alpha: float
    d: float
    theta: float
    direction: int = 1
    travel: Travel | None = None
    working_travel: Travel | None = None
    working_reason: str = ""
    top_speed: float | None = None
    couplings: tuple[Coupling, ...] = ()
    passive: bool = False

    @property
    def is_revolute(self) -> bool:
        """Whether the joint value is an angle."""
        return self.joint is JointKind.REVOLUTE

    @property
    def offset(self) -> float:
        """The joint variable at joint value 0: theta of a revolute row, d of a prismatic one."""
        return self.theta if self.is_revolute else self.d

    @property
    def unit(self) -> str:
        """SI unit of the joint value."""
        return "rad" if self.is_revolute else "m"


@dataclass(frozen=True)
class ChainConstants:
    """The fixed transforms of ``X0 Z1 X1 ... Zn Xn``, Z split into motion and offset.

    ``Zi = motion_i offset_i``: the motion is about or along the axis and comes first, so that the
    offset is a constant that never mixes with a large joint value in one rounded sum.

    Attributes
    ----------
    first : (4, 4), X0.
    offset : (n, 4, 4), Rot(z, theta_i) Trans(z, d_i) at joint variable = offset.
    link : (n, 4, 4), X_i = Trans(x, a) Rot(x, alpha) after each Z_i.
    offset_terms : (n, 3), cosine and sine of theta_i, and d_i; link_terms : (n, 3), a, and cosine
        and sine of alpha: the same numbers as the kernels take them.
    revolute : (n,) bool.
    """

    first: FloatArray
    offset: FloatArray
    link: FloatArray
    offset_terms: FloatArray
    link_terms: FloatArray
    revolute: NDArray[np.bool_]


@dataclass(frozen=True)
class Table:
    """A checked Denavit-Hartenberg table of 0 to 32 rows.

    Raises
    ------
    TooManyRows, NotFinite, OutOfRange, InvalidArm : with ``where`` leading to the value.

    Source
    ------
    The two conventions: Denavit and Hartenberg 1955 as in Spong, Hutchinson and Vidyasagar,
    chapter 3 (standard), and Craig, chapter 3 (modified).

    Examples
    --------
    >>> row = Row(JointKind.REVOLUTE, a=0.4, alpha=0.0, d=0.0, theta=0.0)
    >>> Table(Convention.STANDARD, (row, row)).chain.link[0, 0, 3]
    np.float64(0.4)
    """

    convention: Convention
    rows: tuple[Row, ...]
    chain: ChainConstants = field(init=False, repr=False, compare=False)

    def __post_init__(self) -> None:
        if len(self.rows) > MOST_ROWS:
            raise TooManyRows(
                f"the table has {len(self.rows)} rows",
                where=("rows",),
                value=len(self.rows),
                way_out=f"at most {MOST_ROWS} rows",
            )
        for index, row in enumerate(self.rows):
            check_row(row, index)
        object.__setattr__(self, "chain", _chain_constants(self.convention, self.rows))


def check_row(row: Row, index: int) -> None:
    """Refuse a row whose numbers cannot be used; ``index`` is 0-based and goes into ``where``.

    Raises
    ------
    NotFinite, OutOfRange, InvalidArm

    Examples
    --------
    >>> check_row(Row(JointKind.REVOLUTE, 0.0, 0.0, 0.0, 0.0, travel=Travel(1.0, -1.0)), 2)
    Traceback (most recent call last):
    ...
    kinematics.errors.InvalidArm: travel of row 3 is reversed or empty
    """
    where = ("rows", index)
    for name in ("a", "alpha", "d", "theta"):
        check_number(getattr(row, name), (*where, name))
    if row.direction not in (1, -1):
        raise InvalidArm(
            f"direction of row {index + 1} is neither 1 nor -1",
            where=(*where, "direction"),
            value=row.direction,
            way_out="give 1 or -1; gear ratios are the controller's business",
        )
    for name in ("travel", "working_travel"):
        bounds: Travel | None = getattr(row, name)
        if bounds is not None:
            check_travel(bounds, (*where, name), f"{name.replace('_', ' ')} of row {index + 1}")
    if (
        row.travel is not None
        and row.working_travel is not None
        and (
            row.working_travel.lower < row.travel.lower
            or row.working_travel.upper > row.travel.upper
        )
    ):
        raise InvalidArm(
            f"working travel of row {index + 1} reaches beyond its travel",
            where=(*where, "working_travel"),
            value=list(row.working_travel),
            way_out="keep working_travel inside travel",
        )
    if row.top_speed is not None:
        check_number(row.top_speed, (*where, "top_speed"))
        if row.top_speed < SLOWEST_SPEED:
            raise InvalidArm(
                f"top speed of row {index + 1} is not positive, or below {SLOWEST_SPEED:g} "
                "per second",
                where=(*where, "top_speed"),
                value=row.top_speed,
                way_out="give a speed above 0, or leave it out",
            )
    for position, coupling in enumerate(row.couplings):
        check_number(coupling.ratio, (*where, "couplings", position, "ratio"))


def check_number(value: float, where: Sequence[str | int]) -> None:
    """Refuse a number that is not finite or beyond 1e9 SI units.

    Raises
    ------
    NotFinite, OutOfRange

    Examples
    --------
    >>> check_number(2e9, ("a",))
    Traceback (most recent call last):
    ...
    kinematics.errors.OutOfRange: 2e+09 is beyond 1e9 metres or radians
    """
    if not np.isfinite(value):
        raise NotFinite(
            f"{value} is not a finite number", where=where, value=value, way_out="give a number"
        )
    if abs(value) > LARGEST_MAGNITUDE:
        raise OutOfRange(
            f"{value:.6g} is beyond 1e9 metres or radians",
            where=where,
            value=value,
            way_out="check the units",
        )


def check_travel(bounds: Travel, where: Sequence[str | int], what: str) -> None:
    """Refuse bounds that are not finite numbers or not in rising order.

    Raises
    ------
    NotFinite, OutOfRange, InvalidArm

    Examples
    --------
    >>> check_travel(Travel(-1.0, 1.0), ("travel",), "travel of row 1")
    """
    for position, bound in enumerate(bounds):
        check_number(bound, (*where, position))
    if not bounds.upper - bounds.lower >= NARROWEST_TRAVEL:
        raise InvalidArm(
            f"{what} is reversed or empty",
            where=where,
            value=list(bounds),
            way_out="give the lower limit first, the upper one second",
        )


def turn_about_z(angle: float, along: float) -> FloatArray:
    """Return Rot(z, angle) Trans(z, along), (4, 4).

    Examples
    --------
    >>> turn_about_z(0.0, 2.0)[2, 3]
    np.float64(2.0)
    """
    cos, sin = np.cos(angle), np.sin(angle)
    return np.array(
        [[cos, -sin, 0.0, 0.0], [sin, cos, 0.0, 0.0], [0.0, 0.0, 1.0, along], [0.0, 0.0, 0.0, 1.0]]
    )


def link_of(a: float, alpha: float) -> FloatArray:
    """Return X = Trans(x, a) Rot(x, alpha), (4, 4).

    Examples
    --------
    >>> link_of(0.5, 0.0)[0, 3]
    np.float64(0.5)
    """
    cos, sin = np.cos(alpha), np.sin(alpha)
    return np.array(
        [[1.0, 0.0, 0.0, a], [0.0, cos, -sin, 0.0], [0.0, sin, cos, 0.0], [0.0, 0.0, 0.0, 1.0]]
    )


def _chain_constants(convention: Convention, rows: tuple[Row, ...]) -> ChainConstants:
    count = len(rows)
    links = [link_of(row.a, row.alpha) for row in rows]
    # A modified row holds the X before its Z, a standard row the X after it.
    if convention is Convention.MODIFIED:
        links = [*links, np.eye(4)] if links else []
        first, links = (links[0], links[1:]) if links else (np.eye(4), [])
    else:
        first = np.eye(4)
    offset = np.array([turn_about_z(row.theta, row.d) for row in rows]).reshape(count, 4, 4)
    link = np.array(links).reshape(count, 4, 4)
    return ChainConstants(
        first=first,
        offset=offset,
        link=link,
        offset_terms=np.column_stack([offset[:, 0, 0], offset[:, 1, 0], offset[:, 2, 3]]),
        link_terms=np.column_stack([link[:, 0, 3], link[:, 1, 1], link[:, 2, 1]]),
        revolute=np.array([row.is_revolute for row in rows], dtype=bool),
    )
