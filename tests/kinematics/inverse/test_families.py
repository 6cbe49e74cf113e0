"""Self-motions against what is known of them: by hand, and by rotations alone."""

from dataclasses import replace

import numpy as np
import pytest
from scipy.optimize import brentq

from kinematics.arm import Arm, CombinedTravel
from kinematics.chain import tool_in_base, walk
from kinematics.inverse.families import Family, families_of
from kinematics.table import Row, Travel
from kinematics.travel_limits import travel_margin
from tests.kinematics.example_arms import (
    AT_FLANGE,
    PLANAR,
    SELECTIVE,
    SEVEN,
    SIX,
    SIX_ON_A_TRACK,
    arm_of,
    revolute,
)
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.inverse.test_four_axes import LEVEL

EQUAL = (revolute(a=0.3), revolute(a=0.3))
WRIST_ALIGNED = np.array([0.3, 0.4, 0.5, 0.6, 0.0, 0.7])
WHOLE = [(-np.pi, np.pi)]


def bounded(rows: tuple[Row, ...], *bounds: tuple[float, float] | None, **more: object) -> Arm:
    kept = [None if ends is None else Travel(*ends) for ends in bounds]
    pairs = zip(rows, kept, strict=True)
    return arm_of(*(replace(row, travel=travel) for row, travel in pairs), **more)


def followed(arm: Arm, task: str, *postures: object, tool: np.ndarray = AT_FLANGE) -> list[Family]:
    values = np.array(postures, dtype=float)
    target = tool_in_base(arm, values[0], tool)
    families = families_of(arm, tool, task, target, values)
    for family in families:
        # A witness is on the target and within travel.
        pose = tool_in_base(arm, family.witness, tool)
        np.testing.assert_allclose(pose[:3, 3], target[:3, 3], rtol=0.0, atol=1e-10)
        if task == "pose":
            np.testing.assert_allclose(pose, target, rtol=0.0, atol=1e-10)
        assert travel_margin(arm, family.witness) >= -1e-9
    return families


def test_equal_links_folded_back_leave_joint_1_free() -> None:
    (family,) = followed(arm_of(*EQUAL), "position", [0.5, np.pi])
    assert (family.free_joints, family.relation) == ((1,), None)
    np.testing.assert_allclose(family.interval, WHOLE)


def test_an_interval_is_what_travel_leaves() -> None:
    arm = bounded(EQUAL, (-1.0, 2.0), (-4.0, 4.0))
    (family,) = followed(arm, "position", [0.5, np.pi])
    np.testing.assert_allclose(family.interval, [(-1.0, 2.0)], rtol=0.0, atol=1e-9)
    # A travel of three turns is told as a whole, though the tool comes by every turn.
    arm = bounded(EQUAL, (-9.0, 10.0), None)
    (family,) = followed(arm, "position", [0.5, np.pi])
    np.testing.assert_allclose(family.interval, [(-9.0, 10.0)], rtol=0.0, atol=1e-9)


def test_a_posture_beyond_travel_leads_to_what_is_within() -> None:
    arm = bounded(EQUAL, (-0.2, -0.1), None)
    (family,) = followed(arm, "position", [2.5, np.pi])
    np.testing.assert_allclose(family.interval, [(-0.2, -0.1)], rtol=0.0, atol=1e-9)
    assert followed(bounded(EQUAL, None, (-1.0, 1.0)), "position", [2.5, np.pi]) == []


def test_an_aligned_wrist_turns_joints_4_and_6_against_each_other() -> None:
    (family,) = followed(arm_of(*SIX), "pose", WRIST_ALIGNED)
    assert family.free_joints == (4, 6)
    np.testing.assert_allclose(family.interval, WHOLE)
    assert family.relation is not None
    assert family.relation.text() == "joint 4 + joint 6 = 1.3 rad"


@pytest.mark.parametrize(
    ("fourth", "sixth"),
    [((-3.1, 3.1), (-6.0, 6.0)), ((-3.0, 3.0), (0.5, 1.0)), ((-1.0, 0.65), (-6.0, 0.9))],
)
def test_both_joints_travel_bounds_a_relation(
    fourth: tuple[float, float], sixth: tuple[float, float]
) -> None:
    arm = bounded(SIX, None, None, None, fourth, None, sixth)
    (family,) = followed(arm, "pose", WRIST_ALIGNED)
    wanted = (max(fourth[0], 1.3 - sixth[1]), min(fourth[1], 1.3 - sixth[0]))
    np.testing.assert_allclose(family.interval, [wanted], rtol=0.0, atol=1e-9)
    # The best posture has as much left of both travels as there can be.
    tried = np.linspace(*wanted, 20_001)
    left = [
        np.minimum(values - low, high - values) / (high - low)
        for values, (low, high) in ((tried, fourth), (1.3 - tried, sixth))
    ]
    best = np.minimum(*left).max()
    assert travel_margin(arm, family.witness) == pytest.approx(best, abs=1e-4)


