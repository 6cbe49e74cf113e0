"""Kinds where closed forms say which factor vanishes, and for other bases, tools and tables."""

from dataclasses import replace
from itertools import pairwise

import numpy as np
import pytest
from scipy.linalg import svdvals

from kinematics.arm import Arm
from kinematics.jacobian import motion_of
from kinematics.singular_kinds import Anatomy, anatomy_of, support_of
from kinematics.singularity import NEAR, SINGULAR
from kinematics.table import Convention, Row, Table
from kinematics.table_conversion import converted
from kinematics.task_space import task_space
from kinematics.transforms import pose
from tests.kinematics.example_arms import (
    AT_FLANGE,
    FIVE,
    PLANAR,
    QUARTER,
    SELECTIVE,
    SEVEN,
    SHOULDER_AND_ELBOW,
    SIX,
    SIX_ON_A_TRACK,
    WRIST,
    arm_of,
    prismatic,
    random_pose,
    revolute,
)
from tests.kinematics.plain_chain import stepped_jacobian
from tests.kinematics.told_posture import told

# The upper arm is longer, so that the folded wrist point stays clear of the shoulder.
A2, A3, D3, D4 = 0.6, 0.02, 0.12, 0.41
# Six joints with an offset in the shoulder and one in the elbow, in the modified convention. Its
# determinant is +-a2 s5 (a3 s3 + d4 c3) (a2 c2 + a3 c23 - d4 s23) (after Craig, from memory; each
# root is checked below against singular values): one factor for each kind.
OFFSETS = arm_of(
    revolute(),
    revolute(alpha=-QUARTER),
    revolute(a=A2, d=D3),
    revolute(a=A3, alpha=-QUARTER, d=D4),
    revolute(alpha=QUARTER),
    revolute(alpha=-QUARTER),
    convention="modified",
)


def posture_with(kinds: tuple[str, ...], random: np.random.Generator) -> np.ndarray:
    """Return a random posture at which just the factors of these kinds vanish."""
    joint_values = random.uniform(-1.0, 1.0, size=6)
    joint_values[4] += 1.6
    joint_values[2] = random.uniform(-0.9, 0.9)
    if "wrist" in kinds:
        joint_values[4] = random.choice([0.0, np.pi, -np.pi])
    if "elbow" in kinds:
        joint_values[2] = np.arctan2(-D4, A3) + random.choice([0.0, np.pi])
    third = joint_values[2]
    along = A2 + A3 * np.cos(third) - D4 * np.sin(third)
    across = A3 * np.sin(third) + D4 * np.cos(third)
    at_shoulder = np.arctan2(along, across)
    away = 0.0 if "shoulder" in kinds else random.uniform(0.4, 1.0)
    joint_values[1] = at_shoulder + away
    return joint_values


ROOTS = [("wrist",), ("elbow",), ("shoulder",), ("shoulder", "wrist"), ("elbow", "wrist")]


@pytest.mark.parametrize("kinds", ROOTS, ids=" and ".join)
@pytest.mark.parametrize("seed", range(6))
def test_the_factor_that_vanishes_gives_the_kind(kinds: tuple[str, ...], seed: int) -> None:
    joint_values = posture_with(kinds, np.random.default_rng(seed))
    values = svdvals(stepped_jacobian(OFFSETS, joint_values, AT_FLANGE))
    assert values[-1] < 1e-12
    answer = told(OFFSETS, joint_values)
    assert answer.posture.state == "singular"
    assert tuple(sorted(answer.posture.kinds)) == kinds


@pytest.mark.parametrize("seed", range(6))
def test_where_no_factor_vanishes_there_is_no_kind(seed: int) -> None:
    answer = told(OFFSETS, posture_with((), np.random.default_rng(seed)))
    assert answer.posture.kinds == answer.posture.joints == answer.posture.lost_motion == ()


@pytest.mark.parametrize("kind", ["wrist", "elbow", "shoulder"])
@pytest.mark.parametrize("away", [1e-3, 1e-6])
def test_near_a_root_the_kind_is_the_root_s(kind: str, away: float) -> None:
    joint = {"wrist": 4, "elbow": 2, "shoulder": 1}[kind]
    for seed in range(6):
        joint_values = posture_with((kind,), np.random.default_rng(seed))
        joint_values[joint] += away
        posture = told(OFFSETS, joint_values).posture
        assert (posture.state, posture.kinds) == ("near", (kind,))


