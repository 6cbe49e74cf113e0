"""The two directions in which a plan is told.

Idea: the base's x and y, as drawings have it. Where axis 1 leans in the base, a plan seen along the
base's z would show no circles: then it is seen along axis 1, x as near to the base's as can be.

Source: first-angle projection along an axis. Not covered: arms in the world.
"""

from dataclasses import dataclass

import numpy as np

from kinematics.arm import Arm
from kinematics.number_checks import FloatArray
from kinematics.reach.sample_summary import FirstAxis


@dataclass(frozen=True)
class PlanAxes:
    """Directions of a plan, and how axis 1 is seen in it.

    Attributes
    ----------
    directions : (2, 3), in the base.
    centre : (2,), where axis 1 is; the base's origin without one.
    sense : 1 where joint 1 turns from the first direction to the second, else -1.
    """

    directions: FloatArray
    centre: FloatArray
    sense: float


def plan_axes(arm: Arm, axis: FirstAxis | None) -> PlanAxes:
    """Return the directions of the plan of an arm.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> arm = Arm("one", Table(Convention.STANDARD, (Row(JointKind.REVOLUTE, 0.4, 0, 0, 0),)))
    >>> axis = FirstAxis(np.zeros(3), np.array([0.0, 0.0, 1.0]))
    >>> plan_axes(arm, axis).directions
    array([[1., 0., 0.],
           [0., 1., 0.]])
    """
    directions, centre, sense = np.eye(3)[:2], np.zeros(2), 1.0
    if axis is not None:
        up = axis.direction
        if np.abs(directions @ up).max() > _LEANS:
            x = np.eye(3)[0 if abs(up[0]) < 0.9 else 1]
            x = x - (x @ up) * up
            x = x / np.sqrt(x @ x)
            directions = np.stack([x, np.cross(up, x)])
        centre = directions @ axis.point
        turned = np.cross(directions[0], directions[1]) @ up
        row = arm.drive_map.matrix[0]
        driven = row[np.nonzero(row)[0][0]] if row.any() else 1.0
        sense = float(np.sign(turned) * np.sign(driven))
    return PlanAxes(directions, centre, sense)


_LEANS = 1e-9
"""Of axis 1 off the base's z, rad: what the rounding of typed degrees leaves, a thousandfold."""
