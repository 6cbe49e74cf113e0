"""Whether a reading would fit but for one constant turn: another tool, or another base, was meant.

A screen that shows the flange while the gripper's orientation is known is off by the same turn in
every readout. Left out: readouts with a direction only, and a turn on both sides at once.
"""

from dataclasses import dataclass
from typing import Literal

import numpy as np

from kinematics.number_checks import FloatArray
from kinematics.screen_rotations import product_of

_INVERSE = np.array([1.0, -1.0, -1.0, -1.0])
FEWEST_READOUTS = 3
"""With two readouts some turn brings most readings within any tolerance."""

Side = Literal["tool", "base"]
SIDES: tuple[Side, ...] = ("tool", "base")


@dataclass(frozen=True, slots=True)
class Offset:
    """A constant turn between what is shown and what is known.

    Attributes
    ----------
    side : ``tool`` where known = shown @ turn, ``base`` where known = turn @ shown.
    turn : (4,), w x y z, of length 1.
    """

    side: Side
    turn: FloatArray


def offsets(side: Side, shown: FloatArray, known: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return the turn that explains the readouts best for each map, and what it leaves.

    Parameters
    ----------
    side : as of Offset.
    shown : (maps, readouts, 4), what each map makes of each readout.
    known : (readouts, 4), what is so; unit quaternions w x y z both.

    Returns
    -------
    turns : (maps, 4).
    residuals : (maps, readouts), rad.

    Source
    ------
    The mean of unit quaternions as the largest eigenvector of their moments: Markley et al.,
    J. Guidance, Control and Dynamics 30(4), 2007, eq. 12.

    Examples
    --------
    >>> half = np.array([[0.0, 0.0, 0.0, 1.0]] * 3)
    >>> turns, left = offsets("tool", np.eye(4)[None, :3], product_of(np.eye(4)[:3], half))
    >>> np.abs(turns).round(9).tolist(), float(left.max().round(9))
    ([[0.0, 0.0, 0.0, 1.0]], 0.0)
    """
    if side == "tool":
        each = product_of(shown * _INVERSE, known)
    else:
        each = product_of(np.broadcast_to(known, shown.shape), shown * _INVERSE)
    moments = np.einsum("mri,mrj->mij", each, each)
    turns = np.linalg.eigh(moments)[1][..., -1]
    off = product_of(np.broadcast_to(turns[:, None] * _INVERSE, each.shape), each)
    across = np.linalg.norm(off[..., 1:], axis=-1)
    return turns, 2.0 * np.arctan2(across, np.abs(off[..., 0]))
