"""Tells cheaply whether anything in a SQLite file has changed, whoever changed it.

Left out: what changed. A database server has no such means that a request could afford.
"""

import sqlite3
import threading

import sqlalchemy as sa


class FileState:
    """The state of a SQLite file, as a number that is another one after every commit.

    Keeps one connection that never writes: to it every commit, by this process or another, is
    somebody else's. Asking takes some microseconds.
    """

    def __init__(self, engine: sa.Engine) -> None:
        self._connection = engine.raw_connection()
        self._cursor = self._connection.cursor()
        self._lock = threading.Lock()

    def __call__(self) -> int | None:
        """Return the state's number; None when the file does not answer."""
        try:
            with self._lock:
                self._cursor.execute("PRAGMA data_version")
                row = self._cursor.fetchone()
        except sqlite3.Error:
            return None
        return None if row is None else int(row[0])

    def close(self) -> None:
        """Give the connection back."""
        self._connection.close()
