"""Invented arms with three neighbouring axes that meet or run parallel, drawn anew each time.

Lengths lie between 0.1 and 0.6 m, twists keep away from 0 and 180 deg where axes are not meant to
be parallel. A row is (kind, a, alpha, d), theta is drawn; "meet" and "parallel" set a = d = 0 or
alpha = 0 in the right places.
"""

from collections.abc import Callable

import numpy as np

from kinematics.arm import Arm
from kinematics.table import Convention, JointKind, Row, Table

Draw = Callable[[np.random.Generator], Arm]

_QUARTER = np.pi / 2


def _rows(rng: np.random.Generator) -> np.ndarray:
    """Return a, alpha, d, theta of six rows, nothing special about them."""
    rows = np.empty((6, 4))
    rows[:, 0] = rng.uniform(0.1, 0.6, 6)
    rows[:, 1] = rng.uniform(0.3, 1.3, 6) * rng.choice([-1, 1], 6)
    rows[:, 2] = rng.uniform(0.1, 0.5, 6) * rng.choice([-1, 1], 6)
    rows[:, 3] = rng.uniform(-np.pi, np.pi, 6)
    return rows


def _meet(rows: np.ndarray, first: int, right_angles: bool = False) -> None:
    """Have axes first, first + 1, first + 2 meet in a point."""
    rows[first : first + 2, 0] = 0.0
    rows[first + 1, 2] = 0.0
    if right_angles:
        rows[first : first + 2, 1] = [_QUARTER, -_QUARTER]


def _parallel(rows: np.ndarray, first: int) -> None:
    """Have axes first, first + 1, first + 2 run parallel."""
    rows[first : first + 2, 1] = 0.0


def arm_of(rows: np.ndarray, slides: str = "RRRRRR") -> Arm:
    """Return an arm of rows a, alpha, d, theta."""
    kinds = {"R": JointKind.REVOLUTE, "P": JointKind.PRISMATIC}
    table = Table(
        Convention.STANDARD,
        tuple(
            Row(kinds[kind], a=a, alpha=alpha, d=d, theta=theta)
            for kind, (a, alpha, d, theta) in zip(slides, rows.tolist(), strict=True)
        ),
    )
    return Arm("made-up", table)


def elbow_with_offsets(rng: np.random.Generator) -> Arm:
    """Axes 2 and 3 parallel, a wrist at right angles, offsets at shoulder and elbow."""
    rows = _rows(rng)
    _meet(rows, 3, right_angles=True)
    rows[:3, 1] = _QUARTER, 0.0, _QUARTER
    rows[1:3, 2] = 0.0, rng.uniform(-0.2, 0.2)
    rows[:3, 3] = 0.0
    return arm_of(rows)


def elbow_without_offsets(rng: np.random.Generator) -> Arm:
    """The same with axes 1 and 2 meeting and links in one plane."""
    rows = _rows(rng)
    _meet(rows, 3, right_angles=True)
    rows[:3, 1] = _QUARTER, 0.0, _QUARTER
    rows[0, 0], rows[2, 0] = 0.0, 0.0
    rows[1:3, 2] = 0.0
    return arm_of(rows)


def wrist_on_any_arm(rng: np.random.Generator) -> Arm:
    """A wrist at right angles on three joints in general position."""
    rows = _rows(rng)
    _meet(rows, 3, right_angles=True)
    return arm_of(rows)


def slanted_wrist(rng: np.random.Generator) -> Arm:
    """Axes 2 and 3 parallel and a wrist that cannot turn everywhere."""
    rows = _rows(rng)
    _meet(rows, 3)
    rows[:3, 1] = _QUARTER, 0.0, _QUARTER
    return arm_of(rows)


def _meeting_at(first: int) -> Draw:
    def draw(rng: np.random.Generator) -> Arm:
        rows = _rows(rng)
        _meet(rows, first)
        return arm_of(rows)

    return draw


def _parallel_at(first: int) -> Draw:
    def draw(rng: np.random.Generator) -> Arm:
        rows = _rows(rng)
        _parallel(rows, first)
        return arm_of(rows)

    return draw


def shoulder_at_right_angles(rng: np.random.Generator) -> Arm:
    """Axes 1, 2, 3 meet at right angles, axes 4 and 5 are parallel."""
    rows = _rows(rng)
    _meet(rows, 0, right_angles=True)
    rows[3, 1] = 0.0
    return arm_of(rows)


def three_parallel(rng: np.random.Generator) -> Arm:
    """Axes 2, 3, 4 parallel, the others at right angles: the light arms of many workshops."""
    rows = _rows(rng)
    rows[:, 1] = _QUARTER, 0.0, 0.0, _QUARTER, -_QUARTER, 0.0
    rows[[0, 3, 4, 5], 0] = 0.0
    rows[1:3, 2] = 0.0
    return arm_of(rows)


FAMILIES: dict[str, Draw] = {
    "elbow with offsets": elbow_with_offsets,
    "elbow without offsets": elbow_without_offsets,
    "wrist on any arm": wrist_on_any_arm,
    "slanted wrist": slanted_wrist,
    "axes 1 2 3 meet": _meeting_at(0),
    "axes 2 3 4 meet": _meeting_at(1),
    "axes 3 4 5 meet": _meeting_at(2),
    "shoulder at right angles": shoulder_at_right_angles,
    "three parallel, right angles": three_parallel,
    "axes 1 2 3 parallel": _parallel_at(0),
    "axes 3 4 5 parallel": _parallel_at(2),
}
"""The eleven families of the measurements."""


def _sliding(slides: str, first: int, parallel: bool, right_angles: bool = False) -> Draw:
    def draw(rng: np.random.Generator) -> Arm:
        rows = _rows(rng)
        if parallel:
            _parallel(rows, first)
        else:
            _meet(rows, first, right_angles)
        return arm_of(rows, slides)

    return draw


MORE_FAMILIES: dict[str, Draw] = {
    "axes 2 3 4 parallel": _parallel_at(1),
    "axes 4 5 6 parallel": _parallel_at(3),
    "P P P and wrist": _sliding("PPPRRR", 3, False, True),
    "R R P and wrist": _sliding("RRPRRR", 3, False, True),
    "P R R and wrist": _sliding("PRRRRR", 3, False),
    "R P R and wrist": _sliding("RPRRRR", 3, False),
    "P P R and wrist": _sliding("PPRRRR", 3, False),
    "P, parallel, R R": _sliding("PRRRRR", 1, True),
    "R, parallel, P R": _sliding("RRRRPR", 1, True),
}
"""Other places of the triple, and sliding joints outside it."""


def random_motions(rng: np.random.Generator, arm: Arm, count: int) -> np.ndarray:
    """Return row motions (count, 6): whole turns, and strokes up to 0.5 m."""
    motions = rng.uniform(-np.pi, np.pi, (count, 6))
    slides = np.array([not row.is_revolute for row in arm.table.rows])
    motions[:, slides] *= 0.5 / np.pi
    return motions


def rounded(arm: Arm, decimals: int) -> Arm:
    """Return an arm with its twists and offsets typed with so many decimals of a radian."""
    rows = np.array([[row.a, row.alpha, row.d, row.theta] for row in arm.table.rows])
    rows[:, [1, 3]] = rows[:, [1, 3]].round(decimals)
    return arm_of(rows, "".join("R" if row.is_revolute else "P" for row in arm.table.rows))
