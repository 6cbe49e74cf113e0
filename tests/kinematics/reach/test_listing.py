"""Which postures are told: all of a target, or none."""

import numpy as np

from kinematics.reach.listing import listed


def test_postures_of_targets_that_are_not_told_are_left_out() -> None:
    offsets, kept = listed(np.array([0, 2, 2, 5]), np.array([False, True, True]))
    assert offsets.tolist() == [0, 0, 0, 3]
    assert kept.tolist() == [False, False, True, True, True]
