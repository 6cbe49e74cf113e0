"""Arms to test with: small ones known by hand, awkward ones, and random ones.

Every length and angle is made up for these tests.
"""

import numpy as np

from kinematics.arm import Arm
from kinematics.rotations import rotation_about
from kinematics.table import Convention, Coupling, JointKind, Row, Table
from kinematics.transforms import pose

QUARTER = np.pi / 2
AT_FLANGE = np.eye(4)


def revolute(
    a: float = 0.0, alpha: float = 0.0, d: float = 0.0, theta: float = 0.0, **more: object
) -> Row:
    return Row(JointKind.REVOLUTE, a, alpha, d, theta, **more)  # type: ignore[arg-type]


def prismatic(
    a: float = 0.0, alpha: float = 0.0, d: float = 0.0, theta: float = 0.0, **more: object
) -> Row:
    return Row(JointKind.PRISMATIC, a, alpha, d, theta, **more)  # type: ignore[arg-type]


def arm_of(*rows: Row, convention: str = "standard", **more: object) -> Arm:
    return Arm("tested", Table(Convention(convention), rows), **more)  # type: ignore[arg-type]


PLANAR = (revolute(a=0.42), revolute(a=0.31))
SELECTIVE = (revolute(a=0.45), revolute(a=0.32, alpha=np.pi), prismatic(), revolute(d=0.08))
SHOULDER_AND_ELBOW = (revolute(alpha=QUARTER, d=0.4), revolute(a=0.43), revolute(a=0.37))
WRIST = (revolute(alpha=-QUARTER), revolute(alpha=QUARTER), revolute(d=0.09))
SIX = (
    revolute(a=0.06, alpha=QUARTER, d=0.4),
    revolute(a=0.43),
    revolute(a=0.05, alpha=QUARTER),
    revolute(alpha=-QUARTER, d=0.41),
    revolute(alpha=QUARTER),
    revolute(d=0.09),
)
FIVE = (
    revolute(a=0.06, alpha=QUARTER, d=0.4),
    revolute(a=0.43),
    revolute(a=0.37),
    revolute(alpha=QUARTER),
    revolute(d=0.12),
)
SEVEN = (
    revolute(alpha=-QUARTER, d=0.34),
    revolute(alpha=QUARTER),
    revolute(alpha=QUARTER, d=0.4),
    revolute(alpha=-QUARTER),
    revolute(alpha=-QUARTER, d=0.39),
    revolute(alpha=QUARTER),
    revolute(d=0.11),
)
SIX_ON_A_TRACK = (prismatic(alpha=-QUARTER), *SIX)
# The tables above on one arm: spare joints by two, and the largest made by hand.
NINE = (prismatic(alpha=QUARTER), prismatic(alpha=QUARTER), *SEVEN)
TWELVE = (*SEVEN, *FIVE)


def random_pose(random: np.random.Generator, length: float = 0.3) -> np.ndarray:
    rotation = rotation_about(random.normal(size=3), random.uniform(0.0, np.pi))
    return pose(rotation, random.uniform(-length, length, size=3))


def random_arm(
    random: np.random.Generator,
    count: int,
    *,
    prismatic_share: float = 0.2,
    coupled: bool = False,
    passive: int = 0,
    prismatic_first: bool = False,
    **more: object,
) -> Arm:
    """Return an arm of ``count`` driven rows and ``passive`` passive ones, all offsets taken.

    Couplings lead to driven rows of lower number only, so that the drive map can be inverted.
    """
    is_passive = np.zeros(count + passive, dtype=bool)
    # The first row stays driven, so that passive rows have something to couple to.
    is_passive[1 + random.permutation(count + passive - 1)[:passive]] = True
    rows: list[Row] = []
    for index in range(count + passive):
        slides = random.random() < prismatic_share or (prismatic_first and index == 0)
        before = [number for number in range(1, index + 1) if not is_passive[number - 1]]
        couplings: tuple[Coupling, ...] = ()
        if before and (is_passive[index] or (coupled and random.random() < 0.5)):
            axis = int(random.choice(before))
            couplings = (Coupling(axis, float(random.uniform(-1.5, 1.5))),)
        rows.append(
            Row(
                JointKind.PRISMATIC if slides else JointKind.REVOLUTE,
                a=float(random.uniform(-0.6, 0.6)),
                alpha=float(random.uniform(-np.pi, np.pi)),
                d=float(random.uniform(-0.6, 0.6)),
                theta=float(random.uniform(-np.pi, np.pi)),
                direction=int(random.choice([-1, 1])),
                couplings=couplings,
                passive=bool(is_passive[index]),
            )
        )
    convention = random.choice(["standard", "modified"])
    return arm_of(*rows, convention=convention, **more)


def random_joint_values(random: np.random.Generator, arm: Arm, count: int) -> np.ndarray:
    """Return postures (count, joints): a turn of each revolute joint, 0.5 m of each other."""
    half = np.where(np.array(arm.joint_units) == "m", 0.5, np.pi)
    return random.uniform(-half, half, size=(count, arm.joint_count))
