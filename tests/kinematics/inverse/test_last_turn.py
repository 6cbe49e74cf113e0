"""Few joints with a last turn: all ways to the poses they have, and what is not theirs is told."""

from itertools import product

import numpy as np
import pytest

from kinematics.chain import tool_in_base
from kinematics.inverse.last_turn import last_turn_of
from kinematics.inverse.measured import DIRECTION, POSE
from kinematics.inverse.screws import Screws, screws_of
from tests.kinematics.example_arms import (
    AT_FLANGE,
    QUARTER,
    arm_of,
    prismatic,
    random_pose,
    revolute,
)
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.reach.arm_classes import _row

WITH_A_TURN_AT_AN_END = [
    "".join(kinds)
    for count in (2, 3, 4)
    for kinds in product("RP", repeat=count)
    if "R" in (kinds[0], kinds[-1]) and kinds[1:].count("P") < 3 and kinds[:-1].count("P") < 3
]


def apart(screws: Screws, one: np.ndarray, other: np.ndarray) -> np.ndarray:
    """Return the largest difference of motions (k, rows), whole turns left out."""
    off = one - other
    turns = np.where(screws.prismatic, 0.0, np.round(off / (2.0 * np.pi)))
    return np.abs(off - 2.0 * np.pi * turns).max(axis=1)


@pytest.mark.parametrize("kinds", WITH_A_TURN_AT_AN_END)
def test_whatever_posture_an_arm_was_in_is_found_from_its_pose(kinds: str) -> None:
    random = fresh()
    arm, tool = arm_of(*[_row(random, kind) for kind in kinds]), random_pose(random)
    screws = screws_of(arm, tool)
    solver = last_turn_of(screws, POSE)
    assert solver is not None
    q = random.uniform(-3.0, 3.0, (30, len(kinds)))
    found = solver.solve(tool_in_base(arm, q, tool))
    near = apart(screws, found.motions, arm.drive_map.motions(q)[found.target]) < 1e-5
    assert np.unique(found.target[near]).tolist() == list(range(30))
    exact = near & (found.position_error < 1e-8) & (found.angle_error < 1e-8)
    assert np.unique(found.target[exact]).tolist() == list(range(30))


def test_a_planar_arm_in_a_tilted_plane_has_its_elbow_on_either_side() -> None:
    """Against the cosine law, in a plane that the base does not know."""
    random = fresh()
    arm = arm_of(revolute(alpha=0.7), *(revolute(a=a) for a in (0.4, 0.3, 0.1)))
    screws = screws_of(arm, AT_FLANGE)
    planar = Screws(
        screws.axis[1:], screws.point[1:], screws.prismatic[1:], screws.tool_at_zero, screws.length
    )
    solver = last_turn_of(planar, POSE)
    assert solver is not None
    bent = random.uniform(0.3, 2.5)
    q = np.array([[0.0, random.uniform(-3.0, 3.0), bent, random.uniform(-3.0, 3.0)]])
    found = solver.solve(tool_in_base(arm, q, AT_FLANGE))
    assert len(found.motions) == 2
    elbows = np.sort(found.motions[:, 1])
    np.testing.assert_allclose(elbows, [-bent, bent], atol=1e-9)
    np.testing.assert_allclose(found.position_error, 0.0, atol=1e-9)


def test_an_arm_that_turns_first_is_read_backwards() -> None:
    rows = (revolute(a=0.3, alpha=0.8), revolute(a=0.2, alpha=-1.1), revolute(a=0.1, alpha=0.5))
    solver = last_turn_of(screws_of(arm_of(*rows, prismatic(alpha=0.3)), AT_FLANGE), POSE)
    assert solver is not None
    assert solver.backwards
    assert "joint 1 turns what is left" in solver.geometry.say


def test_who_slides_first_and_last_is_left_to_others() -> None:
    rows = (prismatic(alpha=0.5), revolute(a=0.3, alpha=0.8), revolute(a=0.2, alpha=1.0))
    arm = arm_of(*rows, prismatic(alpha=0.4))
    assert last_turn_of(screws_of(arm, AT_FLANGE), POSE) is None
    five = arm_of(*(revolute(a=0.2, alpha=1.0) for _ in range(5)))
    assert last_turn_of(screws_of(five, AT_FLANGE), POSE) is None


def test_directions_where_tool_z_crosses_the_last_axis() -> None:
    """The place of the crossing is known whatever the spin; the direction comes out exactly."""
    random = fresh()
    rows = (revolute(alpha=QUARTER, d=0.3), revolute(a=0.4), revolute(a=0.3, alpha=0.4))
    arm, tool = arm_of(*rows, revolute(alpha=QUARTER)), AT_FLANGE.copy()
    tool[2, 3] = 0.2
    solver = last_turn_of(screws_of(arm, tool), DIRECTION)
    assert solver is not None
    q = random.uniform(-2.0, 2.0, (20, 4))
    targets = tool_in_base(arm, q, tool)
    spin = np.eye(4)
    spin[:2, :2] = [[0.0, -1.0], [1.0, 0.0]]
    found = solver.solve(targets @ spin)
    exact = (found.position_error < 1e-8) & (found.angle_error < 1e-8)
    near = apart(solver.screws, found.motions, arm.drive_map.motions(q)[found.target]) < 1e-5
    assert np.unique(found.target[exact & near]).tolist() == list(range(20))
    beside = tool.copy()
    beside[0, 3] = 0.05
    assert last_turn_of(screws_of(arm, beside), DIRECTION) is None


def test_what_is_turned_off_is_measured_and_the_nearest_is_nearer() -> None:
    random = fresh()
    arm, tool = arm_of(*[_row(random, "R") for _ in range(4)]), random_pose(random)
    solver = last_turn_of(screws_of(arm, tool), POSE)
    assert solver is not None
    (target,) = tool_in_base(arm, random.uniform(-2.0, 2.0, (1, 4)), tool)
    target[:3, :3] = target[:3, :3] @ np.diag([1.0, -1.0, -1.0])
    found = solver.solve(target[None])
    assert (found.angle_error > 1e-2).all()
    pose = solver.nearest(target[None])
    assert pose.shape == (1, 4)
    there = tool_in_base(arm, pose / arm.drive_map.matrix.diagonal(), tool)[0]
    assert np.linalg.norm(there[:3, 3] - target[:3, 3]) < solver.screws.length
