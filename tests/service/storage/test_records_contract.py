"""What a store promises of records, held on every database (see test_storage_contract)."""

from concurrent.futures import ThreadPoolExecutor
from contextlib import closing
from dataclasses import replace
from datetime import UTC, datetime, timedelta
from pathlib import Path

import pytest

from service.errors import StorageUnavailable
from service.records.ports import Filter, Record, RecordKeyUsed, RecordStorage, Sent, Widths
from service.settings import Settings
from service.storage.opening import OpenStorage, open_storage
from tests.service.storage.conftest import SmallDisk

AT = datetime(2026, 3, 4, 5, 6, 7, 891_000, tzinfo=UTC)
ONE = Record(
    "01", "press-arm", "Größe 7'; --", 5, "good", AT, 6, 4, {"x": 0.1, "y": -0.0, "say": "ü\u2028"}
)


@pytest.fixture
def store(opened: OpenStorage) -> RecordStorage:
    """The empty store."""
    return opened.records


def fill(store: RecordStorage) -> None:
    """Keep nine records of two arms, one an hour."""
    for hour in range(9):
        store.add(
            replace(
                ONE,
                id=f"{hour:02x}",
                arm=("left-arm", "right-arm")[hour % 2],
                serial=None if hour == 8 else f"part-{hour // 3}",
                tag=hour,
                quality="bad" if hour == 4 else "good",
                sampled_at=AT + timedelta(hours=hour),
                joint_count=hour,
                orientation_count=9 if hour == 0 else 3,
            ),
            key=None,
            digest="",
        )


def ids(records: object) -> str:
    return "".join(record.id[1] for record in records)  # type: ignore[attr-defined]


def test_a_record_comes_back_as_it_was_written(store: RecordStorage) -> None:
    store.add(ONE, key=None, digest="d")
    found = store.get("01")
    assert found == ONE
    assert str(found) == str(ONE)
    assert store.get("02") is None
    assert store.get("0' OR 1=1") is None


def test_a_key_is_used_once(store: RecordStorage) -> None:
    store.add(ONE, key="k", digest="d")
    assert store.sent("k") == Sent(ONE, "d")
    assert store.sent("other") is None
    with pytest.raises(RecordKeyUsed) as caught:
        store.add(replace(ONE, id="02"), key="k", digest="e")
    assert caught.value.sent == Sent(ONE, "d")
    assert store.get("02") is None
    # Without a key the same may be kept again and again.
    for number in range(3, 6):
        store.add(replace(ONE, id=f"0{number}"), key=None, digest="d")
    assert ids(store.oldest(Filter(), "", 10)) == "1345"


def test_of_many_with_one_key_one_is_kept(store: RecordStorage) -> None:
    def add(number: int) -> str:
        try:
            store.add(replace(ONE, id=f"{number:02x}"), key="same", digest=str(number))
        except RecordKeyUsed as used:
            return used.sent.record.id
        return f"{number:02x}"

    with ThreadPoolExecutor(8) as pool:
        kept = set(pool.map(add, range(24)))
    assert len(kept) == 1
    assert [record.id for record in store.newest(Filter(), "", 30)] == list(kept)


@pytest.mark.parametrize(
    ("which", "wanted"),
    [
        (Filter(), "012345678"),
        (Filter(arm="left-arm"), "02468"),
        (Filter(arm="no-arm"), ""),
        (Filter(serial="part-1"), "345"),
        (Filter(serial="part-1", arm="right-arm"), "35"),
        (Filter(serial=""), ""),
        (Filter(tag=6), "6"),
        (Filter(tag=-(2**53)), ""),
        (Filter(quality="bad"), "4"),
        (Filter(since=AT + timedelta(hours=7)), "78"),
        (Filter(before=AT + timedelta(hours=2)), "01"),
        (Filter(since=AT + timedelta(hours=2), before=AT + timedelta(hours=4)), "23"),
        (Filter(since=AT + timedelta(hours=4), before=AT + timedelta(hours=2)), ""),
    ],
)
def test_a_filter_finds_what_it_says(store: RecordStorage, which: Filter, wanted: str) -> None:
    fill(store)
    assert ids(store.oldest(which, "", 20)) == wanted
    assert ids(store.newest(which, "", 20)) == wanted[::-1]
    widest = max((int(number) for number in wanted), default=0)
    turned = 0 if not wanted else 9 if "0" in wanted else 3
    assert store.widths(which) == Widths(widest, turned)


def test_pages_join_without_gap_or_overlap(store: RecordStorage) -> None:
    fill(store)
    seen, last = "", ""
    while found := store.oldest(Filter(), last, 4):
        seen, last = seen + ids(found), found[-1].id
    assert seen == "012345678"
    assert ids(store.newest(Filter(), "05", 3)) == "432"
    assert ids(store.newest(Filter(arm="left-arm"), "05", 1)) == "4"


def test_what_cannot_be_written_to_says_so_and_is_read(tmp_path: Path) -> None:
    path = tmp_path / "arms.db"
    with closing(open_storage(Settings(database=str(path)))) as opened:
        opened.records.add(ONE, key=None, digest="")
        opened.records._refuses_writes = "the disk is gone"
        with pytest.raises(StorageUnavailable, match="the disk is gone"):
            opened.records.add(replace(ONE, id="02"), key=None, digest="")
        assert opened.records.get("01") == ONE


def keep_or_refuse(opened: OpenStorage, number: int) -> bool:
    """Keep some kilobytes, or say that the disk is full."""
    record = replace(ONE, id=f"{number:04x}", document={"say": "x" * 4000})
    try:
        opened.records.add(record, key=str(number), digest="")
    except StorageUnavailable as error:
        return "disk is full" not in error.say
    return number < 500


def test_a_full_disk_keeps_a_record_whole_or_not_at_all(small_disk: SmallDisk) -> None:
    with closing(open_storage(Settings(database=str(small_disk.folder / "arms.db")))) as opened:
        small_disk.fill(leave=200_000)
        kept = 0
        while keep_or_refuse(opened, kept):
            kept += 1
        assert kept > 2
        found = opened.records.oldest(Filter(), "", 1000)
        assert [record.id for record in found] == [f"{number:04x}" for number in range(kept)]
        assert opened.records.sent(str(kept)) is None
        small_disk.free()
        opened.records.add(replace(ONE, id=f"{kept:04x}"), key=str(kept), digest="")
