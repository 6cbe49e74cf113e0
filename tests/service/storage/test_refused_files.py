"""Files that are damaged, another program's or newer than this version: refused, and untouched."""

import sqlite3
from collections.abc import Callable
from contextlib import closing
from datetime import UTC, datetime
from pathlib import Path

import pytest

from service.errors import StorageUnusable
from service.settings import Settings
from service.storage.inspection import APPLICATION_ID
from service.storage.opening import open_storage
from service.storage.ports import Draft, Head

Drafts = Callable[..., Draft]


def foreign(path: Path, *statements: str) -> None:
    with closing(sqlite3.connect(path, isolation_level=None)) as connection:
        for statement in statements:
            connection.execute(statement)


def ours(path: Path) -> None:
    """A database of ours with enough in it for damage to hit something."""
    with closing(open_storage(Settings(database=str(path)), serving=False)) as opened:
        for number in range(20):
            name = f"arm-{number}"
            document = {"name": name, "notes": "x" * 3000}
            now = datetime.now(UTC)
            opened.arms.write(
                Draft(name, document, {"table_digest": "a" * 64}, "0" * 8, "", "", now), Head.ABSENT
            )


def text_file(path: Path) -> None:
    path.write_text("name;a;alpha;d;theta\n" * 40)


def one_byte(path: Path) -> None:
    # SQLite itself would take such a file for an empty one.
    path.write_bytes(b"x")


def few_bytes(path: Path) -> None:
    path.write_bytes(b"SQLite")


def header_only(path: Path) -> None:
    path.write_bytes(b"SQLite format 3\x00")


def other_program(path: Path) -> None:
    foreign(path, "CREATE TABLE songs (title TEXT)", "INSERT INTO songs VALUES ('a')")


def other_mark(path: Path) -> None:
    foreign(path, "PRAGMA application_id = 252006674")


def other_program_in_wal_mode(path: Path) -> None:
    foreign(path, "PRAGMA journal_mode = WAL", "CREATE TABLE songs (title TEXT)")


def other_program_killed(path: Path) -> None:
    """A stranger's tables are still in its write-ahead log; the file itself shows none."""
    source = path.with_name("source.db")
    connection = sqlite3.connect(source, isolation_level=None)
    connection.execute("PRAGMA journal_mode = WAL")
    connection.execute("CREATE TABLE songs (title TEXT)")
    for end in ("", "-wal"):
        content = source.with_name(source.name + end).read_bytes()
        path.with_name(path.name + end).write_bytes(content)
    connection.close()
    source.unlink()


def truncated(path: Path) -> None:
    ours(path)
    content = path.read_bytes()
    path.write_bytes(content[: len(content) // 2])


def one_page_overwritten(path: Path) -> None:
    ours(path)
    content = bytearray(path.read_bytes())
    assert len(content) > 8 * 4096
    content[4096 : 2 * 4096] = b"\xa5" * 4096
    path.write_bytes(content)


def one_table_overwritten(path: Path) -> None:
    """Everything but the arms themselves can still be read."""
    ours(path)
    with closing(sqlite3.connect(path)) as connection:
        (page,) = connection.execute(
            "SELECT rootpage FROM sqlite_master WHERE name = 'document_heads'"
        ).fetchone()
    content = bytearray(path.read_bytes())
    content[(page - 1) * 4096 : page * 4096] = b"\x00" * 4096
    path.write_bytes(content)


def all_but_the_header_overwritten(path: Path) -> None:
    ours(path)
    content = path.read_bytes()
    path.write_bytes(content[:100] + b"\xa5" * (len(content) - 100))


def newer(path: Path) -> None:
    ours(path)
    foreign(path, "UPDATE alembic_version SET version_num = '9999'")


def marked_and_nonsense(path: Path) -> None:
    content = bytearray(b"SQLite format 3\x00" + b"\xff" * 5000)
    content[68:72] = APPLICATION_ID.to_bytes(4, "big")
    path.write_bytes(content)


CASES = [
    (text_file, "no SQLite database"),
    (one_byte, "no SQLite database"),
    (few_bytes, "no SQLite database"),
    (header_only, "no SQLite database"),
    (other_program, "another program"),
    (other_mark, "another program"),
    (other_program_in_wal_mode, "another program"),
    (other_program_killed, "another program"),
    (truncated, "damaged"),
    (one_page_overwritten, "damaged"),
    (one_table_overwritten, "damaged"),
    (all_but_the_header_overwritten, "damaged"),
    (newer, "newer version"),
    (marked_and_nonsense, "damaged"),
]


def snapshot(folder: Path) -> dict[str, tuple[bytes, int]]:
    return {path.name: (path.read_bytes(), path.stat().st_mtime_ns) for path in folder.iterdir()}


@pytest.mark.parametrize("serving", [True, False])
@pytest.mark.parametrize(("make", "words"), CASES, ids=[make.__name__ for make, _ in CASES])
def test_it_is_refused_and_left_as_it_is(
    make: Callable[[Path], None], words: str, serving: bool, tmp_path: Path
) -> None:
    path = tmp_path / "arms.db"
    make(path)
    before = snapshot(tmp_path)
    with pytest.raises(StorageUnusable, match=words) as caught:
        open_storage(Settings(database=str(path)), serving=serving)
    assert str(path) in caught.value.say
    assert caught.value.way_out
    assert snapshot(tmp_path) == before


def test_a_folder_is_refused(tmp_path: Path) -> None:
    with pytest.raises(StorageUnusable, match="folder"):
        open_storage(Settings(database=str(tmp_path)))


def test_the_undamaged_file_of_these_cases_opens(tmp_path: Path) -> None:
    path = tmp_path / "arms.db"
    ours(path)
    with closing(open_storage(Settings(database=str(path)))) as opened:
        assert opened.arms.count() == 20


def test_a_killed_servers_file_opens_with_all_it_had_answered(
    tmp_path: Path, draft: Drafts
) -> None:
    """The file and its log are copied as a killed process leaves them, without shared memory."""
    live, copy = tmp_path / "live.db", tmp_path / "copy.db"
    with closing(open_storage(Settings(database=str(live)))) as opened:
        opened.arms.write(draft(), Head.ABSENT)
        for end in ("", "-wal"):
            copy.with_name(copy.name + end).write_bytes(
                live.with_name(live.name + end).read_bytes()
            )
    assert (tmp_path / "copy.db-wal").stat().st_size > 0
    with closing(open_storage(Settings(database=str(copy)))) as opened:
        assert opened.writable
        assert opened.arms.count() == 1


def test_a_start_that_was_cut_short_leaves_a_file_the_next_start_takes(tmp_path: Path) -> None:
    """Everything up to the first commit is in one transaction, of which a kill leaves nothing."""
    path = tmp_path / "arms.db"
    connection = sqlite3.connect(path, isolation_level=None)
    connection.execute("BEGIN IMMEDIATE")
    connection.execute(f"PRAGMA application_id = {APPLICATION_ID}")
    connection.execute("CREATE TABLE arm_revisions (name TEXT)")
    copy = tmp_path / "copy.db"
    copy.write_bytes(path.read_bytes())
    (tmp_path / "copy.db-journal").write_bytes((tmp_path / "arms.db-journal").read_bytes())
    connection.close()
    with closing(open_storage(Settings(database=str(copy)))) as opened:
        assert opened.writable
        assert opened.arms.count() == 0
