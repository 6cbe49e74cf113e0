"""Along a self-motion: from one posture on to others that hold the tool where it is.

Idea: where joints can move without the tool, they do so at first along null directions of the
Jacobian. Step along one, then bring the tool back without undoing the step: a true self-motion is
followed point by point, and at a mere fold the tool does not come back. The step halves where the
curve bends or the correction labours, and grows where it is easy. The curve ends where it meets its
beginning, but for whole turns, or where it can go no further.

Source: predictor and corrector along a curve: Keller 1977, Allgower and Georg 1990; self-motions of
arms: Burdick 1989. Not covered: surfaces of self-motions, of which one curve is followed with
enough joints held; bounds of joint values (kinematics/inverse/families.py).
"""

import math

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.descent import damped_step, gap_at, normal_equations, slopes_at
from kinematics.inverse.descent_arrays import Desk, Lines, Room
from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray

CLOSED, ENDED, LONG = range(3)
"""How a curve ends: where it began; where it can go no further; at the last point asked for."""

_LONGEST_STEP = 0.1
_FIRST_STEP = 0.02
_SHORTEST_STEP = 1e-4
_ON_TARGET = 1e-18
"""Square of the gap, a share of the length or rad, of a corrected point: what counts as exact. A
step from a mere fold leaves more, and so do a few from a posture 1e-8 beside a self-motion."""
_SETTLED = 1e-28
"""The same where rounding begins; in between a point is taken when no correction betters it."""
_CORRECTIONS = 8
_DAMPING = 1e-9
"""Added to squared singular values: what is free beside the curve stays, the rest converges."""
_STRAIGHT = 0.96
"""Cosine between directions at both ends of a step, 16 deg, beyond which the step is too long."""


@compiled
def corrected(
    lines: Lines,
    room: Room,
    desk: Desk,
    task: int,
    target: FloatArray,
    held: NDArray[np.bool_],
    along: FloatArray,
    q: FloatArray,
    onward: FloatArray,
) -> bool:
    """Bring joint values back onto the target across ``along``, in place; return whether they are.

    With J onward = 0 the equations (J^T J + along along^T) x = along have x in its direction.

    Parameters
    ----------
    lines, room, desk, task, target : as ``descent.descend`` takes them; no bounds are looked at.
    held : (joints,), which do not move; along : (joints,), unit direction of the curve before.
    onward : (joints,), written: the unit direction of the curve there, if they are on the target.
    """
    before = 1e300
    for _ in range(_CORRECTIONS):
        squared = gap_at(lines, room, desk, task, 1.0, target, q)
        there = squared < _SETTLED or (squared < _ON_TARGET and squared > 0.25 * before)
        before = squared
        _bordered(lines, room, desk, task, held, along)
        if there:
            for joint in range(q.shape[0]):
                desk.slope[joint] = 0.0 if held[joint] else along[joint]
        damped_step(desk, room, _DAMPING, q)
        if there:
            size = 0.0
            for joint in range(q.shape[0]):
                size += desk.step[joint] * desk.step[joint]
            for joint in range(q.shape[0]):
                onward[joint] = desk.step[joint] / math.sqrt(size)
            return True
        for joint in range(q.shape[0]):
            q[joint] += desk.step[joint]
    return False


@compiled
def _bordered(
    lines: Lines,
    room: Room,
    desk: Desk,
    task: int,
    held: NDArray[np.bool_],
    along: FloatArray,
) -> None:
    """Write the normal equations of the task with one more row, no step along the curve."""
    normal = desk.normal
    slopes_at(lines, room, desk, task, 1.0)
    normal_equations(desk)
    for i in range(along.shape[0]):
        for j in range(along.shape[0]):
            normal[i, j] += along[i] * along[j]
    for i in range(along.shape[0]):
        if held[i]:
            desk.slope[i] = 0.0
            for j in range(along.shape[0]):
                normal[i, j] = normal[j, i] = 1.0 if i == j else 0.0


@compiled
def follow(
    lines: Lines,
    room: Room,
    desk: Desk,
    task: int,
    target: FloatArray,
    held: NDArray[np.bool_],
    first: FloatArray,
    points: FloatArray,
) -> tuple[int, int]:
    """Follow the self-motion from ``points[0]`` in the direction ``first``, a unit null direction.

    Parameters
    ----------
    points : (most, joints), written from place 1 on.

    Returns
    -------
    count, end : points that were reached, the first included; how the curve ends. A closed curve's
        last point is its first but for whole turns.
    """
    joints = first.shape[0]
    along, onward, trial = np.empty(joints), np.empty(joints), np.empty(joints)
    for joint in range(joints):
        along[joint] = first[joint]
    step, count = _FIRST_STEP, int(np.int64(1))
    while count < points.shape[0]:
        for joint in range(joints):
            trial[joint] = points[count - 1, joint] + step * along[joint]
        good = corrected(lines, room, desk, task, target, held, along, trial, onward)
        if good:
            moved, straight = 0.0, 0.0
            for joint in range(joints):
                moved += (trial[joint] - points[count - 1, joint]) * along[joint]
                straight += onward[joint] * along[joint]
            good = straight > _STRAIGHT and moved > 0.5 * step and moved < 2.0 * step
        if not good:
            step *= 0.5
            if step < _SHORTEST_STEP:
                return count, ENDED
            continue
        if count > 2 and _closes(room, points, count, trial, along, first):
            return count + 1, CLOSED
        for joint in range(joints):
            points[count, joint], along[joint] = trial[joint], onward[joint]
        count += 1
        step = min(1.5 * step, _LONGEST_STEP)
    return count, LONG


@compiled
def _closes(
    room: Room,
    points: FloatArray,
    count: int,
    trial: FloatArray,
    along: FloatArray,
    first: FloatArray,
) -> bool:
    """Return whether the next step passes the first point, and write it as the last one then."""
    ahead, passed, off, same_way = 0.0, 0.0, 0.0, 0.0
    for joint in range(trial.shape[0]):
        to_start = points[0, joint] - points[count - 1, joint]
        if room.turning[joint]:
            to_start -= 2.0 * math.pi * np.rint(to_start / (2.0 * math.pi))
        points[count, joint] = points[count - 1, joint] + to_start
        ahead += to_start * along[joint]
        off += to_start * to_start
        passed += (trial[joint] - points[count - 1, joint]) * along[joint]
        same_way += first[joint] * along[joint]
    across = math.sqrt(max(off - ahead * ahead, 0.0))
    near = ahead > 0.0 and ahead <= passed and across < 0.3 * passed
    return near and same_way > 0.8
