"""Postures of an arm of few joints that miss a target least, place and turn held together.

Idea: few joints meet a typed pose only nearly. A closed form meets the place exactly and leaves all
of the error to the turn, where a little off both would do. From its posture damped least squares go
downhill on shift and turn together, each over what it may be off by. Within both tolerances every
weighted mean of the squares is at most 1: where the least one is above it, no posture thereabouts
is within them; else more heed is given to what is too far off, until one or the other is shown.

Source: Gauss-Newton steps; Levenberg (1944) and Marquardt (1963) for the damping, recalled; weak
duality for the proof.
Not covered: postures far from all that are given.
"""

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.found import Found
from kinematics.inverse.landing import gap_to, jacobians_at, land_all
from kinematics.inverse.measured import DIRECTION, POSITION, errors_of, wrapped
from kinematics.inverse.screws import Screws
from kinematics.inverse.several import picked
from kinematics.kernels.compiler import for_kernel
from kinematics.table import FloatArray
from kinematics.tolerances import SAME_COMPROMISE

_STEPS = 12
_ROUNDS, _LESS_HEED = 6, 0.125
"""How often weights are changed, and by how much the weight of what is near enough is lowered."""
_LEAST_DAMPING, _LESS, _MORE = 1e-12, 0.1, 10.0
"""Damping over the largest entry of the normal equations: at the least, after a step downhill, and
after one that led up and was not taken."""


def compromised(
    found: Found,
    screws: Screws,
    drive: FloatArray,
    targets: FloatArray,
    tolerances: FloatArray,
    task: str,
) -> Found:
    """Return what was found with each solution led to where it misses its target least, once each.

    A target that has none within tolerance, but one that need not be the best, is open.

    Parameters
    ----------
    drive : (rows, joints), row motions per joint value; targets : (m, 4, 4), the tool in base.
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
    for this in range(1, len(kept)):
        that = this - 1
        while that >= 0 and found.target[that] == found.target[this]:
            apart = wrapped(found.motions[[this]] - found.motions[[that]], prismatic)
            if kept[that] and np.abs(apart).max() < SAME_COMPROMISE:
                kept[this] = False
            that -= 1
    return picked(found, kept)


def compromises(
    screws: Screws,
    drive: FloatArray,
    motions: FloatArray,
    targets: FloatArray,
    tolerances: FloatArray,
    task: str,
) -> FloatArray:
    """Return motions (k, rows), rad and metres, that miss their targets least, from those given.

    Parameters
    ----------
    drive : (rows, joints), row motions per joint value, as ``DriveMap.matrix``.
    targets : (k, 4, 4), the tool in base, metres, of each motion; task : as in measured.py.
    tolerances : (k, 2), metres and rad, that the errors are divided by.

    Examples
    --------
    >>> screws = Screws(np.eye(3)[2:], np.zeros((1, 3)), np.array([False]), np.eye(4), 1.0)
    >>> screws.tool_at_zero[0, 3] = 1.0
    >>> turned, target = np.zeros((1, 1)), np.eye(4)[None]
    >>> target[0, :2, 3] = np.cos(0.3), np.sin(0.3)
    >>> one = np.eye(1)
    >>> compromises(screws, one, turned, target, np.array([[1.0, 1e-3]]), "pose").round(6)
    array([[0.]])
    >>> compromises(screws, one, turned, target, np.array([[1.0, 1e3]]), "pose").round(6)
    array([[0.3]])
    """
    scale = np.where(screws.prismatic, screws.length, 1.0)
    share = tolerances / np.array([screws.length, 1.0])
    moving = drive / scale[:, None]
    moving = moving / np.linalg.norm(moving, axis=0)
    goals, now = for_kernel(screws.scaled(targets)), for_kernel(motions / scale)
    errors = _errors(screws, now, goals, share, task)
    squares, damping = (errors**2).sum(axis=1), np.full(len(now), _LEAST_DAMPING)
    for _ in range(_STEPS):
        slopes = _slopes(screws, now, goals, share, task) @ moving
        normal = slopes.transpose(0, 2, 1) @ slopes
        size = np.abs(normal).max(axis=(1, 2), initial=0.0)
        normal += (damping * size)[:, None, None] * np.eye(moving.shape[1])
        downhill = (slopes.transpose(0, 2, 1) @ errors[:, :, None])[:, :, 0]
        there = now + (np.linalg.pinv(normal) @ downhill[:, :, None])[:, :, 0] @ moving.T
        errors_there = _errors(screws, there, goals, share, task)
        squares_there = (errors_there**2).sum(axis=1)
        better = squares_there < squares
        now, errors = _where(better, there, now), _where(better, errors_there, errors)
        squares = np.where(better, squares_there, squares)
        damping = np.maximum(damping * np.where(better, _LESS, _MORE), _LEAST_DAMPING)
        if not better.any() and (damping > 1.0).all():
            break
    found: FloatArray = now * scale
    return found


def _where(better: NDArray[np.bool_], this: FloatArray, that: FloatArray) -> FloatArray:
    return np.ascontiguousarray(np.where(better[:, None], this, that))


def _lines(screws: Screws) -> tuple[FloatArray, FloatArray, NDArray[np.bool_], FloatArray]:
    lines = for_kernel(screws.axis), for_kernel(screws.point)
    return *lines, screws.prismatic, for_kernel(screws.tool_at_zero)


def _errors(
    screws: Screws, motions: FloatArray, goals: FloatArray, share: FloatArray, task: str
) -> FloatArray:
    """Return shift and turn to the goals over what they may be, (k, 6)."""
    poses, gaps = np.empty((len(motions), 4, 4)), np.empty((len(motions), 6))
    land_all(*_lines(screws), motions, poses)
    for pose, goal, gap in zip(poses, goals, gaps, strict=True):
        gap_to(pose, goal, gap)
    return _weighed(gaps[:, :, None], goals, share, task)[:, :, 0]


def _slopes(
    screws: Screws, motions: FloatArray, goals: FloatArray, share: FloatArray, task: str
) -> FloatArray:
    """Return how shift and turn change with the motions, (k, 6, rows)."""
    slopes = np.empty((len(motions), 6, screws.rows))
    jacobians_at(*_lines(screws), motions, slopes)
    return _weighed(slopes, goals, share, task)


def _weighed(columns: FloatArray, goals: FloatArray, share: FloatArray, task: str) -> FloatArray:
    """Return columns (k, 6, n) over what may be missed by; what the task leaves free is 0."""
    if task == POSITION:
        columns[:, 3:] = 0.0
    elif task == DIRECTION:
        about = goals[:, :3, 2]
        free = np.einsum("ki,kin->kn", about, columns[:, 3:])
        columns[:, 3:] -= about[:, :, None] * free[:, None, :]
    columns[:, :3] /= share[:, :1, None]
    columns[:, 3:] /= share[:, 1:, None]
    return columns