@pytest.mark.parametrize("kinds", ROOTS, ids=" and ".join)
def test_kinds_know_no_base_no_tool_and_no_convention(kinds: tuple[str, ...]) -> None:
    random = np.random.default_rng(11)
    joint_values = posture_with(kinds, random)
    for _ in range(3):
        arm = replace(OFFSETS, base_in_world=random_pose(random))
        for written in (arm, converted(arm, Convention.STANDARD)):
            posture = told(written, joint_values, tool=random_pose(random)).posture
            assert tuple(sorted(posture.kinds)) == kinds


def moved_along(arm: Arm, row: int, length: float) -> Arm:
    """Return an arm whose parallel axes ``row`` and ``row + 1`` share d in another way."""
    rows = list(arm.table.rows)
    rows[row] = replace(rows[row], d=rows[row].d + length)
    rows[row + 1] = replace(rows[row + 1], d=rows[row + 1].d - length)
    return replace(arm, table=Table(arm.table.convention, tuple(rows)))


def test_kinds_know_nothing_of_where_frames_sit_on_their_axes() -> None:
    """Between parallel axes d is free: the arm is the same, frame origins are not."""
    arm = arm_of(*SHOULDER_AND_ELBOW)
    other = moved_along(arm, 1, 0.35)
    joint_values = np.array([0.4, 0.7, 0.0])
    poses = [motion_of(each, joint_values, AT_FLANGE).tool_in_base for each in (arm, other)]
    np.testing.assert_allclose(*poses, rtol=0.0, atol=1e-15)
    for each in (arm, other):
        assert told(each, joint_values).posture.kinds == ("elbow",)


# Arm, posture, kinds: each by looking at the drawing of the arm.
BY_HAND: dict[str, tuple[tuple[Row, ...], list[float], tuple[str, ...]]] = {
    "two links in line": (PLANAR, [0.3, 0.0], ("elbow", "boundary")),
    "two links folded": (PLANAR, [0.3, np.pi], ("elbow", "boundary")),
    "selective, in line": (SELECTIVE, [0.3, 0.0, 0.1, 0.4], ("elbow", "boundary")),
    "selective, folded": (SELECTIVE, [0.3, np.pi, 0.1, 0.4], ("elbow", "boundary")),
    "arm stretched up and out": (SHOULDER_AND_ELBOW, [0.3, 0.5, 0.0], ("elbow",)),
    "tool point above axis 1": (
        SHOULDER_AND_ELBOW,
        [0.3, np.arctan2(0.43 + 0.37 * np.cos(1.2), 0.37 * np.sin(1.2)), 1.2],
        ("shoulder",),
    ),
    "wrist alone, in line": (WRIST, [0.3, 0.0, 0.2], ("wrist",)),
    "wrist alone, turned back": (WRIST, [0.3, np.pi, 0.2], ("wrist",)),
    "six, wrist in line": (SIX, [0.3, 0.5, -0.4, 0.9, 0.0, 1.2], ("wrist",)),
    "six, forearm in line with the upper arm": (
        SIX,
        # The elbow's link of 0.05 m and the forearm of 0.41 m across it, turned into line.
        [0.3, 0.5, np.arctan2(0.41, 0.05), 0.9, 1.1, 1.2],
        ("elbow",),
    ),
    "five, elbow in line": (FIVE, [0.3, 0.5, 0.0, 0.2, 0.1], ("elbow",)),
    "seven, elbow in line": (SEVEN, [0.2, 0.6, -0.4, 0.0, 0.7, 0.8, 0.1], ("elbow",)),
    "seven, shoulder": (SEVEN, [0.2, 0.0, QUARTER, 1.3, 0.7, 0.5, 0.1], ("shoulder",)),
    "seven, wrist": (SEVEN, [0.2, 0.6, -0.4, 1.3, QUARTER, 0.0, 0.1], ("wrist",)),
    "turn, turn, slide, over axis 1": (
        (revolute(alpha=-QUARTER), revolute(alpha=QUARTER, d=0.1), prismatic()),
        [0.3, 0.0, 0.4],
        ("shoulder",),
    ),
}


@pytest.mark.parametrize("name", BY_HAND)
def test_kinds_by_hand(name: str) -> None:
    rows, joint_values, kinds = BY_HAND[name]
    posture = told(arm_of(*rows), joint_values).posture
    assert (posture.state, posture.kinds) == ("singular", kinds)


