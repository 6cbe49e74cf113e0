"""The plan of what turns a whole turn about axis 1: a disc, a ring, or a circle.

Idea: the radii reached are all between the least and the greatest, for travel is in one piece and
its image too; and each is reached at every bearing. So the plan is known as well as both radii are.

Source: none but that. Not covered: the radii (level_links.py, proved_radii.py).
"""

import numpy as np

from kinematics.envelope.measures import Measure
from kinematics.envelope.plan_axes import PlanAxes
from kinematics.envelope.proved_radii import ProvedRadii
from kinematics.envelope.shapes import PLAN, Curve, View
from kinematics.envelope.tolerances import CHORD


def ring_view(axes: PlanAxes, radii: ProvedRadii, slack: float) -> View:
    """Return the ring between two radii.

    Parameters
    ----------
    slack : m, below which a radius is none, and two radii are one.

    Examples
    --------
    >>> axes = PlanAxes(np.eye(3)[:2], np.zeros(2), 1.0)
    >>> ring = ring_view(axes, ProvedRadii(1.0, 2.0, 1.0, 2.1), 1e-9)
    >>> round(ring.area.value / np.pi, 9), [curve.outer for curve in ring.curves]
    (3.0, [True, False])
    >>> round(ring.area.error_bound / np.pi, 9), round(ring.resolution, 9)
    (0.41, 0.1)
    """
    least, most = radii.least, radii.greatest
    hole = least if least > slack else 0.0
    count = int(np.ceil(np.pi / np.arccos(1.0 - CHORD)))
    turns = np.linspace(0.0, 2.0 * np.pi, count, endpoint=False)
    circle = np.stack([np.cos(turns), np.sin(turns)], axis=1)
    curves = [Curve(axes.centre + most * circle, outer=True)]
    area = Measure(0.0, 0.0)
    if most - least > slack:
        more = radii.above**2 - most**2 + max(hole**2 - radii.below**2, 0.0)
        bound = np.pi * (more + (0.0 if hole else least**2) + ROUNDED * most**2)
        area = Measure(np.pi * (most**2 - hole**2), bound)
        if hole:
            curves.append(Curve(axes.centre + hole * circle[::-1], outer=False))
    resolution = radii.told_resolution(slack)
    return View(PLAN, tuple(curves), area, resolution, CHORD * most, axes.directions)


ROUNDED = 1e-12
"""Share of the disc's area: what rounding leaves of it."""
