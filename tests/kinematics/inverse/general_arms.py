"""Invented arms of six joints without three neighbouring axes that meet or run parallel.

Drawn anew each time, as in triple_arms.py; a name says what is special about pairs of axes.
"""

import numpy as np

from kinematics.arm import Arm
from kinematics.inverse.candidates import land_candidates
from kinematics.inverse.elimination import Elimination
from tests.kinematics.inverse.triple_arms import Draw, arm_of

_QUARTER = np.pi / 2


def rows_of(rng: np.random.Generator) -> np.ndarray:
    """Return a, alpha, d, theta of six rows, nothing special about them."""
    rows = np.empty((6, 4))
    rows[:, 0] = rng.uniform(0.1, 0.6, 6)
    rows[:, 1] = rng.uniform(0.3, 1.3, 6) * rng.choice([-1, 1], 6)
    rows[:, 2] = rng.uniform(0.1, 0.5, 6) * rng.choice([-1, 1], 6)
    rows[:, 3] = rng.uniform(-np.pi, np.pi, 6)
    return rows


def sliding(place: int) -> Draw:
    """Return arms of which the joint with this index slides."""
    slides = "".join("P" if row == place else "R" for row in range(6))
    return lambda rng: arm_of(rows_of(rng), slides)


def _with(meet: tuple[int, ...] = (), parallel: tuple[int, ...] = ()) -> Draw:
    def draw(rng: np.random.Generator) -> Arm:
        rows = rows_of(rng)
        rows[list(meet), 0] = 0.0
        rows[list(parallel), 1] = 0.0
        return arm_of(rows)

    return draw


def _right_angles(rng: np.random.Generator) -> Arm:
    rows = rows_of(rng)
    rows[:, 1] = _QUARTER * rng.choice([-1, 1], 6)
    return arm_of(rows)


def _offset_wrist(rng: np.random.Generator) -> Arm:
    rows = rows_of(rng)
    rows[:, 1] = _QUARTER * np.array([1, 0, 1, -1, 1, 0])
    rows[3:, 0], rows[:3, 2] = 0.0, 0.0
    return arm_of(rows)


def _hollow_wrist(rng: np.random.Generator) -> Arm:
    rows = rows_of(rng)
    rows[:, 1] = _QUARTER * np.array([1, 0, 1, 0.5, -0.5, 0])
    rows[3:, 0] = 0.0
    return arm_of(rows)


def _small_twists(rng: np.random.Generator) -> Arm:
    rows = rows_of(rng)
    rows[:, 1] = np.deg2rad(1.0) * rng.choice([-1, 1], 6)
    return arm_of(rows)


FAMILIES: dict[str, Draw] = {
    "general": lambda rng: arm_of(rows_of(rng)),
    "right angles": _right_angles,
    "axes 3 4 meet": _with(meet=(2,)),
    "axes 2 3 parallel": _with(parallel=(1,)),
    "2 3 and 4 5 parallel": _with(parallel=(1, 3)),
    "1 2, 3 4 and 5 6 meet": _with(meet=(0, 2, 4)),
    "1 2, 5 6 meet, 3 4 parallel": _with(meet=(0, 4), parallel=(2,)),
    "offset wrist, 2 3 parallel": _offset_wrist,
    "hollow wrist, 2 3 parallel": _hollow_wrist,
    "twists of one degree": _small_twists,
}

_SIXTEEN = np.zeros((6, 4))
_SIXTEEN[:, 0] = 0.3, 1.0, 0.0, 1.5, 0.0, 0.0
_SIXTEEN[:, 1] = np.array([_QUARTER, np.deg2rad(1.0)] * 3)
_SIXTEEN[2, 2] = 0.2
SIXTEEN = arm_of(_SIXTEEN)
"""An arm with up to 16 solutions: after Manseur and Doty, A robot manipulator with 16 real inverse
kinematic solution sets, 1989, recalled from memory."""


def counts_by_order(solver: Elimination, targets: np.ndarray) -> list[np.ndarray]:
    """Return how many solutions each of the orders it has finds alone, one or two of (m,)."""
    screws = solver.screws
    scaled = np.ascontiguousarray(screws.scaled(targets))
    counts = []
    for order in (solver.first, solver.second):
        if order is not None:
            tried = order.candidates(scaled)
            counts.append(land_candidates(screws, scaled, tried.motions, tried.of).counts())
    return counts
