"""Points that drawings are marked with: where axis 1 and extremes stand, and arcs about axis 1.

Idea: a drawing needs places on bearings, not angles. Source: none but polar coordinates. Not
covered: how marks look.
"""

import numpy as np

from kinematics.envelope.shapes import Envelope, Extreme, Turn
from kinematics.number_checks import FloatArray


def plan_centre(envelope: Envelope) -> FloatArray:
    """Return where axis 1 stands in the plan, (2,), m; the base's origin without one.

    Examples
    --------
    >>> from kinematics.arm import Arm
    >>> from kinematics.envelope.envelope import envelope_of
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> row = Row(JointKind.REVOLUTE, 0.3, 0.0, 0.0, 0.0)
    >>> plan_centre(envelope_of(Arm("one", Table(Convention.MODIFIED, (row,))), np.eye(4)))
    array([0.3, 0. ])
    """
    if envelope.axis is None:
        return np.zeros(2)
    centre: FloatArray = envelope.plan.directions @ envelope.axis.point
    return centre


def place_in_section(envelope: Envelope, extreme: Extreme) -> FloatArray:
    """Return where an extreme is reached, (2,), m, in the section; in the side view without one.

    Examples
    --------
    >>> from kinematics.arm import Arm
    >>> from kinematics.envelope.envelope import envelope_of
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> row = Row(JointKind.REVOLUTE, 0.4, 0.0, 0.1, 0.0)
    >>> envelope = envelope_of(Arm("one", Table(Convention.STANDARD, (row,))), np.eye(4))
    >>> place_in_section(envelope, envelope.extremes[0]).round(9)
    array([0.4, 0.1])
    """
    if envelope.axis is None:
        return extreme.position[[0, 2]]
    return envelope.axis.radius_and_height(extreme.position)


def bearings_faced(turn: Turn) -> tuple[float, float] | None:
    """Return between which bearings the arm can face, rad; None where at all of them.

    Examples
    --------
    >>> bearings_faced(Turn(-2.0, 2.0, 4.0, 2.0, 2.0 * np.pi - 2.0))
    (-2.0, 2.0)
    """
    if turn.dead_from is None or turn.dead_to is None:
        return None
    return turn.dead_to - 2.0 * np.pi, turn.dead_from


def on_bearings(bearings: FloatArray | list[float]) -> FloatArray:
    """Return the points one away on bearings (count,), rad from the first direction; (count, 2).

    Examples
    --------
    >>> on_bearings([0.0, np.pi / 2]).round(9)
    array([[1., 0.],
           [0., 1.]])
    """
    return np.stack([np.cos(bearings), np.sin(bearings)], axis=-1)


def arc(begin: float, end: float, apart: float = 0.05) -> FloatArray:
    """Return points one away from bearing ``begin`` to ``end``, rad; (count, 2).

    Parameters
    ----------
    apart : rad between points at most.

    Examples
    --------
    >>> arc(0.0, np.pi, 2.0).round(9)
    array([[ 1.,  0.],
           [ 0.,  1.],
           [-1.,  0.]])
    """
    steps = int(np.ceil(abs(end - begin) / apart))
    return on_bearings(np.linspace(begin, end, steps + 1))
