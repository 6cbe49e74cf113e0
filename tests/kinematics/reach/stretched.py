"""Arms stretched out as far as they go, and targets a hair beyond.

Only arms of which it is known that nothing of theirs reaches further that way: links in one plane
that turns about axis 1, or lies across all axes.
"""

from collections.abc import Callable
from dataclasses import replace

import numpy as np

from kinematics.arm import Arm
from kinematics.inverse.screws import screws_of
from kinematics.jacobian import motion_of
from kinematics.reach.targets import NONE, ORIENTATION, Targets
from kinematics.table import Row
from tests.kinematics.example_arms import QUARTER, arm_of, prismatic, random_pose, revolute

Stretched = tuple[Arm, np.ndarray, int, np.ndarray, np.ndarray]
"""An arm, its tool, the freedom, postures, and the way out at each, (count, 3)."""

HAIR = 1e-6


def _postures(random: np.random.Generator, count: int, joints: int) -> np.ndarray:
    return random.uniform(-2.5, 2.5, size=(count, joints))


def _outward(arm: Arm, postures: np.ndarray, first: int, last: int) -> np.ndarray:
    """Return directions from one axis's point to another's, (count, 3)."""
    points = motion_of(arm, postures, np.eye(4)).axis_point
    way = points[:, last] - points[:, first]
    return way / np.linalg.norm(way, axis=1)[:, None]


def upright(random: np.random.Generator, count: int) -> Stretched:
    """Six joints; the wrist centre as far from axis 2 as links 2 and 3 reach, elbow straight."""
    first, second = random.uniform(0.3, 0.6, size=2)
    rows: list[Row] = [
        revolute(a=float(random.choice([0.0, 0.1])), alpha=QUARTER, d=0.4),
        revolute(a=float(first)),
        revolute(alpha=QUARTER, theta=QUARTER),
        revolute(alpha=-QUARTER, d=float(second)),
        revolute(alpha=QUARTER),
        revolute(d=0.1),
    ]
    arm, postures = arm_of(*rows), _postures(random, count, 6)
    postures[:, 2] = 0.0
    # Well away from straight up, where axis 1 could turn the arm over.
    postures[:, 1] = random.uniform(-0.9, 0.9, size=count)
    return arm, random_pose(random), NONE, postures, _outward(arm, postures, 1, 4)


def selective(random: np.random.Generator, count: int) -> Stretched:
    """Four joints; elbow straight."""
    rows = [revolute(a=0.4), revolute(a=0.3, alpha=np.pi), prismatic(), revolute(d=0.1)]
    arm, postures = arm_of(*rows), _postures(random, count, 4)
    postures[:, 1] = 0.0
    return arm, np.eye(4), NONE, postures, _outward(arm, postures, 0, 3)


def planar(random: np.random.Generator, count: int) -> Stretched:
    """Two joints; elbow straight."""
    rows = [revolute(a=float(a)) for a in random.uniform(0.2, 0.6, size=2)]
    arm, postures = arm_of(*rows), _postures(random, count, 2)
    postures[:, 1] = 0.0
    return arm, np.eye(4), ORIENTATION, postures, _outward(arm, postures, 0, 1)


def placing(random: np.random.Generator, count: int) -> Stretched:
    """Three joints for a place; elbow straight."""
    lengths = random.uniform(0.2, 0.6, size=2)
    rows = [revolute(alpha=QUARTER, d=0.3), *(revolute(a=float(a)) for a in lengths)]
    arm, postures = arm_of(*rows), _postures(random, count, 3)
    postures[:, 2] = 0.0
    return arm, np.eye(4), ORIENTATION, postures, _outward(arm, postures, 1, 2)


STRETCHED: dict[str, Callable[[np.random.Generator, int], Stretched]] = {
    "six joints with wrist": upright,
    "four axes": selective,
    "two links": planar,
    "three joints for a place": placing,
}


def hair_beyond(
    arm: Arm, tool: np.ndarray, targets: Targets, outward: np.ndarray, share: float = HAIR
) -> Targets:
    """Return targets moved outward by a share of the arm's length, held to a hundredth of that.

    The tolerance of arms with few joints is as wide as the hair, and is narrowed.
    """
    length = screws_of(arm, tool).length
    poses = targets.tool_in_base.copy()
    poses[:, :3, 3] += share * length * outward
    narrow = np.full(len(targets), 0.01 * share * length)
    return replace(
        targets, tool_in_base=poses, position_tolerance=narrow, angle_tolerance=0.01 * narrow
    )
