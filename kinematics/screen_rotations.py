"""What the numbers on a screen turn the tool by, for every choice of which number is which.

Quaternions throughout, for all maps of a kind and all readouts at once. Left out: which readings
are the same map, and which of them a screen could be (screen_readings).
"""

from collections.abc import Callable
from itertools import permutations, product

import numpy as np
from numpy.typing import NDArray

from kinematics.number_checks import FloatArray
from kinematics.orientation_forms import SEQUENCES
from kinematics.rigidity import nearest_rotation
from kinematics.rotations import quaternion_wxyz_of

IntArray = NDArray[np.int64]

PLACES = {count: np.array(list(permutations(range(count)))) for count in (3, 4)}
"""Every order in which 3 or 4 numbers can stand."""

SIGNS = np.array(list(product((1, -1), repeat=3)))
"""Every choice of signs, all plus first."""

AXES = np.array([["xyz".index(axis) for axis in sequence] for sequence in SEQUENCES])

# Mirroring one axis of both frames keeps the entries of a matrix but for their signs.
MIRRORED = np.array([[1, 1, 1], [-1, 1, 1], [1, -1, 1], [1, 1, -1]])


def product_of(left: FloatArray, right: FloatArray) -> FloatArray:
    """Return the Hamilton product of quaternions (..., 4), scalar first.

    Examples
    --------
    >>> product_of(np.array([0.0, 1.0, 0.0, 0.0]), np.array([0.0, 0.0, 1.0, 0.0])).tolist()
    [0.0, 0.0, 0.0, 1.0]
    """
    a, b, c, d = np.moveaxis(left, -1, 0)
    e, f, g, h = np.moveaxis(right, -1, 0)
    return np.stack(
        [
            a * e - b * f - c * g - d * h,
            a * f + b * e + c * h - d * g,
            a * g - b * h + c * e + d * f,
            a * h + b * g - c * f + d * e,
        ],
        axis=-1,
    )


def turn_maps() -> tuple[IntArray, IntArray, IntArray]:
    """Return axes, places and signs of every map of three turns, left to right: (576, 3) each.

    Examples
    --------
    >>> axes, places, signs = turn_maps()
    >>> axes.shape, sorted(places[-1].tolist())
    ((576, 3), [0, 1, 2])
    """
    grid = np.indices((len(AXES), len(PLACES[3]), len(SIGNS))).reshape(3, -1)
    return AXES[grid[0]], PLACES[3][grid[1]], SIGNS[grid[2]]


def _of_turns(shown: FloatArray, factor: float) -> FloatArray:
    half = 0.5 * factor * shown
    cosines, sines = np.cos(half).T, np.sin(half).T
    axes, places, signs = turn_maps()
    turns = []
    for axis, place, sign in zip(axes.T, places.T, signs.T, strict=True):
        turn = np.zeros((len(axes), len(shown), 4))
        turn[..., 0] = cosines[place]
        turn[np.arange(len(axes)), :, 1 + axis] = sign[:, None] * sines[place]
        turns.append(turn)
    left, middle, right = turns
    return product_of(product_of(left, middle), right)


def _of_vectors(shown: FloatArray, factor: float) -> FloatArray:
    signed = _placed(shown, PLACES[3]) * factor
    angle = np.linalg.norm(signed, axis=-1, keepdims=True)
    ratio = 0.5 * np.sinc(0.5 * angle / np.pi)
    return np.concatenate([np.cos(0.5 * angle), ratio * signed], axis=-1)


def _of_quaternions(shown: FloatArray, factor: float) -> FloatArray:
    unit = _of_length_one(shown)
    scalar = np.repeat(unit.T[PLACES[4][:, 0]], len(SIGNS), axis=0)[..., None]
    return np.concatenate([scalar, _placed(unit, PLACES[4][:, 1:])], axis=-1)


def _of_axes_and_angles(shown: FloatArray, factor: float) -> FloatArray:
    angle = np.repeat(shown.T[PLACES[4][:, 0]], len(SIGNS), axis=0)[..., None]
    axis = _of_length_one(_placed(shown, PLACES[4][:, 1:]))
    half = 0.5 * factor * angle
    return np.concatenate([np.cos(half), np.sin(half) * axis], axis=-1)


def _of_matrices(shown: FloatArray, factor: float) -> FloatArray:
    by_rows = quaternion_wxyz_of(nearest_rotation(shown.reshape(-1, 3, 3)))
    by_columns = by_rows * [1.0, -1.0, -1.0, -1.0]
    # A mirrored axis keeps its turn and reverses those about the other two.
    kept = MIRRORED * np.prod(MIRRORED, axis=1, keepdims=True)
    signs = np.concatenate([np.ones((4, 1)), kept], axis=1)[:, None, :]
    return np.concatenate([by_rows * signs, by_columns * signs])


QUATERNIONS: dict[str, Callable[[FloatArray, float], FloatArray]] = {
    "turns": _of_turns,
    "rotation-vector": _of_vectors,
    "quaternion": _of_quaternions,
    "axis-angle": _of_axes_and_angles,
    "matrix": _of_matrices,
}


def _placed(shown: FloatArray, places: FloatArray) -> FloatArray:
    """Three of the numbers in every order and with all signs: (orders * 8, readouts, 3)."""
    ordered = np.moveaxis(shown.T[places], 1, -1)[:, None]
    return np.asarray(ordered * SIGNS[:, None, :]).reshape(-1, len(shown), 3)


def _of_length_one(vectors: FloatArray) -> FloatArray:
    lengths = np.linalg.norm(vectors, axis=-1, keepdims=True)
    return np.asarray(vectors / np.where(lengths == 0.0, 1.0, lengths))
