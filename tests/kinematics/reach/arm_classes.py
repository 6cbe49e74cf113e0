"""Random arms of each class that no search is needed for, with travel; every number made up.

Joints turn within 1 to 3.5 rad to either side, slides run within a metre; tools stand anywhere, but
for arms that could not then meet their own poses.
"""

from collections.abc import Callable
from dataclasses import replace

import numpy as np

from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.reach.targets import NONE, ORIENTATION, Targets
from kinematics.table import Coupling, JointKind, Row, Travel
from kinematics.tolerances import TARGET_ANGLE, TARGET_POSITION
from kinematics.travel_limits import travel_margin
from tests.kinematics.example_arms import QUARTER, arm_of, random_pose

Made = tuple[Arm, np.ndarray, int]
"""An arm, its tool in the flange, and the freedom of the targets it can meet."""


def _row(random: np.random.Generator, kind: str, **given: float) -> Row:
    """Return a row of random numbers, but for those that are given."""
    numbers = {
        "a": random.uniform(0.1, 0.5) * random.choice([-1, 1]),
        "alpha": random.uniform(-np.pi, np.pi),
        "d": random.uniform(0.1, 0.5) * random.choice([-1, 1]),
        "theta": random.uniform(-np.pi, np.pi),
    } | given
    turns = kind == "R"
    span = random.uniform(1.0, 3.5, size=2) if turns else random.uniform(0.3, 1.0, size=2)
    return Row(
        JointKind.REVOLUTE if turns else JointKind.PRISMATIC,
        **{name: float(number) for name, number in numbers.items()},
        direction=int(random.choice([-1, 1])),
        travel=Travel(-float(span[0]), float(span[1])),
    )


def _six(**special: dict[int, dict[str, float]]) -> Callable[[np.random.Generator], Made]:
    """Return a maker of six joints, "R" unless ``kinds`` says otherwise, with special rows."""

    def made(random: np.random.Generator) -> Made:
        rows = [_row(random, "R", **special["rows"].get(i, {})) for i in range(6)]
        return arm_of(*rows), random_pose(random), NONE

    return made


def _upright_wrist(random: np.random.Generator) -> Made:
    """The arm of most plants: axis 2 across axis 1, 3 parallel to 2, and a wrist."""
    shoulder = float(random.choice([-QUARTER, QUARTER]))
    rows = [
        _row(random, "R", alpha=shoulder, a=random.choice([0.0, 0.12])),
        _row(random, "R", alpha=0.0, d=random.choice([0.0, 0.08])),
        _row(random, "R", alpha=QUARTER, d=0.0, a=random.choice([0.0, 0.05])),
        _row(random, "R", alpha=-QUARTER, a=0.0),
        _row(random, "R", alpha=QUARTER, a=0.0, d=0.0),
        _row(random, "R", alpha=0.0, a=0.0),
    ]
    return arm_of(*rows), random_pose(random), NONE


def _slides_with_wrist(kinds: str) -> Callable[[np.random.Generator], Made]:
    def made(random: np.random.Generator) -> Made:
        rows = [_row(random, kind) for kind in kinds]
        rows += [_row(random, "R", a=0.0), _row(random, "R", a=0.0, d=0.0), _row(random, "R")]
        return arm_of(*rows), random_pose(random), NONE

    return made


def _selective(kinds: str) -> Callable[[np.random.Generator], Made]:
    """Four joints about and along one direction."""

    def made(random: np.random.Generator) -> Made:
        rows = [_row(random, kind, alpha=float(random.choice([0.0, np.pi]))) for kind in kinds]
        return arm_of(*rows), random_pose(random), NONE

    return made


def _level(random: np.random.Generator) -> Made:
    """Four joints, and a passive row that keeps the wrist level."""
    rows = [
        _row(random, "R", alpha=QUARTER),
        _row(random, "R", alpha=0.0),
        _row(random, "R", alpha=0.0),
        _row(random, "R", alpha=-QUARTER),
        _row(random, "R"),
    ]
    level = -rows[1].theta - rows[2].theta
    passive = Row(
        JointKind.REVOLUTE, rows[3].a, QUARTER, rows[3].d, level, passive=True,
        couplings=tuple(Coupling(axis + 1, -float(rows[axis].direction)) for axis in (1, 2)),
    )  # fmt: skip
    return arm_of(*rows[:3], passive, rows[4]), random_pose(random), NONE


def _any_place(kinds: str) -> Callable[[np.random.Generator], Made]:
    """Six joints whose axes are in no special place."""

    def made(random: np.random.Generator) -> Made:
        return arm_of(*(_row(random, kind) for kind in kinds)), random_pose(random), NONE

    return made


