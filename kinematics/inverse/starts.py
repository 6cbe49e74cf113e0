"""Where a search begins: postures spread evenly over travel, those nearest to the target first.

Idea: postures drawn by chance leave gaps and clusters; a Halton sequence, one small prime a joint,
fills travel evenly at every length, and its digits, permuted by chance, lose the stripes it has
for larger primes. Where each start brings the tool is worked out once for an arm, so that each
target can begin with the starts that already come near it, which costs less than one step.

Source: Halton 1960; permuted digits: Braaten and Weller 1979, Owen 2017 (A randomized Halton
algorithm). Not covered: the descent from a start (kinematics/inverse/descent.py).
"""

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.descent import DIRECTION, POSITION
from kinematics.number_checks import FloatArray

_PRIMES = (2, 3, 5, 7, 11, 13, 17, 19, 23, 29, 31, 37, 41, 43, 47, 53)
_MORE_PRIMES = (59, 61, 67, 71, 73, 79, 83, 89, 97, 101, 103, 107, 109, 113, 127, 131)


_LAST_DIGIT = 1e-15
"""Places of digits smaller than that move no point of the cube: doubles hold no more of them."""
_PIECE = 1024
"""Targets held against all starts at a time: some MiB."""


def scrambled_halton(count: int, dimensions: int, seed: int) -> FloatArray:
    """Return points (count, dimensions) of the unit cube, up to 32 dimensions, evenly spread.

    Each digit of each prime is permuted by its own draw; the same seed gives the same points.

    Examples
    --------
    >>> points = scrambled_halton(9, 2, seed=1)
    >>> np.bincount((points[:8, 0] * 8).astype(int)), np.bincount((points[:, 1] * 9).astype(int))
    (array([1, 1, 1, 1, 1, 1, 1, 1]), array([1, 1, 1, 1, 1, 1, 1, 1, 1]))
    """
    random = np.random.default_rng(seed)
    points = np.zeros((count, dimensions))
    for dimension, prime in enumerate((*_PRIMES, *_MORE_PRIMES)[:dimensions]):
        left, place = np.arange(count), 1.0 / prime
        # Digits beyond those of the count are permuted too: they move a point within its cell.
        while place > _LAST_DIGIT:
            points[:, dimension] += random.permutation(prime)[left % prime] * place
            left, place = left // prime, place / prime
    return points


def nearest_starts(poses: FloatArray, targets: FloatArray, task: int, few: int) -> NDArray[np.intp]:
    """Return which starts bring the tool nearest to each target, nearest first, (m, few).

    Lengths as shares of the arm's, turns by the chord of their rotation.

    Parameters
    ----------
    poses : (count, 4, 4), count at least ``few``; targets : (m, 4, 4).

    Examples
    --------
    >>> poses = np.zeros((3, 4, 4))
    >>> poses[:, 0, 3] = [3, 1, 2]
    >>> nearest_starts(poses, np.zeros((1, 4, 4)), POSITION, 2)
    array([[1, 2]])
    """
    first = {POSITION: 3, DIRECTION: 2}.get(task, 0)
    weight = np.sqrt([0.5, 0.5, 1.0 if task == DIRECTION else 0.5, 1.0])[first:]
    of_starts = (poses[:, :3, first:] * weight).reshape(len(poses), 3 * (4 - first))
    of_targets = (targets[:, :3, first:] * weight).reshape(len(targets), 3 * (4 - first))
    picked = np.empty((len(targets), few), np.intp)
    # Of an arm of next to no length a slide may lead 1e160 lengths away: any start is as good.
    with np.errstate(over="ignore", invalid="ignore"):
        own = (of_starts * of_starts).sum(axis=1)
    for begin in range(0, len(targets), _PIECE):
        # Of |s - t|^2 = |s|^2 - 2 s t + |t|^2 the last is the same for all starts.
        with np.errstate(over="ignore", invalid="ignore"):
            squares = own - 2.0 * (of_targets[begin : begin + _PIECE] @ of_starts.T)
        nearest = np.argpartition(squares, min(few, len(poses) - 1), axis=1)[:, :few]
        order = np.argsort(np.take_along_axis(squares, nearest, axis=1), axis=1)
        picked[begin : begin + _PIECE] = np.take_along_axis(nearest, order, axis=1)
    return picked
