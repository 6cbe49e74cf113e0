"""Numbers that a module holds do not have compiled callees made anew."""

from numba import njit

from kinematics.inverse.kernel_numbers import NONE, entries

ONE, TWO = entries(1, 3)


# Not kept: what is loaded has not compiled its callees.
@njit
def raised(value: int) -> int:
    return value + 1


@njit
def by_entries() -> int:
    return raised(ONE) + raised(TWO) + raised(NONE)


def test_the_callee_is_compiled_once_for_all_of_them() -> None:
    assert by_entries() == 6
    assert len(raised.signatures) == 1


def test_entries_step_as_range_does() -> None:
    assert entries(2, 11, 4) == tuple(range(2, 11, 4))
    assert entries(3, 3) == ()
