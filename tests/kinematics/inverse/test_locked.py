"""Six rows between held ones: what they are asked is what the whole arm does."""

import numpy as np
import pytest

from kinematics.chain import tool_in_base
from kinematics.inverse.landing import land_all
from kinematics.inverse.locked import lockings_of
from kinematics.inverse.screws import screws_of
from kinematics.kernels.compiler import for_kernel
from tests.kinematics.example_arms import AT_FLANGE, NINE, arm_of
from tests.kinematics.inverse.redundant_arms import ARMS
from tests.kinematics.inverse.seeds import fresh


@pytest.mark.parametrize("name", [*ARMS, "nine"])
def test_the_six_reach_a_carried_target_with_their_own_motions(name: str) -> None:
    random = fresh()
    arm, tool = (arm_of(*NINE), AT_FLANGE) if name == "nine" else ARMS[name](random)
    screws = screws_of(arm, tool)
    postures = random.uniform(-1.0, 1.0, size=(20, arm.joint_count))
    motions, targets = arm.drive_map.motions(postures), tool_in_base(arm, postures, tool)
    ways = lockings_of(screws)
    assert ways
    for locked in ways:
        carried = locked.targets(targets, motions[:, locked.held])
        between = np.setdiff1d(np.arange(screws.rows), locked.held)
        size = np.where(locked.six.prismatic, screws.length, 1.0)
        six, poses = locked.six, np.empty((20, 4, 4))
        moved = for_kernel(motions[:, between] / size)
        land_all(six.axis, six.point, six.prismatic, six.tool_at_zero, moved, poses)
        poses[:, :3, 3] *= screws.length
        np.testing.assert_allclose(poses, carried, atol=1e-12)
        whole = locked.whole(motions[:, between], motions[:, locked.held])
        np.testing.assert_array_equal(whole, motions)


def test_axes_are_told_by_the_arms_own_numbers() -> None:
    random = fresh()
    said = {name: lockings_of(screws_of(*ARMS[name](random)))[0].say for name in ARMS}
    assert said["on a track"] == "axes 5, 6 and 7 meet in a point: a spherical wrist"
    assert said["turning tool post"] == "axes 1, 2 and 3 meet in a point: a spherical shoulder"


def test_rows_are_held_where_a_special_triple_is_left() -> None:
    random = fresh()
    held = {name: lockings_of(screws_of(*ARMS[name](random)))[0].held.tolist() for name in ARMS}
    assert held["on a track"] == [0]
    assert held["turning tool post"] == [6]
