"""The least peak against linear programming by scipy, and by hand."""

import numpy as np
import pytest
from scipy.optimize import linprog

from kinematics.peak_demand import least_peak


def programmed(demand: np.ndarray, spare: np.ndarray) -> float:
    """Return min t with |demand + spare z| <= t, with z split into two that are not negative."""
    joints, count = spare.shape
    both = np.hstack([spare, -spare])
    result = linprog(
        c=[0.0] * (2 * count) + [1.0],
        A_ub=np.block([[both, -np.ones((joints, 1))], [-both, -np.ones((joints, 1))]]),
        b_ub=np.concatenate([-demand[:, 0], demand[:, 0]]),
        method="highs",
    )
    assert result.status == 0
    return float(result.fun)


@pytest.mark.parametrize("count", [0, 1, 2, 3])
@pytest.mark.parametrize("joints", [3, 7])
def test_against_linear_programming(joints: int, count: int) -> None:
    random = np.random.default_rng([joints, count])
    demand, spare = random.normal(size=(40, joints, 1)), random.normal(size=(40, joints, count))
    least = least_peak(demand, spare)
    assert least.shape == (40,)
    expected = [programmed(*pair) for pair in zip(demand, spare, strict=True)]
    # HiGHS promises 1e-7; on problems this small it meets the last digits.
    np.testing.assert_allclose(least, expected, rtol=0.0, atol=1e-12)


def test_without_spare_motions_the_peak_is_what_it_is() -> None:
    demand = np.array([[0.2], [-0.7], [0.0]])
    assert float(least_peak(demand, np.empty((3, 0)))) == 0.7


def test_one_spare_motion_by_hand() -> None:
    """Joint 1 carries 1, and joint 2 can take over one for one: half each."""
    demand = np.array([[1.0], [0.0]])
    assert float(least_peak(demand, np.array([[1.0], [-1.0]]))) == 0.5
    assert float(least_peak(demand, np.array([[1.0], [0.0]]))) == 0.0
    assert float(least_peak(demand, np.array([[0.0], [1.0]]))) == 1.0


def test_a_spare_motion_of_nothing_shares_nothing() -> None:
    demand = np.array([[1.0], [-2.0]])
    assert float(least_peak(demand, np.zeros((2, 1)))) == 2.0
    assert float(least_peak(demand, np.zeros((2, 2)))) == pytest.approx(2.0)


def test_two_spare_motions_by_hand() -> None:
    """Three joints, two free ways to shift: all that stays is the mean of the three."""
    demand = np.array([[3.0], [0.0], [0.0]])
    spare = np.array([[1.0, 0.0], [-1.0, 1.0], [0.0, -1.0]])
    assert float(least_peak(demand, spare)) == pytest.approx(1.0, rel=1e-12)


@pytest.mark.parametrize("count", [0, 1, 2])
@pytest.mark.parametrize("batch", [(), (0,), (2, 3)])
def test_shapes(batch: tuple[int, ...], count: int) -> None:
    assert least_peak(np.ones((*batch, 4, 1)), np.ones((*batch, 4, count))).shape == batch


@pytest.mark.parametrize("count", [1, 2])
def test_more_spare_motions_never_make_it_worse(count: int) -> None:
    random = np.random.default_rng(count)
    demand, spare = random.normal(size=(30, 5, 1)), random.normal(size=(30, 5, count))
    assert (least_peak(demand, spare) <= least_peak(demand, spare[..., :-1]) + 1e-12).all()
