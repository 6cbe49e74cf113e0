"""Lists of answers: samples of free joints, and lists that are full."""

import numpy as np
import pytest

from kinematics.inverse.regional_rows import (
    A_FREE,
    C_FREE,
    FREE,
    NEAR_FREE,
    NONE_FREE,
    REGULAR,
    SAMPLES,
    flags_of,
    put,
    put_samples,
)
from kinematics.inverse.tolerances import FREE_JOINT, MAYBE_FREE


def test_flags_by_how_far_a_joint_swings_what_it_turns() -> None:
    assert flags_of(2.0 * MAYBE_FREE) == REGULAR
    assert flags_of(0.5 * MAYBE_FREE) == NEAR_FREE
    assert flags_of(0.5 * FREE_JOINT) == FREE


def test_samples_go_all_around_from_the_value_given() -> None:
    out = np.zeros((40, 4))
    count = put(out, 0, 1.0, 2.0, 3.0, NONE_FREE)
    count = put_samples(out, count, 0.5, 2.0, 3.0, A_FREE)
    assert count == 1 + SAMPLES
    assert out[0] == pytest.approx([1.0, 2.0, 3.0, -1.0])
    assert out[1:count, 0] == pytest.approx(0.5 + np.arange(SAMPLES) * np.radians(30.0))
    assert (out[1:count, 1:] == [2.0, 3.0, 0.0]).all()


def test_a_full_list_takes_no_more() -> None:
    out = np.zeros((5, 4))
    assert put_samples(out, 0, 1.0, 2.0, 3.0, C_FREE) == 5
    before = out.copy()
    assert put(out, 5, 9.0, 9.0, 9.0, NONE_FREE) == 5
    assert put_samples(out, 5, 9.0, 9.0, 9.0, A_FREE) == 5
    assert (out == before).all()
