"""Motion between samples, against differences of the chain itself."""

import numpy as np
import pytest

from kinematics.chain import tool_in_base
from kinematics.rotations import rotation_vector_of
from kinematics.sampled_motion import joint_rates, joint_too_fast, posture_between, tool_motion
from kinematics.table import Row
from tests.kinematics.example_arms import (
    NINE,
    PLANAR,
    SIX,
    SIX_ON_A_TRACK,
    arm_of,
    prismatic,
    random_joint_values,
    random_pose,
    revolute,
)

STEP_S = 1e-5


def test_a_line_through_two_samples() -> None:
    first, second = (0.1, -2.0, 0.3), (0.4, -1.0, 0.3)
    assert posture_between(first, second, 0.0) == first
    assert posture_between(first, second, 1.0) == pytest.approx(second)
    rates = joint_rates(first, second, 0.5)
    after = np.array(first) + 0.125 * np.array(rates)
    assert posture_between(first, second, 0.25) == pytest.approx(after.tolist())


@pytest.mark.parametrize("rows", [PLANAR, SIX, SIX_ON_A_TRACK, NINE])
def test_the_tool_moves_as_the_chain_does(rows: tuple[Row, ...]) -> None:
    """A central difference of a smooth chain is exact to the square of the step: 1e-10."""
    random = np.random.default_rng(20261202)
    arm, tool = arm_of(*rows), random_pose(random)
    turned = random_pose(random)[:3, :3]
    for values in random_joint_values(random, arm, 20):
        rates = random.normal(size=arm.joint_count)
        steps = np.outer([-0.5, 0.5], rates) * STEP_S
        before, after = tool_in_base(arm, values + steps, tool)
        linear = turned @ (after[:3, 3] - before[:3, 3]) / STEP_S
        angular = turned @ rotation_vector_of(after[:3, :3] @ before[:3, :3].T) / STEP_S
        moves = tool_motion(arm, values.tolist(), rates.tolist(), tool, turned)
        assert moves.linear == pytest.approx(linear, abs=1e-8)
        assert moves.angular == pytest.approx(angular, abs=1e-8)
        assert moves.speed == pytest.approx(np.linalg.norm(linear), abs=1e-8)
        assert moves.turning_speed == pytest.approx(np.linalg.norm(angular), abs=1e-8)


def test_the_joint_that_is_fastest_for_what_it_can_do() -> None:
    arm = arm_of(revolute(top_speed=1.0), prismatic(), revolute(top_speed=0.5, passive=True))
    assert arm.joint_count == 2
    at_rest = (0.0, 0.0)
    assert joint_too_fast(arm, at_rest, (0.1, 1e9), 0.1) is None
    assert joint_too_fast(arm, at_rest, (-0.1001, 0.0), 0.1) == 1
    both = arm_of(revolute(top_speed=1.0), revolute(top_speed=0.5))
    assert joint_too_fast(both, at_rest, (0.3, 0.2), 0.1) == 2
    assert joint_too_fast(both, at_rest, (0.3, 0.1), 0.1) == 1
