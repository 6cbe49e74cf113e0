"""Invented arms with a joint to spare, each with travel and a tool that stands anywhere."""

from collections.abc import Callable
from dataclasses import replace

import numpy as np

from kinematics.arm import Arm
from kinematics.table import Coupling, Row, Travel
from tests.kinematics.example_arms import SEVEN, SIX, SIX_ON_A_TRACK, arm_of, random_pose, revolute

Made = tuple[Arm, np.ndarray]


def _bounded(random: np.random.Generator, rows: tuple[Row, ...], widest: float) -> tuple[Row, ...]:
    """Return rows with travel: turns up to ``widest`` to either side, slides over 1 to 2 m."""
    bounded = []
    for row in rows:
        low, high = random.uniform(0.6, 1.0, size=2) * widest
        travel = Travel(-low, high) if row.is_revolute else Travel(0.0, float(high / widest + 0.5))
        sign = int(random.choice([-1, 1]))
        bounded.append(replace(row, travel=travel, direction=sign))
    return tuple(bounded)


def shoulder_and_wrist(random: np.random.Generator) -> Made:
    """Three axes meet at the shoulder, three at the wrist."""
    return arm_of(*_bounded(random, SEVEN, 2.8)), random_pose(random)


def several_turns(random: np.random.Generator) -> Made:
    """The same with joints that turn further than once around."""
    return arm_of(*_bounded(random, SEVEN, 5.5)), random_pose(random)


def on_a_track(random: np.random.Generator) -> Made:
    """A track under a shoulder, an elbow and a wrist."""
    return arm_of(*_bounded(random, SIX_ON_A_TRACK, 2.8)), random_pose(random)


def turning_tool_post(random: np.random.Generator) -> Made:
    """A shoulder whose axes meet, and a last row after them: the last one is held."""
    numbers = ((0.0, 1.2, 0.3), (0.0, -1.4, 0.0), (0.3, 0.9, 0.35), (0.25, -0.8, 0.1))
    numbers += ((0.2, 1.1, 0.15), (0.1, -1.0, 0.2), (0.1, 0.4, 0.1))
    rows = tuple(revolute(a=a, alpha=alpha, d=d) for a, alpha, d in numbers)
    return arm_of(*_bounded(random, rows, 2.8)), random_pose(random)


def coupled(random: np.random.Generator) -> Made:
    """A track that is held, and an elbow held level by a linkage."""
    rows = list(_bounded(random, SIX_ON_A_TRACK, 2.4))
    rows[3] = replace(rows[3], couplings=(Coupling(3, -1.0),))
    return arm_of(*rows), random_pose(random)


def turntable_under_six(random: np.random.Generator) -> Made:
    """Six joints on a turntable beside which they stand."""
    return arm_of(*_bounded(random, (revolute(a=0.5, alpha=0.4), *SIX), 2.8)), random_pose(random)


ARMS: dict[str, Callable[[np.random.Generator], Made]] = {
    "shoulder and wrist": shoulder_and_wrist,
    "several turns": several_turns,
    "on a track": on_a_track,
    "turning tool post": turning_tool_post,
    "coupled": coupled,
    "turntable under six": turntable_under_six,
}
