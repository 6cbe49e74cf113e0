"""Envelopes that follow from the structure of an arm: upright pairs, gantries.

Idea: two joints that keep the point in a plane along axis 1 give a section that axis 1 turns; its
extremes are at ends of its level lines, or at its ends along them. Slides alone give a box. Both
are recognised by how the joints move the point, whatever the table looks like; a third structure
is in level.py.

Source: regional structures (Milenkovic and Huang 1983); convex hulls by Qhull (Barber, Dobkin and
Huhdanpaa 1996) in scipy. Not covered: all other arms (searched.py).
"""

import numpy as np

from kinematics.envelope.draws import between
from kinematics.envelope.inquiry import Inquiry
from kinematics.envelope.measures import Measure
from kinematics.envelope.pair_views import plan_of_pair, section_view, swept_plan
from kinematics.envelope.section import section_from
from kinematics.envelope.shapes import PLAN, SIDE, Curve, View, Views
from kinematics.envelope.tolerances import PLACES_DRAWN, SAME_PLACE
from kinematics.number_checks import FloatArray


def upright(inquiry: Inquiry) -> Views | None:
    """Return the envelope of two joints that keep the point in a plane along axis 1.

    Examples
    --------
    >>> from kinematics.arm import Arm
    >>> from kinematics.envelope.inquiry import inquiry_of
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = [Row(JointKind.REVOLUTE, *row, 0.0, 0.0) for row in
    ...         ((0.0, np.pi / 2), (0.5, 0.0), (0.3, 0.0))]
    >>> inquiry = inquiry_of(Arm("upright", Table(Convention.STANDARD, tuple(rows))), np.eye(4))
    >>> round(upright(inquiry).volume.value / np.pi, 9)
    0.672
    """
    axis = inquiry.axis
    section = None if axis is None else section_from(inquiry.motion, axis)
    if axis is None or section is None:
        return None
    swept = swept_plan(section, float(inquiry.motion.limits.lower[0]), inquiry.axes)
    volume = section.volume
    if volume is None:
        least, most = section.swept
        low, high = least.value - least.error_bound, most.value + most.error_bound
        volume = between(inquiry.drawn(PLACES_DRAWN), low, high)
    postures = np.repeat(inquiry.search.joint_values[:1], 4, axis=0)
    postures[:, list(section.pair)] = section.extreme_postures()
    return Views(
        section_view(section, axis.direction),
        plan_of_pair(swept, inquiry.axes.directions),
        volume,
        section.turn >= 2.0 * np.pi or not section.reaches_behind,
        inquiry.extremes_at(postures),
    )


def slides(inquiry: Inquiry) -> Views | None:
    """Return the envelope of slides alone.

    Examples
    --------
    >>> from kinematics.arm import Arm
    >>> from kinematics.envelope.inquiry import inquiry_of
    >>> from kinematics.table import Convention, JointKind, Row, Table, Travel
    >>> rows = [Row(JointKind.PRISMATIC, 0.0, turned, 0.0, 0.0, travel=Travel(0.0, 2.0))
    ...         for turned in (np.pi / 2, 0.0)]
    >>> views = slides(inquiry_of(Arm("cross", Table(Convention.STANDARD, tuple(rows))), np.eye(4)))
    >>> round(views.section.area.value, 9), views.plan.area.value, views.volume.value
    (0.0, 0.0, 0.0)
    """
    motion = inquiry.motion
    movers = motion.movers(np.eye(3))
    fixed = np.ptp(motion.linear, axis=0).max(initial=0.0) <= motion.off
    tied = motion.limits.weights[:, list(movers)].any()
    if not movers or len(movers) > _MOST_SLIDES or not fixed or tied:
        return None
    columns = motion.linear[0][:, list(movers)]
    low, high = motion.limits.lower[list(movers)], motion.limits.upper[list(movers)]
    chosen = np.stack(np.unravel_index(np.arange(2 ** len(movers)), (2,) * len(movers)), axis=1)
    values = np.where(chosen == 1, high, low)
    corners = motion.places[0] + (values - motion.postures[0, list(movers)]) @ columns.T
    side, plan = (
        _hull_view(corners @ ways.T, seen, ways)
        for seen, ways in ((SIDE, np.eye(3)[[0, 2]]), (PLAN, inquiry.axes.directions))
    )
    # A corner is the best of all that slides reach in any direction, so searches end there.
    extremes = inquiry.searched_extremes
    return Views(side, plan, _hull_volume(corners), False, extremes)


_MOST_SLIDES = 6
"""Of which the 64 corners are listed."""


def _hull_view(points: FloatArray, kind: str, directions: FloatArray) -> View:
    """Return the view of a convex reach with corners (count, 2)."""
    size = float(np.ptp(points, axis=0).max())
    middle = points.mean(axis=0)
    spread = np.linalg.svd(points - middle, compute_uv=False)
    if spread[1] <= SAME_PLACE * spread[0]:
        way = np.linalg.svd(points - middle)[2][0]
        ends = points[[int(np.argmin(points @ way)), int(np.argmax(points @ way))]]
        return View(kind, (Curve(ends, outer=True),), Measure(0.0, 0.0), None, 0.0, directions)
    # Imported where it is needed: it takes as long as all else of the core.
    from scipy.spatial import ConvexHull

    curve = Curve(points[ConvexHull(points).vertices], outer=True)
    area = Measure(curve.signed_area, ROUNDED * size * size)
    return View(kind, (curve,), area, None, 0.0, directions)


def _hull_volume(corners: FloatArray) -> Measure:
    spread = np.linalg.svd(corners - corners.mean(axis=0), compute_uv=False)
    if len(spread) < 3 or spread[2] <= SAME_PLACE * spread[0]:
        return Measure(0.0, 0.0)
    from scipy.spatial import ConvexHull

    volume = float(ConvexHull(corners).volume)
    return Measure(volume, ROUNDED * float(spread[0]) ** 3)


ROUNDED = 1e-12
"""Share of a hull's size cubed or squared: what the rounding of its corners leaves."""
