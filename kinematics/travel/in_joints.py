"""One leg in joint values: every joint grows evenly from one posture to another.

Idea: nothing has to be followed, for the way in the joints is given; it is sampled as densely as
joints move, so that the tool's speed, singular places and margins on the way are seen. What bounds
joint values bounds a straight way between two postures by its ends, whatever sums are bounded.

Source: none. Not covered: speeds that grow and fall at the ends (acceleration).
"""

import numpy as np

from kinematics.arm import Arm
from kinematics.jacobian import motion_of
from kinematics.rotations import angle_of
from kinematics.table import FloatArray
from kinematics.tolerances import TRAVEL_EDGE
from kinematics.travel.moves import BEYOND_TRAVEL
from kinematics.travel.tolerances import JOINT_STEP, MOST_POSTURES
from kinematics.travel.tracking import Track
from kinematics.travel.trails import WHOLE, Trail
from kinematics.travel_limits import limits_of


def joint_trail(
    arm: Arm, tool_in_flange: FloatArray, scale: FloatArray, start: FloatArray, end: FloatArray
) -> Trail:
    """Return the leg from joint values to joint values, (joints,) each, as far as travel lets it.

    Parameters
    ----------
    scale : (joints,), what joint values are divided by in tracks.
    """
    moved = end - start
    last, limit = _as_far_as_travel(arm, start, moved)
    steps = int(np.ceil(np.abs(moved / scale).max(initial=0.0) * last / JOINT_STEP)) + 1
    shares = np.linspace(0.0, last, min(max(steps, 2), MOST_POSTURES)) if last else np.zeros(1)
    motion = motion_of(arm, start + shares[:, None] * moved, tool_in_flange)
    points = motion.tool_in_base[:, :3, 3]
    chords = np.linalg.norm(np.diff(points, axis=0), axis=1)
    places = np.concatenate([[0.0], np.cumsum(chords)])
    velocity = motion.of_joints[:, :3] @ moved
    first, final = motion_of(arm, np.stack([start, end]), tool_in_flange).tool_in_base
    track = Track(
        shares,
        (start + shares[:, None] * moved) / scale,
        np.tile(moved / scale, (len(shares), 1)),
        np.zeros((len(shares), 2)),
    )
    length = float(places[-1]) if last == 1.0 else _length(arm, tool_in_flange, start, moved)
    return Trail(
        track,
        len(shares),
        scale,
        length,
        float(angle_of(final[:3, :3] @ first[:3, :3].T)),
        float(np.linalg.norm(velocity, axis=1).max(initial=0.0)),
        places,
        lambda asked: (start + np.minimum(asked, last)[:, None] * moved) / scale,
        WHOLE if limit < 0 else BEYOND_TRAVEL,
        limit,
    )


def _as_far_as_travel(arm: Arm, start: FloatArray, moved: FloatArray) -> tuple[float, int]:
    """Return the share of a leg that is within travel, and the limit that it ends at, or -1."""
    limits = limits_of(arm)
    if not len(limits.each):
        return 1.0, -1
    at, change = limits.weights @ start + limits.constants, limits.weights @ moved
    end = at + change
    beyond = np.maximum(limits.lower - end, end - limits.upper) > TRAVEL_EDGE
    beyond |= np.maximum(limits.lower - at, at - limits.upper) > TRAVEL_EDGE
    beyond &= ~limits.working
    if not beyond.any():
        return 1.0, -1
    bound = np.where(change > 0.0, limits.upper, limits.lower)
    with np.errstate(divide="ignore", invalid="ignore"):
        shares = np.where(beyond, np.nan_to_num((bound - at) / change), np.inf)
    already = np.maximum(limits.lower - at, at - limits.upper) > TRAVEL_EDGE
    shares[beyond & already] = 0.0
    first = int(np.argmin(shares))
    return float(np.clip(shares[first], 0.0, 1.0)), first


def _length(arm: Arm, tool_in_flange: FloatArray, start: FloatArray, moved: FloatArray) -> float:
    """Return how far the tool's point would go on the whole leg, m, by chords."""
    shares = np.linspace(0.0, 1.0, 101)
    postures = start + shares[:, None] * moved
    points = motion_of(arm, postures, tool_in_flange).tool_in_base[:, :3, 3]
    return float(np.linalg.norm(np.diff(points, axis=0), axis=1).sum())
