"""Postures held against a line: the pose on it, corrections, rates, and joints that are held."""

import numpy as np
import pytest

from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.jacobian import motion_of
from kinematics.reach.targets import NONE
from kinematics.travel.lines import StraightLine, line_between
from kinematics.travel.on_line import bench_for, corrected, place_on
from kinematics.travel.straight import OnLines
from tests.kinematics.example_arms import SEVEN, random_pose
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.reach.arm_classes import postures_within_travel
from tests.kinematics.travel.bounded import FLANGE, along, bounded, offset_arm, selective_arm


def seven() -> Arm:
    return bounded(SEVEN, (2.9,) * 7)


def moved(lines: OnLines, way: StraightLine, share: float, q: np.ndarray) -> np.ndarray:
    """Return rates at a share, after q (scaled) has been brought onto the line."""
    line = lines.line_for(way)
    bench = bench_for(lines.for_kernels, line)
    assert corrected(lines.for_kernels, line, bench, share, q, np.empty(1)) >= 0.0
    return bench.onward.copy()


def test_the_pose_at_a_share() -> None:
    random, lines = fresh(), OnLines(offset_arm(), FLANGE)
    for _ in range(10):
        way, pose = line_between(random_pose(random), random_pose(random)), np.eye(4)
        place_on(lines.line_for(way), 0.3, pose)
        pose[:3, 3] *= lines.screws.length
        assert pose == pytest.approx(way.at(0.3), abs=1e-12)


@pytest.mark.parametrize("make", [offset_arm, selective_arm, seven])
def test_corrections_end_on_the_line_and_rates_follow_it(make) -> None:  # noqa: ANN001
    random, arm = fresh(), make()
    lines = OnLines(arm, FLANGE, NONE)
    postures = postures_within_travel(random, arm, 30)
    of_joints = lines.space.scaled(motion_of(arm, postures, FLANGE).of_joints)
    weakest = np.linalg.svd(of_joints, compute_uv=False)[:, lines.space.generic_rank - 1]
    for start in postures[weakest > 0.05][:5]:
        way = along(tool_in_base(arm, start, FLANGE), random.normal(scale=0.002, size=3))
        on, step = start / lines.scale + random.normal(scale=1e-6, size=arm.joint_count), 1e-4
        rates = moved(lines, way, 0.5, on)
        tool = tool_in_base(arm, on * lines.scale, FLANGE)
        assert tool == pytest.approx(way.at(0.5), abs=1e-9)
        ahead, behind = on + step * rates, on - step * rates
        tools = tool_in_base(arm, np.stack([behind, ahead]) * lines.scale, FLANGE)
        velocity = (tools[1, :3, 3] - tools[0, :3, 3]) / (2.0 * step)
        assert velocity == pytest.approx(way.shift, abs=1e-7)


def test_spare_joints_hold_back_near_limits_and_hold_still_if_told() -> None:
    arm = seven()
    lines = OnLines(arm, FLANGE)
    start = np.array([0.1, 0.5, 0.2, -1.2, 0.3, 0.9, 0.1])
    way = along(tool_in_base(arm, start, FLANGE), [0.02, 0.03, -0.01])
    even = moved(lines, way, 0.0, start.copy())
    # Of all motions that do it the shortest: none of the tool's rest is in it.
    line = lines.line_for(way)._replace(free=np.array([1.0, 1, 0, 1, 1, 1, 1]))
    bench = bench_for(lines.for_kernels, line)
    assert corrected(lines.for_kernels, line, bench, 0.0, start.copy(), np.empty(1)) >= 0.0
    assert bench.onward[2] == 0.0
    assert np.linalg.norm(even) < np.linalg.norm(bench.onward)
    wide = lines.line_for(way)
    narrow = wide._replace(lower=np.where(np.arange(7) == 2, 0.199, wide.lower))
    bench = bench_for(lines.for_kernels, narrow)
    assert corrected(lines.for_kernels, narrow, bench, 0.0, start.copy(), np.empty(1)) >= 0.0
    assert abs(bench.onward[2]) < 0.5 * abs(even[2])
