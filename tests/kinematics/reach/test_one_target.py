"""One pose answered at once: the same best posture as in the usual way, or nothing at all."""

from dataclasses import replace

import numpy as np
import pytest

from kinematics.arm import Arm
from kinematics.reach.checks import Reacher
from kinematics.reach.targets import WITNESS, Target, Targets
from kinematics.table import Table, Travel
from kinematics.transforms import in_frame, inverse
from tests.kinematics.example_arms import SIX, arm_of, random_pose
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.reach.arm_classes import CLASSES, postures_within_travel, targets_at

FEW = 60
NOT_SPECIAL = {name for name in CLASSES if name.endswith(("anywhere", "measured"))}


@pytest.mark.parametrize("name", sorted(CLASSES))
@pytest.mark.parametrize("by_nearness", [False, True])
def test_it_is_the_best_posture_of_the_usual_way(name: str, by_nearness: bool) -> None:
    random = fresh()
    told = 0
    for _ in range(3):
        arm, tool, freedom = CLASSES[name](random)
        reacher = Reacher(arm, tool)
        postures = postures_within_travel(random, arm, FEW)
        targets = targets_at(arm, tool, freedom, postures)
        if reacher.one_target is None:
            assert arm.joint_count < 6 or name in NOT_SPECIAL
            continue
        base_in_frame = random_pose(random)
        near = postures[0] if by_nearness else None
        usual = reacher.check(targets, near=near)
        for index in range(len(targets)):
            pose = in_frame(base_in_frame, targets.tool_in_base[index : index + 1])
            best = reacher.one_target.best(inverse(base_in_frame), pose, near, named=True)
            if best is None:
                continue
            told += 1
            first = usual.offsets[index]
            assert usual.proof[index] == WITNESS
            assert best.found == usual.found[index]
            assert np.abs(best.joint_values - usual.joint_values[first]).max() < 1e-9
            assert abs(best.margin - usual.margin[first]) < 1e-9
            assert best.branch == usual.branches[usual.branch[first]]
            assert best.position_error < 1e-9 * reacher.answerer_of(0).ranking.screws.length
            assert best.angle_error < 1e-9
    if arm.joint_count == 6 and name not in NOT_SPECIAL:
        assert told > FEW  # of random postures few are near a fold or a limit


def bounded(arm: Arm, limit: float, **travel: float) -> Arm:
    rows = [replace(row, travel=Travel(-limit, limit, **travel)) for row in arm.table.rows]
    return Arm(arm.name, Table(arm.table.convention, tuple(rows)))


def told_at_once(arm: Arm, joints: list[float]) -> bool:
    reacher, flange = Reacher(arm, np.eye(4)), np.eye(4)
    targets = targets_at(arm, flange, 0, np.array([joints]))
    assert reacher.one_target is not None
    return reacher.one_target.best(flange, targets.tool_in_base, None, named=False) is not None


def test_what_needs_a_second_look_is_left_to_it() -> None:
    arm = bounded(arm_of(*SIX), 3.0)
    plain = [0.3, 1.2, -1.3, 0.4, 0.5, 0.6]
    assert told_at_once(arm, plain)
    assert not told_at_once(arm, [*plain[:4], 0.0, 0.6])  # two axes of the wrist in line
    assert not told_at_once(bounded(arm_of(*SIX), 0.2), plain)  # beyond travel
    assert not told_at_once(bounded(arm_of(*SIX), 1.3), plain)  # onto a limit
    far = Targets.of([Target(np.array([[1.0, 0, 0, 9], [0, 1, 0, 0], [0, 0, 1, 0], [0, 0, 0, 1]]))])
    one_target = Reacher(arm, np.eye(4)).one_target
    assert one_target is not None
    assert one_target.best(np.eye(4), far.tool_in_base, None, named=True) is None


def test_of_joints_without_travel_a_margin_is_told_but_no_nearness() -> None:
    rows = bounded(arm_of(*SIX), 3.0).table.rows
    arm, flange = arm_of(*rows[:5], replace(rows[5], travel=None)), np.eye(4)
    one_target, joints = Reacher(arm, flange).one_target, np.array([[0.3, 1.2, -1.3, 0.4, 0.5, 0]])
    assert one_target is not None
    pose = targets_at(arm, flange, 0, joints).tool_in_base
    assert one_target.best(flange, pose, joints[0], named=True) is None
    best = one_target.best(flange, pose, None, named=True)
    assert best is not None
    assert best.margin == pytest.approx(max(best.margin, (3.0 - 1.3) / 6.0))
    assert not told_at_once(arm_of(*SIX), joints[0].tolist())  # nothing to rank postures by


def test_few_joints_have_none() -> None:
    assert Reacher(bounded(arm_of(*SIX[:3]), 3.0), np.eye(4)).one_target is None
