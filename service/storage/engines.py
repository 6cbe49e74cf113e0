"""SQLAlchemy engines for the places arms are kept: a SQLite file, memory, a database server.

Left out: what is asked of them (``sql.py``), and whether a file may be opened (``inspection.py``).
"""

import sqlite3
from collections.abc import Callable
from pathlib import Path
from typing import Literal

import sqlalchemy as sa
from sqlalchemy.pool import QueuePool

# Beside a request a writer holds the database for milliseconds; `armspan arms add` on a slow disk
# for tenths of a second. Longer than this means something is stuck, and the caller should hear it.
BUSY_TIMEOUT_S = 5.0

FileMode = Literal["rw", "ro", "immutable"]


def file_address(path: Path, mode: FileMode) -> str:
    """Return the SQLite URI of ``path``; ``immutable`` reads without locks or side files.

    Examples
    --------
    >>> file_address(Path("/data/a b.db"), "immutable")
    'file:///data/a%20b.db?mode=ro&immutable=1'
    """
    return path.as_uri() + ("?mode=ro&immutable=1" if mode == "immutable" else f"?mode={mode}")


def on_file(path: Path, mode: FileMode) -> sa.Engine:
    """Return an engine on a SQLite file; nothing is opened before the first question."""
    address = file_address(path, mode)

    def connect() -> sqlite3.Connection:
        connection = sqlite3.connect(
            address,
            uri=True,
            timeout=BUSY_TIMEOUT_S,
            isolation_level=None,
            check_same_thread=False,
        )
        # FULL: an answered write survives a power cut, which WAL alone does not promise.
        connection.execute("PRAGMA synchronous=FULL")
        connection.execute("PRAGMA foreign_keys=ON")
        return connection

    # More connections than worker threads of the event loop (40), so that none waits for one.
    return _sqlite_engine(connect, pool_size=8, max_overflow=40)


def in_memory() -> sa.Engine:
    """Return an engine on a SQLite database that lives and dies with its only connection."""

    def connect() -> sqlite3.Connection:
        connection = sqlite3.connect(":memory:", isolation_level=None, check_same_thread=False)
        connection.execute("PRAGMA foreign_keys=ON")
        return connection

    return _sqlite_engine(connect, pool_size=1, max_overflow=0)


def by_url(url: sa.URL) -> sa.Engine:
    """Return an engine on a database server; idle connections are tried before they are used."""
    return sa.create_engine(url, pool_pre_ping=True)


def _sqlite_engine(
    connect: Callable[[], sqlite3.Connection], pool_size: int, max_overflow: int
) -> sa.Engine:
    engine = sa.create_engine(
        "sqlite://",
        creator=connect,
        poolclass=QueuePool,
        pool_size=pool_size,
        max_overflow=max_overflow,
    )

    @sa.event.listens_for(engine, "begin")
    def begin(connection: sa.Connection) -> None:
        # A writer that reads first and locks later would fail where it could have waited. A reader
        # asks one question, which SQLite answers from one state without being told to.
        if connection.get_execution_options().get("writes", False):
            connection.exec_driver_sql("BEGIN IMMEDIATE")

    return engine
