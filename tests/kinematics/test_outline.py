"""NEVER RUN (written 13:10 after the freeze; for tests/kinematics/test_outline.py next session).

The lines of an arm against sums of the chain written out step by step, both conventions.
"""

import numpy as np
import pytest

from kinematics.arm import Arm
from kinematics.outline import outline
from kinematics.table import Convention, JointKind
from tests.kinematics.example_arms import random_arm, random_joint_values, random_pose

CLOSE = 1e-12


def turned(axis: int, angle: float) -> np.ndarray:
    c, s = np.cos(angle), np.sin(angle)
    i, j = [(1, 2), (2, 0), (0, 1)][axis]
    step = np.eye(4)
    step[i, i], step[i, j], step[j, i], step[j, j] = c, -s, s, c
    return step


def shifted(axis: int, length: float) -> np.ndarray:
    step = np.eye(4)
    step[axis, 3] = length
    return step


def corners(arm: Arm, joint_values: np.ndarray) -> list[np.ndarray]:
    """Return base, then the place before and after each turn-and-slide along z, then the flange."""
    motions = arm.drive_map.matrix @ joint_values
    standard = arm.table.convention is Convention.STANDARD
    frame, found = np.eye(4), [np.zeros(3)]
    for row, motion in zip(arm.table.rows, motions, strict=True):
        slides = row.joint is JointKind.PRISMATIC
        across = shifted(0, row.a) @ turned(0, row.alpha)
        if not standard:
            frame = frame @ across
        found.append(frame[:3, 3])
        theta, d = (row.theta, row.d + motion) if slides else (row.theta + motion, row.d)
        frame = frame @ turned(2, theta) @ shifted(2, d)
        found.append(frame[:3, 3])
        if standard:
            frame = frame @ across
    return [*found, frame[:3, 3]]


@pytest.mark.parametrize("count", [1, 3, 6, 8])
@pytest.mark.parametrize("seed", range(6))
def test_every_corner_stands_where_the_chain_leads(count: int, seed: int) -> None:
    random = np.random.default_rng([count, seed])
    arm, tool, base_in_frame = random_arm(random, count), random_pose(random), random_pose(random)
    (joint_values,) = random_joint_values(random, arm, 1)
    told = outline(arm, joint_values, tool, base_in_frame)
    expected = np.array(corners(arm, joint_values)) @ base_in_frame[:3, :3].T + base_in_frame[:3, 3]
    scale = 1.0 + np.abs(expected).max()
    np.testing.assert_allclose(told.line[:-1], expected, rtol=0.0, atol=CLOSE * scale)
    np.testing.assert_allclose(told.line[-1], told.tool[:3, 3], rtol=0.0, atol=CLOSE * scale)
