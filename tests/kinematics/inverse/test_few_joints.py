"""Which closed form answers for few joints: by what they are, and what is asked of them."""

import numpy as np
import pytest

from kinematics.chain import tool_in_base
from kinematics.inverse.few_joints import few_joints_of
from kinematics.inverse.measured import DIRECTION, POSE, POSITION
from kinematics.inverse.screws import screws_of
from tests.kinematics.example_arms import AT_FLANGE, FIVE, arm_of, random_pose, revolute
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.reach.arm_classes import _row


@pytest.mark.parametrize("task", [POSE, POSITION, DIRECTION])
@pytest.mark.parametrize("kinds", ["R", "P", "RR", "RP", "RRR", "PRP", "PPP"])
def test_up_to_three_joints_meet_all_that_they_have_been_at(kinds: str, task: str) -> None:
    random = fresh()
    arm, tool = arm_of(*[_row(random, kind) for kind in kinds]), random_pose(random)
    solver = few_joints_of(arm, screws_of(arm, tool), tool, task)
    assert solver is not None
    found = solver.solve(tool_in_base(arm, random.uniform(-1.0, 1.0, (20, len(kinds))), tool))
    met = (found.position_error < 1e-8) & (found.angle_error < 1e-7)
    assert np.unique(found.target[met]).tolist() == list(range(20))


def test_places_by_more_joints_than_they_need_are_no_closed_form() -> None:
    planar = arm_of(*(revolute(a=0.3) for _ in range(3)))
    for arm in (planar, arm_of(*FIVE[:4]), arm_of(*FIVE)):
        assert few_joints_of(arm, screws_of(arm, AT_FLANGE), AT_FLANGE, POSITION) is None
    assert few_joints_of(planar, screws_of(planar, AT_FLANGE), AT_FLANGE, POSE) is not None


def test_four_joints_that_leave_the_spin_open_by_five() -> None:
    """Three parallel axes, a turn across, and tool z beside it: the spin is the fifth joint."""
    random, tool = fresh(), random_pose(fresh(), 0.2)
    arm = arm_of(*FIVE[:4])
    solver = few_joints_of(arm, screws_of(arm, tool), tool, DIRECTION)
    assert solver is not None
    q = random.uniform(-2.0, 2.0, (30, 4))
    found = solver.solve(tool_in_base(arm, q, tool))
    met = (found.position_error < 1e-8) & (found.angle_error < 1e-7)
    assert found.motions.shape[1] == 4
    assert np.unique(found.target[met]).tolist() == list(range(30))
    assert solver.nearest(tool_in_base(arm, q[:1], tool)).shape == (1, 4)
