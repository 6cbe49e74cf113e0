"""The postures of each target in order, best first, and no more of them than are to be listed.

Postures within travel come alone where there are any. Ranks are given in steps, so that what
differs by rounding keeps the order in which it was found, whichever machine computed it.

Left out: what postures are ranked by (kinematics/reach), and where they come from (whole_turns.py).
"""

import numpy as np
from numpy.typing import NDArray

from kinematics.kernels.compiler import compiled_exactly
from kinematics.kernels.whole_turns import INSIDE, ROUNDED
from kinematics.number_checks import FloatArray

IntArray = NDArray[np.int64]


def in_steps(score: FloatArray) -> FloatArray:
    """Return scores (...,) rounded to whole steps, larger is better.

    Examples
    --------
    >>> one, other = in_steps(np.array([0.25, 0.25 - 1e-13]))
    >>> bool(one == other)
    True
    """
    steps: FloatArray = np.round(score * ROUNDED)
    return steps / ROUNDED


def preferred(score: FloatArray, outside_working: NDArray[np.bool_]) -> FloatArray:
    """Return scores (...,) in steps, and half a step more for postures within working travel.

    Many postures share a margin, where one joint bounds them all: working travel tells them apart.

    Parameters
    ----------
    score : (...,), margin or nearness; infinite, counted as 1, where nothing bounds the arm.
    outside_working : (...,).

    Examples
    --------
    >>> outside, within = preferred(np.array([0.25, 0.25 - 1e-13]), np.array([True, False]))
    >>> float(outside), bool(within > outside)
    (0.25, True)
    """
    steps: FloatArray = np.round(np.minimum(score, 1.0) * ROUNDED)
    return (steps + np.where(outside_working, 0.0, 0.5)) / ROUNDED


@compiled_exactly
def best_first(
    targets: int,
    target: NDArray[np.intp],
    source: IntArray,
    flags: IntArray,
    primary: FloatArray,
    secondary: FloatArray,
    most: int,
    beyond: int,
) -> tuple[NDArray[np.intp], IntArray, NDArray[np.bool_], bool]:
    """Return the order of each target's postures, best first: those within travel, if any are.

    Parameters
    ----------
    target : (k,), ascending, of each wanted motion; source, flags : (p,), as ``postures_of`` gives.
    primary, secondary : (p,), in steps, larger is better; what is equal keeps its order.
    most, beyond : postures that are listed of a target with some within travel, and with none.

    Returns
    -------
    offsets (targets + 1,) into the order; the order, indices of postures; which targets have any
    within travel, (targets,); and whether all have.

    Examples
    --------
    >>> flags, rank = np.array([0, 1, 1]), np.array([0.5, 0.1, 0.2])
    >>> best_first(1, np.array([0]), np.zeros(3, np.int64), flags, rank, rank, 9, 9)[1]
    array([2, 1])
    """
    count = len(source)
    offsets, order = np.zeros(targets + 1, np.intp), np.empty(count, np.int64)
    reached, all_reached = np.zeros(targets, np.bool_), True
    filled, at = 0, 0
    for m in range(targets):
        first, inside, start = filled, False, at
        while at < count and target[source[at]] == m:
            inside |= (flags[at] & INSIDE) != 0
            at += 1
        listed = most if inside else beyond
        for posture in range(start, at):
            if inside and not flags[posture] & INSIDE:
                continue
            place = filled
            while place > first and _better(posture, order[place - 1], primary, secondary):
                if place - first < listed:
                    order[place] = order[place - 1]
                place -= 1
            if place - first < listed:
                order[place] = posture
                filled = min(filled + 1, first + listed)
        offsets[m + 1], reached[m] = filled, inside
        all_reached &= inside
    return offsets, order[:filled], reached, all_reached


@compiled_exactly
def _better(one: int, other: int, primary: FloatArray, secondary: FloatArray) -> bool:
    if primary[one] == primary[other]:
        return bool(secondary[one] > secondary[other])
    return bool(primary[one] > primary[other])
