"""Which method answers for which arm and task, and what its no is worth.

Closed forms and eliminations first, for they find every solution and their no is a proof: up to
three joints for a place, axes of one direction, six joints (six_joints.py). Last joints that leave
the tool's point where it is are left out of a place; fewer than six joints meet what they can
(few_joints.py), of seven one is held still (redundant.py). Whatever remains is searched for, and so
is what those leave open.

Source: none; an order. Not covered: closed forms for more than seven joints.
"""

from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from kinematics.arm import Arm
from kinematics.inverse.few_joints import MOST as FEW
from kinematics.inverse.few_joints import few_joints_of
from kinematics.inverse.found import Found, Solver
from kinematics.inverse.four_axes import FourAxes, four_axes_of
from kinematics.inverse.geometry import Regime
from kinematics.inverse.held_values import refuse_unbounded_slides
from kinematics.inverse.iterative import Search
from kinematics.inverse.locked import SIX
from kinematics.inverse.measured import DIRECTION, POSE, POSITION, Measured
from kinematics.inverse.redundant import Redundant, redundant_of
from kinematics.inverse.screws import Screws, screws_of
from kinematics.inverse.several import Several
from kinematics.inverse.six_joints import six_joints_of
from kinematics.inverse.tolerances import EXACT_AXES
from kinematics.inverse.upright_spins import upright_spins_of
from kinematics.table import FloatArray, Table
from kinematics.transforms import inverse
from kinematics.travel_limits import limits_of


@dataclass(frozen=True, eq=False)
class Method:
    """How targets of one task are answered for one arm with one tool.

    Attributes
    ----------
    arm, tool_in_flange, task : of whom, with what, what is asked (inverse/measured.py).
    solver : finds motions of the first rows; of all of them, but for joints that do not matter.
    idle : (joints,), joints that do not matter: the last ones, about axes through the tool's point,
        or about tool z.
    """

    arm: Arm
    tool_in_flange: FloatArray
    task: str
    solver: Solver
    idle: NDArray[np.bool_]

    @cached_property
    def closed(self) -> bool:
        """Whether solutions come from a closed form or an elimination, which find all of them."""
        return self.solver.proof != "search"

    @cached_property
    def complete(self) -> bool:
        """Whether a no is proved, unless the solver says that it is open.

        Of an arm whose axes are only nearly special a closed form loses some solutions.
        """
        return self.closed and getattr(self.solver.geometry, "regime", None) != Regime.CALIBRATED

    @property
    def say(self) -> str:
        """What answers rest on, for people."""
        return self.solver.geometry.say

    @cached_property
    def search(self) -> Search:
        """Looks once more for what a closed form leaves open."""
        return Search(self.arm, self.tool_in_flange, self.task)

    def solve(self, targets: FloatArray, rest: FloatArray, near: FloatArray | None = None) -> Found:
        """Return what is found for targets (m, 4, 4), the tool in base, metres.

        ``rest`` (joints,): values for joints that do not matter; ``near`` (joints,): of joints to
        spare those postures are wanted that are nearest to it.
        """
        if near is not None and isinstance(self.solver, Redundant):
            return self.solver.solve(targets, near)
        found = self.solver.solve(targets)
        if not self.idle.any():
            return found
        return replace(
            found,
            motions=self._with_rest(found.motions, rest),
            nearest=self._with_rest(found.nearest, rest),
        )

    def nearest(self, targets: FloatArray, rest: FloatArray) -> FloatArray:
        """Return row motions (m, rows) that bring the tool as near as they can."""
        return self._with_rest(self.solver.nearest(targets), rest)

    def _with_rest(self, motions: FloatArray, rest: FloatArray) -> FloatArray:
        drive_map = self.arm.drive_map
        still = drive_map.motions(np.where(self.idle, rest, 0.0))
        whole = np.tile(still, (len(motions), 1))
        moving = np.ones(len(still), np.bool_)
        moving[np.array(drive_map.driven)[self.idle]] = False
        known = np.flatnonzero(moving)[: motions.shape[1]]
        whole[:, known] = motions[:, known]
        return whole


