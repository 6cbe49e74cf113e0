"""What all stores in SQL do alike: ask and write, and say in words why they cannot.

Left out: what is asked and written.
"""

import logging
from collections.abc import Iterator
from contextlib import AbstractContextManager, contextmanager

import sqlalchemy as sa

from service.errors import StorageUnavailable

_LOG = logging.getLogger(__name__)

_REASONS = {
    "SQLITE_FULL": "the disk is full",
    "SQLITE_READONLY": "the database is read-only",
    "SQLITE_BUSY": "another process holds the database",
    "SQLITE_LOCKED": "another process holds the database",
    "SQLITE_CANTOPEN": "the database file cannot be opened",
    "SQLITE_IOERR": "the disk is full or reports an error",
    "SQLITE_CORRUPT": "the database file is damaged",
    "SQLITE_NOTADB": "the database file is damaged",
}


class SqlStore:
    """A store over an engine whose database has the present layout.

    Parameters
    ----------
    what : is kept, in the plural.
    refuses_writes : why nothing can be written, or "" when it can.
    """

    def __init__(self, engine: sa.Engine, what: str, *, refuses_writes: str = "") -> None:
        self._engine, self._what, self._refuses_writes = engine, what, refuses_writes

    def _asking(self) -> AbstractContextManager[sa.Connection]:
        return asking(self._engine, self._what)

    def _writing(self) -> AbstractContextManager[sa.Connection]:
        return storing(self._engine, self._what, self._refuses_writes)


@contextmanager
def asking(engine: sa.Engine, what: str) -> Iterator[sa.Connection]:
    """Hold a connection that reads ``what``.

    Raises
    ------
    StorageUnavailable : the database fails.
    """
    try:
        with engine.connect() as connection:
            yield connection
    except (sa.exc.DBAPIError, sa.exc.TimeoutError) as error:
        raise unavailable(error, f"{what} cannot be read") from error


@contextmanager
def storing(engine: sa.Engine, what: str, refused: str) -> Iterator[sa.Connection]:
    """Hold a transaction that writes ``what``.

    Parameters
    ----------
    refused : why nothing may be written, or "".

    Raises
    ------
    StorageUnavailable : it is refused, or the database fails.
    sqlalchemy.exc.IntegrityError : as it came: callers know what it means.
    """
    if refused:
        raise StorageUnavailable(
            f"nothing can be stored: {refused}",
            way_out="start the service with a database it can write to",
        )
    try:
        with writing(engine) as connection:
            yield connection
    except sa.exc.IntegrityError:
        raise
    except (sa.exc.DBAPIError, sa.exc.TimeoutError) as error:
        raise unavailable(error, f"{what} cannot be stored") from error


@contextmanager
def writing(engine: sa.Engine) -> Iterator[sa.Connection]:
    """Hold a transaction that may write: committed at the end, undone by any exception."""
    with engine.connect().execution_options(writes=True) as connection, connection.begin():
        yield connection


def sqlite_error_name(error: BaseException) -> str:
    """Return SQLite's name for an error, e.g. ``SQLITE_FULL``, or "" for any other database's."""
    return str(getattr(getattr(error, "orig", error), "sqlite_errorname", ""))


def reason_of(error: BaseException) -> str:
    """Return why a database failed, in words for a user, without SQL or addresses.

    Examples
    --------
    >>> reason_of(sa.exc.OperationalError("SELECT 1", {}, Exception("host 10.0.0.7 is down")))
    'the database does not answer'
    """
    name = sqlite_error_name(error)
    for prefix, reason in _REASONS.items():
        if name.startswith(prefix):
            return reason
    return "the database does not answer"


def unavailable(error: Exception, what: str) -> StorageUnavailable:
    """Return the refusal of what the database failed at, and tell the log its own words."""
    reason = reason_of(error)
    _LOG.error("%s: %s (%s)", what, reason, getattr(error, "orig", error))
    return StorageUnavailable(f"{what} now: {reason}", way_out="try again when this is mended")
