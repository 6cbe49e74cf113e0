"""The compiled search for travel left against the same sums written with NumPy."""

from typing import Any

import numpy as np
import pytest

from kinematics.kernels.travel import travel_left
from kinematics.number_checks import FloatArray


def found(joint_values: FloatArray, *limits: Any) -> tuple[FloatArray, np.ndarray]:
    margin, outside = np.full(len(joint_values), np.nan), np.empty(len(joint_values), dtype=bool)
    weights, constants, lower, upper, working = limits
    travel_left(joint_values, weights, constants, lower, upper, working, margin, outside)
    return margin, outside


@pytest.mark.parametrize("joints", [0, 1, 5, 8])
@pytest.mark.parametrize("limits", [0, 1, 4, 12])
def test_the_kernel_does_what_the_formulas_say(joints: int, limits: int) -> None:
    random = np.random.default_rng([joints, limits])
    values = random.uniform(-1.5, 1.5, size=(500, joints))
    weights, constants = random.normal(size=(limits, joints)), random.uniform(-0.5, 0.5, limits)
    middle, half = random.uniform(-0.3, 0.3, limits), random.uniform(0.5, 2.0 + joints, limits)
    lower, upper = middle - half, middle + half
    working = random.random(limits) < 0.4
    margin, outside = found(values, weights, constants, lower, upper, working)

    forms = values @ weights.T + constants
    room = np.minimum(forms - lower, upper - forms) / (upper - lower)
    expected = room[:, ~working].min(axis=1, initial=np.inf)
    np.testing.assert_allclose(margin, expected, rtol=0.0, atol=1e-14)
    assert np.array_equal(outside, (room < 0.0).any(axis=1))
    if limits > 1 and joints:
        assert 0 < outside.sum() < 500
        assert working.any()
    if limits == 12 and joints:
        # Working travel is exceeded, which is told, and does not count for the margin.
        assert (outside & (margin >= 0.0)).any()


def test_on_the_bound_nothing_is_exceeded() -> None:
    one = np.ones(1)
    limits = np.ones((1, 1)), np.zeros(1), -one, one, np.array([False])
    margin, outside = found(np.array([[-1.0], [1.0], [np.nextafter(1.0, 2.0)]]), *limits)
    assert margin[:2].tolist() == [0.0, 0.0]
    assert margin[2] < 0.0
    assert outside.tolist() == [False, False, True]