def method_of(arm: Arm, tool_in_flange: FloatArray, task: str = POSE) -> Method:
    """Return how targets of a task are answered; some milliseconds, to be kept by whoever asks.

    Raises
    ------
    KinematicsError : an arm of more than six joints has a slide without travel.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row
    >>> turning, sliding = (Row(kind, 0.3, 0.0, 0.0, 0.0) for kind in JointKind)
    >>> arm = Arm("four", Table(Convention.STANDARD, (turning, turning, sliding, turning)))
    >>> method_of(arm, np.eye(4)).say
    'axes 1, 2 and 4 are parallel and row 3 slides along them: closed form across the axes'
    """
    if arm.joint_count > SIX:
        refuse_unbounded_slides(arm)
    none_idle = np.zeros(arm.joint_count, np.bool_)
    solver: Solver | None = None
    if task == DIRECTION:
        solver = upright_spins_of(arm, tool_in_flange, screws_of(arm, tool_in_flange))
    solver = solver or _closed_form(arm, tool_in_flange, task)
    if isinstance(solver, FourAxes) and task == POSITION:
        idle = _last_turn(arm)
        if idle.any():
            return Method(arm, tool_in_flange, task, solver, idle)
        solver = None
    if solver is None and task == DIRECTION and _turns_tool_z(arm, screws_of(arm, tool_in_flange)):
        posed = _closed_form(arm, tool_in_flange, POSE)
        if posed is not None:
            solver = Measured(posed, screws_of(arm, tool_in_flange), DIRECTION)
            return Method(arm, tool_in_flange, task, solver, _last_turn(arm))
    if solver is None and task == POSITION:
        rows = _rows_that_matter(arm, screws_of(arm, tool_in_flange))
        if rows < len(arm.table.rows) and rows:
            solver = _closed_form(*_first_rows(arm, tool_in_flange, rows), POSITION)
            if solver is not None:
                idle = np.array([row >= rows for row in arm.drive_map.driven])
                return Method(arm, tool_in_flange, task, solver, idle)
    if solver is None and task == POSE:
        solver = redundant_of(arm, tool_in_flange)
    if solver is None:
        solver = Several(arm, tool_in_flange, task)
    return Method(arm, tool_in_flange, task, solver, none_idle)


def _closed_form(arm: Arm, tool_in_flange: FloatArray, task: str) -> Solver | None:
    """Return the closed form for an arm's task, or None."""
    screws, joints = screws_of(arm, tool_in_flange), arm.joint_count
    if task != DIRECTION:
        of_one_direction = four_axes_of(arm, tool_in_flange, task)
        if of_one_direction is not None:
            return of_one_direction
    if joints < screws.rows:
        return None
    if joints <= FEW:
        return few_joints_of(arm, screws, tool_in_flange, task)
    return six_joints_of(screws) if joints == SIX and task == POSE else None


def _last_turn(arm: Arm) -> NDArray[np.bool_]:
    """Return which joint turns last, (joints,), if neither rows nor limits tie it to others."""
    turning = [row for row in arm.drive_map.driven if arm.table.rows[row].is_revolute]
    alone = bool(turning) and _alone(arm, turning[-1])
    return np.array([alone and row == turning[-1] for row in arm.drive_map.driven])


def _alone(arm: Arm, row: int) -> bool:
    """Tell whether a row and its joint have nothing to do with others: by couplings, or by bounds.

    A joint that does not matter is put anywhere within its travel; it must not be what brings
    another row, or a sum of joint values, within bounds.
    """
    if row not in arm.drive_map.driven:
        return False
    joint, matrix = arm.drive_map.driven.index(row), arm.drive_map.matrix
    bounds = limits_of(arm)
    of_it = bounds.weights[~bounds.working & (bounds.weights[:, joint] != 0.0)]
    lonely = np.count_nonzero(matrix[row]) == 1 and np.count_nonzero(matrix[:, joint]) == 1
    return bool(lonely and np.count_nonzero(of_it) == len(of_it))


def _turns_tool_z(arm: Arm, screws: Screws) -> bool:
    """Tell whether the last row turns the tool about its own z axis, and does so alone."""
    last, tool = screws.rows - 1, screws.tool_at_zero
    if screws.prismatic[last] or last not in arm.drive_map.driven or not _last_turn(arm).any():
        return False
    tilt = np.linalg.norm(np.cross(screws.axis[last], tool[:3, 2]))
    away = np.linalg.norm(np.cross(screws.axis[last], tool[:3, 3] - screws.point[last]))
    return bool(tilt < EXACT_AXES and away < EXACT_AXES)


def _rows_that_matter(arm: Arm, screws: Screws) -> int:
    """Return how many rows carry the tool's point: what turns about it after them does not."""
    rows = screws.rows
    while rows and not screws.prismatic[rows - 1]:
        row = rows - 1
        away = np.cross(screws.tool_at_zero[:3, 3] - screws.point[row], screws.axis[row])
        if not _alone(arm, row) or np.linalg.norm(away) > EXACT_AXES:
            break
        rows -= 1
    return rows


def _first_rows(arm: Arm, tool_in_flange: FloatArray, rows: int) -> tuple[Arm, FloatArray]:
    """Return the arm of the first rows, which carries the tool as the last ones do at zero."""
    shorter = Arm(arm.name, Table(arm.table.convention, arm.table.rows[:rows]))
    flange = screws_of(shorter, np.eye(4))
    whole = screws_of(arm, tool_in_flange)
    at_flange, at_tool = flange.tool_at_zero.copy(), whole.tool_at_zero.copy()
    at_flange[:3, 3] *= flange.length
    at_tool[:3, 3] *= whole.length
    return shorter, inverse(at_flange) @ at_tool
