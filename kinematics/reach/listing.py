"""Which postures of a target are told, and of how many.

Source: none. Not covered: their order (verdicts.py).
"""

import numpy as np
from numpy.typing import NDArray

from kinematics.reach.targets import OUTSIDE_TRAVEL
from kinematics.reach.verdicts import Ranked


def how_many(ranked: Ranked, verdict: NDArray[np.int64]) -> NDArray[np.int64]:
    """Return how many postures get to each target, listed or not."""
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
    """Return offsets and postures of the targets whose postures are told."""
    counts = np.diff(offsets)
    fewer = np.concatenate([[0], np.cumsum(np.where(told, counts, 0))]).astype(np.intp)
    return fewer, np.repeat(told, counts)
