"""Boxes shared among targets: what is proved, what is met after all, and in which words."""

import numpy as np
import pytest

from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.inverse.found import TRAVEL, none_found
from kinematics.inverse.measured import POSE
from kinematics.inverse.solve import method_of
from kinematics.reach import last_proof
from kinematics.reach.checks import Reacher
from kinematics.reach.last_proof import LastProof
from kinematics.reach.targets import (
    BRANCH_AND_BOUND,
    NOT_FOUND,
    OUTSIDE_TRAVEL,
    REACHABLE,
    UNREACHABLE,
    WITNESS,
    Target,
    Targets,
)
from kinematics.reach.verdicts import Ranking
from kinematics.rotations import rotation_about
from kinematics.table import Coupling
from tests.kinematics.example_arms import AT_FLANGE, arm_of, prismatic, revolute
from tests.kinematics.inverse.bounded_arms import bounded
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.reach.arm_classes import postures_within_travel


def searched_arm() -> Arm:
    """Four joints of no closed form: the first and the last slide."""
    rows = (
        prismatic(alpha=0.7, d=0.2),
        revolute(a=0.3, alpha=0.9, d=0.1),
        revolute(a=0.25, alpha=-1.1),
        prismatic(a=0.1, alpha=0.4, d=0.1),
    )
    return bounded(rows, (0.0, 0.5), (-2.0, 2.0), (-2.0, 2.0), (0.0, 0.4))


def upside_down(poses: np.ndarray) -> np.ndarray:
    turned = poses.copy()
    turned[:, :3, :3] = turned[:, :3, :3] @ np.diag([1.0, -1.0, -1.0])
    return turned


def test_each_target_has_its_own_answer() -> None:
    random, arm = fresh(), searched_arm()
    method, ranking = method_of(arm, AT_FLANGE), Ranking(arm, AT_FLANGE)
    poses = tool_in_base(arm, postures_within_travel(random, arm, 6), AT_FLANGE)
    targets = Targets.of([Target(pose) for pose in (*poses, *upside_down(poses))])
    left = np.array([0, 2, 5, 7, 9])
    proofs = LastProof(ranking, method).of(targets, left, none_found(12, 4), np.zeros(12, np.bool_))
    assert np.flatnonzero(proofs.boxes).tolist() == left.tolist()
    assert np.flatnonzero(proofs.proved).tolist() == [7, 9]
    assert proofs.met.target.tolist() == [0, 2, 5]
    assert ranking.accepted(proofs.met, targets).all()
    assert proofs.added_to(none_found(12, 4)).count_per_target().sum() == 3


def test_what_is_proved_and_known_beyond_travel_is_listed() -> None:
    arm = searched_arm()
    method, ranking = method_of(arm, AT_FLANGE), Ranking(arm, AT_FLANGE)
    beyond = np.array([[0.9, 0.3, 0.4, 0.7]])
    (pose,) = tool_in_base(arm, beyond, AT_FLANGE)
    known = none_found(1, 4)
    known.stage[0], known.nearest[0] = TRAVEL, arm.drive_map.motions(beyond[0])
    proofs = LastProof(ranking, method).of(
        Targets.of([Target(pose)]), np.array([0]), known, np.zeros(1, np.bool_)
    )
    assert proofs.proved.tolist() == [True]
    np.testing.assert_allclose(proofs.met.motions, known.nearest)


def test_verdicts_of_an_arm_that_is_searched() -> None:
    """Its own poses are reachable; upside down they are proved out of reach, and it is said so."""
    random, arm = fresh(), searched_arm()
    reacher = Reacher(arm, AT_FLANGE)
    poses = tool_in_base(arm, postures_within_travel(random, arm, 8), AT_FLANGE)
    checks = reacher.check(Targets.of([Target(pose) for pose in (*poses, *upside_down(poses))]))
    assert checks.verdict[:8].tolist() == [REACHABLE] * 8
    assert checks.proof[:8].tolist() == [WITNESS] * 8
    assert set(checks.verdict[8:].tolist()) <= {UNREACHABLE, OUTSIDE_TRAVEL}
    assert set(checks.proof[8:].tolist()) == {BRANCH_AND_BOUND}
    reason = checks.reason_of(8)
    assert reason is not None
    assert "numerically proved" in reason.text()


def test_too_few_boxes_prove_nothing_and_say_so(monkeypatch: pytest.MonkeyPatch) -> None:
    arm = searched_arm()
    (pose,) = tool_in_base(arm, np.array([[0.2, 0.3, 0.4, 0.1]]), AT_FLANGE)
    pose[:3, :3] = pose[:3, :3] @ rotation_about(np.array([1.0, 0.4, 0.2]), 0.01)
    monkeypatch.setattr(last_proof, "BOX_BUDGET", 20)
    checks = Reacher(arm, AT_FLANGE).check(Targets.of([Target(pose)]))
    assert checks.verdict.tolist() == [NOT_FOUND]
    reason = checks.reason_of(0)
    assert reason is not None
    assert "20 boxes of joint values were looked at" in reason.text()


def test_an_arm_whose_travel_is_no_box_is_not_asked() -> None:
    """A joint without travel that another row follows by half: two turns are no whole one."""
    rows = (revolute(a=0.3), revolute(a=0.2, alpha=0.5, couplings=(Coupling(1, 0.5),)))
    arm = arm_of(*rows)
    proof = LastProof(Ranking(arm, AT_FLANGE), method_of(arm, AT_FLANGE, POSE))
    assert not proof.applies
    targets = Targets.of([Target(np.eye(4))])
    assert proof.of(
        targets, np.array([0]), none_found(1, 2), np.ones(1, np.bool_)
    ).boxes.tolist() == [0]
