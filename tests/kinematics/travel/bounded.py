"""Arms with travel that moves are tested with; every length and angle is made up."""

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from kinematics.arm import Arm
from kinematics.table import Row, Travel
from kinematics.travel.lines import StraightLine, line_between
from tests.kinematics.example_arms import QUARTER, SELECTIVE, SIX, arm_of, revolute

FLANGE = np.eye(4)
SPEEDS = (2.0, 1.5, 2.5, 4.0, 4.5, 6.0, 6.0)

UPRIGHT = (
    revolute(alpha=QUARTER, d=0.4),
    revolute(a=0.5),
    revolute(alpha=QUARTER, theta=QUARTER),
    revolute(alpha=-QUARTER, d=0.6),
    revolute(alpha=QUARTER),
    revolute(d=0.1),
)
"""No offsets: its wrist centre reaches axis 1, and the elbow stretches at joint 3 = 0."""

THREE_PARALLEL = (
    revolute(alpha=QUARTER, d=0.2),
    revolute(a=0.45, theta=QUARTER),
    revolute(a=0.4),
    revolute(alpha=QUARTER, d=0.14),
    revolute(alpha=-QUARTER, d=0.12),
    revolute(d=0.1),
)


def bounded(rows: Sequence[Row], half: Sequence[float], **more: object) -> Arm:
    """Return an arm whose joints travel ``half`` to either side, and have top speeds."""
    return arm_of(
        *(
            replace(row, travel=Travel(-limit, limit), top_speed=speed)
            for row, limit, speed in zip(rows, half, SPEEDS, strict=False)
        ),
        **more,
    )


def offset_arm() -> Arm:
    return bounded(SIX, (2.9, 2.2, 2.6, 3.1, 2.0, 6.1))


def upright_arm() -> Arm:
    return bounded(UPRIGHT, (2.9, 2.2, 3.0, 3.1, 2.0, 6.1))


def parallel_arm() -> Arm:
    return bounded(THREE_PARALLEL, (3.1, 2.3, 2.7, 4.0, 4.0, 4.0))


def selective_arm() -> Arm:
    return bounded(SELECTIVE, (2.3, 2.5, 0.2, 6.0))


def along(arm_at: np.ndarray, shift: Sequence[float]) -> StraightLine:
    """Return the line from a pose that shifts the tool by so many metres in the base."""
    end = arm_at.copy()
    end[:3, 3] += shift
    return line_between(arm_at, end)
