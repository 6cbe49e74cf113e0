"""Tools aslant on arms that cannot tilt: the one turn about tool z, against a search for it."""

import numpy as np
import pytest

from kinematics.chain import tool_in_base
from kinematics.inverse.screws import screws_of
from kinematics.inverse.solve import method_of
from kinematics.inverse.upright_spins import UprightSpins, upright_spins_of
from kinematics.reach.spins import spun
from tests.kinematics.example_arms import AT_FLANGE, SELECTIVE, SIX, arm_of
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.reach.arm_classes import CLASSES, postures_within_travel

KINDS = ("RRPR", "PRRR", "RRRP", "RPRR", "level wrist")


@pytest.mark.parametrize("name", KINDS)
def test_generating_postures_are_found_however_the_target_is_turned(name: str) -> None:
    random = fresh()
    arm, tool, _ = CLASSES[name](random)
    solver = upright_spins_of(arm, tool, screws_of(arm, tool))
    assert solver is not None
    postures = postures_within_travel(random, arm, 40)
    poses = tool_in_base(arm, postures, tool)
    targets = spun(poses, random.uniform(-np.pi, np.pi, 40))
    found = solver.solve(targets)
    motions = arm.drive_map.motions(postures)
    for index in range(40):
        mine = found.target == index
        off = found.motions[mine] - motions[index]
        off -= np.where(solver.screws.prismatic, 0.0, 2.0 * np.pi * np.rint(off / (2.0 * np.pi)))
        assert np.abs(off).max(axis=1).min() < 1e-7
        assert found.position_error[mine].max() < 1e-9
        assert found.angle_error[mine].max() < 1e-9


@pytest.mark.parametrize("name", KINDS)
def test_what_is_left_is_the_difference_of_the_angles_to_tool_z(name: str) -> None:
    random = fresh()
    arm, tool, _ = CLASSES[name](random)
    solver = method_of(arm, tool, "position+direction").solver
    assert isinstance(solver, UprightSpins)
    poses = tool_in_base(arm, postures_within_travel(random, arm, 10), tool)
    up = poses[0, :3, :3] @ solver.up
    # Tipped towards the axes' direction, or away from it.
    across = np.cross(up, poses[:, :3, 2])
    across /= np.linalg.norm(across, axis=1)[:, None]
    tipped = poses.copy()
    for column in range(3):
        turned = poses[:, :3, column]
        along = (across * turned).sum(axis=1)[:, None] * across
        tipped[:, :3, column] = (
            along + (turned - along) * np.cos(0.01) + np.cross(across, turned) * np.sin(0.01)
        )
    found = solver.solve(tipped)
    np.testing.assert_allclose(found.angle_error, 0.01, atol=1e-9)


def test_tools_along_the_axes_and_other_arms_have_none() -> None:
    for rows in (SELECTIVE, SIX):
        arm = arm_of(*rows)
        assert upright_spins_of(arm, AT_FLANGE, screws_of(arm, AT_FLANGE)) is None
