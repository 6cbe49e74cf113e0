"""What of an arm counts on a line: its bounds, its scale, and how many equations it has."""

import numpy as np
import pytest

from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.kernels.compiler import for_kernel
from kinematics.reach.targets import NONE, ORIENTATION, SPIN
from kinematics.travel.arm_on_lines import ArmOnLines
from kinematics.travel.on_line import POSE, POSITION, SPIN_FREE
from kinematics.travel_limits import travel_margin
from tests.kinematics.example_arms import FIVE, SEVEN, arm_of, random_pose
from tests.kinematics.inverse.bounded_arms import COUPLED
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.travel.bounded import FLANGE, along, offset_arm, selective_arm


@pytest.mark.parametrize("arm", [offset_arm(), selective_arm(), COUPLED], ids=lambda arm: arm.name)
def test_bounds_are_those_of_travel(arm: Arm) -> None:
    random = fresh()
    lines = ArmOnLines(arm, FLANGE)
    values = random.uniform(-3.0, 3.0, size=(50, arm.joint_count))
    bounds = lines.bounds
    sums = values / lines.scale @ bounds.weights.T + bounds.constants
    room = np.minimum(sums - bounds.least, bounds.most - sums) / (bounds.most - bounds.least)
    margin = room[:, ~bounds.advice].min(axis=1)
    np.testing.assert_allclose(margin, travel_margin(arm, values), atol=1e-12)


@pytest.mark.parametrize(
    ("arm", "left", "counts", "rows", "spare"),
    [
        (offset_arm(), NONE, POSE, 6, 0),
        (offset_arm(), ORIENTATION, POSE, 6, 0),
        (arm_of(*SEVEN), NONE, POSE, 6, 1),
        (selective_arm(), NONE, POSE, 4, 0),
        (selective_arm(), ORIENTATION, POSITION, 3, 1),
        (arm_of(*FIVE), SPIN, SPIN_FREE, 6, 0),
    ],
)
def test_what_counts_on_a_line(arm: Arm, left: int, counts: int, rows: int, spare: int) -> None:
    tool = random_pose(fresh())
    lines = ArmOnLines(arm, tool, left)
    start = tool_in_base(arm, np.full(arm.joint_count, 0.3), tool)
    line = lines.line_for(along(start, (0.3, 0.0, 0.0)))
    assert lines.few == (arm.joint_count < 6)
    assert lines.spare == spare
    assert (line.left, line.row_map.shape) == (counts, (rows, 6))
    np.testing.assert_allclose(line.start, for_kernel(lines.screws.scaled(start)))
    np.testing.assert_allclose(
        line.velocity, [0.3 / lines.screws.length, 0, 0, 0, 0, 0], atol=1e-15
    )
    assert (line.lower < line.upper).all()
