"""Samples: scipy's own sequence, the same in any pieces, within all limits, evenly spread."""

import numpy as np
import pytest
from scipy.stats.qmc import Sobol

from kinematics.arm import Arm, CombinedTravel
from kinematics.chain import tool_in_base
from kinematics.errors import KinematicsError
from kinematics.reach.samples import BLOCK, JointSamples, tool_positions
from kinematics.table import Travel
from kinematics.travel_limits import travel_margin
from tests.kinematics.example_arms import arm_of, prismatic, revolute

WIDE = Travel(-1.5, 2.5)


def two_joints(**more: object) -> Arm:
    return arm_of(revolute(a=0.4, travel=WIDE), revolute(a=0.3, travel=Travel(0.0, 1.0)), **more)


def test_they_are_the_numbers_of_scipys_sequence_to_the_last_bit() -> None:
    count = 5 * BLOCK + 17
    sequence = Sobol(2, scramble=True, bits=30, rng=42)
    shares = np.vstack([sequence.random(BLOCK), sequence.random(count - BLOCK)])
    expected = shares * np.array([4.0, 1.0]) + np.array([-1.5, 0.0])
    np.testing.assert_array_equal(JointSamples(two_joints(), count, 42).piece(0, count), expected)


@pytest.mark.parametrize("cut", [False, True])
def test_they_do_not_depend_on_where_pieces_begin(cut: bool) -> None:
    combined = (CombinedTravel({1: 1.0, 2: 1.0}, Travel(-0.5, 2.0)),) if cut else ()
    samples = JointSamples(two_joints(combined_travel=combined), 20_000, 3)
    whole = samples.piece(0, 20_000)
    backwards = [samples.piece(at, min(at + 3001, 20_000)) for at in range(0, 20_000, 3001)[::-1]]
    np.testing.assert_array_equal(np.vstack(backwards[::-1]), whole)
    assert len(np.unique(whole, axis=0)) == 20_000


def test_combined_travel_is_kept_to_and_filled_evenly() -> None:
    combined = (CombinedTravel({1: 1.0, 2: 1.0}, Travel(-0.5, 2.0)),)
    arm = two_joints(combined_travel=combined)
    values = JointSamples(arm, 50_000, 9).piece(0, 50_000)
    assert travel_margin(arm, values).min() >= 0.0
    # Of the strip of width 2.5 and height 1, cut by a sum, the first joint's mean is 0.25.
    assert abs(values[:, 0].mean() - 0.25) < 0.002
    assert abs(values.sum(axis=1).min() + 0.5) < 0.001


def test_a_joint_without_travel_takes_one_turn() -> None:
    values = JointSamples(arm_of(revolute(a=1.0)), 4096, 0).piece(0, 4096)
    # One sample in each of 4096 equal parts of the turn.
    parts = np.floor((values[:, 0] + np.pi) / (2.0 * np.pi) * 4096)
    np.testing.assert_array_equal(np.sort(parts), np.arange(4096))


def test_working_travel_bounds_only_where_it_is_asked_for() -> None:
    row = revolute(a=1.0, travel=Travel(-2.0, 2.0), working_travel=Travel(-1.0, 0.5))
    for working, most in ((False, 2.0), (True, 0.5)):
        values = JointSamples(arm_of(row), 1024, 5, working=working).piece(0, 1024)
        assert most - 0.01 < values.max() <= most


def test_positions_are_those_of_the_chain() -> None:
    arm = arm_of(revolute(a=0.4, alpha=0.7), prismatic(travel=Travel(0.0, 0.2)), revolute(a=0.1))
    samples = JointSamples(arm, 9000, 1)
    tool = np.eye(4)
    tool[:3, 3] = 0.1, 0.2, 0.3
    expected = tool_in_base(arm, samples.piece(4000, 9000), tool)[:, :3, 3]
    np.testing.assert_array_equal(tool_positions(samples, tool, 4000, 9000), expected)


EXCLUDED = (CombinedTravel({1: 1.0, 2: 1.0}, Travel(9.0, 10.0)),)
THIN = (CombinedTravel({1: 1.0, 2: 1.0}, Travel(0.0, 1e-6)),)


@pytest.mark.parametrize(
    ("arm", "count", "seed", "where"),
    [
        (arm_of(), 5, 1, ("arm", "rows")),
        (arm_of(prismatic()), 5, 1, ("arm", "rows", 0, "travel")),
        (two_joints(), 0, 1, ("count",)),
        (two_joints(), 10**10, 1, ("count",)),
        (two_joints(), 5, -1, ("seed",)),
        (two_joints(combined_travel=EXCLUDED), 5, 1, ("arm",)),
        (two_joints(combined_travel=THIN), 5, 1, ("arm", "combined_travel")),
    ],
)
def test_what_cannot_be_drawn_is_refused(
    arm: object, count: int, seed: int, where: tuple[str | int, ...]
) -> None:
    with pytest.raises(KinematicsError) as refused:
        JointSamples(arm, count, seed).piece(0, 1)  # type: ignore[arg-type]
    assert refused.value.where == where
    assert refused.value.way_out