def _as_measured(random: np.random.Generator) -> Made:
    """The arm of most plants with each number of its table off by up to a thousandth."""
    arm, tool, freedom = _upright_wrist(random)
    off = random.uniform(-1e-3, 1e-3, size=(6, 3))
    rows = (
        replace(row, a=row.a + a, alpha=row.alpha + alpha, d=row.d + d)
        for row, (a, alpha, d) in zip(arm.table.rows, off.tolist(), strict=True)
    )
    return arm_of(*rows), tool, freedom


def _place(kinds: str) -> Callable[[np.random.Generator], Made]:
    """Up to three joints that bring a point to its place."""

    def made(random: np.random.Generator) -> Made:
        rows = [_row(random, kind) for kind in kinds]
        return arm_of(*rows), random_pose(random), ORIENTATION

    return made


def _five_parallel(random: np.random.Generator) -> Made:
    rows = [
        _row(random, "R", alpha=QUARTER),
        _row(random, "R", alpha=0.0),
        _row(random, "R", alpha=0.0),
        _row(random, "R", alpha=QUARTER),
        _row(random, "R"),
    ]
    return arm_of(*rows), np.eye(4), NONE


def _five_with_wrist(random: np.random.Generator) -> Made:
    """Two axes of the wrist meet, and tool z leads through that point."""
    rows = [_row(random, "R") for _ in range(3)]
    rows += [_row(random, "R", a=0.0), _row(random, "R", a=0.0, d=0.0, alpha=QUARTER)]
    tool = np.eye(4)
    tool[2, 3] = 0.2
    return arm_of(*rows), tool, NONE


CLASSES: dict[str, Callable[[np.random.Generator], Made]] = {
    "upright arm with wrist": _upright_wrist,
    "4, 5 and 6 meet": _six(rows={3: {"a": 0.0}, 4: {"a": 0.0, "d": 0.0}}),
    "3, 4 and 5 meet": _six(rows={2: {"a": 0.0}, 3: {"a": 0.0, "d": 0.0}}),
    "2, 3 and 4 meet": _six(rows={1: {"a": 0.0}, 2: {"a": 0.0, "d": 0.0}}),
    "1, 2 and 3 meet": _six(rows={0: {"a": 0.0}, 1: {"a": 0.0, "d": 0.0}}),
    "1, 2 and 3 parallel": _six(rows={0: {"alpha": 0.0}, 1: {"alpha": 0.0}}),
    "2, 3 and 4 parallel": _six(rows={1: {"alpha": 0.0}, 2: {"alpha": np.pi}}),
    "3, 4 and 5 parallel": _six(rows={2: {"alpha": 0.0}, 3: {"alpha": 0.0}}),
    "4, 5 and 6 parallel": _six(rows={3: {"alpha": np.pi}, 4: {"alpha": 0.0}}),
    **{f"{kinds} and wrist": _slides_with_wrist(kinds) for kinds in ("PPP", "RRP", "PRR", "RPR")},
    **{kinds: _selective(kinds) for kinds in ("RRPR", "PRRR", "RRRP", "RPRR")},
    **{
        f"{kinds} anywhere": _any_place(kinds) for kinds in ("RRRRRR", "RRPRRR", "PRRPRR", "PRPRPR")
    },
    "as measured": _as_measured,
    "level wrist": _level,
    **{f"place by {kinds}": _place(kinds) for kinds in ("RRR", "RRP", "RPR", "PRR", "RPP", "PPR")},
    "place by PPP": _place("PPP"),
    "place by RR": _place("RR"),
    "five, three parallel": _five_parallel,
    "five, with wrist": _five_with_wrist,
}


def postures_within_travel(random: np.random.Generator, arm: Arm, count: int) -> np.ndarray:
    """Return postures (count, joints) spread evenly over travel."""
    rows = [arm.table.rows[row] for row in arm.drive_map.driven]
    lower, upper = np.array([row.travel for row in rows]).T
    postures = np.empty((0, len(rows)))
    while len(postures) < count:
        more = random.uniform(lower, upper, size=(count, len(rows)))
        postures = np.concatenate([postures, more[travel_margin(arm, more) >= 0.0]])
    return postures[:count]


def targets_at(arm: Arm, tool: np.ndarray, freedom: int, postures: np.ndarray) -> Targets:
    """Return the targets that postures (count, joints) are on, with the usual tolerances."""
    count = len(postures)
    return Targets(
        tool_in_base(arm, postures, tool),
        np.full(count, freedom),
        np.zeros(count),
        np.full(count, TARGET_POSITION),
        np.full(count, TARGET_ANGLE),
    )
