"""Looks at a SQLite file without touching it, and refuses what is damaged or not ours.

Left out: opening it for use (``opening.py``). A refused file gets no side files either.
"""

import shutil
import sqlite3
import tempfile
from collections.abc import Iterator
from contextlib import closing, contextmanager
from pathlib import Path

from service.errors import StorageUnusable
from service.storage.engines import BUSY_TIMEOUT_S, FileMode, file_address
from service.storage.layouts import LAYOUTS

# "Aspn" in ASCII; SQLite keeps it at byte 68 of the file for the program that owns the data.
APPLICATION_ID = int.from_bytes(b"Aspn", "big")

_HEADER_BYTES = 100
_REFUSALS = {
    "SQLITE_NOTADB": "it is no SQLite database, or its head is damaged",
    "SQLITE_BUSY": "another program holds it locked",
    "SQLITE_CANTOPEN": "it cannot be read",
}
_WAY_OUT = "put a backup in its place, or name another file with --database"


def inspect(path: Path) -> str | None:
    """Return the layout of the database in ``path``, or None when nothing is in it yet.

    Raises
    ------
    StorageUnusable : no SQLite file, another program's, damaged, or written by a newer version.

    Source: SQLite file format, section 1.3 "The Database Header".
    """
    # Only SQLite may open the file: closing it by any other hand would drop the locks that this
    # process holds on it (SQLite, "How To Corrupt An SQLite Database File", section 2.2).
    size = path.stat().st_size
    if size == 0:
        return None
    if size < _HEADER_BYTES:
        raise unusable(path, "it is no SQLite database")
    try:
        with _view(path) as connection:
            if connection.execute("PRAGMA application_id").fetchone()[0] != APPLICATION_ID:
                _refuse_unless_empty(path, connection)
                return None
            return _checked_layout(path, connection)
    except (sqlite3.DatabaseError, OSError) as error:
        name = getattr(error, "sqlite_errorname", "SQLITE_CANTOPEN")
        raise unusable(path, _REFUSALS.get(name, "it is damaged")) from error


def unusable(path: Path, reason: str, way_out: str = _WAY_OUT) -> StorageUnusable:
    """Return the refusal of ``path``: a clause that says why, and what to do about it."""
    say = f"the database {path} cannot be used: {reason}; it was left as it is"
    return StorageUnusable(say, value=str(path), way_out=way_out)


def _refuse_unless_empty(path: Path, connection: sqlite3.Connection) -> None:
    tables = connection.execute("SELECT count(*) FROM sqlite_master").fetchone()[0]
    marked = connection.execute("PRAGMA application_id").fetchone()[0]
    if tables or marked:
        raise unusable(path, "it belongs to another program")


def _checked_layout(path: Path, connection: sqlite3.Connection) -> str | None:
    verdict = connection.execute("PRAGMA quick_check(1)").fetchone()[0]
    if verdict != "ok":
        raise unusable(path, "it is damaged")
    has_layout = connection.execute(
        "SELECT count(*) FROM sqlite_master WHERE type = 'table' AND name = 'alembic_version'"
    ).fetchone()[0]
    row = has_layout and connection.execute("SELECT version_num FROM alembic_version").fetchone()
    if not row:
        return None
    if row[0] not in LAYOUTS:
        raise unusable(path, f"a newer version of armspan wrote it (layout {row[0]})")
    return str(row[0])


@contextmanager
def _view(path: Path) -> Iterator[sqlite3.Connection]:
    """Open ``path`` so that neither it nor its folder changes, whatever state it was left in.

    With a shared-memory file beside it a process is at work (or was killed), and only an ordinary
    reader sees one state. A log or journal alone is worked off in a private copy. Else the file
    is all there is, and is read as immutable.
    """
    leftovers = [_beside(path, end) for end in ("-wal", "-journal")]
    if _beside(path, "-shm").exists():
        with closing(_connect(path, "ro")) as connection:
            yield connection
    elif any(_has_content(leftover) for leftover in leftovers):
        with tempfile.TemporaryDirectory(prefix="armspan-") as folder:
            for source in (path, *leftovers):
                if source.exists():
                    shutil.copyfile(source, Path(folder) / source.name)
            with closing(_connect(Path(folder) / path.name, "rw")) as connection:
                yield connection
    else:
        with closing(_connect(path, "immutable")) as connection:
            yield connection


def _connect(path: Path, mode: FileMode) -> sqlite3.Connection:
    return sqlite3.connect(
        file_address(path, mode), uri=True, timeout=BUSY_TIMEOUT_S, isolation_level=None
    )


def _beside(path: Path, end: str) -> Path:
    return path.with_name(path.name + end)


def _has_content(path: Path) -> bool:
    return path.exists() and path.stat().st_size > 0