def test_combined_travel_bounds_a_family() -> None:
    sums = CombinedTravel({4: 1.0, 6: -1.0}, Travel(-0.5, 2.1))
    (family,) = followed(arm_of(*SIX, combined_travel=(sums,)), "pose", WRIST_ALIGNED)
    # q4 - q6 = 2 q4 - 1.3; once around the sum gains two turns, so it is met once.
    ends = [((-0.5 + 1.3) / 2, (2.1 + 1.3) / 2)]
    np.testing.assert_allclose(family.interval, ends, rtol=0.0, atol=1e-9)


def test_a_level_wrist_above_the_waist() -> None:
    """Waist and last axis turn against each other, in opposite directions of their own."""
    arm = arm_of(*LEVEL)
    # The links upright and level put the wrist at 0.245 + 1.165 + 0.228 from the waist.
    reach = 0.245 + 0.228

    def ahead(dip: float) -> float:
        return reach + 1.08 * np.sin(-0.9) + 1.165 * np.cos(dip)

    dip = brentq(ahead, 0.3, 2.5, xtol=1e-15)
    posture = np.array([0.2, -0.9, dip, 0.4])
    assert np.hypot(*tool_in_base(arm, posture, AT_FLANGE)[:2, 3]) < 1e-14
    (family,) = followed(arm, "pose", posture)
    assert family.free_joints == (1, 4)
    assert family.relation is not None
    assert family.relation.say == "joint 1 - joint 4 = {measure}"
    assert family.relation.measure == pytest.approx(-0.2)
    np.testing.assert_allclose(family.interval, WHOLE)


def shoulder_posture(arm: Arm) -> np.ndarray:
    """Return a posture with the wrist's centre on axis 1."""

    def ahead(second: float) -> float:
        centre = walk(arm, np.array([0.0, second, 0.6, 0, 0, 0])).link_in_base[4][:3, 3]
        return float(centre[0])

    return np.array([0.3, brentq(ahead, -2.0, -0.5, xtol=1e-15), 0.6, 0.4, 0.9, 0.2])


def wrist_along(arm: Arm, posture: np.ndarray, first: np.ndarray) -> np.ndarray:
    """Return joints 4, 5, 6 (k, 3) that keep the hand's turn as joint 1 takes other values.

    Rotations alone: Rz(t) R with the forearm's turn R; the wrist's turn is then a z-y-z sequence.
    """
    frames = walk(arm, posture).link_in_base
    hand, wrist = frames[6][:3, :3], []
    for value in first:
        moved = posture.copy()
        moved[0] = value
        forearm = walk(arm, moved).link_in_base[3][:3, :3]
        turn = forearm.T @ hand
        # SIX: the wrist is Rz(q4) Rx(-90) Rz(q5) Rx(90) Rz(q6) = Rz(q4) Ry(q5) Rz(q6).
        fifth = np.arctan2(np.hypot(turn[0, 2], turn[1, 2]), turn[2, 2])
        fourth, sixth = np.arctan2(turn[1, 2], turn[0, 2]), np.arctan2(turn[2, 1], -turn[2, 0])
        wrist.append([fourth, fifth, sixth])
    return np.array(wrist)


def test_a_wrist_centre_on_axis_1_turns_joint_1_with_the_wrist() -> None:
    arm = arm_of(*SIX)
    posture = shoulder_posture(arm)
    np.testing.assert_allclose(wrist_along(arm, posture, posture[:1])[0], posture[3:], atol=1e-9)
    (family,) = followed(arm, "pose", posture)
    assert (family.free_joints, family.relation) == ((1, 4, 5, 6), None)
    np.testing.assert_allclose(family.interval, WHOLE)


@pytest.mark.parametrize("waist", [(-np.pi, np.pi), None])
def test_travel_of_the_wrist_cuts_pieces_out_of_joint_1(waist: tuple[float, float] | None) -> None:
    """Pieces with ends where joint 5 meets its bound, as rotations alone have it."""
    plain = arm_of(*SIX)
    posture = shoulder_posture(plain)
    around = np.linspace(-np.pi, np.pi, 20_001)
    fifth = wrist_along(plain, posture, around)[:, 1]
    middle = float(np.quantile(fifth, 0.6))
    inside = (fifth >= 0.1) & (fifth <= middle)
    arm = bounded(SIX, waist, None, None, None, (0.1, middle), None)
    within = posture.copy()
    at = np.flatnonzero(inside)[0]
    within[0], within[3:] = around[at], wrist_along(plain, posture, around[at : at + 1])[0]
    (family,) = followed(arm, "pose", within)
    changes = np.flatnonzero(np.diff(inside.astype(int)))
    ends = [
        brentq(
            lambda first: wrist_along(plain, posture, np.array([first]))[0, 1] - middle,
            around[k],
            around[k + 1],
            xtol=1e-14,
        )
        for k in changes
    ]
    told = [end for pair in family.interval for end in pair if abs(abs(end) - np.pi) > 1e-6]
    assert len(ends) >= 2
    told = [(end + np.pi) % (2 * np.pi) - np.pi for end in told]
    np.testing.assert_allclose(sorted(told), sorted(ends), rtol=0.0, atol=1e-8)


