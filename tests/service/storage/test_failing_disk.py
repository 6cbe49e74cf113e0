"""A disk that fills up or turns read-only under a running service: 503 for writes, reads go on.

Full: a real file system of 1 MiB where one can be mounted, and SQLite's own page limit, which
gives the same SQLITE_FULL anywhere. Read-only: a connection that SQLite itself lets write nothing.
"""

from collections.abc import Callable
from contextlib import closing
from pathlib import Path
from typing import Any, Protocol

import pytest
import sqlalchemy as sa

from service.errors import StorageUnavailable
from service.settings import Settings
from service.storage.opening import OpenStorage, open_storage
from service.storage.ports import Draft, Head, Revision

Drafts = Callable[..., Draft]


class Disk(Protocol):
    folder: Path

    def fill(self, leave: int) -> None: ...
    def free(self) -> None: ...


def write_until_refused(opened: OpenStorage, draft: Drafts) -> tuple[list[Revision], str]:
    written: list[Revision] = []
    for _ in range(1000):
        document = {"name": "press-arm", "notes": "x" * 20_000, "step": len(written)}
        try:
            written.append(opened.arms.write(draft(document=document), len(written) or Head.ABSENT))
        except StorageUnavailable as error:
            return written, error.say
    pytest.fail("the disk never filled up")


def intact(opened: OpenStorage) -> bool:
    with opened.arms._engine.connect() as connection:
        return connection.exec_driver_sql("PRAGMA integrity_check").scalar() == "ok"


def holds_exactly(opened: OpenStorage, written: list[Revision]) -> bool:
    storage = opened.arms
    return (
        storage.head("press-arm") == written[-1]
        and list(storage.revisions("press-arm", 0, 2000)) == written
        and storage.count() == 1
    )


def test_a_full_disk_refuses_writes_and_goes_on_reading(small_disk: Disk, draft: Drafts) -> None:
    path = small_disk.folder / "arms.db"
    with closing(open_storage(Settings(database=str(path)))) as opened:
        small_disk.fill(leave=300_000)
        written, say = write_until_refused(opened, draft)
        assert len(written) > 2
        assert "the disk is full" in say
        assert holds_exactly(opened, written)
        assert intact(opened)
        small_disk.free()
        written.append(opened.arms.write(draft(), len(written)))
        assert holds_exactly(opened, written)
    with closing(open_storage(Settings(database=str(path)))) as opened:
        assert holds_exactly(opened, written)


def test_a_full_disk_at_the_start_leaves_reading(small_disk: Disk, draft: Drafts) -> None:
    path = small_disk.folder / "arms.db"
    with closing(open_storage(Settings(database=str(path)), serving=False)) as opened:
        written = opened.arms.write(draft(), Head.ABSENT)
    small_disk.fill(leave=0)
    with closing(open_storage(Settings(database=str(path)))) as opened:
        assert opened.arms.head("press-arm") == written
        with pytest.raises(StorageUnavailable):
            opened.arms.write(draft(document={"notes": "x" * 100_000}), 1)
        assert opened.arms.head("press-arm") == written


def test_a_disk_too_full_for_a_new_database_means_memory(small_disk: Disk) -> None:
    small_disk.fill(leave=0)
    path = small_disk.folder / "arms.db"
    with closing(open_storage(Settings(database=str(path)))) as opened:
        assert not opened.writable
        assert opened.description == "memory"
        assert "disk" in opened.notices[0]
    assert not path.exists()


def test_a_database_at_its_page_limit_refuses_writes_and_goes_on_reading(
    tmp_path: Path, draft: Drafts
) -> None:
    with closing(open_storage(Settings(database=str(tmp_path / "arms.db")))) as opened:
        on_each_connection(opened, "PRAGMA max_page_count = 60")
        written, say = write_until_refused(opened, draft)
        assert len(written) > 2
        assert "the disk is full" in say
        assert holds_exactly(opened, written)
        assert intact(opened)


def test_a_database_that_turns_read_only_refuses_writes_and_goes_on_reading(
    tmp_path: Path, draft: Drafts
) -> None:
    with closing(open_storage(Settings(database=str(tmp_path / "arms.db")))) as opened:
        written = [opened.arms.write(draft(), Head.ABSENT)]
        on_each_connection(opened, "PRAGMA query_only = ON")
        with pytest.raises(StorageUnavailable, match="read-only"):
            opened.arms.write(draft(), 1)
        assert holds_exactly(opened, written)


def test_a_database_file_that_vanishes_answers_503_and_is_not_made_anew(
    tmp_path: Path, draft: Drafts
) -> None:
    path = tmp_path / "arms.db"
    with closing(open_storage(Settings(database=str(path)))) as opened:
        opened.arms.write(draft(), Head.ABSENT)
        opened.arms._engine.dispose()
        for file in tmp_path.glob("arms.db*"):
            file.unlink()
        for ask in (opened.arms.ping, opened.arms.count):
            with pytest.raises(StorageUnavailable, match="cannot be opened"):
                ask()
        with pytest.raises(StorageUnavailable, match="cannot be opened"):
            opened.arms.write(draft(), 1)
        assert not path.exists()


def test_a_refusal_shows_no_sql(tmp_path: Path, draft: Drafts) -> None:
    with closing(open_storage(Settings(database=str(tmp_path / "arms.db")))) as opened:
        with opened.arms._engine.connect() as connection:
            connection.exec_driver_sql("DROP TABLE document_heads")
        with pytest.raises(StorageUnavailable) as caught:
            opened.arms.count()
        assert "document_heads" not in caught.value.say
        assert "SELECT" not in caught.value.say


def on_each_connection(opened: OpenStorage, pragma: str) -> None:
    @sa.event.listens_for(opened.arms._engine, "checkout")
    def tell(connection: Any, _record: object, _proxy: object) -> None:
        connection.execute(pragma)
