"""What a store promises of events, held on every database (see test_storage_contract)."""

from collections.abc import Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import replace
from datetime import UTC, datetime, timedelta
from pathlib import Path

import pytest

from service.events.ports import ENDED, OPEN, UNKNOWN, Event, EventStorage, Which
from service.settings import Settings
from service.storage.events import SqlEvents
from service.storage.opening import OpenStorage, open_storage

AT = datetime(2026, 3, 4, 5, 6, 7, 891_000, tzinfo=UTC)
LATER = AT + timedelta(minutes=5)
ONE = Event("a", "press-arm", "stale", OPEN, AT, AT, None, {"peak": 0.1, "say": "Größe"})
ALL = Which()


@pytest.fixture
def store(opened: OpenStorage) -> EventStorage:
    """The empty store."""
    return opened.events


def ended(event: Event, at: datetime = LATER) -> Event:
    return replace(event, state=ENDED, seen_at=at, ended_at=at)


def seen(events: Sequence[Event]) -> list[tuple[str, str, int]]:
    return [(event.id, event.state, event.change) for event in events]


def test_an_event_comes_back_as_it_was_written(store: EventStorage) -> None:
    assert store.last_change() == 0
    assert store.write([ONE], 1) == 1
    assert list(store.after(ALL, 0, 10)) == [replace(ONE, change=1)]
    assert store.write([ended(ONE)], 1) == 2
    assert list(store.after(ALL, 0, 10)) == [replace(ended(ONE), change=2)]
    assert store.last_change() == 2
    assert store.write([], 1) == 2


def test_who_has_read_up_to_a_change_sees_each_later_one(store: EventStorage) -> None:
    others = [replace(ONE, id=name) for name in "bcd"]
    store.write([ONE, *others], 1)
    assert seen(store.after(ALL, 2, 10)) == [("c", OPEN, 3), ("d", OPEN, 4)]
    store.write([ended(others[0]), ended(ONE)], 1)
    assert seen(store.after(ALL, 4, 10)) == [("b", ENDED, 5), ("a", ENDED, 6)]
    assert seen(store.after(ALL, 0, 2)) == [("c", OPEN, 3), ("d", OPEN, 4)]
    assert seen(store.newest(ALL, 3)) == [("d", OPEN, 4), ("b", ENDED, 5), ("a", ENDED, 6)]
    assert list(store.after(ALL, 6, 10)) == []


def test_of_one_event_in_one_step_the_last_state_counts(store: EventStorage) -> None:
    other = replace(ONE, id="b")
    assert store.write([ONE, other, ended(ONE)], 1) == 2
    assert seen(store.after(ALL, 0, 10)) == [("b", OPEN, 1), ("a", ENDED, 2)]
    # New and known ones in one step, each number once and in the order given.
    later = replace(ONE, id="c")
    assert store.write([ended(other), later, ended(ONE, LATER + LATER.resolution)], 1) == 5
    assert seen(store.after(ALL, 0, 10)) == [("b", ENDED, 3), ("c", OPEN, 4), ("a", ENDED, 5)]


def test_a_filter_finds_what_it_says(store: EventStorage) -> None:
    store.write([ONE, replace(ONE, id="b", kind="singular"), replace(ONE, id="c", arm="x")], 1)
    store.write([ended(ONE)], 1)
    for which, wanted in [
        (Which(arm="press-arm"), "ba"),
        (Which(kind="stale"), "ca"),
        (Which(state=OPEN), "bc"),
        (Which("press-arm", "singular", OPEN), "b"),
        (Which(arm="nobody"), ""),
    ]:
        assert "".join(event.id for event in store.after(which, 0, 10)) == wanted


def test_writers_at_once_leave_no_number_twice_and_none_out_of_sight(store: EventStorage) -> None:
    def write(number: int) -> int:
        return store.write([replace(ONE, id=f"{number}-{part}") for part in "xyz"], 1)

    with ThreadPoolExecutor(8) as pool:
        last = sorted(pool.map(write, range(16)))
    assert last == [3 * number for number in range(1, 17)]
    found = store.after(ALL, 0, 100)
    assert [event.change for event in found] == list(range(1, 49))
    # What was written in one step stands together.
    assert all(found[i].id[:-1] == found[i + 2].id[:-1] for i in range(0, 48, 3))


def test_what_was_left_open_becomes_unknown_once(store: EventStorage) -> None:
    store.write([ONE, replace(ONE, id="b")], 1)
    store.write([ended(replace(ONE, id="b"))], 1)
    store.watch(2)
    (left,) = store.after(Which(state=UNKNOWN), 0, 10)
    assert (left.id, left.ended_at, left.seen_at, left.change) == ("a", None, AT, 4)
    store.watch(3)
    assert store.last_change() == 4


def test_another_process_that_still_watches_keeps_its_own(opened: OpenStorage) -> None:
    first, second = opened.events, SqlEvents(opened.events._engine)
    first.watch(11)
    first.write([ONE], 11)
    second.watch(12)
    (found,) = first.after(ALL, 0, 10)
    # A file has one server; on a database server the first one still lives.
    on_server = opened.events._engine.dialect.name == "postgresql"
    assert found.state == (OPEN if on_server else UNKNOWN)
    first.close()
    third = SqlEvents(opened.events._engine)
    third.watch(13)
    (found,) = third.after(ALL, 0, 10)
    assert found.state == UNKNOWN
    second.close()
    third.close()


def test_what_is_over_is_trimmed_by_age_and_count(store: EventStorage) -> None:
    for number in range(6):
        event = replace(ONE, id=str(number), seen_at=AT + timedelta(days=number))
        store.write([event if number == 1 else ended(event, event.seen_at)], 1)
    assert store.trim(100, AT) == 0
    assert store.trim(100, AT + timedelta(days=2)) == 1  # one of the two that old is still open
    assert "".join(event.id for event in store.after(ALL, 0, 10)) == "12345"
    assert store.trim(3, AT) == 2
    assert "".join(event.id for event in store.after(ALL, 0, 10)) == "145"
    # All that is over is too old now; the last change stays, and the count goes on.
    assert store.trim(0, AT + timedelta(days=99)) == 1
    assert "".join(event.id for event in store.after(ALL, 0, 10)) == "15"
    assert store.write([replace(ONE, id="z")], 1) == 7


def test_simulated_events_drive_out_no_real_ones(store: EventStorage) -> None:
    real = [ended(replace(ONE, id=f"r{number}")) for number in range(5)]
    made = [ended(replace(ONE, id=f"s{number}", simulated=True)) for number in range(30)]
    store.write([*real, *made], 1)
    assert store.trim(20, AT) == 28
    kept = [event.id for event in store.after(ALL, 0, 100)]
    assert kept == [*(event.id for event in real), "s28", "s29"]


def test_events_may_stand_in_memory_where_arms_may_not(tmp_path: Path) -> None:
    folder = tmp_path / "no"
    folder.write_text("a file where a folder should be")
    opened = open_storage(Settings(database=str(folder / "arms.db")))
    try:
        assert not opened.writable
        assert opened.events.write([ONE], 1) == 1
    finally:
        opened.close()
