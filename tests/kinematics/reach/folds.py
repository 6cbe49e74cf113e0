"""Postures in which an arm has just lost a motion: where two of its ways to a target meet."""

import numpy as np

from kinematics.arm import Arm
from kinematics.jacobian import motion_of
from kinematics.task_space import task_space
from tests.kinematics.reach.arm_classes import postures_within_travel

HALVINGS = 60


def determinants(arm: Arm, tool: np.ndarray, postures: np.ndarray) -> np.ndarray | None:
    """Return the determinant of the scaled task rows, (count,); None where they are not square."""
    space = task_space(arm, tool)
    assert space is not None
    if space.row_map.shape[0] != arm.joint_count:
        return None
    of_joints = motion_of(arm, postures, tool).of_joints * space.joint_scale
    return np.linalg.det(space.row_map @ of_joints)


def folds(random: np.random.Generator, arm: Arm, tool: np.ndarray, count: int) -> np.ndarray:
    """Return postures (up to count, joints) where the determinant changes its sign, to rounding."""
    first, last = (postures_within_travel(random, arm, count) for _ in range(2))
    signs = determinants(arm, tool, first)
    ends = determinants(arm, tool, last)
    if signs is None or ends is None:
        return np.empty((0, arm.joint_count))
    changing = np.sign(signs) != np.sign(ends)
    low, high, sign = first[changing], last[changing], np.sign(signs[changing])
    for _ in range(HALVINGS):
        middle = 0.5 * (low + high)
        same = (np.sign(determinants(arm, tool, middle)) == sign)[:, None]
        low, high = np.where(same, middle, low), np.where(same, high, middle)
    return low
