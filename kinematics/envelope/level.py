"""Envelopes of arms whose joints move the point level, and others up and down.

Idea: where no joint does both, every place of the plan is reached at every height, so that the
reach is the plan times the stroke, and the section a rectangle of the radii and the heights. The
heights are a sum of joint values with fixed weights. The radii are known in closed form where all
joints that move the point level turn it (level_links.py); with slides among them, or joints tied to
each other, they are searched and the search is proved (proved_radii.py). About an axis that turns
all the way the plan is the ring between them. Otherwise it is found as a region of two joints, or
sampled; each of its radii is then reached over the turn of axis 1 at least, and over a whole turn
at most.

Source: linear programs for heights under combined travel, by HiGHS in scipy; else as the modules
used. Not covered: joints that lift and move level at once.
"""

from dataclasses import replace

import numpy as np

from kinematics.envelope.draws import between
from kinematics.envelope.flat_views import flat_view
from kinematics.envelope.inquiry import Inquiry
from kinematics.envelope.level_links import MOST_LINKS, LevelLinks
from kinematics.envelope.measures import Measure
from kinematics.envelope.pair_of_arm import pair_region_of
from kinematics.envelope.pair_views import plan_of_pair
from kinematics.envelope.proved_radii import ProvedRadii
from kinematics.envelope.ring import ring_view
from kinematics.envelope.shapes import PLAN, SECTION, Curve, Extreme, View, Views
from kinematics.envelope.tolerances import LINKS_ROUNDING, SAME_PLACE
from kinematics.jacobian import motion_of
from kinematics.number_checks import FloatArray
from kinematics.reach.travel_region import TravelRegion


def level(inquiry: Inquiry) -> Views | None:
    """Return the envelope of joints that move level, and others up and down; None of other arms.

    Examples
    --------
    Two links of 0.5 and 0.3 m that turn level.

    >>> from kinematics.arm import Arm
    >>> from kinematics.envelope.inquiry import inquiry_of
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = [Row(JointKind.REVOLUTE, a, 0.0, 0.0, 0.0) for a in (0.5, 0.3)]
    >>> views = level(inquiry_of(Arm("flat", Table(Convention.STANDARD, tuple(rows))), np.eye(4)))
    >>> round(views.plan.area.value / np.pi, 9), views.section.flat
    (0.6, True)
    """
    motion, axis, axes = inquiry.motion, inquiry.axis, inquiry.axes
    if axis is None or inquiry.turn is None:
        return None
    across, lifts = motion.movers(axes.directions), motion.movers(axis.direction[None])
    if set(across) & set(lifts) or not motion.apart(across):
        return None
    heights = _highest_and_lowest(inquiry, lifts)
    if heights is None:
        return None
    radii, extremes = _radii(inquiry, across, heights)
    slack = SAME_PLACE * inquiry.search.length
    stroke = extremes[3].value - extremes[2].value
    stroke = stroke if lifts and stroke > slack else 0.0
    section = _rectangle(inquiry, radii, extremes[2].value, stroke)
    plan = _plan(inquiry, radii)
    # Off by what the plan is, and by what rounding leaves of the stroke.
    rounding = 2.0 * _rounding(inquiry) * plan.area.value
    bound = plan.area.error_bound * stroke + (rounding if stroke else 0.0)
    volume = Measure(plan.area.value * stroke, bound)
    return Views(section, plan, volume, inquiry.turns_whole, extremes)


def _highest_and_lowest(inquiry: Inquiry, lifts: tuple[int, ...]) -> FloatArray | None:
    """Return postures (2, joints) of the least and the greatest height.

    None where heights are no sum of joint values.
    """
    motion, axis = inquiry.motion, inquiry.axis
    assert axis is not None
    rates = axis.direction @ motion.linear[:, :, list(lifts)]
    if np.ptp(rates, axis=0).max(initial=0.0) > motion.off:
        return None
    limits, weights = motion.limits, np.zeros(len(motion.limits.lower))
    weights[list(lifts)] = rates.mean(axis=0)
    if limits.weights[:, list(lifts)].any():
        return np.stack([_least(limits, weights), _least(limits, -weights)])
    postures = np.repeat(inquiry.search.joint_values[:1], 2, axis=0)
    ends = np.where(weights > 0.0, limits.lower, limits.upper)
    postures[0, list(lifts)] = ends[list(lifts)]
    ends = np.where(weights > 0.0, limits.upper, limits.lower)
    postures[1, list(lifts)] = ends[list(lifts)]
    return postures


def _least(limits: TravelRegion, weights: FloatArray) -> FloatArray:
    """Return the posture within combined travel that makes a sum of joint values least."""
    # Imported where it is needed: it takes as long as all else of the core.
    from scipy.optimize import linprog

    found = linprog(
        weights,
        A_ub=np.vstack([limits.weights, -limits.weights]),
        b_ub=np.concatenate([limits.cut_upper, -limits.cut_lower]),
        bounds=np.stack([limits.lower, limits.upper], axis=1),
    )
    posture: FloatArray = np.clip(found.x, limits.lower, limits.upper)
    return posture


