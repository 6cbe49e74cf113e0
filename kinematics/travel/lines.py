"""Straight lines of the tool: from one pose to another, the orientation turning evenly.

The tool's point goes straight, and the orientation turns about one axis that stands still, by as
much for each share of the way. What a target leaves open is taken from the posture that the tool
comes from: it turns no further than the target asks.

Source: the rotation vector of the difference, the shortest way between two orientations. Not
covered: postures on the way (tracking.py), and orientations half a turn apart, where two ways are
as short: which of them is taken is arbitrary, and told.
"""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from kinematics.reach.targets import CONE, NONE, ORIENTATION, Target
from kinematics.rotations import rotation_about, rotation_from_vector, rotation_vector_of
from kinematics.table import FloatArray
from kinematics.tolerances import SHORT_VECTOR


@dataclass(frozen=True, eq=False)
class StraightLine:
    """A way of the tool in the base.

    Attributes
    ----------
    start : (4, 4), tool in base, metres. shift : (3,), metres. turn : (3,), rotation vector in base
        axes: angle times axis.

    Examples
    --------
    >>> end = np.eye(4)
    >>> end[:3, 3] = [3.0, 0.0, 4.0]
    >>> line = line_between(np.eye(4), end)
    >>> line.length, line.angle, line.at(0.5)[:3, 3]
    (5.0, 0.0, array([1.5, 0. , 2. ]))
    """

    start: FloatArray
    shift: FloatArray
    turn: FloatArray

    @cached_property
    def length(self) -> float:
        """Metres that the tool's point goes."""
        return float(np.linalg.norm(self.shift))

    @cached_property
    def angle(self) -> float:
        """Rad that the tool turns."""
        return float(np.linalg.norm(self.turn))

    def at(self, share: float) -> FloatArray:
        """Return the pose at a share of the way, (4, 4)."""
        there = self.start.copy()
        there[:3, :3] = rotation_from_vector(share * self.turn) @ self.start[:3, :3]
        there[:3, 3] += share * self.shift
        return there


def line_between(start: FloatArray, end: FloatArray) -> StraightLine:
    """Return the line from pose to pose, (4, 4) each, tool in base, metres.

    Examples
    --------
    >>> quarter = np.array([[1.0, 0, 0, 2], [0, 0, -1, 0], [0, 1, 0, 0], [0, 0, 0, 1]])
    >>> line = line_between(np.eye(4), quarter)
    >>> line.shift, line.turn.round(6)
    (array([2., 0., 0.]), array([1.570796, 0.      , 0.      ]))
    """
    turn = rotation_vector_of(end[:3, :3] @ start[:3, :3].T)
    # Products of rotations leave 1e-16 of a turn where there is none.
    if np.linalg.norm(turn) < SHORT_VECTOR:
        turn = np.zeros(3)
    return StraightLine(np.array(start), end[:3, 3] - start[:3, 3], turn)


def end_of_line(start: FloatArray, target: Target) -> FloatArray:
    """Return the pose (4, 4) that a tool at ``start`` is to be brought to for a target.

    Examples
    --------
    >>> quarter = np.array([[1.0, 0, 0, 2], [0, 0, -1, 0], [0, 1, 0, 0], [0, 0, 0, 1]])
    >>> end_of_line(quarter, Target(np.eye(4), ORIENTATION))
    array([[ 1.,  0.,  0.,  0.],
           [ 0.,  0., -1.,  0.],
           [ 0.,  1.,  0.,  0.],
           [ 0.,  0.,  0.,  1.]])
    """
    end = np.array(target.tool_in_base)
    if target.freedom == NONE:
        return end
    turned = start[:3, :3]
    if target.freedom != ORIENTATION:
        spread = target.cone if target.freedom == CONE else 0.0
        turned = _bent_towards(turned, end[:3, 2], spread)
    end[:3, :3] = turned
    return end


def _bent_towards(rotation: FloatArray, wanted: FloatArray, spread: float) -> FloatArray:
    """Return a rotation turned by the shortest way until its z is within ``spread`` of a line."""
    z = rotation[:, 2]
    axis = np.cross(z, wanted)
    sine = float(np.linalg.norm(axis))
    apart = float(np.arctan2(sine, z @ wanted))
    if apart <= spread + SHORT_VECTOR:
        return rotation
    # Opposite directions: about tool x as well as about any other line across.
    axis = axis / sine if sine > SHORT_VECTOR else rotation[:, 0]
    bent: FloatArray = rotation_about(axis, apart - spread) @ rotation
    return bent
