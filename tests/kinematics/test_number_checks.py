"""What counts as a number from outside, and where the error points."""

import numpy as np
import pytest

from kinematics.errors import InvalidOrientation, KinematicsError, NotFinite, OutOfRange
from kinematics.number_checks import checked_numbers


@pytest.mark.parametrize("values", [(1, 2.5), [1, 2.5], np.array([1, 2.5]), [np.float32(1), 2.5]])
def test_lists_tuples_and_arrays_are_taken(values: object) -> None:
    numbers = checked_numbers(values, (2,), "a pair")
    assert numbers.dtype == np.float64
    assert numbers.tolist() == [1.0, 2.5]


def test_what_is_nested_deeper_than_can_be_followed_is_refused() -> None:
    nested: object = 1.0
    for _ in range(100_000):
        nested = [nested]
    with pytest.raises(InvalidOrientation, match="takes 2 numbers"):
        checked_numbers([1.0, nested], (2,), "a pair")


def test_the_result_is_a_copy() -> None:
    given = np.array([1.0, 2.0])
    checked_numbers(given, (2,), "a pair")[0] = 9.0
    assert given[0] == 1.0


@pytest.mark.parametrize("entry", ["1", "nan", None, True, 1j, [1.0], {}])
def test_what_is_no_number_is_refused_where_it_stands(entry: object) -> None:
    with pytest.raises(InvalidOrientation) as caught:
        checked_numbers([[1, 2], [entry, 4]], (2, 2), "a table")
    if not isinstance(entry, list):
        assert caught.value.where == (1, 0)
        assert caught.value.value == entry
    assert caught.value.way_out


@pytest.mark.parametrize("entry", [float("nan"), float("inf"), -float("inf"), np.nan])
def test_non_finite_entries_are_refused_where_they_stand(entry: float) -> None:
    with pytest.raises(NotFinite) as caught:
        checked_numbers([[1, 2], [3, entry]], (2, 2), "a table")
    assert caught.value.where == (1, 1)


@pytest.mark.parametrize("entry", [1.0000001e9, -2e9, 1e308, 10**400, -(10**400)])
def test_entries_beyond_the_largest_magnitude_are_refused(entry: float) -> None:
    with pytest.raises(OutOfRange) as caught:
        checked_numbers([0, entry], (2,), "a pair")
    assert caught.value.where == (1,)
    assert caught.value.value == entry


def test_the_largest_magnitude_itself_is_taken() -> None:
    assert checked_numbers([1e9, -1e9], (2,), "a pair").tolist() == [1e9, -1e9]


@pytest.mark.parametrize("values", [[1, 2, 3], [], 5, None, "ab", [[1], [2]], {"x": 1, "y": 2}])
def test_another_shape_is_refused(values: object) -> None:
    with pytest.raises(InvalidOrientation):
        checked_numbers(values, (2,), "a pair")


def test_the_class_of_refusal_can_be_chosen() -> None:
    with pytest.raises(KinematicsError, match="a position takes 3 numbers") as caught:
        checked_numbers([1, 2], (3,), "a position", KinematicsError)
    assert type(caught.value) is KinematicsError
