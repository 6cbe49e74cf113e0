"""One server process to a SQLite file, held by a lock that dies with the process.

Left out: other writers; ``armspan arms add`` needs no such lock, SQLite itself keeps order.
"""

import sqlite3
from pathlib import Path

from service.storage.inspection import unusable


class ServerLock:
    """The lock of the server on ``path``, kept in a small SQLite file beside it.

    SQLite's own file locks are the portable ones at hand, and the system frees them when the
    process ends, however it ends. The empty lock file stays: removing it would let a third
    process lock a new file while a second still waits on the old one.

    Raises
    ------
    StorageUnusable : another server process holds the lock.
    OSError : no lock file can be made there, so nothing can be written there either.
    """

    def __init__(self, path: Path) -> None:
        lock_path = path.with_name(path.name + "-server")
        try:
            self._connection = sqlite3.connect(
                lock_path, timeout=0, isolation_level=None, check_same_thread=False
            )
        except sqlite3.OperationalError as error:
            raise OSError(f"{lock_path} cannot be made") from error
        try:
            # Nothing is ever written: a journal would only be one more file to leave behind.
            self._connection.execute("PRAGMA journal_mode = MEMORY")
            self._connection.execute("BEGIN EXCLUSIVE")
        except sqlite3.DatabaseError as error:
            self._connection.close()
            if error.sqlite_errorname.startswith("SQLITE_BUSY"):
                raise unusable(
                    path,
                    "another armspan server process has it open",
                    way_out="stop that one, name another file with --database, or use PostgreSQL, "
                    "which several processes may share",
                ) from error
            raise OSError(f"{lock_path} cannot be locked") from error

    def release(self) -> None:
        """Let another server process open the database."""
        self._connection.close()
