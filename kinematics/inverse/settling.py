"""What worked-out postures are worth: settled on the table as it stands, measured, equal ones once.

Idea: a closed form takes axes that are parallel but for typed digits as parallel. Each posture then
goes downhill on the table itself, to the target's point and the turn about the axes, which takes a
step or two. Whatever way a posture was found, its error is what the whole chain says.

Source: none; the descent has its own (kinematics/inverse/descent.py). Not covered: targets out of
reach by more than ``WORTH_TELLING``, whose nearest posture alone is told.
"""

import math
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.descent import ABOUT, descend_all
from kinematics.inverse.descent_arrays import Desk, Lines, Room, desk_for
from kinematics.inverse.landing import gap_to, land
from kinematics.inverse.planar import ROUNDING
from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray

WORTH_TELLING = 1e-3
"""Distance, a share of the length, within which an unreached target's nearest postures are told
among the solutions: a target's own tolerance may be wider than what rounding leaves."""

SAME_POSTURE, SAME_SETTLED = 1e-8, 1e-6
"""Radians, or shares of the length, within which postures are one: at a fold both ways meet within
the square root of rounding, and settled ones within that of what settling leaves."""

SETTLED = 1e-9
"""Share of the length by which a settled posture may miss a target that others meet: one that was
started beyond the edge of reach, in case the table had a posture there."""

_SETTLING_STEPS = 25


class Settled(NamedTuple):
    """What is written: ``motions`` (k, rows), ``target`` (k,) and ``errors`` (k, 2), a share of the
    length and rad, of the postures kept; ``nearest`` (m, rows) of targets out of reach."""

    motions: FloatArray
    target: NDArray[np.int64]
    errors: FloatArray
    nearest: FloatArray


def settled_on_table(
    lines: Lines,
    room: Room,
    undrive: FloatArray,
    goals: FloatArray,
    postures: FloatArray,
    of: NDArray[np.int64],
) -> FloatArray:
    """Return postures (k, rows) brought onto their goals' points, and turns, along the table.

    Parameters
    ----------
    undrive : (joints, rows), joint values of row motions; room : without bounds.
    goals : (m, 4, 4); of : (k,), which goal.
    """
    q = postures @ undrive.T
    rows, joints = lines.drive.shape
    desk, squared = desk_for(rows, joints, 0), np.empty(len(q))
    descend_all(lines, room, desk, ABOUT, 1.0, goals, of, q, _SETTLING_STEPS, 1, squared)
    settled: FloatArray = q @ lines.drive.T
    return settled


@compiled
def settle(
    lines: Lines,
    desk: Desk,
    uneven: bool,
    goals: FloatArray,
    postures: FloatArray,
    of: NDArray[np.int64],
    short: FloatArray,
    settled: Settled,
) -> int:
    """Settle and measure postures, those of one target together; return how many are kept.

    Parameters
    ----------
    uneven : whether postures were settled.
    goals : (m, 4, 4); postures : (k, rows), overwritten; of : (k,), ascending, which target.
    short : (m, 2), how far targets are out of reach, in the first column.
    """
    count, first, least = int(np.int64(0)), int(np.int64(0)), 1e300
    gap, same = desk.gap, SAME_SETTLED if uneven else SAME_POSTURE
    for place in range(postures.shape[0]):
        at, posture = of[place], postures[place]
        if place == 0 or at != of[place - 1]:
            first, least = count, 1e300
        _wrap(lines, posture)
        if _met_before(lines, posture, settled.motions, first, count, same):
            continue
        land(
            lines.axis,
            lines.point,
            lines.prismatic,
            lines.tool_at_zero,
            posture,
            desk.axis_now,
            desk.point_now,
            desk.pose,
        )
        gap_to(desk.pose, goals[at], gap)
        shift = math.sqrt(gap[0] * gap[0] + gap[1] * gap[1] + gap[2] * gap[2])
        if uneven and short[at, 0] < ROUNDING and shift > SETTLED:
            continue
        if short[at, 0] > WORTH_TELLING:
            if shift < least:
                least = shift
                _copy(posture, settled.nearest[at])
            continue
        settled.errors[count, 0] = shift
        turned = math.sqrt(gap[3] * gap[3] + gap[4] * gap[4] + gap[5] * gap[5])
        settled.errors[count, 1], settled.target[count] = turned, at
        _copy(posture, settled.motions[count])
        count += 1
    return count


@compiled
def _wrap(lines: Lines, posture: FloatArray) -> None:
    """Bring turns into (-pi, pi]."""
    for row in range(posture.shape[0]):
        if not lines.prismatic[row]:
            turns = math.ceil((posture[row] - math.pi) / (2.0 * math.pi))
            posture[row] -= 2.0 * math.pi * turns


@compiled
def _copy(source: FloatArray, goal: FloatArray) -> None:
    """Write a row: by a loop, since an assignment of arrays takes seconds to compile."""
    for k in range(source.shape[0]):
        goal[k] = source[k]


@compiled
def _met_before(
    lines: Lines,
    posture: FloatArray,
    motions: FloatArray,
    first: int,
    count: int,
    within: float,
) -> bool:
    """Return whether a posture stands among those written from ``first`` on."""
    for place in range(first, count):
        same = True
        for row in range(posture.shape[0]):
            apart = posture[row] - motions[place, row]
            if not lines.prismatic[row]:
                apart -= 2.0 * math.pi * np.rint(apart / (2.0 * math.pi))
            same = same and abs(apart) < within
        if same:
            return True
    return False
