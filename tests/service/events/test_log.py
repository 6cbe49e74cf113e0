"""Events on their way into the store: gathered, tried again, bounded, closed at the next start."""

import threading
import time
from collections.abc import Callable, Iterator, Sequence
from datetime import UTC, datetime, timedelta
from typing import Any

import pytest

from service.errors import StorageUnavailable
from service.events import log as log_module
from service.events.log import EventLog
from service.events.ports import ENDED, OPEN, UNKNOWN, Event, Which
from service.settings import Settings
from service.storage.opening import open_storage

AT = datetime(2026, 3, 4, 5, 6, 7, tzinfo=UTC)


def event(name: str, state: str = OPEN) -> Event:
    ended = AT if state == ENDED else None
    return Event(name, "press-arm", "stale", state, AT, AT, ended, {"peak": 1.0})


class Store:
    """A store that can be away, and remembers each writing."""

    def __init__(self) -> None:
        self.is_away = self.fails = False
        self.writings: list[list[Event]] = []
        self.watchers: list[int] = []
        self.trims: list[tuple[int, datetime]] = []

    def watch(self, watcher: int) -> None:
        self._check()
        self.watchers.append(watcher)

    def write(self, events: Sequence[Event], watcher: int) -> int:
        self._check()
        if self.fails:
            self.fails = False
            raise RuntimeError("nobody foresaw this")
        self.writings.append(list(events))
        return len(self.writings)

    def trim(self, most: int, before: datetime) -> int:
        self.trims.append((most, before))
        return 0

    def _check(self) -> None:
        if self.is_away:
            raise StorageUnavailable("away")


@pytest.fixture
def store() -> Store:
    return Store()


@pytest.fixture
def written() -> threading.Event:
    return threading.Event()


@pytest.fixture
def log(store: Any, written: threading.Event, monkeypatch: Any) -> Iterator[EventLog]:
    monkeypatch.setattr(log_module, "GATHERED_S", 0.02)
    monkeypatch.setattr(log_module, "_AGAIN_S", 0.02)
    made = EventLog(store, most=7, most_days=3, written=written.set, now=lambda: AT)
    yield made
    made.stop()


def until(enough: Callable[[], bool]) -> None:
    deadline = time.monotonic() + 10.0
    while not enough():
        assert time.monotonic() < deadline
        time.sleep(0.005)


def test_nothing_runs_before_something_happens(log: EventLog, store: Store) -> None:
    log.begin()
    assert len(store.watchers) == 1
    assert "events" not in {thread.name for thread in threading.enumerate()}


def test_what_comes_together_is_written_in_one_step(
    log: EventLog, store: Store, written: threading.Event
) -> None:
    log.begin()
    for number in range(50):
        log.put(event(str(number)))
        log.put(event(str(number), ENDED))
    assert written.wait(10)
    log.stop()
    all_of_them = [one for writing in store.writings for one in writing]
    # Begun and ended meanwhile: written once, as it is now.
    assert len(store.writings) <= 2
    assert {one.id: one.state for one in all_of_them} == {str(n): ENDED for n in range(50)}
    assert len(store.watchers) == 1
    assert store.trims == [(7, AT - timedelta(days=3))]


def test_what_waits_for_a_store_that_is_away_is_written_later(log: EventLog, store: Store) -> None:
    store.is_away = True
    log.begin()
    log.put(event("a"))
    time.sleep(0.1)
    log.put(event("b"))
    log.put(event("a", ENDED))
    time.sleep(0.1)
    assert store.writings == []
    store.is_away = False
    until(lambda: bool(store.writings))
    assert [(one.id, one.state) for one in store.writings[0]] == [("a", ENDED), ("b", OPEN)]
    assert len(store.watchers) == 1


def test_a_bounded_number_waits(log: EventLog, store: Store, monkeypatch: Any) -> None:
    monkeypatch.setattr(log_module, "MOST_WAITING", 10)
    store.is_away = True
    log.put(event("open"))
    for number in range(100):
        log.put(event(str(number), ENDED))
    store.is_away = False
    until(lambda: bool(store.writings))
    kept = [one.id for one in store.writings[0]]
    assert kept == ["open", *map(str, range(91, 100))]


def test_a_bounded_number_waits_also_while_it_is_tried_again(
    log: EventLog, store: Store, monkeypatch: Any
) -> None:
    monkeypatch.setattr(log_module, "MOST_WAITING", 10)
    store.is_away = True
    for number in range(100):
        log.put(event(str(number), ENDED))
        time.sleep(0.003)
    log.stop()
    assert len(log._waiting) <= 10
    assert "99" in log._waiting


def test_a_trim_that_fails_ends_no_thread(log: EventLog, store: Store, monkeypatch: Any) -> None:
    def fail(most: int, before: datetime) -> int:
        raise RuntimeError("nobody foresaw this")

    monkeypatch.setattr(store, "trim", fail)
    for name in ("a", "b"):
        log.put(event(name))
        until(lambda name=name: any(one[-1].id == name for one in store.writings))


def test_a_failure_nobody_foresaw_ends_no_thread(log: EventLog, store: Store) -> None:
    store.fails = True
    log.put(event("a"))
    until(lambda: not store.fails)
    log.put(event("b"))
    until(lambda: bool(store.writings))
    assert [one.id for one in store.writings[-1]] == ["b"]


def test_what_is_put_last_is_written_at_the_end(log: EventLog, store: Store) -> None:
    log.put(event("a"))
    log.stop()
    assert [one.id for writing in store.writings for one in writing] == ["a"]


def test_the_next_start_closes_what_a_killed_process_left_open(tmp_path: Any) -> None:
    database = Settings(database=str(tmp_path / "arms.db"))
    opened = open_storage(database)
    opened.events.write([event("a"), event("b", ENDED)], 1)
    opened.close()
    opened = open_storage(database)
    try:
        EventLog(opened.events, most=9, most_days=9, written=lambda: None).begin()
        found = {one.id: (one.state, one.ended_at) for one in opened.events.after(Which(), 0, 9)}
        assert found == {"b": (ENDED, AT), "a": (UNKNOWN, None)}
    finally:
        opened.close()
