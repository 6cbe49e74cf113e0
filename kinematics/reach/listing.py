"""Which postures of a target are told, and of how many.

Source: none. Not covered: their order (verdicts.py).
"""

import numpy as np
from numpy.typing import NDArray

from kinematics.reach.targets import OUTSIDE_TRAVEL
from kinematics.reach.verdicts import Ranked


def how_many(ranked: Ranked, verdict: NDArray[np.int64]) -> NDArray[np.int64]:
    """Return how many postures get to each target, listed or not.

    Parameters
    ----------
    verdict : (m,).

    Examples
    --------
    A target of three postures within travel of which one is listed:

    >>> listed_of, counted = np.array([0, 1]), (np.zeros((1, 6)), *(np.zeros(1),) * 2)
    >>> found = np.array([0]), None, np.array([0]), np.array([True]), True, False, np.array([3.0])
    >>> how_many(Ranked(listed_of, *counted, *found), np.array([0]))
    array([3])
    """
    if ranked.all_listed:
        return ranked.offsets[1:] - ranked.offsets[:-1]
    seen = np.where(ranked.seen < 0, -ranked.seen - 1.0, ranked.seen)
    inside = np.bincount(ranked.target, seen, len(verdict)).astype(np.int64)
    if ranked.all_inside:
        return inside
    beyond = np.where(verdict == OUTSIDE_TRAVEL, np.diff(ranked.offsets), 0)
    return np.where(ranked.inside, inside, beyond)


def listed(
    offsets: NDArray[np.intp], told: NDArray[np.bool_]
) -> tuple[NDArray[np.intp], NDArray[np.bool_]]:
    """Return offsets and postures of the targets whose postures are told.

    Parameters
    ----------
    offsets : (m + 1,), into the postures of m targets. told : (m,).

    Examples
    --------
    >>> listed(np.array([0, 2, 3]), np.array([False, True]))
    (array([0, 0, 1]), array([False, False,  True]))
    """
    counts = np.diff(offsets)
    fewer = np.concatenate([[0], np.cumsum(np.where(told, counts, 0))]).astype(np.intp)
    return fewer, np.repeat(told, counts)
