"""Distances and speeds that lead nowhere are refused with the way out."""

import pytest

from kinematics.errors import KinematicsError
from kinematics.travel.above_zero import check_above_zero


@pytest.mark.parametrize("value", [0.0, -0.1, float("nan"), float("inf")])
def test_nothing_but_numbers_above_zero(value: float) -> None:
    with pytest.raises(KinematicsError, match="the speed is") as refused:
        check_above_zero(value, "the speed", ("legs", 0, "speed"))
    assert refused.value.where == ("legs", 0, "speed")
    assert "above 0" in refused.value.way_out


def test_small_numbers_are_numbers() -> None:
    check_above_zero(1e-9, "the distance", ())
