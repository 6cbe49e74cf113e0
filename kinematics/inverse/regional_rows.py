"""How answers to the regional problem are written down: rows of a, b, c and which joint is free.

A joint whose axis passes through what it has to turn is free: any value of it will do. A list then
holds samples of it all around, the first of them the value that the equations gave, which still
means something where the joint is only nearly free.

Source: none; a layout. Not covered: how many there really are; a full list takes no more.
"""

import math

from kinematics.inverse.kernel_numbers import entries
from kinematics.inverse.tolerances import FREE_JOINT, MAYBE_FREE
from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray

MOST_ROWS_FOUND = 64
"""Rows of a list: four roots with a free joint each, and room for roots that stand for two."""

SAMPLES = 12
"""Values of a free joint that are tried: every 30 degrees."""

REGULAR, FREE, NEAR_FREE = entries(0, 3)
"""Flags of an answer: bits."""

NONE_FREE, A_FREE, B_FREE, C_FREE = entries(-1, 3)
"""Which joint is free in a row."""


@compiled
def flags_of(swing: float) -> int:
    """Return the flags for a joint that swings what it turns by this much.

    Examples
    --------
    >>> flags_of(0.3), flags_of(3e-8), flags_of(0.0)
    (0, 2, 1)
    """
    if swing > MAYBE_FREE:
        return REGULAR
    return NEAR_FREE if swing > FREE_JOINT else FREE


@compiled
def put(out: FloatArray, count: int, a: float, b: float, c: float, free: int) -> int:
    """Write an answer, ``free`` the index of the joint that is free; return the new count."""
    if count >= out.shape[0]:
        return count
    out[count, 0], out[count, 1], out[count, 2], out[count, 3] = a, b, c, free
    return count + 1


@compiled
def put_samples(out: FloatArray, count: int, a: float, b: float, c: float, free: int) -> int:
    """Write an answer and samples of its free joint, the others staying; return the new count."""
    begin = count
    for k in range(SAMPLES):
        count = put(out, count, a, b, c, free)
        if count > begin + k:
            out[count - 1, free] += 2.0 * math.pi / SAMPLES * k
    return count
