"""What a store promises of surveys, held on every database (see test_storage_contract)."""

import time
from collections.abc import Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import replace
from datetime import UTC, datetime, timedelta
from typing import Any

import pytest
import sqlalchemy as sa

from service.errors import StorageUnavailable, UnknownSurvey
from service.settings import Settings
from service.storage.opening import OpenStorage, open_storage
from service.storage.ports import (
    CANCELLED,
    FAILED,
    RUNNING,
    SUCCEEDED,
    GivenPiece,
    KeyUsed,
    MadePiece,
    Survey,
    SurveyStorage,
)
from tests.service.storage.conftest import SmallDisk

AT = datetime(2026, 3, 4, 5, 6, 7, 891_000, tzinfo=UTC)
PIECES = [GivenPiece(0, 3, b"\x00one"), GivenPiece(1, 3, b"two"), GivenPiece(2, 1, b"")]
ONE = Survey("a1", "reach-checks", "Größe", {"x": [0.1, -0.0]}, {"arm": {"name": "a"}}, 7, AT)


@pytest.fixture
def store(opened: OpenStorage) -> SurveyStorage:
    """The empty store."""
    return opened.surveys


def add(store: SurveyStorage, name: str = "a1", key: str | None = None, digest: str = "d") -> None:
    store.add(replace(ONE, id=name), PIECES, key=key, digest=digest)


def made(number: int, **counts: int) -> MadePiece:
    return MadePiece(number, bytes([number]) * 3, counts)


def get(store: SurveyStorage, name: str = "a1") -> Survey:
    found = store.get(name)
    assert found is not None
    return found


def test_a_survey_comes_back_as_it_was_written(store: SurveyStorage) -> None:
    add(store)
    assert get(store) == ONE
    assert str(get(store).request) == str(ONE.request)
    assert store.get("a2") is None
    assert list(store.left("a1", -1, 10)) == PIECES
    assert list(store.left("a1", 0, 1)) == [PIECES[1]]
    assert list(store.sizes("a1")) == [3, 3, 1]


def test_what_is_made_is_kept_once_and_counted_once(store: SurveyStorage) -> None:
    add(store)
    assert store.begin("a1", AT)
    assert store.keep("a1", [made(1, reachable=2, refused=1)])
    assert store.keep("a1", [MadePiece(1, b"other", {"reachable": 9}), made(0, reachable=3)])
    found = get(store)
    assert (found.state, found.done, found.counts) == (RUNNING, 6, {"reachable": 5, "refused": 1})
    assert store.made("a1", 1) == b"\x01\x01\x01"
    assert list(store.left("a1", -1, 10)) == [PIECES[2]]


def test_the_first_bytes_of_what_was_made(store: SurveyStorage) -> None:
    add(store)
    store.begin("a1", AT)
    long = bytes(range(256)) * 40
    store.keep("a1", [MadePiece(2, long, {}), MadePiece(0, b"\x00x", {}), MadePiece(1, long, {})])
    assert store.beginnings("a1", 300) == [b"\x00x", long[:300], long[:300]]
    assert store.beginnings("a2", 300) == []


def test_a_state_that_is_the_last_stays(store: SurveyStorage) -> None:
    add(store)
    assert not store.keep("a1", [made(0)])  # nobody has begun
    assert store.begin("a1", AT)
    assert store.begin("a1", datetime.now(UTC))  # goes on after a kill; it has begun when it did
    assert get(store).started_at == AT
    assert store.end("a1", CANCELLED, AT)
    assert not store.end("a1", SUCCEEDED, AT)
    assert not store.end("a1", FAILED, AT, "late")
    assert not store.begin("a1", AT)
    assert not store.keep("a1", [made(0)])
    found = get(store)
    assert (found.state, found.reason, found.finished_at, found.done) == (CANCELLED, "", AT, 0)


def test_the_oldest_open_one_is_next(store: SurveyStorage) -> None:
    assert store.next_open() is None
    for name in ("b2", "a1", "c3"):
        add(store, name)
    assert store.count_open() == 3
    order = []
    while (found := store.next_open()) is not None:
        order.append(found.id)
        store.end(found.id, FAILED, AT, "why")
    assert order == ["a1", "b2", "c3"]
    assert store.count_open() == 0
    assert get(store).reason == "why"


def test_pages_go_back_from_the_newest(store: SurveyStorage) -> None:
    names = [f"{number:02}" for number in range(7)]
    for name in names:
        add(store, name)

    def ids(page: Sequence[Survey]) -> list[str]:
        return [survey.id for survey in page]

    assert ids(store.page("", 3)) == ["06", "05", "04"]
    assert ids(store.page("04", 3)) == ["03", "02", "01"]
    assert ids(store.page("00", 3)) == []


