"""How far an arm reaches: section through axis 1, plan, volume and extremes.

Idea: what the structure of the arm tells exactly is told exactly; for every other arm places are
asked for one by one on a grid, and the curves between those reached and those not are found by
halving. Both ways answer in the same words, with bounds and the resolution said.

Source: as the modules that answer. Not covered: collisions, orientations at the places reached.
"""

import numpy as np

from kinematics.arm import Arm
from kinematics.envelope.inquiry import Finds, Inquiry, at_once, inquiry_of
from kinematics.envelope.known_structures import slides, upright
from kinematics.envelope.level import level
from kinematics.envelope.sampled_views import Fineness
from kinematics.envelope.searched import searched
from kinematics.envelope.shapes import TOOL, WRIST, Envelope, Extreme, Turn, Views
from kinematics.envelope.tolerances import MOST_CELLS
from kinematics.envelope.wrist import wrist_in_flange
from kinematics.number_checks import FloatArray
from kinematics.reach.sample_summary import FirstAxis


def envelope_of(
    arm: Arm,
    tool_in_flange: FloatArray,
    *,
    working: bool = False,
    point: str = TOOL,
    resolution: float | None = None,
    most_cells: int = MOST_CELLS,
    finds: Finds = at_once,
) -> Envelope:
    """Return how far an arm reaches within its travel.

    Parameters
    ----------
    tool_in_flange : (4, 4); its axes do not matter.
    working : whether working travel bounds it too.
    point : TOOL, or WRIST for where the axes of the wrist meet.
    resolution : m, of views that are sampled; left out, a 64th of what is reached. Exact views
        have none.
    most_cells : along what is reached: a finer resolution is refused (``UnfitResolution``).
    finds : what finds that which is asked for on the way.

    Raises
    ------
    KinematicsError : an arm without joints, a slide that nothing bounds, limits that exclude each
        other, a wrist asked for that there is not, a resolution that does not fit.

    Examples
    --------
    A column that carries two links upright, without limits: a ball with a hollow in it.

    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = [Row(JointKind.REVOLUTE, *row, 0.0, 0.0) for row in
    ...         ((0.0, np.pi / 2), (0.5, 0.0), (0.37, 0.0))]
    >>> envelope = envelope_of(Arm("upright", Table(Convention.STANDARD, tuple(rows))), np.eye(4))
    >>> round(envelope.volume.value, 9), envelope.exact, len(envelope.section.curves)
    (2.749128144, True, 1)
    """
    if point == WRIST:
        tool_in_flange = wrist_in_flange(arm)
    fineness = Fineness(resolution, most_cells)
    inquiry = inquiry_of(arm, tool_in_flange, working=working, fineness=fineness, finds=finds)
    views = (slides if inquiry.axis is None else upright)(inquiry)
    views = views or level(inquiry) or searched(inquiry)
    turn = _turn(inquiry, views.extremes[1])
    return Envelope(
        point=point,
        point_in_flange=tool_in_flange[:3, 3].copy(),
        working=working,
        axis=inquiry.axis,
        turn=turn,
        section=views.section,
        plan=views.plan,
        volume=views.volume,
        same_at_every_bearing=views.same_at_every_bearing,
        extremes=views.extremes,
        notes=_notes(views, inquiry.axis, turn),
    )


def _turn(inquiry: Inquiry, farthest: Extreme) -> Turn | None:
    """Return how far axis 1 turns; None where other joints turn with it.

    Parameters
    ----------
    farthest : the arm faces the bearing at which it reaches farthest.
    """
    angle, limits, axes = inquiry.turn, inquiry.search.limits, inquiry.axes
    if angle is None:
        return None
    lower, upper = float(limits.lower[0]), float(limits.upper[0])
    if angle >= 2.0 * np.pi:
        return Turn(lower, upper, angle, None, None)
    x, y = (axes.directions @ farthest.position - axes.centre).tolist()
    straight = float(np.arctan2(y, x)) - axes.sense * float(farthest.joint_values[0])
    begin, end = sorted((straight + axes.sense * lower, straight + axes.sense * upper))
    # From the end of the turn on to its beginning, which is a turn later.
    turns = 2.0 * np.pi * float(np.floor((end + np.pi) / (2.0 * np.pi)))
    return Turn(lower, upper, angle, end - turns, begin + 2.0 * np.pi - turns)


def _notes(views: Views, axis: FirstAxis | None, turn: Turn | None) -> tuple[str, ...]:
    notes = []
    if axis is None:
        notes.append("row 1 does not turn: the side view stands in for a section through axis 1")
    elif turn is None:
        notes.append(
            "joint 1 turns other rows too, or is bounded with other joints: the section shows what "
            "is reached at any bearing"
        )
    elif not views.same_at_every_bearing:
        notes.append(
            "axis 1 turns less than once: the section shows what is reached at any bearing, not at "
            "every one"
        )
    if views.section.flat:
        notes.append("the section has no size: the point stays on a line or at a place")
    if views.plan.flat:
        notes.append("the plan has no size: the point stays on a line or at a place")
    if not views.section.exact or not views.plan.exact:
        notes.append(
            "sampled: what is narrower than the resolution may be missing, and a place not reached "
            "is one that no search got to"
        )
    return tuple(notes)
