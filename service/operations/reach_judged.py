"""Solutions of targets judged before they are told: all together, or the best of one alone.

Left out: what is told of them (reach_told.py).
"""

from dataclasses import replace
from itertools import compress
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from kinematics.jacobian import motion_of
from kinematics.reach.targets import OUTSIDE_TRAVEL, Checks
from kinematics.travel_limits import limits_exceeded
from service.operations.questions import Question
from service.operations.reach_told import Exceeded, ToldChecks
from service.operations.singularities import judged, judged_reading

if TYPE_CHECKING:
    # Its kernels are loaded with all others for reach, when first wanted.
    from kinematics.travel.approaches import Approached


def told_together(
    question: Question,
    checks: Checks,
    *,
    best_only: bool,
    by_singularity: bool,
    approached: "Approached | None" = None,
) -> ToldChecks:
    """Return what was found with all solutions that may be told judged in one batch.

    ``approached`` : the same checks with approaches, where there are some.
    """
    if best_only and not by_singularity:
        kept = _best_alone(checks)
        if not kept.all():
            checks = _only(checks, kept)
            if approached is not None:
                approached = replace(approached, ways=tuple(compress(approached.ways, kept)))
    joint_values = checks.joint_values
    if not len(joint_values):
        return ToldChecks(question, checks, None, _NO_LIMIT, approached=approached)
    motion = motion_of(question.arm, joint_values, question.tool.tool_in_flange)
    return ToldChecks(
        question,
        checks,
        judged(question, joint_values, motion),
        limits_exceeded(question.arm, joint_values),
        best_only=best_only,
        by_singularity=by_singularity,
        approached=approached,
    )


def _best_alone(checks: Checks) -> NDArray[np.bool_]:
    """Return which solutions are told: one for each target, but all of those that exceed travel."""
    counts = np.diff(checks.offsets)
    kept = np.where(checks.verdict == OUTSIDE_TRAVEL, counts, np.minimum(counts, 1))
    rank = np.arange(len(checks.joint_values)) - np.repeat(checks.offsets[:-1], counts)
    told: NDArray[np.bool_] = rank < np.repeat(kept, counts)
    return told


def _only(checks: Checks, kept: NDArray[np.bool_]) -> Checks:
    """Return the same with some of the solutions alone."""
    before = np.concatenate([[0], np.cumsum(kept)])
    return replace(
        checks,
        offsets=before[checks.offsets],
        **{name: getattr(checks, name)[kept] for name in _OF_SOLUTIONS},
    )


_NO_LIMIT: Exceeded = (np.zeros(0, np.bool_), np.zeros(0, np.bool_))
_OF_SOLUTIONS = (
    *("joint_values", "margin", "outside_working", "position_error", "angle_error", "branch"),
)


def told_best(
    question: Question, checks: Checks, approached: "Approached | None" = None
) -> ToldChecks:
    """Return what was found for one target, of which the best solution alone can be told."""
    if not len(checks.joint_values):
        return ToldChecks(question, checks, None, _NO_LIMIT, approached=approached)
    joint_values = checks.joint_values[0].tolist()
    read = question.reader.read(joint_values)
    found = judged_reading(question, joint_values, read)
    exceeded = np.array([read.outside]), np.array([read.outside])
    return ToldChecks(question, checks, found, exceeded, first_alone=True, approached=approached)
