"""Where a point is in a view, and how the joints move it there: what places are asked in.

Idea: every question about a reach is one about some coordinates of a point: radius and height about
axis 1, two directions of the base, all three, or one alone. Each kind tells the coordinates of many
postures and how the joints change them, so that one search serves all of them.

Source: chain rule on the Jacobian. Not covered: which coordinates tell what (envelope.py).
"""

from collections.abc import Callable

import numpy as np

from kinematics.arm import Arm
from kinematics.jacobian import motion_of
from kinematics.number_checks import FloatArray
from kinematics.reach.sample_summary import FirstAxis

PointView = Callable[[FloatArray], tuple[FloatArray, FloatArray]]
"""Coordinates (count, m) and their Jacobians (count, m, joints) for postures (count, joints)."""


def along(arm: Arm, tool_in_flange: FloatArray, directions: FloatArray) -> PointView:
    """Return the view of the tool point along directions (m, 3) of the base.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> arm = Arm("one", Table(Convention.STANDARD, (Row(JointKind.REVOLUTE, 0.5, 0, 0, 0),)))
    >>> places, jacobians = along(arm, np.eye(4), np.eye(3)[:2])(np.array([[0.0]]))
    >>> places, jacobians[0]
    (array([[0.5, 0. ]]), array([[0. ],
           [0.5]]))
    """

    def view(joint_values: FloatArray) -> tuple[FloatArray, FloatArray]:
        motion = motion_of(arm, joint_values, tool_in_flange)
        places = motion.tool_in_base[:, :3, 3] @ directions.T
        return places, directions @ motion.of_joints[:, :3]

    return view


def about(arm: Arm, tool_in_flange: FloatArray, axis: FirstAxis) -> PointView:
    """Return the view of radius and height about axis 1.

    On the axis itself the radius grows whichever way the point moves; it is told along one of
    them.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> arm = Arm("one", Table(Convention.STANDARD, (Row(JointKind.REVOLUTE, 0.5, 0, 0.2, 0),)))
    >>> axis = FirstAxis(np.zeros(3), np.array([0.0, 0.0, 1.0]))
    >>> about(arm, np.eye(4), axis)(np.array([[0.7]]))[0].round(12)
    array([[0.5, 0.2]])
    """

    def view(joint_values: FloatArray) -> tuple[FloatArray, FloatArray]:
        motion = motion_of(arm, joint_values, tool_in_flange)
        positions, linear = motion.tool_in_base[:, :3, 3], motion.of_joints[:, :3]
        arms = positions - axis.point
        heights = positions @ axis.direction
        arms = arms - (arms @ axis.direction)[:, None] * axis.direction
        radii = np.sqrt((arms * arms).sum(axis=1))
        outward = arms / np.maximum(radii, 1e-300)[:, None]
        rows = np.stack([outward, np.broadcast_to(axis.direction, outward.shape)], axis=1)
        return np.stack([radii, heights], axis=1), rows @ linear

    return view


def only(view: PointView, coordinate: int) -> PointView:
    """Return one coordinate of a view as a view of its own.

    Examples
    --------
    >>> view = lambda q: (q, np.ones((1, 2, 2)))
    >>> only(view, 1)(np.array([[3.0, 4.0]]))[0]
    array([[4.]])
    """

    def alone(joint_values: FloatArray) -> tuple[FloatArray, FloatArray]:
        places, jacobians = view(joint_values)
        return places[:, coordinate : coordinate + 1], jacobians[:, coordinate : coordinate + 1]

    return alone
