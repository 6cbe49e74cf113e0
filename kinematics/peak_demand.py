"""The least demand on the most loaded joint: an arm's spare joints may share the work.

One small minimax problem per posture; closed form for no or one spare joint motion.
"""

import numpy as np

from kinematics.table import FloatArray
from kinematics.tolerances import LINES_CROSS


def least_peak(demand: FloatArray, spare: FloatArray) -> FloatArray:
    """Return min over z of max_i |demand_i + (spare z)_i|, (...,).

    Parameters
    ----------
    demand : (..., n, 1), share of each joint's top speed that the motion takes.
    spare : (..., n, k), joint motions that move nothing, in the same shares; k may be 0.

    Source
    ------
    Linear programming; for k = 1 the minimum lies where two of the 2n lines cross.

    Examples
    --------
    >>> float(least_peak(np.array([[1.0], [0.0]]), np.array([[1.0], [1.0]])))
    0.5
    """
    count = spare.shape[-1]
    if count == 0:
        alone: FloatArray = np.abs(demand[..., 0]).max(axis=-1)
        return alone
    if count == 1:
        return _on_one_line(demand[..., 0], spare[..., 0])
    batch = demand.shape[:-2]
    flat_demand = demand.reshape(-1, demand.shape[-2])
    flat_spare = spare.reshape(-1, *spare.shape[-2:])
    least = [_by_programming(*pair) for pair in zip(flat_demand, flat_spare, strict=True)]
    return np.array(least).reshape(batch)


def _on_one_line(demand: FloatArray, spare: FloatArray) -> FloatArray:
    """Evaluate the maximum at every crossing of the lines +-(demand_i + spare_i z)."""
    signed_demand = np.concatenate([demand, -demand], axis=-1)
    signed_spare = np.concatenate([spare, -spare], axis=-1)
    rise = signed_spare[..., :, None] - signed_spare[..., None, :]
    gap = signed_demand[..., None, :] - signed_demand[..., :, None]
    crossing = np.zeros_like(gap)
    np.divide(gap, rise, out=crossing, where=np.abs(rise) > LINES_CROSS)
    candidates = crossing.reshape(*crossing.shape[:-2], crossing.shape[-1] ** 2)
    loads = np.abs(demand[..., None, :] + spare[..., None, :] * candidates[..., None])
    least: FloatArray = loads.max(axis=-1).min(axis=-1)
    return least


def _by_programming(demand: FloatArray, spare: FloatArray) -> float:
    # Imported here: only arms with two or more spare joint motions pay scipy's import time.
    from scipy.optimize import linprog

    joints, count = spare.shape
    bound = -np.ones((joints, 1))
    result = linprog(
        c=np.append(np.zeros(count), 1.0),
        A_ub=np.vstack([np.hstack([spare, bound]), np.hstack([-spare, bound])]),
        b_ub=np.concatenate([-demand, demand]),
        bounds=[(None, None)] * count + [(0.0, None)],
    )
    return float(result.fun)
