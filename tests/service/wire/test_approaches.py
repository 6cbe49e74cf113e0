"""Approaches and retracts as they are given: SI, directions, what no arm has."""

import numpy as np
import pytest

from kinematics.errors import KinematicsError
from service.convert import UNITS
from service.errors import UnusableValue
from service.wire.approaches import read_approach, speed_in
from service.wire.reach_request import Approach, Retract

MM = UNITS["mm-deg"]
HERE = ("targets", 3, "approach")


def test_directions_have_length_one() -> None:
    read = read_approach(Approach(distance=250, along=[1e-200, 0, 0]), MM, HERE)
    np.testing.assert_array_equal(read.along, [1, 0, 0])
    assert (read.distance, read.speed) == (0.25, None)


def test_a_retract_goes_back_as_the_approach_came() -> None:
    approach = read_approach(Approach(distance=10, along=[0, 2, 0]), MM, HERE)
    same = read_approach(Retract(distance=5), MM, HERE, approach)
    np.testing.assert_array_equal(same.along, [0, 1, 0])
    assert same.distance == 0.005
    other = read_approach(Retract(distance=5, along="tool-z"), MM, HERE, approach)
    assert other.along is None
    assert read_approach(Retract(distance=5), MM, HERE).along is None


@pytest.mark.parametrize(
    ("given", "name"),
    [
        (Approach(distance=1e13), "distance"),
        (Approach(distance=1e-9), "distance"),
        (Approach(distance=1, speed=1e13), "speed"),
        (Approach(distance=1, speed=5e-324), "speed"),
    ],
)
def test_what_no_arm_does(given: Approach, name: str) -> None:
    with pytest.raises(UnusableValue) as caught:
        read_approach(given, MM, HERE)
    assert caught.value.where == (*HERE, name)
    assert caught.value.value == getattr(given, name)


def test_no_direction() -> None:
    with pytest.raises(KinematicsError, match="length zero") as caught:
        read_approach(Approach(distance=1, along=[0, 0, -0.0]), MM, HERE)
    assert caught.value.where == (*HERE, "along")


def test_speeds() -> None:
    assert speed_in(None, "m", MM, ("speed",)) is None
    assert speed_in(250, "m", MM, ("speed",)) == 0.25
    assert speed_in(180, "rad", MM, ("turn_speed",)) == pytest.approx(np.pi)