def test_an_idle_last_joint_is_a_family_of_its_own() -> None:
    arm = bounded(SELECTIVE, None, None, (0.0, 0.2), (-6.0, 6.0))
    (family,) = followed(arm, "position", [0.3, 0.4, 0.1, 0.2])
    assert (family.free_joints, family.relation) == ((4,), None)
    np.testing.assert_allclose(family.interval, [(-6.0, 6.0)], rtol=0.0, atol=1e-9)
    np.testing.assert_allclose(family.witness, [0.3, 0.4, 0.1, 0.0], rtol=0.0, atol=1e-6)


def test_seven_joints_swing_the_elbow() -> None:
    """All joints but the elbow's move; each end of the interval has a joint at its bound."""
    arm = bounded(SEVEN, *[(-2.0, 2.0)] * 7)
    posture = [0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9]
    free = followed(arm_of(*SEVEN), "pose", posture)[0]
    np.testing.assert_allclose(free.interval, WHOLE)
    (family,) = followed(arm, "pose", posture)
    assert family.free_joints == free.free_joints == (1, 2, 3, 5, 6, 7)
    ((low, high),) = family.interval
    assert -2.0 < low < 0.3 < high <= 2.0 + 1e-9
    # Joint 3 alone further out would not do: bounds a little wider give a wider interval.
    wider = followed(bounded(SEVEN, *[(-2.1, 2.1)] * 7), "pose", posture)[0].interval[0]
    assert wider[0] < low
    assert wider[1] > high


def test_solutions_of_one_family_are_told_once() -> None:
    random, arm = fresh(), arm_of(*SIX)
    others = np.tile(WRIST_ALIGNED, (5, 1))
    turned = random.uniform(-3.0, 3.0, 5)
    others[:, 3] += turned
    others[:, 5] -= turned
    (family,) = followed(arm, "pose", *others)
    assert family.free_joints == (4, 6)
    flipped = others[0].copy()
    assert len(followed(arm, "pose", flipped, others[1])) == 1


def test_a_track_is_as_long_as_travel_lets_it() -> None:
    arm = bounded(SIX_ON_A_TRACK, (-0.5, 0.4), *[None] * 6)
    (family,) = followed(arm, "pose", [0.1, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8])
    assert family.free_joints == (1, 2, 3, 4, 5, 6, 7)
    ((low, high),) = family.interval
    assert low == pytest.approx(-0.5, abs=1e-9)
    assert high <= 0.4 + 1e-9


@pytest.mark.parametrize("second", [0.0, 1e-7, 1e-4, 1.0])
def test_folds_and_regular_postures_have_none(second: float) -> None:
    assert followed(arm_of(*PLANAR), "position", [0.5, second]) == []
    assert followed(arm_of(*PLANAR), "position", [0.5, np.pi - second]) == []


@pytest.mark.parametrize("fifth", [1e-7, 1e-5, 1e-3, 0.7])
def test_a_wrist_beside_alignment_has_none(fifth: float) -> None:
    posture = WRIST_ALIGNED.copy()
    posture[4] = fifth
    assert followed(arm_of(*SIX), "pose", posture) == []


def test_a_stretched_elbow_has_none() -> None:
    arm = arm_of(*SIX)

    def bend(third: float) -> float:
        """Axes 2 and 3 and the wrist's centre: the height of the triangle they make."""
        frames = walk(arm, np.array([0.0, 0.4, third, 0, 0, 0])).link_in_base
        shoulder, elbow, centre = (frames[k][:3, 3] for k in (1, 2, 4))
        return float(np.cross(elbow - shoulder, centre - elbow)[1])

    stretched = brentq(bend, 0.8, 2.2, xtol=1e-15)
    assert followed(arm, "pose", [0.3, 0.4, stretched, 0.6, 0.7, 0.8]) == []


def test_a_surface_of_self_motions_tells_one_curve_on_it() -> None:
    idle, other = followed(arm_of(*SIX), "position", [0.3, 0.4, 0.5, 0.6, 0.7, 0.8])
    assert idle.free_joints == (6,)
    assert other.free_joints[0] == 1
    ((low, high),) = other.interval
    assert low < 0.3 < high


def test_a_posture_off_its_target_keeps_its_own_place() -> None:
    """An arm with few joints meets a target within a tolerance; its families are where it is."""
    arm = arm_of(*LEVEL[:1], *LEVEL[1:])
    posture = np.array([[0.2, 0.3, 0.4, 0.5]])
    target = tool_in_base(arm, posture[0], AT_FLANGE)
    target[2, 3] += 1e-6
    assert families_of(arm, AT_FLANGE, "pose", target, posture) == []
    (family,) = families_of(arm, AT_FLANGE, "position", target, posture)
    assert family.free_joints == (4,)
