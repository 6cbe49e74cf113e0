"""Folds by hand: a stretched planar arm is left inwards, to either side, as a square root."""

import numpy as np
import pytest

from kinematics.chain import tool_in_base
from kinematics.reach.targets import ORIENTATION
from kinematics.task_space import task_space
from kinematics.tolerances import TARGET_ANGLE, TARGET_POSITION
from kinematics.travel.folds import fold_at
from kinematics.travel.straight import OnLines
from kinematics.travel.trails import STALLS, WHOLE
from tests.kinematics.example_arms import PLANAR, arm_of
from tests.kinematics.travel.bounded import FLANGE, along, bounded, upright_arm

USUAL = (TARGET_POSITION, TARGET_ANGLE)


def test_a_stretched_planar_arm_leaves_as_the_law_of_cosines_says() -> None:
    arm = arm_of(*PLANAR)
    space = task_space(arm, FLANGE)
    assert space is not None
    fold = fold_at(arm, FLANGE, space, np.zeros(2))
    assert fold is not None
    assert fold.ends
    inwards = fold.leaving(np.array([-1e-6, 0, 0, 0, 0, 0]))
    assert inwards is not None
    reach = 0.73 - 1e-6
    elbow = np.arccos((reach**2 - 0.42**2 - 0.31**2) / (2 * 0.42 * 0.31))
    assert abs(inwards[1]) == pytest.approx(elbow, rel=1e-4)
    assert fold.leaving(np.array([1e-6, 0, 0, 0, 0, 0])) is None
    bent = fold_at(arm, FLANGE, space, np.array([0.0, 1.0]))
    assert bent is not None
    assert not bent.ends


@pytest.mark.parametrize("aside", [0.0, 1e-9, 1e-6, -1e-5])
def test_a_leg_may_begin_at_a_fold(aside: float) -> None:
    arm = bounded(PLANAR, (2.0, 2.0))
    start, lines = np.array([0.3, aside]), OnLines(arm, FLANGE, ORIENTATION)
    at = tool_in_base(arm, start, FLANGE)
    inwards = -0.1 * at[:3, 3] / np.linalg.norm(at[:3, 3])
    run = lines.run(along(at, inwards), start, USUAL)
    assert run.kind == WHOLE
    postures = run.track.values[: run.many] * lines.scale
    tools = tool_in_base(arm, postures, FLANGE)
    for tool, share in zip(tools, run.track.shares[: run.many], strict=True):
        assert tool[:3, 3] == pytest.approx(run.way.at(float(share))[:3, 3], abs=1e-8)
    outwards = lines.run(along(at, -inwards), start, USUAL)
    assert outwards.kind == STALLS
    assert outwards.track.shares[outwards.many - 1] < 1e-6


def test_a_leg_may_end_at_a_fold_and_six_joints_leave_one() -> None:
    arm = bounded(PLANAR, (2.0, 2.0))
    start, lines = np.array([0.3, 0.8]), OnLines(arm, FLANGE, ORIENTATION)
    at = tool_in_base(arm, start, FLANGE)
    out = at[:3, 3] / np.linalg.norm(at[:3, 3])
    room = 0.73 - float(np.linalg.norm(at[:3, 3]))
    run = lines.run(along(at, room * out), start, USUAL)
    assert run.kind == WHOLE
    six = upright_arm()
    stretched = np.array([0.1, 0.9, 0.0, 0.3, 1.1, 0.2])
    at = tool_in_base(six, stretched, FLANGE)
    inwards = [0.4, 0.0, 0.4] - (at[:3, 3] - 0.1 * at[:3, 2])
    left = OnLines(six, FLANGE).run(along(at, 0.1 * inwards), stretched, USUAL)
    assert left.kind == WHOLE
    last = tool_in_base(six, left.track.values[left.many - 1], FLANGE)
    assert last == pytest.approx(left.way.at(1.0), abs=1e-9)
