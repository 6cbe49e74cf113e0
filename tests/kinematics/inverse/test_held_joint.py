"""One joint held: the posture with the most room, and Newton's way onto a target."""

import itertools

import numpy as np
import pytest

from kinematics.chain import tool_in_base
from kinematics.inverse.held_joint import HeldJoint
from kinematics.inverse.redundant import redundant_of
from kinematics.travel_limits import travel_margin
from tests.kinematics.inverse.redundant_arms import ARMS
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.reach.arm_classes import postures_within_travel


def held(name: str, random: np.random.Generator) -> tuple[HeldJoint, np.ndarray]:
    arm, tool = ARMS[name](random)
    redundant = redundant_of(arm, tool)
    assert redundant is not None
    return redundant.joint, tool


@pytest.mark.parametrize("name", ["several turns", "coupled"])
def test_of_whole_turns_those_with_the_most_room_are_told(name: str) -> None:
    random = fresh()
    joint, _ = held(name, random)
    arm = joint.arm
    turns = 2.0 * np.pi * random.integers(-1, 2, size=(30, 7)) * arm.revolute_joints
    motions = arm.drive_map.motions(postures_within_travel(random, arm, 30)) + turns
    values, margin, inside = joint.postures(motions, None)
    assert inside.all()
    np.testing.assert_allclose(margin, travel_margin(arm, values), atol=1e-12)
    around = 2.0 * np.pi * np.array(list(itertools.product((-1, 0, 1), repeat=7)))
    around = around[(around[:, ~arm.revolute_joints] == 0.0).all(axis=1)]
    for posture, best in zip(values, margin, strict=True):
        every = np.linalg.solve(arm.drive_map.matrix, (arm.drive_map.motions(posture) + around).T).T
        assert travel_margin(arm, every).max() <= best + 1e-12


@pytest.mark.parametrize("name", sorted(ARMS))
def test_postures_are_brought_onto_targets_with_the_row_held(name: str) -> None:
    random = fresh()
    joint, tool = held(name, random)
    arm = joint.arm
    postures = 0.8 * postures_within_travel(random, arm, 40)
    targets = tool_in_base(arm, postures, tool)
    beside = postures + random.uniform(-0.005, 0.005, size=postures.shape)
    there, landed = joint.brought(beside, targets)
    assert landed.sum() >= 28  # beside folds, a little further on there is no posture
    shown = tool_in_base(arm, there[landed], tool)
    assert np.abs(shown - targets[landed]).max() < 1e-8
    moved = arm.drive_map.motions(there)[:, joint.row]
    np.testing.assert_allclose(moved, arm.drive_map.motions(beside)[:, joint.row], atol=1e-12)
    # Held where the targets come from, the postures come back, and count as led to.
    row = arm.drive_map.motions(postures)[:, joint.row]
    back, met = joint.followed(beside, targets, row)
    off = np.abs(back - postures).max(axis=1)
    assert met.sum() >= 38
    assert np.median(off[met]) < 1e-9


def test_what_is_nearer_or_has_more_room_scores_higher() -> None:
    random = fresh()
    joint, _ = held("shoulder and wrist", random)
    values = postures_within_travel(random, joint.arm, 20)
    margin = travel_margin(joint.arm, values)
    assert (np.argsort(joint.scored(values, margin, None)) == np.argsort(margin)).all()
    near = joint.scored(values, margin, values[3])
    assert near.argmax() == 3
    assert near[3] == pytest.approx(1.0, abs=1e-8)
    assert (joint.scored(values, np.full(20, -0.1), values[3]) < 0.0).all()
