"""From row motions to the joint values that produce them, whole turns and travel included.

A solver finds how far each row of the table must move, v, up to whole turns. The drive map C says
v = C q. So the joint values are q = C^-1 (v + 2 pi k) over the driven rows for every integer k that
leaves q within travel: often one, two for each joint that turns further than once around, and a
lattice where rows are coupled. Rows without a joint value must move as wanted by their couplings.

Source: none; counting. Not covered: more than ``MOST_TURNS`` postures of one solution; those looked
at are nearest the middle of travel, or nearest joint values that are given.
"""

from typing import Any, NamedTuple
from weakref import WeakKeyDictionary

import numpy as np
from numpy.typing import NDArray

from kinematics.arm import Arm
from kinematics.kernels.compiler import for_kernel
from kinematics.kernels.whole_turns import CLIPPED, INSIDE, WORKING, postures_of
from kinematics.table import FloatArray
from kinematics.tolerances import MOST_TURNS, PASSIVE_FITS, TRAVEL_EDGE
from kinematics.travel_limits import Limit, limits_of

_LAST_BITS = 4
"""Units in the last place that turning radians into degrees and back may change."""

__all__ = ["CLIPPED", "INSIDE", "WORKING", "Drive", "Postures", "drive_of"]


class Postures(NamedTuple):
    """Joint values that produce wanted row motions; p in all, those of one motion together.

    Attributes
    ----------
    joint_values : (p, joints), rad or m.
    source : (p,), index of the wanted motion, ascending.
    margin : (p,), smallest share of travel left; infinite where nothing bounds the arm.
    flags : (p,), bits INSIDE travel, beyond WORKING travel, CLIPPED onto a limit.
    seen : (k,), how many postures within travel each wanted motion has; negative, less one, where
        there may be more.
    any_clipped : whether any posture is CLIPPED.
    """

    joint_values: FloatArray
    source: NDArray[np.int64]
    margin: FloatArray
    flags: NDArray[np.int64]
    seen: FloatArray
    any_clipped: bool


