"""Courses to a target along its approach, and away along its retract.

Idea: an approach is a straight leg whose start is the target moved back along a direction; a
retract is one that ends there.

Source: none; a layout. Not covered: whether an arm can follow them (approaches.py).
"""

from dataclasses import replace

import numpy as np

from kinematics.errors import KinematicsError
from kinematics.number_checks import FloatArray
from kinematics.reach.targets import Target
from kinematics.travel.above_zero import check_above_zero
from kinematics.travel.moves import Approach, Course, Leg, Place


def approached(
    target: Target, approach: Approach | None, retract: Approach | None = None, samples: int = 0
) -> Course:
    """Return the course to a target along its approach, and away along its retract.

    Without an approach it begins at the target. Errors lead to ``approach`` or ``retract``.

    Raises
    ------
    KinematicsError : neither of them; a distance or speed that is not above 0; along nothing.

    Examples
    --------
    >>> target = Target(np.eye(4))
    >>> course = approached(target, Approach(0.1), Approach(0.2, np.array([0.0, 0.0, -5.0])))
    >>> course.start.target.tool_in_base[:3, 3]
    array([ 0. ,  0. , -0.1])
    >>> [float(leg.end.target.tool_in_base[2, 3]) for leg in course.legs]
    [0.0, 0.2]
    """
    if approach is None and retract is None:
        raise KinematicsError(
            "a way to a target needs an approach or a retract",
            where=("approach",),
            way_out='give one: {"distance": 100, "along": "tool-z"}',
        )
    start, legs = target, list[Leg]()
    if approach is not None:
        start = back_along(target, approach, "approach")
        legs.append(Leg(Place(target=target), speed=approach.speed))
    if retract is not None:
        end = back_along(target, retract, "retract")
        legs.append(Leg(Place(target=end), speed=retract.speed))
    return Course(
        Place(target=start),
        tuple(legs),
        target.position_tolerance,
        target.angle_tolerance,
        samples,
    )


def in_base(approach: Approach, frame_in_base: FloatArray) -> Approach:
    """Return an approach whose direction was given in a frame, with its direction in the base.

    Examples
    --------
    >>> quarter = np.array([[0, -1, 0, 5], [1, 0, 0, 5], [0, 0, 1, 5], [0, 0, 0, 1.0]])
    >>> in_base(Approach(0.1, np.array([1.0, 0.0, 0.0])), quarter).along
    array([0., 1., 0.])
    """
    if approach.along is None:
        return approach
    return replace(approach, along=frame_in_base[:3, :3] @ approach.along)


def back_along(target: Target, approach: Approach, where: str) -> Target:
    """Return the target moved back along an approach.

    Examples
    --------
    >>> back_along(Target(np.eye(4)), Approach(0.2), "approach").tool_in_base[:3, 3]
    array([ 0. ,  0. , -0.2])
    """
    pose = np.array(target.tool_in_base, dtype=np.float64)
    along = pose[:3, 2] if approach.along is None else np.asarray(approach.along, np.float64)
    length = float(np.linalg.norm(along))
    if not length > 0.0 or not np.isfinite(length):
        raise KinematicsError(
            "an approach along nothing leads nowhere",
            where=(where, "along"),
            value=along.tolist(),
            way_out='give a direction other than 0, 0, 0, or "tool-z"',
        )
    check_above_zero(approach.distance, f"the distance of the {where}", (where, "distance"))
    if approach.speed is not None:
        check_above_zero(approach.speed, f"the speed of the {where}", (where, "speed"))
    pose[:3, 3] -= approach.distance / length * along
    return target._replace(tool_in_base=pose)