def _radii(
    inquiry: Inquiry, across: tuple[int, ...], heights: FloatArray
) -> tuple[ProvedRadii, tuple[Extreme, ...]]:
    """Return the radii reached, and the extremes.

    Parameters
    ----------
    across : joints that move the point level; heights : (2, joints), lowest and highest posture.
    """
    postures = _nearest_and_farthest(inquiry, across)
    if postures is not None:
        extremes = inquiry.extremes_at(np.concatenate([postures, heights]))
        near, far, off = extremes[0].value, extremes[1].value, _rounding(inquiry)
        return ProvedRadii(near, far, max(near - off, 0.0), far + off), extremes
    found = inquiry.searched_extremes[:2]
    searched = np.stack([one.joint_values for one in found])
    extremes = inquiry.extremes_at(np.concatenate([searched, heights]))
    reached = extremes[0].value, extremes[1].value
    return inquiry.proved_radii(reached), extremes


def _nearest_and_farthest(inquiry: Inquiry, across: tuple[int, ...]) -> FloatArray | None:
    """Return postures (2, joints) of the least and the greatest radius.

    None where there is no closed form: with slides, with joints tied to others, or too many.
    """
    motion, axes = inquiry.motion, inquiry.axes
    arm, limits, joints = motion.arm, motion.limits, [joint for joint in across if joint]
    matrix = arm.drive_map.matrix
    rows = [arm.drive_map.driven[joint] for joint in joints]
    alone = np.count_nonzero(matrix[:, joints], axis=0).max(initial=0) <= 1
    alone &= np.count_nonzero(matrix[rows], axis=1).max(initial=0) <= 1
    tied = bool(limits.weights[:, joints].any())
    if not alone or tied or not arm.revolute_joints[joints].all() or len(joints) > MOST_LINKS:
        return None
    posture = inquiry.search.joint_values[0]
    moved = motion_of(arm, posture, motion.tool_in_flange)
    places = np.concatenate([moved.axis_point[rows], moved.tool_in_base[None, :3, 3]])
    normal = np.cross(*axes.directions)
    # How far the links beyond a joint turn with it, from the first direction to the second.
    rates = np.sign(moved.axis_direction[rows] @ normal) * matrix[rows, joints]
    steps = np.diff(places @ axes.directions.T, axis=0, prepend=axes.centre[None])
    ends = (np.stack([limits.lower, limits.upper]) - posture)[:, joints] * rates
    links = LevelLinks(steps, *np.sort(ends, axis=0))
    postures = np.repeat(posture[None], 2, axis=0)
    turned = posture[joints] + links.nearest_and_farthest() / rates
    postures[:, joints] = np.clip(turned, limits.lower[joints], limits.upper[joints])
    return postures


def _rounding(inquiry: Inquiry) -> float:
    """Return how far off a place known in closed form may be, m: far from 0 angles lose digits."""
    limits = inquiry.motion.limits
    widest = float(np.abs([limits.lower, limits.upper]).max())
    return LINKS_ROUNDING * inquiry.search.length * max(1.0, widest)


def _rectangle(inquiry: Inquiry, radii: ProvedRadii, low: float, stroke: float) -> View:
    """Return the section: all radii at all heights; a line or a point where one of them is none."""
    axis, slack, rounding = inquiry.axis, SAME_PLACE * inquiry.search.length, _rounding(inquiry)
    assert axis is not None
    width = radii.greatest - radii.least
    width = width if width > slack else 0.0
    near, right, top = radii.least, radii.least + width, low + stroke
    corners = np.array([[near, low], [right, low], [right, top], [near, top]])
    if not width or not stroke:
        # A line there and back, or a point.
        corners = np.array([[near, low], [right, top]])[: 1 + (width > 0.0 or stroke > 0.0)]
    off = radii.least - radii.below + radii.above - radii.greatest
    bound = off * stroke + 2.0 * rounding * (width + stroke) if width and stroke else 0.0
    return View(
        SECTION,
        (Curve(corners, outer=True),),
        Measure(width * stroke, bound),
        radii.told_resolution(slack),
        0.0,
        np.stack([inquiry.axes.directions[0], axis.direction]),
    )


def _plan(inquiry: Inquiry, radii: ProvedRadii) -> View:
    search, directions = inquiry.search, inquiry.axes.directions
    flat = flat_view(search, search.along(directions)[0], PLAN, directions)
    if flat is not None:
        return flat
    region = pair_region_of(inquiry.motion, directions, np.zeros(3))
    if region is not None:
        return plan_of_pair(region, directions)
    if inquiry.turns_whole:
        return ring_view(inquiry.axes, radii, SAME_PLACE * search.length)
    found = inquiry.sampled(PLAN, directions).view
    assert inquiry.turn is not None
    least = 0.5 * inquiry.turn * (radii.greatest**2 - radii.least**2)
    most = np.pi * (radii.above**2 - radii.below**2)
    return replace(found, area=between(found.area, least, most))
