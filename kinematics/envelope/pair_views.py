"""Exact views of what two joints reach, and of what such a section sweeps about axis 1.

Idea: both views are regions known on every level line. The section counts what is reached behind
axis 1 as what is reached before it. Its plan is what the line from its least to its greatest place
sweeps as it turns, which is a region of two joints again: the turn, and the way along the line.

Source: as the modules used. Not covered: which arms have such sections (section.py).
"""

import numpy as np

from kinematics.envelope.measures import area_of, both_sides, without_overlap
from kinematics.envelope.outlines import Ends, LevelLines, outlines_of
from kinematics.envelope.pair_region import PairRegion
from kinematics.envelope.plan_axes import PlanAxes
from kinematics.envelope.section import Section
from kinematics.envelope.shapes import PLAN, SECTION, View
from kinematics.envelope.tolerances import CHORD, SAME_PLACE
from kinematics.number_checks import FloatArray


def section_view(section: Section, axis_direction: FloatArray) -> View:
    """Return the section of radius and height.

    Examples
    --------
    >>> from kinematics.arm import Arm
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = [Row(JointKind.REVOLUTE, *row, 0.0, 0.0) for row in
    ...         ((0.0, np.pi / 2), (0.5, 0.0), (0.3, 0.0))]
    >>> arm = Arm("upright", Table(Convention.STANDARD, tuple(rows)))
    >>> from kinematics.envelope.section import section_of
    >>> section = section_of(arm, np.eye(4))
    >>> view = section_view(section, np.array([0.0, 0.0, 1.0]))
    >>> view.box.round(3).tolist(), round(view.area.value / np.pi, 9)
    ([[0.0, -0.8], [0.8, 0.8]], 0.3)
    """
    region = section.region
    size = _size(region)

    def lines(heights: FloatArray) -> list[Ends]:
        stretches = region.stretches(heights)
        begin, end = without_overlap(*both_sides(stretches.places, stretches.counts > 0))
        return _listed(np.hypot(begin, section.aside), np.hypot(end, section.aside), size)

    directions = np.stack([section.outward, axis_direction])
    curves = outlines_of(lines, region.corners, CHORD * size)
    return View(SECTION, curves, section.area, None, CHORD * size, directions)


def plan_of_pair(region: PairRegion, directions: FloatArray) -> View:
    """Return the plan that a pair of joints reaches.

    Parameters
    ----------
    directions : (2, 3), of its coordinates in the base.

    Examples
    --------
    >>> still = np.broadcast_to(np.eye(2), (1, 2, 2))
    >>> box = np.array([[0.0, 0.0], [3.0, 0.0], [3.0, 1.0], [0.0, 1.0]])
    >>> region = PairRegion(lambda q: (q, np.repeat(still, len(q), 0)), box, np.array([0.0, 1.0]))
    >>> plan_of_pair(region, np.eye(3)[:2]).box.round(9).tolist()
    [[0.0, 0.0], [3.0, 1.0]]
    """
    size = _size(region)
    curves = outlines_of(plain_lines(region, size), region.corners, CHORD * size)
    return View(PLAN, curves, area_of(region), None, CHORD * size, directions)


def plain_lines(region: PairRegion, size: float) -> LevelLines:
    """Return the stretches of a region as level lines have them.

    Examples
    --------
    >>> still = np.broadcast_to(np.eye(2), (1, 2, 2))
    >>> box = np.array([[0.0, 0.0], [3.0, 0.0], [3.0, 1.0], [0.0, 1.0]])
    >>> region = PairRegion(lambda q: (q, np.repeat(still, len(q), 0)), box, np.array([0.0, 1.0]))
    >>> plain_lines(region, 3.0)(np.array([0.5]))
    [array([[0., 3.]])]
    """

    def lines(heights: FloatArray) -> list[Ends]:
        stretches = region.stretches(heights)
        finite = np.where(np.isfinite(stretches.places), stretches.places, 0.0)
        inside = stretches.counts[:, :-1] > 0
        begin = np.where(inside, finite[:, :-1], np.inf)
        end = np.where(inside, finite[:, 1:], np.inf)
        return _listed(begin, end, size)

    return lines


def swept_plan(section: Section, lower: float, axes: PlanAxes) -> PairRegion:
    """Return what a section turned about axis 1 reaches, seen along the axis.

    Parameters
    ----------
    lower : rad, of joint 1, where its turn begins.

    Examples
    --------
    >>> from kinematics.arm import Arm
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = [Row(JointKind.REVOLUTE, *row, 0.0, 0.0) for row in
    ...         ((0.0, np.pi / 2), (0.5, 0.0), (0.3, 0.0))]
    >>> arm = Arm("upright", Table(Convention.STANDARD, tuple(rows)))
    >>> from kinematics.envelope.section import section_of
    >>> section = section_of(arm, np.eye(4))
    >>> axes = PlanAxes(np.eye(3)[:2], np.zeros(2), 1.0)
    >>> swept_plan(section, 0.0, axes).extent().round(9)
    array([-0.8,  0.8])
    """
    least, most = section.region.extent()
    outward, sideways = axes.directions @ section.outward, axes.directions @ section.sideways
    quarter = np.array([[0.0, -1.0], [1.0, 0.0]])

    def place_of(swings: FloatArray) -> tuple[FloatArray, FloatArray]:
        turn, out = axes.sense * swings[:, :1], swings[:, 1:]
        cosine, sine = np.cos(turn), np.sin(turn)
        spokes = cosine * outward + sine * (quarter @ outward)
        arms = out * spokes + cosine * sideways + sine * (quarter @ sideways)
        turning = axes.sense * arms @ quarter.T
        return axes.centre + arms, np.stack([turning, spokes], axis=2)

    upper = lower + section.turn
    polygon = np.array([[lower, least], [upper, least], [upper, most], [lower, most]])
    return PairRegion(place_of, polygon, np.array([0.0, 1.0]))


def _listed(begin: FloatArray, end: FloatArray, size: float) -> list[Ends]:
    """Return the stretches of each line; those that touch are one, those of no length none."""
    found = []
    for low, high in zip(begin, end, strict=True):
        stretches: list[list[float]] = []
        for first, last in zip(low.tolist(), high.tolist(), strict=True):
            if not first < last:
                continue
            if stretches and first <= stretches[-1][1] + _TOUCHING * size:
                stretches[-1][1] = max(last, stretches[-1][1])
            else:
                stretches.append([first, last])
        kept = [one for one in stretches if one[1] - one[0] > _TOUCHING * size]
        found.append(np.array(kept).reshape(-1, 2))
    return found


_TOUCHING = 1e-3 * SAME_PLACE
"""Share of the size by which neighbouring stretches may be apart and still be one: crossings are
found to the last bits, and two of one place may be some of them apart."""


def _size(region: PairRegion) -> float:
    return max(float(np.ptp(region.corners)), float(np.abs(region.extent()).max()))
