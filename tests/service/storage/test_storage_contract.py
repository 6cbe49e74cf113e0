"""What every store promises, of arms and of cells, held on every database.

PostgreSQL is taken from ARMSPAN_TEST_POSTGRES; without it those cases are skipped and say so.
"""

import json
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from datetime import UTC, datetime
from threading import Barrier

import pytest

from service.storage.opening import OpenStorage
from service.storage.ports import Draft, Head, HeadDiffers, Hiding, Storage

Drafts = Callable[..., Draft]
HIDING = Hiding("Bo", "scrapped", datetime(2026, 5, 6, 7, 8, 9, 123_000, tzinfo=UTC))


@pytest.fixture(params=["arms", "cells"])
def storage(request: pytest.FixtureRequest, opened: OpenStorage) -> Storage:
    """The empty store of a kind of document; that of the other kind has the same names."""
    found: Storage = getattr(opened, request.param)
    other: Storage = getattr(opened, {"arms": "cells", "cells": "arms"}[request.param])
    for name, at in (("press-arm", 3), ("a", 1), ("other", 1)):
        for number in range(at):
            draft = Draft(name, {"other": number}, {}, "", "", "", datetime.now(UTC))
            other.write(draft, number or Head.ABSENT)
    return found


def test_a_revision_comes_back_as_it_was_written(storage: Storage, draft: Drafts) -> None:
    document = {
        "name": "press-arm",
        "numbers": [0.1, -0.0, 5e-324, 1.7976931348623157e308, 2**53 + 1, 1 / 3],
        "text": 'Ä "quoted" \u0000 \U0001f527',
        "nothing": None,
    }
    written = storage.write(draft(document=document), Head.ABSENT)
    read = storage.head("press-arm")
    assert read == written
    assert read is not None
    # Compared as text too: -0.0 == 0.0 and 1 == 1.0 would hide a change.
    assert json.dumps(read.document) == json.dumps(document)
    assert (read.revision, read.author, read.reason) == (1, "Ada", "first measurement")
    assert read.digests == {"table_digest": "a" * 64, "setup_digest": "b" * 64}
    assert read.digest == "0123abcd"
    assert read.created_at == datetime(2026, 3, 4, 5, 6, 7, 891_000, tzinfo=UTC)
    assert read.hidden is None


def test_an_unknown_name_has_nothing(storage: Storage) -> None:
    assert storage.head("none") is None
    assert storage.head_number("none") is None
    assert storage.revision("none", 1) is None
    assert list(storage.revisions("none", 0, 10)) == []
    assert list(storage.heads("", 10)) == []
    assert storage.count() == 0
    storage.ping()


def test_revisions_count_up_and_old_ones_stay(storage: Storage, draft: Drafts) -> None:
    for number in (1, 2, 3):
        expected = Head.ABSENT if number == 1 else number - 1
        assert storage.write(draft(document={"v": number}), expected).revision == number
    assert storage.head_number("press-arm") == 3
    assert [storage.revision("press-arm", n).document for n in (1, 2, 3)] == [  # type: ignore[union-attr]
        {"v": 1},
        {"v": 2},
        {"v": 3},
    ]
    assert storage.revision("press-arm", 4) is None
    assert storage.count() == 1


@pytest.mark.parametrize("expected", [1, 3, Head.ABSENT])
def test_a_write_that_expects_another_head_is_refused(
    storage: Storage, draft: Drafts, expected: int | Head
) -> None:
    storage.write(draft(), Head.ABSENT)
    head = storage.write(draft(), 1)
    with pytest.raises(HeadDiffers) as caught:
        storage.write(draft(), expected)
    assert caught.value.current == head
    assert storage.head("press-arm") == head


@pytest.mark.parametrize("expected", [1, Head.ANY])
def test_a_write_that_expects_a_head_where_there_is_none_is_refused(
    storage: Storage, draft: Drafts, expected: int | Head
) -> None:
    with pytest.raises(HeadDiffers) as caught:
        storage.write(draft(), expected)
    assert caught.value.current is None
    assert storage.count() == 0


def test_any_head_will_do_where_the_writer_says_so(storage: Storage, draft: Drafts) -> None:
    storage.write(draft(), Head.ABSENT)
    assert storage.write(draft(), Head.ANY).revision == 2


def test_a_hidden_name_is_gone_and_its_revisions_stay(storage: Storage, draft: Drafts) -> None:
    first = storage.write(draft(), Head.ABSENT)
    storage.write(draft(), 1)
    storage.hide("press-arm", 2, HIDING)
    assert storage.head("press-arm") is None
    assert storage.head_number("press-arm") is None
    assert storage.count() == 0
    assert list(storage.heads("", 10)) == []
    assert storage.revision("press-arm", 1) == first
    assert [record.hidden for record in storage.revisions("press-arm", 0, 10)] == [None, HIDING]


