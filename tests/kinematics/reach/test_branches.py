"""Branches in words: what they mean by hand, and that the ways to a target differ in them."""

import numpy as np
import pytest

from kinematics.arm import Arm
from kinematics.inverse.screws import screws_of
from kinematics.inverse.several import picked
from kinematics.reach.branches import Branches
from kinematics.reach.checks import Reacher
from kinematics.reach.tolerances import EXACT_REACH
from kinematics.table import Travel
from tests.kinematics.example_arms import (
    AT_FLANGE,
    PLANAR,
    QUARTER,
    SELECTIVE,
    SIX,
    arm_of,
    prismatic,
    revolute,
)
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.reach.arm_classes import CLASSES, postures_within_travel, targets_at

HANGING = np.diag([1.0, -1.0, -1.0, 1.0])
ON_A_WALL = np.array([[0.0, 0, 1, 0], [0, 1, 0, 0], [-1, 0, 0, 0], [0, 0, 0, 1]])

# Upright, wrist ahead: the elbow lies at q2 from the horizontal, the fore arm 90 deg - q3 from it.
REACHING_AHEAD = [0.3, 1.2, -1.3, 0.4, 0.5, 0.6]


def words(arm: Arm, *values: float) -> str:
    branches = Branches(arm, screws_of(arm, AT_FLANGE))
    motions = arm.drive_map.motions(np.array([values]))
    return branches.sentences[branches.of(motions, np.zeros(1, np.intp))[0]]


def six(**more: object) -> Arm:
    rows = list(SIX)
    rows[2] = revolute(a=0.05, alpha=QUARTER, theta=QUARTER)
    return arm_of(*rows, **more)


def test_six_joints_with_a_wrist() -> None:
    arm = six()
    ahead = "wrist centre ahead of axis 1, elbow above, wrist not turned over"
    assert words(arm, *REACHING_AHEAD) == ahead
    turned = [0.3, 1.2, -1.3, 0.4 + np.pi, -0.5, 0.6 + np.pi]
    assert words(arm, *turned) == ahead.replace("not turned", "turned")
    assert "elbow below" in words(arm, 0.3, -0.6, 1.3, 0.4, 0.5, 0.6)
    assert "behind axis 1" in words(arm, 0.3 + np.pi, np.pi - 1.2, 1.3, 0.4, 0.5, 0.6)


def test_above_is_above_for_a_hanging_arm_too() -> None:
    assert "elbow below" in words(six(base_in_world=HANGING), *REACHING_AHEAD)
    assert "elbow out along axis 1" in words(six(base_in_world=ON_A_WALL), *REACHING_AHEAD)


def test_ahead_is_where_axis_2_is_offset_to() -> None:
    rows = list(SIX)
    rows[0] = revolute(a=-0.06, alpha=QUARTER, d=0.4)
    rows[2] = revolute(a=0.05, alpha=QUARTER, theta=QUARTER)
    assert "behind axis 1" in words(arm_of(*rows), *REACHING_AHEAD)


def test_ahead_is_where_the_arm_reaches_in_mid_travel_without_an_offset() -> None:
    rows = list(SIX)
    for low, high, said in ((0.0, 1.5, "ahead of"), (1.7, 3.1, "behind")):
        rows[0] = revolute(alpha=QUARTER, d=0.4)
        rows[1] = revolute(a=0.43, travel=Travel(low, high))
        rows[2] = revolute(a=0.05, alpha=QUARTER, theta=QUARTER)
        assert f"{said} axis 1" in words(arm_of(*rows), *REACHING_AHEAD)


def test_elbows_of_flat_arms_as_seen_from_above() -> None:
    assert words(arm_of(*SELECTIVE), 0.2, 0.9, 0.1, 0.3) == "elbow to the right, seen from above"
    assert words(arm_of(*PLANAR), 0.2, -0.9) == "elbow to the left, seen from above"
    hanging = arm_of(*PLANAR, base_in_world=HANGING)
    assert words(hanging, 0.2, -0.9) == "elbow to the right, seen from above"
    assert "seen against axis 1" in words(arm_of(*PLANAR, base_in_world=ON_A_WALL), 0.2, -0.9)


def test_slides_that_run_forwards_or_backwards() -> None:
    arm = arm_of(revolute(alpha=-QUARTER), revolute(alpha=QUARTER), prismatic())
    assert words(arm, 0.1, 1.0, 0.5) == "tool ahead of axis 1, slide 3 run out forwards"
    assert words(arm, 0.1, 1.0, -0.5) == "tool behind axis 1, slide 3 run out backwards"


def test_an_arm_with_nothing_to_bend_has_numbered_ways() -> None:
    arm = arm_of(prismatic(alpha=-QUARTER), prismatic(alpha=-QUARTER), prismatic())
    assert words(arm, 0.1, 0.2, 0.3) == "first way"


# Arms whose first rows are askew have four ways to a place that are no two choices.
TOLD_BY_CHOICES = (
    *("upright arm with wrist", "RRPR", "PRRR", "RRRP", "level wrist", "place by RPP"),
    *("place by RR", "PPP and wrist", "five, three parallel"),
)


@pytest.mark.parametrize("name", CLASSES)
def test_no_two_ways_to_a_target_share_their_words(name: str) -> None:
    random = fresh()
    for _ in range(3):
        arm, tool, freedom = CLASSES[name](random)
        reacher = Reacher(arm, tool)
        postures = postures_within_travel(random, arm, 30)
        targets = targets_at(arm, tool, freedom, postures)
        method = reacher.answerer_of(freedom).method
        everything = method.solve(targets.tool_in_base, np.zeros(arm.joint_count))
        ranking = reacher.answerer_of(freedom).ranking
        found = picked(everything, ranking.accepted(everything, targets))
        branches = Branches(arm, screws_of(arm, tool))
        code = branches.of(found.motions, found.target)
        said = {(t, branches.sentences[c]) for t, c in zip(found.target, code, strict=True)}
        assert len(said) == len(found.target)
        if name in TOLD_BY_CHOICES:
            # Five joints come near a target within its tolerance in other postures too.
            met = picked(found, np.maximum(found.angle_error, found.position_error) < EXACT_REACH)
            words_met = (branches.sentences[c] for c in branches.of(met.motions, met.target))
            numbered = [w for w in words_met if w.endswith("such")]
            assert not numbered


def test_the_eight_ways_of_an_arm_have_eight_sentences_without_numbers() -> None:
    for rows in (SIX, THREE_PARALLEL):
        arm = arm_of(*rows)
        random, most = fresh(), 0
        targets = targets_at(arm, AT_FLANGE, 0, random.uniform(-2.0, 2.0, size=(100, 6)))
        checks = Reacher(arm, AT_FLANGE).check(targets)
        for index in range(100):
            said = {checks.branches[code] for code in checks.branch[checks.solutions_of(index)]}
            most = max(most, len([words for words in said if "such" not in words]))
        assert most == 8


THREE_PARALLEL = (
    revolute(alpha=QUARTER, d=0.2),
    revolute(a=0.47),
    revolute(a=0.43),
    revolute(alpha=QUARTER, d=0.14),
    revolute(alpha=-QUARTER, d=0.12),
    revolute(d=0.1),
)
