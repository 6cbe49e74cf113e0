"""Envelopes of arms whose structure does not tell it: every view searched.

Idea: section and plan are sampled each in its own coordinates. Where axis 1 turns a whole turn and
alone, the plan is a ring between the least and the greatest radius, and the volume the section
turned. Otherwise what is reached differs from bearing to bearing, and the volume is drawn; where
axis 1 turns alone it is also between the section over the turn of axis 1 and over a whole turn,
since every place of the section is reached at that many bearings.

Source: as the modules used; theorem of Pappus for the section turned. Not covered: reach narrower
than the resolution.
"""

import numpy as np

from kinematics.envelope.draws import between, drawn_volume
from kinematics.envelope.flat_views import flat_view
from kinematics.envelope.known_structures import Views
from kinematics.envelope.measures import Measure
from kinematics.envelope.plan_axes import PlanAxes
from kinematics.envelope.sampled_views import Fineness, SampledView, ring_view, sampled_view
from kinematics.envelope.search import Search
from kinematics.envelope.shapes import PLAN, SECTION, SIDE, Extreme, View
from kinematics.envelope.tolerances import DEFAULT_CELLS, PLACES_DRAWN, SAME_PLACE
from kinematics.reach.sample_summary import FirstAxis


def searched(
    search: Search,
    axis: FirstAxis | None,
    axes: PlanAxes,
    turn: float | None,
    extremes: tuple[Extreme, ...],
    fineness: Fineness,
) -> Views:
    """Return the envelope of any arm.

    Parameters
    ----------
    turn : of axis 1, rad, at most a whole one; None where joint 1 does not turn it alone.
    extremes : of radius and height, or of x, y and z.
    fineness : of views that are sampled.

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
    >>> extremes = search.extremes(("radius", "height"), search.about(axis)[0])
    >>> volume = searched(search, axis, axes, 2.0 * np.pi, extremes, Fineness(0.05)).volume
    >>> bool(abs(volume.value / np.pi - 0.672) < volume.error_bound)
    True
    """
    section = _section(search, axis, axes, fineness)
    whole = turn is not None and turn >= 2.0 * np.pi
    if whole:
        radii, slack = (extremes[0].value, extremes[1].value), SAME_PLACE * search.length
        plan = ring_view(axes, radii, slack, section.view.resolution)
    else:
        view, seeker = search.along(axes.directions)
        flat = flat_view(search, view, PLAN, axes.directions)
        samples = search.samples(view)
        plan = flat or sampled_view(seeker, samples, PLAN, axes.directions, fineness).view
    volume = _volume(search, section, turn)
    return Views(section.view, plan, volume, same_at_every_bearing=whole)


def _section(
    search: Search, axis: FirstAxis | None, axes: PlanAxes, fineness: Fineness
) -> SampledView:
    """Return the section about axis 1, or the side view of an arm without one."""
    if axis is None:
        kind, directions = SIDE, np.eye(3)[[0, 2]]
        view, seeker = search.along(directions)
    else:
        kind, directions = SECTION, np.stack([axes.directions[0], axis.direction])
        view, seeker = search.about(axis)
    flat = flat_view(search, view, kind, directions)
    if flat is not None:
        return SampledView(flat, Measure(0.0, 0.0))
    return sampled_view(seeker, search.samples(view), kind, directions, fineness)


def _volume(search: Search, section: SampledView, turn: float | None) -> Measure:
    space, seeker = search.along(np.eye(3))
    if search.rank(space) < 3:
        return Measure(0.0, 0.0)
    moment, whole = section.moment, 2.0 * np.pi
    if turn is not None and turn >= whole:
        return Measure(whole * moment.value, whole * moment.error_bound)
    drawn = drawn_volume(seeker, search.samples(space), _places_drawn(section.view))
    if turn is None:
        return drawn
    least = turn * (moment.value - moment.error_bound)
    return between(drawn, least, whole * (moment.value + moment.error_bound))


def _places_drawn(view: View) -> int:
    """Return how many places to draw: more with a finer grid, in about the time that it takes."""
    if view.resolution is None:
        return PLACES_DRAWN
    size = float(np.ptp(view.box, axis=0).max())
    finer = max(size / DEFAULT_CELLS / view.resolution, 1.0)
    return int(PLACES_DRAWN * finer**1.5)