def test_a_number_is_never_used_again(storage: Storage, draft: Drafts) -> None:
    storage.write(draft(), Head.ABSENT)
    storage.write(draft(), 1)
    storage.hide("press-arm", Head.ANY, HIDING)
    again = storage.write(draft(document={"v": "again"}), Head.ABSENT)
    assert again.revision == 3
    assert storage.head("press-arm") == again
    assert [record.revision for record in storage.revisions("press-arm", 0, 10)] == [1, 2, 3]


@pytest.mark.parametrize("expected", [1, Head.ANY])
def test_a_hidden_name_takes_no_next_revision(
    storage: Storage, draft: Drafts, expected: int | Head
) -> None:
    storage.write(draft(), Head.ABSENT)
    storage.hide("press-arm", Head.ANY, HIDING)
    with pytest.raises(HeadDiffers) as caught:
        storage.write(draft(), expected)
    assert caught.value.current is None


def test_hiding_another_head_than_expected_is_refused(storage: Storage, draft: Drafts) -> None:
    head = storage.write(draft(), Head.ABSENT)
    with pytest.raises(HeadDiffers) as caught:
        storage.hide("press-arm", 7, HIDING)
    assert caught.value.current == head
    assert storage.head("press-arm") == head


def test_hiding_what_is_not_there_is_refused(storage: Storage, draft: Drafts) -> None:
    with pytest.raises(HeadDiffers) as caught:
        storage.hide("none", Head.ANY, HIDING)
    assert caught.value.current is None
    storage.write(draft(), Head.ABSENT)
    storage.hide("press-arm", Head.ANY, HIDING)
    with pytest.raises(HeadDiffers):
        storage.hide("press-arm", Head.ANY, HIDING)


def test_heads_come_in_pages_by_the_bytes_of_their_names(storage: Storage, draft: Drafts) -> None:
    names = ["a", "a-b", "a0", "ab", "b", "hidden", "z9"]
    for name in reversed(names):
        storage.write(draft(name), Head.ABSENT)
    storage.write(draft("ab", document={"v": 2}), 1)
    storage.hide("hidden", Head.ANY, HIDING)
    expected = sorted(set(names) - {"hidden"})
    assert [record.name for record in storage.heads("", 100)] == expected
    found: list[str] = []
    while page := storage.heads(found[-1] if found else "", 2):
        assert len(page) <= 2
        found += [record.name for record in page]
    assert found == expected
    assert {record.name: record.revision for record in storage.heads("", 100)}["ab"] == 2


def test_revisions_come_in_pages_by_number(storage: Storage, draft: Drafts) -> None:
    for number in range(11):
        storage.write(draft(), number or Head.ABSENT)
    assert [record.revision for record in storage.revisions("press-arm", 0, 4)] == [1, 2, 3, 4]
    assert [record.revision for record in storage.revisions("press-arm", 8, 4)] == [9, 10, 11]
    assert list(storage.revisions("press-arm", 11, 4)) == []


def test_of_writers_with_one_expectation_exactly_one_wins(storage: Storage, draft: Drafts) -> None:
    writers = 8
    start = Barrier(writers)

    def write(writer: int, expected: int | Head) -> int | None:
        start.wait()
        try:
            return storage.write(draft(document={"writer": writer}), expected).revision
        except HeadDiffers:
            return None

    with ThreadPoolExecutor(writers) as pool:
        for step in range(10):
            expected = step or Head.ABSENT
            numbers = list(pool.map(write, range(writers), [expected] * writers))
            assert sorted(number for number in numbers if number is not None) == [step + 1]
            head = storage.head("press-arm")
            assert head is not None
            assert numbers[head.document["writer"]] == step + 1


def test_writers_that_take_any_head_lose_nothing(storage: Storage, draft: Drafts) -> None:
    writers, each = 6, 10
    storage.write(draft(document={"writer": -1, "step": 0}), Head.ABSENT)

    def write(writer: int) -> None:
        for step in range(each):
            storage.write(draft(document={"writer": writer, "step": step}), Head.ANY)

    with ThreadPoolExecutor(writers) as pool:
        list(pool.map(write, range(writers)))
    records = storage.revisions("press-arm", 1, 1000)
    assert [record.revision for record in records] == list(range(2, writers * each + 2))
    written = {(record.document["writer"], record.document["step"]) for record in records}
    assert written == {(writer, step) for writer in range(writers) for step in range(each)}
