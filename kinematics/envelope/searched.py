"""Envelopes of arms whose structure does not tell it: every view searched.

Idea: section and plan are sampled each in its own coordinates. Where axis 1 turns a whole turn and
alone, the plan is a ring between the least and the greatest radius, both searched and then proved,
and the volume the section turned. Otherwise what is reached differs from bearing to bearing, and
the volume is drawn; where axis 1 turns alone it is also between the section over the turn of axis 1
and over a whole turn, since every place of the section is reached at that many bearings.

Source: as the modules used; theorem of Pappus for the section turned. Not covered: reach narrower
than the resolution.
"""

import numpy as np

from kinematics.envelope.draws import between
from kinematics.envelope.flat_views import flat_view
from kinematics.envelope.inquiry import Inquiry
from kinematics.envelope.measures import Measure
from kinematics.envelope.ring import ring_view
from kinematics.envelope.sampled_views import SampledView
from kinematics.envelope.shapes import PLAN, SECTION, SIDE, View, Views
from kinematics.envelope.tolerances import PLACES_DRAWN, SAME_PLACE


def searched(inquiry: Inquiry) -> Views:
    """Return the envelope of any arm.

    Examples
    --------
    >>> from kinematics.arm import Arm
    >>> from kinematics.envelope.inquiry import inquiry_of
    >>> from kinematics.envelope.sampled_views import Fineness
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = [Row(JointKind.REVOLUTE, *row, 0.0, 0.0) for row in
    ...         ((0.0, np.pi / 2), (0.5, 0.0), (0.3, 0.0))]
    >>> arm = Arm("upright", Table(Convention.STANDARD, tuple(rows)))
    >>> volume = searched(inquiry_of(arm, np.eye(4), fineness=Fineness(0.05))).volume
    >>> bool(abs(volume.value / np.pi - 0.672) < volume.error_bound)
    True
    """
    section = _section(inquiry)
    volume = _volume(inquiry, section)
    extremes = inquiry.searched_extremes
    return Views(section.view, _plan(inquiry), volume, inquiry.turns_whole, extremes)


def _plan(inquiry: Inquiry) -> View:
    search, axes = inquiry.search, inquiry.axes
    if inquiry.turns_whole:
        near, far = inquiry.searched_extremes[:2]
        radii = inquiry.proved_radii((near.value, far.value))
        return ring_view(axes, radii, SAME_PLACE * search.length)
    flat = flat_view(search, search.along(axes.directions)[0], PLAN, axes.directions)
    if flat is not None:
        return flat
    return inquiry.sampled(PLAN, axes.directions).view


def _section(inquiry: Inquiry) -> SampledView:
    """Return the section about axis 1, or the side view of an arm without one."""
    search, axis = inquiry.search, inquiry.axis
    if axis is None:
        kind, directions = SIDE, np.eye(3)[[0, 2]]
        view, _ = search.along(directions)
    else:
        kind, directions = SECTION, np.stack([inquiry.axes.directions[0], axis.direction])
        view, _ = search.about(axis)
    flat = flat_view(search, view, kind, directions)
    if flat is not None:
        return SampledView(flat, Measure(0.0, 0.0))
    return inquiry.sampled(kind, directions)


def _volume(inquiry: Inquiry, section: SampledView) -> Measure:
    search, turn = inquiry.search, inquiry.turn
    if search.rank(search.along(np.eye(3))[0]) < 3:
        return Measure(0.0, 0.0)
    moment, whole = section.moment, 2.0 * np.pi
    if turn is not None and turn >= whole:
        return Measure(whole * moment.value, whole * moment.error_bound)
    # More with a finer grid, in about the time that it takes.
    drawn = inquiry.drawn(int(PLACES_DRAWN * section.finer**1.5))
    if turn is None:
        return drawn
    least = turn * (moment.value - moment.error_bound)
    return between(drawn, least, whole * (moment.value + moment.error_bound))
