"""Postures of an arm of few joints that miss a target least, place and turn held together.

Idea: few joints meet a typed pose only nearly. A closed form meets the place exactly and leaves all
of the error to the turn, where a little off both would do. From its posture the descent goes
downhill on shift and turn together, each over what it may be off by. Within both tolerances every
weighted mean of the squares is at most 1: where the least one is above it, no posture thereabouts
is within them; else more heed is given to what is too far off, until one or the other is shown.

Source: that of the descent (descent.py); weak duality for the proof.
Not covered: postures far from all that are given.
"""

from dataclasses import replace
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.descent import descend
from kinematics.inverse.descent_arrays import FAR, Desk, Lines, Room, desk_for
from kinematics.inverse.found import Found
from kinematics.inverse.iterative import TASKS
from kinematics.inverse.measured import errors_of, wrapped
from kinematics.inverse.screws import Screws
from kinematics.inverse.several import picked
from kinematics.kernels.compiler import compiled, for_kernel
from kinematics.table import FloatArray
from kinematics.tolerances import SAME_COMPROMISE

_NO_TURN = np.array([0.0, 0.0, 1.0])
_STEPS = 15
"""Steps downhill: from a posture a degree or less away some four do."""
_ROUNDS, _LESS_HEED = 6, 0.125
"""How often weights are changed, and by how much the weight of what is near enough is lowered."""


class Driven(NamedTuple):
    """How joint values move rows: ``matrix`` (rows, joints), as ``DriveMap.matrix``, and which
    ``rows`` (joints,) have a value of their own."""

    matrix: FloatArray
    rows: NDArray[np.intp]


def each_row(rows: int) -> Driven:
    """Return that each of so many rows has its own joint value.

    Examples
    --------
    >>> each_row(2).rows
    array([0, 1])
    """
    return Driven(np.eye(rows), np.arange(rows))


def compromised(
    found: Found,
    screws: Screws,
    drive: Driven,
    targets: FloatArray,
    tolerances: FloatArray,
    task: str,
) -> Found:
    """Return what was found with each solution led to where it misses its target least, once each.

    A target that has none within tolerance, but one that need not be the best, is open.

    Parameters
    ----------
    targets : (m, 4, 4), the tool in base, metres.
    tolerances : (m, 2), metres and rad; task : as in measured.py.
    """
    of, each = found.target, tolerances[found.target]
    motions, shares = found.motions.copy(), np.empty((len(of), 2))
    position, angle = np.empty(len(of)), np.empty(len(of))
    weights, left = np.full((len(of), 2), 0.5), np.arange(len(of))
    for _ in range(_ROUNDS):
        mine, by = of[left], each[left] / np.sqrt(weights[left])
        there = compromises(screws, drive, motions[left], targets[mine], by, task)
        motions[left] = wrapped(there, screws.prismatic)
        position[left], angle[left] = errors_of(screws, motions[left], targets, mine, task)
        shares[left] = np.stack([position[left], angle[left]], axis=1) / each[left]
        met, least = (shares <= 1.0).all(axis=1), (weights * shares**2).sum(axis=1)
        left = np.flatnonzero(~met & (least <= 1.0))
        if not len(left):
            break
        too_far = np.argmax(shares[left], axis=1)
        weights[left, 1 - too_far] *= _LESS_HEED
        weights[left, too_far] = 1.0 - weights[left, 1 - too_far]
    is_open = found.open.copy()
    is_open[of[left]] = True
    is_open[of[(shares <= 1.0).all(axis=1)]] = False
    led = replace(
        found,
        motions=motions,
        position_error=position,
        angle_error=angle,
        open=is_open | found.open,
    )
    return each_once(led, screws.prismatic)


def each_once(found: Found, prismatic: NDArray[np.bool_]) -> Found:
    """Return what was found without repeated motions of a target.

    Examples
    --------
    >>> from kinematics.inverse.found import none_found
    >>> twice = replace(
    ...     none_found(1, 1), motions=np.array([[3.0], [3.0 - 2 * np.pi]]), target=np.zeros(2, int),
    ...     position_error=np.zeros(2), angle_error=np.zeros(2),
    ... )
    >>> each_once(twice, np.array([False])).motions
    array([[3.]])
    """
    kept = np.ones(len(found.target), np.bool_)
    for lag in range(1, int(found.count_per_target().max(initial=1))):
        apart = wrapped(found.motions[lag:] - found.motions[:-lag], prismatic)
        same = (np.abs(apart) < SAME_COMPROMISE).all(axis=1)
        same &= found.target[lag:] == found.target[:-lag]
        kept[lag:] &= ~(same & kept[:-lag])
    return picked(found, kept)


def compromises(
    screws: Screws,
    drive: Driven,
    motions: FloatArray,
    targets: FloatArray,
    tolerances: FloatArray,
    task: str,
) -> FloatArray:
    """Return motions (k, rows), rad and metres, that miss their targets least, from those given.

    Parameters
    ----------
    targets : (k, 4, 4), the tool in base, metres, of each motion; task : as in measured.py.
    tolerances : (k, 2), metres and rad, that the errors are divided by.

    Examples
    --------
    >>> screws = Screws(np.eye(3)[2:], np.zeros((1, 3)), np.array([False]), np.eye(4), 1.0)
    >>> screws.tool_at_zero[0, 3] = 1.0
    >>> turned, target = np.zeros((1, 1)), np.eye(4)[None]
    >>> target[0, :2, 3] = np.cos(0.3), np.sin(0.3)
    >>> one = each_row(1)
    >>> compromises(screws, one, turned, target, np.array([[1.0, 1e-3]]), "pose").round(6)
    array([[0.]])
    >>> compromises(screws, one, turned, target, np.array([[1.0, 1e3]]), "pose").round(6)
    array([[0.3]])
    """
    scale = np.where(screws.prismatic, screws.length, 1.0)
    moving = drive.matrix / scale[:, None]
    moving = for_kernel(moving / np.abs(moving).max(axis=0))
    lines = Lines(
        for_kernel(screws.axis),
        for_kernel(screws.point),
        screws.prismatic,
        for_kernel(screws.tool_at_zero),
        moving,
        _NO_TURN,
    )
    joints = moving.shape[1]
    far, none = np.full(joints, FAR), np.empty(0)
    room = Room(-far, far, np.empty((0, joints)), none, none, np.zeros(joints, np.bool_))
    values = np.linalg.solve(moving[drive.rows], (motions / scale)[:, drive.rows].T).T
    q = np.array(values, dtype=np.float64, order="C")
    shares = tolerances[:, 0] / screws.length / tolerances[:, 1]
    desk, goals = desk_for(screws.rows, joints, 0), for_kernel(screws.scaled(targets))
    descend_each(lines, room, desk, TASKS[task], shares, goals, q, _STEPS)
    found: FloatArray = (q @ moving.T) * scale
    return found


@compiled
def descend_each(
    lines: Lines,
    room: Room,
    desk: Desk,
    task: int,
    shares: FloatArray,
    goals: FloatArray,
    q: FloatArray,
    most: int,
) -> None:
    """Bring joint values (k, joints) downhill in place, each to its own goal (k, 4, 4).

    Parameters
    ----------
    shares : (k,), weight of turns beside lengths.
    """
    for k in range(q.shape[0]):
        descend(lines, room, desk, task, shares[k], goals[k], q[k], most, 1)
