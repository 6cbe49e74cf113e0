"""Which method answers for an arm of up to five joints, whatever of a target it is asked for.

Idea: few joints meet few of a target's six numbers, so a part of it is solved for and the rest is
measured. Three joints bring a point to its place. One more, or fewer whose point stays in a plane,
is a last turn (last_turn.py). Five joints are six of which one must stay at zero
(missing_joint.py), by whichever method has all of six (six_joints.py), and four that leave the spin
about tool z open are five, the last one turning about it.

Source: none; an order. Not covered: places alone by more than three joints, which have joints to
spare; arms without a structure of either kind: a search, and boxes, answer for them.
"""

from dataclasses import dataclass, replace

import numpy as np

from kinematics.arm import Arm
from kinematics.inverse.found import Found, Geometry, Solver
from kinematics.inverse.last_turn import last_turn_of
from kinematics.inverse.measured import DIRECTION, POSE, POSITION, Measured, errors_of
from kinematics.inverse.missing_joint import FiveJoints, with_missing_joint
from kinematics.inverse.regional_arm import regional_arm_of
from kinematics.inverse.screws import Screws
from kinematics.inverse.six_joints import six_joints_of
from kinematics.inverse.tolerances import SEARCH_ACCEPTS, SEARCH_RELAXED
from kinematics.table import FloatArray

MOST = 5
"""Joints of arms that are asked about here."""


def few_joints_of(arm: Arm, screws: Screws, tool_in_flange: FloatArray, task: str) -> Solver | None:
    """Return the closed form of an arm of one to five rows that all have their joint value.

    Examples
    --------
    >>> from kinematics.inverse.screws import screws_of
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = tuple(Row(JointKind.REVOLUTE, 0.3, 0.0, 0.0, 0.0) for _ in range(3))
    >>> arm = Arm("planar", Table(Convention.STANDARD, rows))
    >>> few_joints_of(arm, screws_of(arm, np.eye(4)), np.eye(4), "pose").geometry.say[:54]
    'a point of axis 3 is brought to its place by the other'
    """
    if screws.rows <= 3:
        regional = regional_arm_of(arm, tool_in_flange)
        if regional is not None:
            slack = SEARCH_ACCEPTS if task == POSITION else SEARCH_RELAXED
            return Measured(replace(regional, slack=slack), screws, task)
    if task == POSITION:
        return None
    if screws.rows < MOST:
        turning = last_turn_of(screws, task)
        if turning is not None or task != DIRECTION or screws.rows < MOST - 1:
            return turning
        return _spinning(screws)
    five = _five_joints(screws, task)
    return None if five is None or (task == DIRECTION and five.place != MOST) else five


def _five_joints(screws: Screws, task: str) -> FiveJoints | None:
    extended = with_missing_joint(screws)
    if extended is None:
        return None
    inner = six_joints_of(extended[0])
    return None if inner is None else FiveJoints(inner, *extended, screws, task)


@dataclass(frozen=True, eq=False)
class Spinning:
    """A solver for places and directions, by one for poses of the same rows and a spin after them.

    Attributes
    ----------
    inner : for the rows and the spin. screws : the rows.
    """

    inner: Solver
    screws: Screws

    @property
    def proof(self) -> str:
        return self.inner.proof

    @property
    def geometry(self) -> Geometry:
        return self.inner.geometry

    def solve(self, targets: FloatArray) -> Found:
        """Return motions (k, rows) for targets (m, 4, 4), whatever the spin."""
        found = self.inner.solve(targets)
        motions = np.ascontiguousarray(found.motions[:, :-1])
        position, angle = errors_of(self.screws, motions, targets, found.target, DIRECTION)
        return replace(
            found,
            motions=motions,
            position_error=position,
            angle_error=angle,
            nearest=found.nearest[:, :-1],
        )

    def nearest(self, targets: FloatArray) -> FloatArray:
        """Return row motions (m, rows) near the target."""
        return self.inner.nearest(targets)[:, :-1]


def _spinning(screws: Screws) -> Spinning | None:
    """Return the solver for four rows with the spin open, by five with a turn about tool z."""
    tool = screws.tool_at_zero
    five = replace(
        screws,
        axis=np.vstack([screws.axis, tool[:3, 2]]),
        point=np.vstack([screws.point, tool[:3, 3]]),
        prismatic=np.append(screws.prismatic, False),
    )
    posed = _five_joints(five, POSE)
    return None if posed is None else Spinning(posed, screws)
