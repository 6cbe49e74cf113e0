"""Straight lines of the tool: even, and turning no further than a target asks."""

import numpy as np
import pytest

from kinematics.reach.targets import CONE, ORIENTATION, SPIN, Target
from kinematics.rotations import angle_of, rotation_about
from kinematics.transforms import pose
from kinematics.travel.lines import end_of_line, line_between
from tests.kinematics.example_arms import random_pose
from tests.kinematics.inverse.seeds import fresh


def test_a_line_is_even_and_turns_about_one_axis() -> None:
    random = fresh()
    for _ in range(20):
        start, end = random_pose(random), random_pose(random)
        line = line_between(start, end)
        assert line.at(1.0) == pytest.approx(end, abs=1e-12)
        assert line.length == pytest.approx(np.linalg.norm(end[:3, 3] - start[:3, 3]))
        assert line.angle == pytest.approx(float(angle_of(end[:3, :3] @ start[:3, :3].T)))
        for share in (0.25, 0.5):
            there = line.at(share)
            assert there[:3, 3] == pytest.approx(
                (1.0 - share) * start[:3, 3] + share * end[:3, 3], abs=1e-12
            )
            # What is turned so far leaves the axis alone, and is the share of the whole.
            turned = there[:3, :3] @ start[:3, :3].T
            assert turned @ line.turn == pytest.approx(line.turn, abs=1e-12)
            assert float(angle_of(turned)) == pytest.approx(share * line.angle, abs=1e-12)


def test_rounding_is_no_turn() -> None:
    start = random_pose(fresh())
    end = start.copy()
    end[:3, 3] += 0.1
    assert line_between(start, end).angle == 0.0


def test_what_a_target_leaves_open_stays_as_it_is() -> None:
    random = fresh()
    for _ in range(20):
        start, wanted = random_pose(random), random_pose(random)
        free = end_of_line(start, Target(wanted, ORIENTATION))
        assert (free[:3, :3] == start[:3, :3]).all()
        assert (free[:3, 3] == wanted[:3, 3]).all()
        spun = end_of_line(start, Target(wanted, SPIN))
        assert spun[:3, 2] == pytest.approx(wanted[:3, 2], abs=1e-12)
        apart = np.arccos(np.clip(start[:3, 2] @ wanted[:3, 2], -1.0, 1.0))
        assert float(angle_of(spun[:3, :3] @ start[:3, :3].T)) == pytest.approx(apart, abs=1e-7)
        coned = end_of_line(start, Target(wanted, CONE, 0.5 * apart))
        assert float(angle_of(coned[:3, :3] @ start[:3, :3].T)) == pytest.approx(0.5 * apart)
        within = end_of_line(start, Target(wanted, CONE, 1.01 * apart))
        assert (within[:3, :3] == start[:3, :3]).all()


def test_opposite_directions_turn_by_half() -> None:
    start = np.eye(4)
    wanted = pose(rotation_about([1.0, 0.0, 0.0], np.pi), [0.0, 0.0, 0.3])
    spun = end_of_line(start, Target(wanted, SPIN))
    assert spun[:3, 2] == pytest.approx([0.0, 0.0, -1.0], abs=1e-12)
