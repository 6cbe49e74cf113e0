"""Ids that sort by time."""

from datetime import UTC, datetime, timedelta

from service.sorted_ids import ID, new_id

AT = datetime(2026, 1, 2, 3, 4, 5, 678_000, tzinfo=UTC)


def test_ids_sort_by_the_millisecond_they_were_made_in() -> None:
    later = [AT + timedelta(milliseconds=number) for number in (0, 1, 2, 60_000, 10**11)]
    ids = [new_id(at) for at in later]
    assert ids == sorted(ids)
    assert all(ID.fullmatch(made) for made in ids)


def test_no_two_are_the_same_in_one_millisecond() -> None:
    assert len({new_id(AT) for _ in range(1000)}) == 1000


def test_the_time_can_be_read_back() -> None:
    assert int(new_id(AT)[:12], 16) == round(AT.timestamp() * 1000)
