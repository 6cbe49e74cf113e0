"""Places no arm of such links reaches: beyond all of them, or within the longest one's shadow.

A point on a turning axis keeps its distance from a point on the next one, whatever the joints do.
So points chosen on the axes are a chain of links of fixed lengths l from axis 1 to the place that
must be reached (the wrist centre, where the last three axes meet in one; else the tool's point):
that place is never further from the first point than the sum of l, and never nearer than the
longest exceeds the others together. The points are chosen so that the sum is least.

Source: the polygon inequality, as in Siciliano, Sciavicco, Villani and Oriolo for the planar arm.
Not covered: what orientation asks beyond the wrist centre; slides, but for those the arm begins
with, along which places are not held against anything; travel.
"""

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.screws import Screws
from kinematics.reach.arm_parts import meeting_point
from kinematics.reach.tolerances import BOUND_ROUNDING
from kinematics.table import FloatArray
from kinematics.tolerances import SHORTEST_LENGTH

_SWEEPS = 60
"""Improvements of every point in turn; any points are a bound, these a near best one."""

FREE, BEYOND, WITHIN = range(3)


class Held(NamedTuple):
    """Targets held against the bounds of an arm.

    Attributes
    ----------
    outcome : (m,), FREE, BEYOND all links or WITHIN the void they leave.
    distance : (m,), metres, of the place to be reached from the first axis.
    """

    outcome: NDArray[np.int64]
    distance: FloatArray


class Bounds:
    """The bounds of one arm with one tool.

    Parameters
    ----------
    posed : whether the target's orientation is asked for too, and so the wrist centre's place.

    Attributes
    ----------
    place : name of what must be reached. axis : 1-based number of the first turning axis.
    aim : (3,), that place in the tool, metres.
    furthest, nearest : metres from that axis's point; infinite and 0 where there is no bound.

    Examples
    --------
    >>> from kinematics.arm import Arm
    >>> from kinematics.inverse.screws import screws_of
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = tuple(Row(JointKind.REVOLUTE, a, 0.0, 0.0, 0.0) for a in (0.6, 0.2, 0.15))
    >>> bounds = Bounds(screws_of(Arm("three", Table(Convention.STANDARD, rows)), np.eye(4)))
    >>> round(bounds.furthest, 9), round(bounds.nearest, 9)
    (0.95, 0.25)
    """

    def __init__(self, screws: Screws, posed: bool = False) -> None:
        self.place, rows = "tool", screws.rows
        goal = screws.tool_at_zero[:3, 3]
        centre = meeting_point(screws, 3) if posed else None
        if centre is not None:
            self.place, rows, goal = "wrist centre", screws.rows - 3, centre
        at_zero = screws.tool_at_zero
        self.aim = at_zero[:3, :3].T @ (goal - at_zero[:3, 3]) * screws.length
        turning = [row for row in range(rows) if not screws.prismatic[row]]
        slides = [row for row in range(rows) if screws.prismatic[row]]
        self.furthest, self.nearest, self._across = np.inf, 0.0, np.eye(3)
        self._rounding = BOUND_ROUNDING * screws.length
        self._first = np.zeros(3)
        self.axis = turning[0] + 1 if turning else 0
        if not turning or (slides and slides[-1] > turning[0]):
            return
        points = shortest_way(screws.axis[turning], screws.point[turning], goal)
        lengths = np.linalg.norm(np.diff(points, axis=0), axis=1) * screws.length
        self._first = points[0] * screws.length
        self.furthest = float(lengths.sum())
        if slides:
            along = screws.axis[slides]
            self._across = np.eye(3) - np.linalg.pinv(along) @ along
        else:
            self.nearest = max(0.0, float(2.0 * lengths.max() - lengths.sum()))

    def hold(self, targets: FloatArray, tolerance: FloatArray | float = 0.0) -> Held:
        """Hold targets (m, 4, 4), the tool in base, metres, against the bounds.

        ``tolerance`` (m,), metres: by how much the place may be missed.
        """
        places = targets[:, :3, :3] @ self.aim + targets[:, :3, 3]
        distance = np.linalg.norm((places - self._first) @ self._across, axis=1)
        slack = self._rounding + tolerance
        outcome = np.zeros(len(targets), np.int64)
        outcome[distance > self.furthest + slack] = BEYOND
        outcome[distance < self.nearest - slack] = WITHIN
        return Held(outcome, distance)

    def apart(self, one: FloatArray, other: FloatArray) -> float:
        """Return how far apart, metres, the place to be reached is for two poses (4, 4)."""
        places = [pose[:3, :3] @ self.aim + pose[:3, 3] for pose in (one, other)]
        return float(np.linalg.norm(places[0] - places[1]))


def shortest_way(axis: FloatArray, point: FloatArray, goal: FloatArray) -> FloatArray:
    """Return a point on each line (n, 3), and the goal after them, so that the way is short.

    Light reflects off a line where the way between two points is shortest: the place along it
    divides that between their feet as their distances from it.

    Parameters
    ----------
    axis, point : (n, 3), unit directions of the lines, and any points on them; goal : (3,).

    Examples
    --------
    Across from the one line to the other, and on to the goal.

    >>> lines = np.array([[0.0, 0.0, 1.0], [0.0, 0.0, 1.0]])
    >>> points = shortest_way(lines, np.array([[0.0, 0.0, 7.0], [3.0, 0.0, 5.0]]), np.zeros(3))
    >>> points.round(6) + 0.0
    array([[0., 0., 0.],
           [3., 0., 0.],
           [0., 0., 0.]])
    """
    places = np.vstack([point, goal])
    for _ in range(_SWEEPS):
        before = places.copy()
        for i in range(len(axis) - 1, -1, -1):
            beyond = places[i + 1] - point[i]
            along = float(beyond @ axis[i])
            if i:
                back = places[i - 1] - point[i]
                other = float(back @ axis[i])
                far = float(np.linalg.norm(beyond - along * axis[i]))
                near = float(np.linalg.norm(back - other * axis[i]))
                weight = near / (near + far) if near + far > SHORTEST_LENGTH else 0.5
                along = other + weight * (along - other)
            places[i] = point[i] + along * axis[i]
        if np.abs(places - before).max() < SHORTEST_LENGTH:
            break
    return places
