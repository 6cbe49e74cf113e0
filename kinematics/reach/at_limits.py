"""Postures a little beyond travel that may stand at its end and still be near enough.

An arm that stands at a limit shows a pose with some decimals; what solves the typed pose exactly is
then a hair beyond the limit. Arms of few joints are held to a tolerance, so the limit itself is
tried: each joint value beyond its travel is put onto the end of it, and the posture is measured as
any other.

Source: none. Not covered: limits of sums and of passive rows, which no single joint value meets.
"""

from dataclasses import replace

import numpy as np

from kinematics.inverse.drive import drive_of
from kinematics.inverse.found import Found, none_found
from kinematics.inverse.measured import errors_of, wrapped
from kinematics.inverse.several import joined, picked
from kinematics.inverse.solve import Method
from kinematics.reach.targets import Targets
from kinematics.reach.verdicts import Ranked, Ranking
from kinematics.travel_limits import travel_margin


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
    at_ends = np.clip(postures.joint_values, *drive.box)
    target = found.target[rows[postures.source]]
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