@pytest.mark.parametrize("seed", range(3))
def test_a_boundary_is_one_on_any_base(seed: int) -> None:
    random = np.random.default_rng(seed)
    arm = arm_of(*SELECTIVE, base_in_world=random_pose(random))
    assert told(arm, [0.3, 0.0, 0.1, 0.4]).posture.kinds == ("elbow", "boundary")


def test_links_in_line_are_an_alignment_where_no_single_elbow_makes_it() -> None:
    three = arm_of(*PLANAR, revolute(a=0.2))
    for folds in ([0.0, 0.0], [0.0, np.pi], [np.pi, 0.0], [np.pi, np.pi]):
        posture = told(three, [0.4, *folds], task=["vx", "vy"]).posture
        assert "alignment" in posture.kinds
        assert "shoulder" not in posture.kinds


def test_both_at_once_are_both_told() -> None:
    """Stretched straight up: the elbow is in line, and the tool point is above axis 1."""
    posture = told(arm_of(*SHOULDER_AND_ELBOW), [0.3, QUARTER, 0.0]).posture
    assert set(posture.kinds) == {"elbow", "shoulder"}
    assert len(posture.lost_motion) == 2


# --- anatomy -------------------------------------------------------------------------------


def anatomy(*rows: Row, tool: np.ndarray = AT_FLANGE) -> Anatomy:
    arm = arm_of(*rows)
    space = task_space(arm, tool)
    assert space is not None
    return anatomy_of(arm, space, tool)


def test_anatomy_of_six_joints() -> None:
    found = anatomy(*SIX)
    assert found.wrist == found.wrist_point == (3, 4, 5)
    assert found.runs == ((1, 2),)
    assert found.shoulder == (0, 1)
    assert not found.positional


def test_anatomy_of_other_arms() -> None:
    assert anatomy(*SIX_ON_A_TRACK).wrist == (4, 5, 6)
    assert anatomy(*SIX_ON_A_TRACK).shoulder == (1, 2)
    assert anatomy(*SELECTIVE).wrist == ()
    assert anatomy(*SELECTIVE).runs == ((0, 1, 3),)
    assert anatomy(*SELECTIVE).shoulder == (0, -1)
    assert anatomy(*PLANAR).positional
    assert anatomy(*PLANAR).wrist_point == ()
    assert anatomy(prismatic(), prismatic()).shoulder == (-1, -1)
    # The five-joint arm's last two axes meet; axes 2, 3 and 4 are parallel.
    assert anatomy(*FIVE).runs == ((1, 2, 3),)
    assert anatomy(*FIVE).wrist_point == (3, 4)


def test_parts_are_found_with_angles_typed_to_four_decimals() -> None:
    typed = tuple(replace(row, alpha=round(row.alpha, 4)) for row in SIX)
    assert any(typed_row.alpha != row.alpha for typed_row, row in zip(typed, SIX, strict=True))
    found, exact = anatomy(*typed), anatomy(*SIX)
    assert (found.wrist, found.runs, found.shoulder) == (exact.wrist, exact.runs, exact.shoulder)
    assert found.wrist_point == exact.wrist_point


@pytest.mark.parametrize(
    ("state", "share", "joints"),
    [(SINGULAR, 2e-5, (1, 2)), (SINGULAR, 1e-6, (2,)), (NEAR, 0.04, (2,)), (NEAR, 0.06, (1, 2))],
)
def test_support_leaves_out_what_only_trembles(
    state: int, share: float, joints: tuple[int, ...]
) -> None:
    assert support_of(np.array([[0.0], [share], [-0.9]]), state) == joints


def test_support_of_several_motions_is_their_union() -> None:
    assert support_of(np.array([[0.6, 0.0], [0.0, 0.0], [0.0, 0.7]]), SINGULAR) == (0, 2)
    assert support_of(np.empty((3, 0)), SINGULAR) == ()


def test_a_tool_that_points_elsewhere_keeps_the_parts() -> None:
    tools = [pose(np.eye(3), [0.1 * k, 0.0, 0.2]) for k in range(3)]
    found = [anatomy(*SIX, tool=tool) for tool in tools]
    for first, second in pairwise(found):
        assert (first.wrist, first.runs, first.wrist_point) == (
            second.wrist,
            second.runs,
            second.wrist_point,
        )
