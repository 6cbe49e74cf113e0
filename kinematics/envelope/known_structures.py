"""Envelopes that follow from the structure of an arm: upright pairs, level arms, gantries.

Idea: three structures cover most arms whose tool is not set off. Two joints that keep the point in
a plane along axis 1 give a section that axis 1 turns. Joints that move the point level and others
that move it up and down, independent of each other, give a plan times a stroke. Slides alone give a
box. Each is recognised by how the joints move the point, whatever the table looks like.

Source: regional structures (Milenkovic and Huang 1983); convex hulls by Qhull (Barber, Dobkin and
Huhdanpaa 1996) in scipy. Not covered: all other arms (sampled_views.py).
"""

from typing import NamedTuple

import numpy as np

from kinematics.envelope.draws import between, drawn_volume
from kinematics.envelope.flat_views import flat_view
from kinematics.envelope.measures import Measure
from kinematics.envelope.pair_of_arm import PointMotion, pair_region_of
from kinematics.envelope.pair_views import plan_of_pair, section_view, swept_plan
from kinematics.envelope.plan_axes import PlanAxes
from kinematics.envelope.sampled_views import Fineness, sampled_view
from kinematics.envelope.search import Search
from kinematics.envelope.section import section_from, turn_of, turns_alone
from kinematics.envelope.shapes import PLAN, SECTION, SIDE, Curve, Extreme, View
from kinematics.envelope.tolerances import PLACES_DRAWN, SAME_PLACE
from kinematics.number_checks import FloatArray
from kinematics.reach.sample_summary import FirstAxis


class Views(NamedTuple):
    """Section (or side) and plan, volume, and whether the section is the same at every bearing."""

    section: View
    plan: View
    volume: Measure
    same_at_every_bearing: bool


def upright(motion: PointMotion, axis: FirstAxis, axes: PlanAxes, search: Search) -> Views | None:
    """Return the envelope of two joints that keep the point in a plane along axis 1.

    Examples
    --------
    >>> from kinematics.arm import Arm
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = [Row(JointKind.REVOLUTE, *row, 0.0, 0.0) for row in
    ...         ((0.0, np.pi / 2), (0.5, 0.0), (0.3, 0.0))]
    >>> arm = Arm("upright", Table(Convention.STANDARD, tuple(rows)))
    >>> from kinematics.envelope.plan_axes import plan_axes
    >>> from kinematics.envelope.search import search_of
    >>> from kinematics.reach.sample_summary import first_axis
    >>> axis = first_axis(arm)
    >>> axes, search = plan_axes(arm, axis), search_of(arm, np.eye(4))
    >>> from kinematics.envelope.pair_of_arm import point_motion
    >>> motion = point_motion(arm, np.eye(4))
    >>> round(upright(motion, axis, axes, search).volume.value / np.pi, 9)
    0.672
    """
    section = section_from(motion, axis)
    if section is None:
        return None
    swept = swept_plan(section, float(motion.limits.lower[0]), axes)
    volume = section.volume
    if volume is None:
        space, seeker = search.along(np.eye(3))
        least, most = section.swept
        drawn = drawn_volume(seeker, search.samples(space), PLACES_DRAWN)
        low, high = least.value - least.error_bound, most.value + most.error_bound
        volume = between(drawn, low, high)
    same = section.turn >= 2.0 * np.pi or not section.reaches_behind
    return Views(
        section_view(section, axis.direction),
        plan_of_pair(swept, axes.directions),
        volume,
        same,
    )


def level(
    motion: PointMotion,
    axis: FirstAxis,
    axes: PlanAxes,
    search: Search,
    extremes: tuple[Extreme, ...],
    fineness: Fineness,
) -> Views | None:
    """Return the envelope of joints that move level, and others up and down.

    Parameters
    ----------
    extremes : of radius and height, least before greatest.
    fineness : of a plan that is sampled.

    Examples
    --------
    Two links of 0.5 and 0.3 m that turn level.

    >>> from kinematics.arm import Arm
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = [Row(JointKind.REVOLUTE, *row, 0.0, 0.0) for row in
    ...         ((0.5, 0.0), (0.3, 0.0))]
    >>> arm = Arm("flat", Table(Convention.STANDARD, tuple(rows)))
    >>> from kinematics.envelope.plan_axes import plan_axes
    >>> from kinematics.envelope.search import search_of
    >>> from kinematics.reach.sample_summary import first_axis
    >>> axis = first_axis(arm)
    >>> axes, search = plan_axes(arm, axis), search_of(arm, np.eye(4))
    >>> from kinematics.envelope.pair_of_arm import point_motion
    >>> motion = point_motion(arm, np.eye(4))
    >>> extremes = search.extremes(("radius", "height"), search.about(axis)[0])
    >>> views = level(motion, axis, axes, search, extremes, Fineness())
    >>> round(views.plan.area.value / np.pi, 9), views.section.flat
    (0.6, True)
    """
    across, lifts = motion.movers(axes.directions), motion.movers(axis.direction[None])
    if not turns_alone(motion) or set(across) & set(lifts) or not motion.apart(across):
        return None
    near, far, low, high = (one.value for one in extremes)
    slack = SAME_PLACE * search.length
    stroke = high - low if lifts and high - low > slack else 0.0
    width = far - near if far - near > slack else 0.0
    right, top = near + width, low + stroke
    corners = np.array([[near, low], [right, low], [right, top], [near, top]])
    # A line there and back, or a point, where one of them is none.
    corners = corners[: 4 if width and stroke else 1 + (width > 0.0 or stroke > 0.0)]
    corners[-1] = corners[-1] if width and stroke else (right, top)
    area = Measure(width * stroke, slack * (width + stroke) if width * stroke else 0.0)
    directions = np.stack([axes.directions[0], axis.direction])
    section = View(SECTION, (Curve(corners, outer=True),), area, None, 0.0, directions)
    region = pair_region_of(motion, axes.directions, np.zeros(3))
    view, seeker = search.along(axes.directions)
    plan = flat_view(search, view, PLAN, axes.directions)
    if plan is None and region is not None:
        plan = plan_of_pair(region, axes.directions)
    if plan is None:
        samples = search.samples(view)
        plan = sampled_view(seeker, samples, PLAN, axes.directions, fineness).view
    volume = Measure(
        plan.area.value * stroke,
        plan.area.error_bound * stroke + (1e-3 * slack * plan.area.value if stroke else 0.0),
    )
    return Views(section, plan, volume, turn_of(motion) >= 2.0 * np.pi)


def slides(motion: PointMotion, axes: PlanAxes) -> Views | None:
    """Return the envelope of slides alone.

    Examples
    --------
    >>> from kinematics.arm import Arm
    >>> from kinematics.envelope.plan_axes import plan_axes
    >>> from kinematics.table import Convention, JointKind, Row, Table, Travel
    >>> rows = [Row(JointKind.PRISMATIC, 0.0, turned, 0.0, 0.0, travel=Travel(0.0, 2.0))
    ...         for turned in (np.pi / 2, 0.0)]
    >>> arm = Arm("cross", Table(Convention.STANDARD, tuple(rows)))
    >>> from kinematics.envelope.pair_of_arm import point_motion
    >>> motion = point_motion(arm, np.eye(4))
    >>> views = slides(motion, plan_axes(arm, None))
    >>> round(views.section.area.value, 9), views.plan.area.value, views.volume.value
    (0.0, 0.0, 0.0)
    """
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
        for seen, ways in ((SIDE, np.eye(3)[[0, 2]]), (PLAN, axes.directions))
    )
    return Views(side, plan, _hull_volume(corners), same_at_every_bearing=False)


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
