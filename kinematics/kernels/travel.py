"""How much of its travel each joint value of many postures has left.

Left out: which limits an arm has and what they are called (kinematics/travel_limits.py).
"""

import numpy as np
from numpy.typing import NDArray

from kinematics.kernels.compiler import compiled_exactly
from kinematics.number_checks import FloatArray


@compiled_exactly
def travel_left(
    joint_values: FloatArray,
    weights: FloatArray,
    constants: FloatArray,
    lower: FloatArray,
    upper: FloatArray,
    working: NDArray[np.bool_],
    margin: FloatArray,
    outside: NDArray[np.bool_],
) -> None:
    """Write the smallest share of travel left, infinite without limits, and who is outside any.

    Parameters
    ----------
    joint_values : (count, joints).
    weights : (limits, joints); constants, lower, upper : (limits,), of ``weights . q + constant``.
    working : (limits,), limits that count for ``outside`` but not for the margin.
    margin, outside : (count,).

    Examples
    --------
    >>> margin, outside, one = np.empty(1), np.empty(1, dtype=bool), np.ones(1)
    >>> limits = np.ones((1, 1)), np.zeros(1), -one, one, np.array([False])
    >>> travel_left(np.array([[0.5]]), *limits, margin, outside)
    >>> margin, outside
    (array([0.25]), array([False]))
    """
    for b in range(joint_values.shape[0]):
        beyond = False
        margin[b] = np.inf
        for limit in range(weights.shape[0]):
            value = constants[limit]
            for joint in range(weights.shape[1]):
                value += weights[limit, joint] * joint_values[b, joint]
            left = min(value - lower[limit], upper[limit] - value)
            beyond |= left < 0.0
            if not working[limit]:
                margin[b] = min(margin[b], left / (upper[limit] - lower[limit]))
        outside[b] = beyond
