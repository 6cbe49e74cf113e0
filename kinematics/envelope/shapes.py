"""What an envelope is made of: closed curves, their areas, and where the arm reaches farthest.

Idea: two views say it. The section through axis 1 tells which radii and heights are reached, the
plan which places seen along axis 1. Each is a set of closed curves: outer ones run
counter-clockwise, inner ones (around what is not reached) clockwise, so that the reach is always
on the left and the areas between them add up with their signs. An arm without an axis 1 has a side
view instead of the section.

Source: working space of ISO 8373 and its drawing in ISO 9946. Not covered: how the curves are
found (envelope.py).
"""

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np

from kinematics.envelope.measures import Measure
from kinematics.reach.sample_summary import FirstAxis
from kinematics.table import FloatArray

TOOL = "tool"
WRIST = "wrist"
"""Points an envelope is told of: the tool point, or where the axes of the wrist meet."""

SECTION = "section"
SIDE = "side"
PLAN = "plan"
"""Kinds of views; their coordinates are in ``COORDINATES``."""

COORDINATES = {SECTION: ("radius", "height"), SIDE: ("x", "z"), PLAN: ("x", "y")}
"""What the two coordinates of a view are. Radius and height are about axis 1, height from the
base's origin; x, y and z are the base's, but for the plan of an arm whose axis 1 leans in the base:
see ``View.directions``."""


@dataclass(frozen=True)
class Curve:
    """One closed curve of a view.

    Attributes
    ----------
    points : (count, 2), m, in order; the last is joined to the first, which is not repeated.
    outer : whether the reach is inside of it (it runs counter-clockwise) or outside (clockwise).

    Examples
    --------
    >>> square = Curve(np.array([[0.0, 0.0], [2.0, 0.0], [2.0, 2.0], [0.0, 2.0]]), outer=True)
    >>> square.signed_area
    4.0
    """

    points: FloatArray
    outer: bool

    @property
    def signed_area(self) -> float:
        """Area within, negative of an inner curve; m^2. Source: the shoelace formula."""
        x, y = (self.points - self.points.mean(axis=0)).T
        return float(0.5 * (x @ np.roll(y, -1) - y @ np.roll(x, -1)))


@dataclass(frozen=True)
class View:
    """What is reached, seen in a plane.

    Attributes
    ----------
    kind : SECTION, SIDE or PLAN.
    curves : outer ones first, the largest first. Of a region of no size (``flat``) one closed
        curve that runs along it and back, or a single point.
    area : of all that is reached, each place counted once; m^2, with how far off it may be.
    resolution : m, distance of the places asked for one by one: what is narrower may be missed;
        of a ring, and of a rectangle, by how much a radius may be off. None where the curves are
        exact.
    chord : m, how far a curve may be from the straight line between two of its points; of one that
        is sampled only where it is smooth: a corner may be cut off by the resolution.
    directions : (2, 3), in the base, of the two coordinates; of the radius of a section that which
        it has where joint 1 is at 0.
    """

    kind: str
    curves: tuple[Curve, ...]
    area: Measure
    resolution: float | None
    chord: float
    directions: FloatArray

    @property
    def exact(self) -> bool:
        """Whether the curves follow from the arm alone, not from places asked one by one."""
        return self.resolution is None

    @property
    def flat(self) -> bool:
        """Whether the region has no size: a line or a point."""
        return self.area.value == 0.0

    @property
    def box(self) -> FloatArray:
        """Least and greatest of both coordinates, (2, 2): ``[[least, least], [most, most]]``."""
        points = np.concatenate([curve.points for curve in self.curves])
        return np.stack([points.min(axis=0), points.max(axis=0)])


@dataclass(frozen=True)
class Extreme:
    """How far the point gets in one direction, and a posture that brings it there.

    Attributes
    ----------
    measure : ``radius`` or ``height``; of an arm without an axis 1 ``x``, ``y`` or ``z``.
    greatest : the greatest value, or the least.
    value : m, of the posture told: nothing is told that is not reached.
    joint_values : (joints,), rad or m.
    position : (3,), m, in the base.
    """

    measure: str
    greatest: bool
    value: float
    joint_values: FloatArray
    position: FloatArray


class Views(NamedTuple):
    """What one way to find an envelope tells.

    Attributes
    ----------
    section : or the side view; extremes : of each measure, the least before the greatest.
    same_at_every_bearing : as of ``Envelope``.
    """

    section: View
    plan: View
    volume: Measure
    same_at_every_bearing: bool
    extremes: tuple[Extreme, ...]


@dataclass(frozen=True)
class Turn:
    """How far axis 1 turns, and which bearings that leaves out.

    Attributes
    ----------
    lower, upper : rad, of joint 1.
    angle : rad, of the bearings the arm can face: at most a whole turn.
    dead_from, dead_to : rad, bearings in the plan between which the arm cannot face, counted from
        the plan's first direction to its second; ``dead_from < dead_to``. None where axis 1 turns
        a whole turn. What reaches backwards over the axis may still get there.
    """

    lower: float
    upper: float
    angle: float
    dead_from: float | None
    dead_to: float | None


@dataclass(frozen=True)
class Envelope:
    """How far an arm reaches.

    Attributes
    ----------
    point : TOOL or WRIST; point_in_flange : (3,), m, where it is in the flange.
    working : whether working travel bounds it too.
    axis : axis 1 in the base; None where row 1 slides or there are no joints.
    turn : of axis 1; None as ``axis``.
    section : kind SECTION; SIDE where there is no axis 1.
    plan : kind PLAN.
    volume : m^3, each place counted once, with how far off it may be.
    same_at_every_bearing : whether the section is reached whole at every bearing that the arm can
        face, so that the volume is the section turned; otherwise it shows what is reached at any.
    extremes : least and greatest of each measure.
    notes : sentences about what a reader of the drawing should know.
    """

    point: str
    point_in_flange: FloatArray
    working: bool
    axis: FirstAxis | None
    turn: Turn | None
    section: View
    plan: View
    volume: Measure
    same_at_every_bearing: bool
    extremes: tuple[Extreme, ...]
    notes: tuple[str, ...]

    @property
    def exact(self) -> bool:
        """Whether both views are exact."""
        return self.section.exact and self.plan.exact