def test_a_key_makes_one_survey(store: SurveyStorage) -> None:
    add(store, "a1", "key", "one body")
    with pytest.raises(KeyUsed) as caught:
        add(store, "b2", "key", "another")
    assert (caught.value.survey, caught.value.digest) == (ONE, "one body")
    assert store.get("b2") is None
    assert store.sent("key") == (ONE, "one body")
    assert store.sent("other key") is None
    add(store, "b2", "other key")
    add(store, "c3")
    add(store, "d4")
    assert store.count_open() == 4


def test_of_many_with_one_key_one_is_taken(store: SurveyStorage) -> None:
    def post(number: int) -> str:
        try:
            add(store, f"{number:02}", "key")
        except KeyUsed as used:
            return used.survey.id
        return f"{number:02}"

    with ThreadPoolExecutor(8) as pool:
        assert len(set(pool.map(post, range(16)))) == 1
    assert store.count_open() == 1


def test_what_is_removed_is_gone(store: SurveyStorage) -> None:
    add(store, "a1", "key")
    add(store, "b2")
    store.remove("a1")
    store.remove("a1")
    assert store.get("a1") is None
    with pytest.raises(UnknownSurvey):
        store.made("a1", 0)
    assert list(store.sizes("a1")) == []
    assert list(store.sizes("b2")) == [3, 3, 1]
    add(store, "c3", "key")  # a key lasts as long as its survey
    assert not store.end("a1", CANCELLED, AT)
    assert not store.begin("a1", AT)
    assert not store.keep("a1", [])


def test_what_was_over_before_a_moment(store: SurveyStorage) -> None:
    for number, (name, state) in enumerate(
        [("a1", SUCCEEDED), ("a2", CANCELLED), ("a3", FAILED), ("a4", "")]
    ):
        add(store, name)
        store.begin(name, AT)
        if state:
            store.end(name, state, AT + timedelta(days=number))
    assert store.over_before(AT, 9) == []
    assert store.over_before(AT + timedelta(days=1, seconds=1), 9) == ["a1", "a2"]
    assert store.over_before(AT + timedelta(days=99), 9) == ["a1", "a2", "a3"]
    assert store.over_before(AT + timedelta(days=99), 2) == ["a1", "a2"]


def test_writers_at_once_lose_no_count(store: SurveyStorage) -> None:
    pieces = [GivenPiece(number, 2, b"") for number in range(40)]
    store.add(replace(ONE, total=80), pieces, key=None, digest="")
    store.begin("a1", AT)

    def keep(number: int) -> bool:
        return store.keep("a1", [made(number, seen=1)])

    with ThreadPoolExecutor(6) as pool:
        assert all(pool.map(keep, [*range(40), *range(40)]))
    assert (get(store).done, get(store).counts) == (80, {"seen": 40})


def test_one_process_leads(opened: OpenStorage, request: pytest.FixtureRequest) -> None:
    assert opened.surveys.may_lead()
    assert opened.surveys.may_lead()
    if "postgresql" not in request.node.name:
        return
    url = opened.surveys._engine.url.render_as_string(hide_password=False)
    other = open_storage(Settings(database=url.replace("+psycopg", "")))
    try:
        assert not other.surveys.may_lead()
        opened.surveys.close()
        assert other.surveys.may_lead()
        # The database server is started anew: whoever led finds out when it is asked again.
        with other.surveys._engine.begin() as connection:
            lead: Any = other.surveys._lead
            leader = lead.connection.dbapi_connection.info.backend_pid
            connection.execute(sa.text("SELECT pg_terminate_backend(:pid)"), {"pid": leader})
        deadline = time.monotonic() + 5
        while not opened.surveys.may_lead():
            assert time.monotonic() < deadline
            time.sleep(0.01)
        assert not other.surveys.may_lead()
    finally:
        other.close()


def test_a_full_disk_is_told_and_undoes_the_step(small_disk: SmallDisk) -> None:
    opened = open_storage(Settings(database=str(small_disk.folder / "arms.db")))
    store: Any = opened.surveys
    add(store)
    store.begin("a1", AT)
    small_disk.fill(leave=0)
    with pytest.raises(StorageUnavailable, match="disk is full"):
        store.keep("a1", [MadePiece(0, b"x" * 500_000, {"seen": 1})])
    assert (get(store).done, get(store).counts) == (0, {})
    small_disk.free()
    assert store.keep("a1", [made(0, seen=1)])
    assert get(store).done == 3
    opened.close()


def test_a_title_may_hold_any_character(store: SurveyStorage) -> None:
    titled = replace(ONE, title="zero \0 and \u00df")
    store.add(titled, [], key=None, digest="")
    assert store.get(ONE.id) == titled
