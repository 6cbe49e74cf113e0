"""A search for several solutions of a target, and for one with all starts where none was found.

Looking for all of an arm's solutions with many starts would cost every target what only the hard
ones need. So a few starts look for several, and many for one where these found nothing.

Source: none. Not covered: which solutions are missing; nobody knows.
"""

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from kinematics.arm import Arm
from kinematics.inverse.found import Found
from kinematics.inverse.iterative import Search, SearchGeometry
from kinematics.table import FloatArray

_WANTED, _FEW = 8, 16
"""Solutions that are looked for, and the starts for them."""


def joined(found: Found, more: Found, which: NDArray[np.intp]) -> Found:
    """Return what was found with more of some of its targets, ``which`` (ascending).

    What ``more`` tells of a no takes the place of what was told before.

    Examples
    --------
    >>> from kinematics.inverse.found import none_found
    >>> both = joined(none_found(2, 6), none_found(1, 6), np.array([1]))
    >>> len(both.open), len(both.motions)
    (2, 0)
    """
    target = np.concatenate([found.target, which[more.target]])
    order = np.argsort(target, kind="stable")
    is_open, stage = found.open.copy(), found.stage.copy()
    shortfall, nearest = found.shortfall.copy(), found.nearest.copy()
    is_open[which], stage[which] = more.open, more.stage
    shortfall[which], nearest[which] = more.shortfall, more.nearest
    return Found(
        np.concatenate([found.motions, more.motions])[order],
        target[order],
        np.concatenate([found.position_error, more.position_error])[order],
        np.concatenate([found.angle_error, more.angle_error])[order],
        is_open,
        stage,
        shortfall,
        nearest,
    )


def picked(found: Found, kept: NDArray[np.bool_]) -> Found:
    """Return what was found with some of its solutions, (k,), left out.

    Examples
    --------
    >>> from kinematics.inverse.found import none_found
    >>> len(picked(none_found(2, 6), np.empty(0, np.bool_)).motions)
    0
    """
    if kept.all():
        return found
    return replace(
        found,
        motions=found.motions[kept],
        target=found.target[kept],
        position_error=found.position_error[kept],
        angle_error=found.angle_error[kept],
    )


class Several:
    """A solver for any arm and task, as ``Search``, that looks for some solutions of each target.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = (Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0),) * 2
    >>> solver = Several(Arm("planar", Table(Convention.STANDARD, rows)), np.eye(4), "position")
    >>> target = np.eye(4)[None]
    >>> target[0, :2, 3] = 0.4
    >>> len(solver.solve(target).motions)
    2
    """

    proof = "search"
    geometry = SearchGeometry()

    def __init__(self, arm: Arm, tool_in_flange: FloatArray, task: str) -> None:
        self._few = Search(arm, tool_in_flange, task, _WANTED, _FEW)
        self._many = Search(arm, tool_in_flange, task)

    def solve(self, targets: FloatArray) -> Found:
        """Return what is found for targets (m, 4, 4), the tool in base, metres; within travel."""
        found = self._few.solve(targets)
        missing = np.flatnonzero(found.count_per_target() == 0)
        if not len(missing):
            return found
        return joined(found, self._many.solve(targets[missing]), missing)

    def nearest(self, targets: FloatArray) -> FloatArray:
        """Return row motions (m, rows) within travel that bring the tool nearest to targets."""
        return self._many.nearest(targets)
