"""Values that a joint to spare is held at, against the travel of whatever drives its row."""

from dataclasses import replace

import numpy as np
import pytest

from kinematics.arm import Arm
from kinematics.errors import KinematicsError
from kinematics.inverse.held_values import held_values, motions_within, refuse_unbounded_slides
from kinematics.inverse.tolerances import HELD_SHARES, HELD_STEP
from kinematics.table import Travel
from tests.kinematics.example_arms import SEVEN, SIX_ON_A_TRACK, arm_of
from tests.kinematics.inverse.redundant_arms import ARMS
from tests.kinematics.inverse.seeds import fresh


@pytest.mark.parametrize("name", ARMS)
def test_a_row_moves_as_far_as_postures_at_the_ends_of_travel_move_it(name: str) -> None:
    random = fresh()
    arm, _ = ARMS[name](random)
    travels = np.array([row.travel for row in arm.table.rows], dtype=float)
    corners = travels[np.arange(7), random.integers(0, 2, size=(2000, 7))]
    moved = arm.drive_map.motions(corners)
    for row in range(7):
        low, high = motions_within(arm, row)
        assert low >= moved[:, row].min() - 1e-12
        assert high <= moved[:, row].max() + 1e-12
        if moved[:, row].max() - moved[:, row].min() <= 2.0 * np.pi:
            np.testing.assert_allclose((low, high), (moved[:, row].min(), moved[:, row].max()))


def test_steps_of_turns_are_no_wider_than_two_degrees_and_of_slides_a_share_of_travel() -> None:
    turning, sliding = (
        held_values(bounded, 0) for bounded in (arm_of(*SEVEN), _on_a_track(Travel(-1.0, 5.0)))
    )
    assert np.diff(turning).max() <= HELD_STEP * (1.0 + 1e-12)
    np.testing.assert_allclose(turning[[0, -1]], [-np.pi, np.pi])
    np.testing.assert_allclose(np.diff(sliding), 6.0 / HELD_SHARES)


def _on_a_track(travel: Travel | None) -> Arm:
    return arm_of(replace(SIX_ON_A_TRACK[0], travel=travel), *SIX_ON_A_TRACK[1:])


def test_a_slide_without_travel_is_refused_and_told() -> None:
    refuse_unbounded_slides(_on_a_track(Travel(0.0, 1.0)))
    with pytest.raises(KinematicsError) as refused:
        refuse_unbounded_slides(_on_a_track(None))
    assert refused.value.where == ("rows", 0, "travel")
    assert "joint 1" in str(refused.value)
    assert refused.value.way_out
