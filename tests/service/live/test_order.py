"""Counts and times of one source, in every combination."""

import pytest

from service.live.order import Order

SEEN: list[tuple[list[tuple[int | None, float | None]], str]] = [
    ([(1, 1.0), (2, 2.0)], ""),
    ([(1, 1.0), (1, 1.0)], "repeated"),
    ([(2, 2.0), (1, 1.0)], "out-of-order"),
    # The count wins over a clock that was set back a little.
    ([(1, 2.0), (2, 1.5)], ""),
    # Counted anew, and its clock says so.
    ([(65_535, 1.0), (0, 2.0)], ""),
    ([(5, 1.0), (5, 2.0)], ""),
    # Without times, or without counts.
    ([(5, None), (5, None)], "repeated"),
    ([(5, None), (4, None)], "out-of-order"),
    ([(None, 1.0), (None, 1.0)], "repeated"),
    ([(None, 2.0), (None, 1.0)], "out-of-order"),
    ([(None, None), (None, None)], ""),
    # One of them says what the other does not.
    ([(5, None), (None, 1.0)], ""),
    ([(None, 1.0), (5, 0.5)], "out-of-order"),
    # Stragglers that do not rise are no count begun anew.
    ([(9, None), (3, None), (2, None), (1, None), (4, None)], "out-of-order"),
]


@pytest.mark.parametrize(("seen", "told"), SEEN)
def test_the_last_of_them(seen: list[tuple[int | None, float | None]], told: str) -> None:
    order = Order()
    assert [order.dropped(*one) for one in seen][-1] == told


@pytest.mark.parametrize("first", [(1, 1.0), (100, 1.0), (1, 100.0), (None, None)])
def test_what_begins_anew_is_newer_than_all_before(
    first: tuple[int | None, float | None],
) -> None:
    order = Order()
    order.dropped(100, 100.0)
    order.begin_anew()
    assert order.dropped(*first) == ""


@pytest.mark.parametrize("said", [(7, None), (7, 1.5), (None, 1.5)])
def test_the_same_once_more_begins_nothing(said: tuple[int | None, float | None]) -> None:
    order = Order()
    order.dropped(*said)
    order.begin_anew()
    assert [order.dropped(*said) for _ in range(3)] == ["repeated"] * 3
    assert order.dropped(3, 0.5) == ""
    # From there on it is an order as any.
    assert order.dropped(3, 0.5) == "repeated"
    assert order.dropped(2, 0.25) == "out-of-order"


def test_who_says_neither_count_nor_time_may_repeat_himself() -> None:
    order = Order()
    order.dropped(None, None)
    order.begin_anew()
    assert order.dropped(None, None) == ""
