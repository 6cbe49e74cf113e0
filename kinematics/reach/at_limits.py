"""Postures a little beyond travel that may stand at its end and still be near enough.

An arm that stands at a limit shows a pose with some decimals; what solves the typed pose exactly is
then a hair beyond the limit, and beside a fold a good deal. Arms of few joints are held to a
tolerance, so the limit itself is tried: each joint value beyond its travel is put onto the end of
it, the others go downhill within theirs, and the posture is measured as any other.

Source: none; the descent has its own. Not covered: postures beyond limits of sums and of passive
rows, which no single joint value meets: the descent may bring them back, or not.
"""

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.compromises import descend_each
from kinematics.inverse.descent_arms import lines_of, room_of
from kinematics.inverse.descent_arrays import desk_for
from kinematics.inverse.drive import drive_of
from kinematics.inverse.found import Found, none_found
from kinematics.inverse.iterative import TASKS
from kinematics.inverse.measured import POSITION, errors_of, wrapped
from kinematics.inverse.several import joined, picked
from kinematics.inverse.solve import Method
from kinematics.kernels.compiler import for_kernel
from kinematics.reach.targets import Targets
from kinematics.reach.verdicts import Ranked, Ranking
from kinematics.table import FloatArray
from kinematics.travel_limits import travel_margin

_STEPS = 15
"""Steps downhill from an end of travel: what a typed pose is off by takes four."""


def with_ends_of_travel(
    ranking: Ranking, method: Method, found: Found, targets: Targets, ranked: Ranked
) -> Found | None:
    """Return what was found with postures at ends of travel, or None where none is near enough.

    Only of targets without a posture within travel.
    """
    beyond = ~ranked.inside[found.target]
    if ranking.exact or not beyond.any():
        return None
    drive, screws, rows = drive_of(ranking.arm), ranking.screws, np.flatnonzero(beyond)
    idle = method.idle if method.idle.any() else None
    postures = drive.postures(found.motions[rows], still=idle)
    target = found.target[rows[postures.source]]
    clipped = np.clip(postures.joint_values, *drive.box)
    at_ends = clipped
    if method.task != POSITION:
        at_ends = _led(ranking, method, targets, target, clipped)
    motions = wrapped(ranking.arm.drive_map.motions(at_ends), screws.prismatic)
    poses, count = targets.tool_in_base, len(targets)
    position, angle = errors_of(screws, motions, poses, target, method.task)
    tried = replace(
        none_found(count, screws.rows),
        motions=motions,
        target=target,
        position_error=position,
        angle_error=angle,
        open=found.open,
    )
    moved = (at_ends != postures.joint_values).any(axis=1)
    within = moved & (travel_margin(ranking.arm, at_ends) >= 0.0)
    near = picked(tried, within & ranking.accepted(tried, targets))
    return joined(found, near, np.arange(count)) if len(near.target) else None


def _led(
    ranking: Ranking,
    method: Method,
    targets: Targets,
    target: NDArray[np.intp],
    joint_values: FloatArray,
) -> FloatArray:
    """Return postures (p, joints) brought downhill to their targets (p,) within travel.

    Turns count beside lengths as they are tolerated; the joint values of slides without travel stay
    within a few lengths of the arm's anyway.
    """
    arm, screws = ranking.arm, ranking.screws
    scale = np.where(arm.revolute_joints, 1.0, screws.length)
    allowed = ranking.allowed(targets)[target]
    shares = allowed[:, 0] / screws.length / allowed[:, 1]
    room, q = room_of(arm, scale), for_kernel(joint_values / scale)
    goals = for_kernel(screws.scaled(targets.tool_in_base[target]))
    desk = desk_for(screws.rows, arm.joint_count, len(room.least))
    lines, task = lines_of(screws, arm), TASKS[method.task]
    descend_each(lines, room, desk, task, shares, goals, q, _STEPS)
    led: FloatArray = np.clip(q * scale, *drive_of(arm).box)
    return led
