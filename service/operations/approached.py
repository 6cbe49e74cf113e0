"""Approaches to targets that are asked about, as part of the answer.

Left out: reading them (wire/approaches.py), telling them (courses_told.py).
"""

from collections.abc import Mapping
from typing import TYPE_CHECKING

import numpy as np

from kinematics.errors import KinematicsError
from kinematics.reach.targets import Checks, Target, Targets
from kinematics.travel.moves import Approach, Course, Leg, Place
from kinematics.travel.to_targets import in_base
from service.errors import ServiceError
from service.operations.questions import Question
from service.wire import reach_request
from service.wire.approaches import read_approach

if TYPE_CHECKING:
    from kinematics.travel.approaches import Approached

_WAYS = 2
"""Of a target that are followed until one is whole, in the mean."""


def approached_checks(
    question: Question,
    checks: Checks,
    targets: Targets,
    approaches: Mapping[int, Approach],
    *,
    every_way: bool,
) -> "Approached | None":
    """Return what was found with approaches, given by index in the frame asked for, if any are."""
    if not approaches:
        return None
    # Imported when first wanted, like what tells of targets.
    from kinematics.travel.approaches import with_approaches

    frame = question.frame_in_base
    meant = {index: in_base(approach, frame) for index, approach in approaches.items()}
    return with_approaches(question.courses, checks, targets, meant, every_way=every_way)


def approach_asked(question: Question, given: reach_request.Approach) -> Approach:
    """Return the approach of a query string in SI, its direction in the frame asked for.

    Raises
    ------
    UnusableValue : its length cannot be used.
    """
    try:
        return read_approach(given, question.units, ("approach",))
    except ServiceError as error:
        error.where, error.location = ("approach",), "query"
        raise
    except KinematicsError as error:
        error.where = ("along",)
        raise


def approach_seconds(question: Question) -> float:
    """Return about how long the approach to a target takes."""
    anywhere = Course(
        Place(np.zeros(question.arm.joint_count)), (Leg(Place(target=Target(np.eye(4)))),)
    )
    return _WAYS * question.courses.estimated_seconds(anywhere)