class Drive:
    """The drive map of an arm read backwards, with everything that bounds it.

    Attributes
    ----------
    box : (2, joints), least and largest joint values that are listed; infinite for slides without
        travel. spans : (joints,), how wide it is, 1 where it is infinite.
    middle_of_travel : (joints,), 0 without travel.
    endless : (joints,), joints that turn their own row alone, as often as they like.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table, Travel
    >>> row = Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0, travel=Travel(-4.0, 4.0))
    >>> drive = Drive(Arm("one", Table(Convention.STANDARD, (row,))))
    >>> drive.postures(np.array([[3.0]])).joint_values.round(3).ravel()
    array([-3.283,  3.   ])
    """

    def __init__(self, arm: Arm) -> None:
        driven = np.array(arm.drive_map.driven, dtype=np.intp)
        rows = arm.table.rows
        self._square = arm.drive_map.matrix[driven]
        turning = np.array([rows[row].is_revolute for row in driven], dtype=np.bool_)
        travels = [rows[row].travel for row in driven]
        turn = np.where(turning, np.pi, np.inf)
        lower = [-turn[j] if travel is None else travel.lower for j, travel in enumerate(travels)]
        upper = [turn[j] if travel is None else travel.upper for j, travel in enumerate(travels)]
        box = np.array([lower, upper]).reshape(2, len(driven))
        passive = np.array([i for i, row in enumerate(rows) if row.passive], dtype=np.intp)
        limits = limits_of(arm)
        self._row_box = _motions_in(self._square, box)
        self._middle = _middle(self._row_box)
        self.spans = np.where(np.isfinite(box).all(axis=0), box[1] - box[0], 1.0)
        self._of_kernel = (
            (np.array(np.linalg.inv(self._square), dtype=np.float64), driven, turning),
            (
                for_kernel(arm.drive_map.matrix[passive]),
                passive,
                np.array([rows[row].is_revolute for row in passive], dtype=np.bool_),
                PASSIVE_FITS,
            ),
            (
                limits.weights,
                limits.constants,
                limits.lower,
                limits.upper,
                limits.working,
                np.array([_alone(limit) for limit in limits.each], dtype=np.intp),
            ),
        )
        self.box = box
        alone = np.count_nonzero(arm.drive_map.matrix, axis=0) == 1
        alone &= np.count_nonzero(self._square, axis=1) == 1
        bounded = np.array([travel is not None for travel in travels], dtype=np.bool_)
        self.endless = turning & ~bounded & alone & ~(limits.weights != 0.0).any(axis=0)
        self.middle_of_travel = _middle(box)
        # Onto a limit, or hardly inside: in degrees and back it must not be beyond.
        rounded = np.isfinite(box) & (box != 0.0)
        inside = np.spacing(np.abs(box), where=rounded, out=np.zeros_like(box))
        ends = box + _LAST_BITS * inside * np.array([[1.0], [-1.0]])
        self._ends = (ends, bounded)

    def postures(
        self,
        motions: FloatArray,
        near: FloatArray | None = None,
        edge: float = TRAVEL_EDGE,
        still: NDArray[np.bool_] | None = None,
        most: int = MOST_TURNS,
    ) -> Postures:
        """Return the joint values within travel that move the rows by ``motions`` (k, rows).

        Of a motion without any, the joint values that exceed travel least. Joints without travel
        are listed within one turn, (-pi, pi].

        Parameters
        ----------
        near : (joints,), look nearest these joint values first, where not all can be looked at.
        edge : rad or m; a joint value that exceeds its limit by no more is put onto it (CLIPPED).
        still : (joints,), joints whose values are taken as they are, without whole turns.
        most : postures of one motion that are looked at.
        """
        return Postures(*postures_of(motions, *self.for_kernel(near, edge, still, most)))

    def for_kernel(
        self,
        near: FloatArray | None = None,
        edge: float = TRAVEL_EDGE,
        still: NDArray[np.bool_] | None = None,
        most: int = MOST_TURNS,
    ) -> tuple[Any, ...]:
        """Return what ``postures_of`` takes beside motions; parameters as in ``postures``."""
        middle = self._middle if near is None else self._square @ near
        drive, passive, limits = self._of_kernel
        if still is not None:
            drive = (drive[0], drive[1], drive[2] & ~still)
        return drive, passive, limits, (*self._ends, edge), self._row_box, middle, most


def _alone(limit: Limit) -> int:
    """Return the joint whose value a limit bounds as it is, or -1."""
    return -1 if limit.joint is None else limit.joint - 1


def _middle(box: FloatArray) -> FloatArray:
    """Return the middle of a box (2, n), 0 where it is infinite."""
    middle: FloatArray = np.where(np.isfinite(box).all(axis=0), box, 0.0).mean(axis=0)
    return middle


def _motions_in(square: FloatArray, box: FloatArray) -> FloatArray:
    """Return the least and largest motions of driven rows for joint values in a box, (2, n)."""
    ends = np.zeros((2, len(square)))
    for row, ratios in enumerate(square):
        for ratio, (low, high) in zip(ratios, box.T, strict=True):
            if ratio:
                ends[:, row] += sorted((ratio * low, ratio * high))
    return ends


_kept: WeakKeyDictionary[Arm, Drive] = WeakKeyDictionary()


def drive_of(arm: Arm) -> Drive:
    """Return the drive map of an arm read backwards, made once and kept as long as the arm is.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> arm = Arm("one", Table(Convention.STANDARD, (Row(JointKind.REVOLUTE, 0.4, 0, 0, 0),)))
    >>> drive_of(arm) is drive_of(arm)
    True
    """
    drive = _kept.get(arm)
    if drive is None:
        drive = _kept[arm] = Drive(arm)
    return drive
