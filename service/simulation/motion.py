"""Arms that wander: which motion an arm has for a seed, the same wherever it is made.

Left out: where its joint values go (moving_cell.py, sending.py).
"""

from zlib import crc32

from kinematics.arm import Arm
from kinematics.table import FloatArray
from kinematics.wandering import SHARE_OF_TOP_SPEED, Wandering

SOURCE = "simulation"
USUAL_SEED = 1


def wandering_of(
    arm: Arm, seed: int, start: FloatArray | None = None, *, share: float = SHARE_OF_TOP_SPEED
) -> Wandering:
    """Return the motion of an arm; arms of one seed move each in its own way.

    Parameters
    ----------
    share : of top speed.

    Raises
    ------
    KinematicsError : an arm without joints, or whose travel leaves no posture.
    """
    return Wandering(arm, seed=seed + crc32(arm.name.encode()), share=share, start=start)
