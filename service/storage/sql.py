"""The store of arms in SQL, one code for SQLite and PostgreSQL.

Left out: opening, migrating and closing the database (``opening.py``).
"""

import logging
from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager

import sqlalchemy as sa

from service.errors import StorageUnavailable
from service.storage.ports import Draft, Head, HeadDiffers, Hiding, Revision
from service.storage.rows import milliseconds, revision_from, revision_of, row_of
from service.storage.schema import HEADS, NAME, REVISIONS

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

# Questions are built once: building one takes longer than SQLite takes to answer it, and a
# controller asks for the head at every cycle.
_NAME = sa.bindparam("name", type_=NAME)
_LIMIT = sa.bindparam("limit", type_=sa.Integer)
_HEAD_ROWS = sa.and_(REVISIONS.c.name == HEADS.c.name, REVISIONS.c.revision == HEADS.c.revision)
_HEAD = sa.select(REVISIONS).join(HEADS, _HEAD_ROWS).where(HEADS.c.name == _NAME, ~HEADS.c.hidden)
_HEAD_NUMBER = sa.select(HEADS.c.revision).where(HEADS.c.name == _NAME, ~HEADS.c.hidden)
_LAST_NUMBER = sa.select(HEADS.c.revision).where(HEADS.c.name == _NAME).with_for_update()
_REVISION = sa.select(REVISIONS).where(
    REVISIONS.c.name == _NAME, REVISIONS.c.revision == sa.bindparam("number")
)
_REVISIONS = (
    sa.select(REVISIONS)
    .where(REVISIONS.c.name == _NAME, REVISIONS.c.revision > sa.bindparam("after"))
    .order_by(REVISIONS.c.revision)
    .limit(_LIMIT)
)
_HEADS = (
    sa.select(REVISIONS)
    .join(HEADS, _HEAD_ROWS)
    .where(HEADS.c.name > sa.bindparam("after"), ~HEADS.c.hidden)
    .order_by(HEADS.c.name)
    .limit(_LIMIT)
)
_COUNT = sa.select(sa.func.count()).select_from(HEADS).where(~HEADS.c.hidden)


class SqlArmStorage:
    """``ArmStorage`` over an engine whose database has the present layout.

    Parameters
    ----------
    engine : the database.
    refuses_writes : why users cannot write, or "" when they can.
    takes_seeds : whether a refused write is let through with ``seed``.
    state : see ``ArmStorage.state``; None where it cannot be told.
    """

    def __init__(
        self,
        engine: sa.Engine,
        *,
        refuses_writes: str = "",
        takes_seeds: bool = True,
        state: Callable[[], int | None] | None = None,
    ) -> None:
        self._engine = engine
        self._state = state
        self._refuses_writes = refuses_writes
        self._takes_seeds = takes_seeds

    def head(self, name: str) -> Revision | None:
        """See ``ArmStorage.head``."""
        with self._asking() as connection:
            return _head(connection, name)

    def head_number(self, name: str) -> int | None:
        """See ``ArmStorage.head_number``."""
        with self._asking() as connection:
            return connection.execute(_HEAD_NUMBER, {"name": name}).scalar()

    def revision(self, name: str, number: int) -> Revision | None:
        """See ``ArmStorage.revision``."""
        with self._asking() as connection:
            row = connection.execute(_REVISION, {"name": name, "number": number}).first()
            return None if row is None else revision_from(row)

    def revisions(self, name: str, after: int, limit: int) -> Sequence[Revision]:
        """See ``ArmStorage.revisions``."""
        bounds = {"name": name, "after": after, "limit": limit}
        with self._asking() as connection:
            return [revision_from(row) for row in connection.execute(_REVISIONS, bounds)]

    def heads(self, after_name: str, limit: int) -> Sequence[Revision]:
        """See ``ArmStorage.heads``."""
        bounds = {"after": after_name, "limit": limit}
        with self._asking() as connection:
            return [revision_from(row) for row in connection.execute(_HEADS, bounds)]

    def count(self) -> int:
        """See ``ArmStorage.count``."""
        with self._asking() as connection:
            return connection.execute(_COUNT).scalar_one()

    def write(self, draft: Draft, expected: int | Head, *, seed: bool = False) -> Revision:
        """See ``ArmStorage.write``."""
        try:
            with self._writing(seed) as connection:
                last = _locked_number(connection, draft.name)
                _check(connection, draft.name, expected)
                written = revision_of(draft, 1 if last is None else last + 1)
                connection.execute(REVISIONS.insert().values(row_of(written)))
                _put_head(connection, written, is_new=last is None)
                return written
        except sa.exc.IntegrityError:
            # Two created the same name at once, and this one came second: no row to lock yet.
            raise HeadDiffers(self.head(draft.name)) from None

    def hide(self, name: str, expected: int | Head, hiding: Hiding) -> None:
        """See ``ArmStorage.hide``."""
        with self._writing(seed=False) as connection:
            last = _locked_number(connection, name)
            _check(connection, name, expected)
            connection.execute(HEADS.update().where(HEADS.c.name == name).values(hidden=True))
            connection.execute(
                REVISIONS.update()
                .where(REVISIONS.c.name == name, REVISIONS.c.revision == last)
                .values(
                    hidden_by=hiding.author,
                    hidden_reason=hiding.reason,
                    hidden_at_ms=milliseconds(hiding.at),
                )
            )

    def state(self) -> int | None:
        """See ``ArmStorage.state``."""
        return None if self._state is None else self._state()

    def ping(self) -> None:
        """See ``ArmStorage.ping``."""
        with self._asking() as connection:
            connection.execute(sa.select(1))

    @contextmanager
    def _asking(self) -> Iterator[sa.Connection]:
        try:
            with self._engine.connect() as connection:
                yield connection
        except (sa.exc.DBAPIError, sa.exc.TimeoutError) as error:
            raise _unavailable(error, "read") from error

    @contextmanager
    def _writing(self, seed: bool) -> Iterator[sa.Connection]:
        if self._refuses_writes and not (seed and self._takes_seeds):
            raise StorageUnavailable(
                f"nothing can be stored: {self._refuses_writes}",
                way_out="start the service with a database it can write to",
            )
        try:
            with writing(self._engine) as connection:
                yield connection
        except sa.exc.IntegrityError:
            raise
        except (sa.exc.DBAPIError, sa.exc.TimeoutError) as error:
            raise _unavailable(error, "stored") from error


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


def _unavailable(error: Exception, what: str) -> StorageUnavailable:
    reason = reason_of(error)
    _LOG.error("arms cannot be %s: %s (%s)", what, reason, getattr(error, "orig", error))
    return StorageUnavailable(
        f"arms cannot be {what} now: {reason}", way_out="try again when this is mended"
    )


def _head(connection: sa.Connection, name: str) -> Revision | None:
    row = connection.execute(_HEAD, {"name": name}).first()
    return None if row is None else revision_from(row)


def _locked_number(connection: sa.Connection, name: str) -> int | None:
    """Return the last number given to ``name``, hidden or not, and keep others from writing it."""
    return connection.execute(_LAST_NUMBER, {"name": name}).scalar()


def _check(connection: sa.Connection, name: str, expected: int | Head) -> None:
    current = _head(connection, name)
    found = Head.ABSENT if current is None else current.revision
    if found == expected or (expected is Head.ANY and current is not None):
        return
    raise HeadDiffers(current)


def _put_head(connection: sa.Connection, written: Revision, *, is_new: bool) -> None:
    values = {"revision": written.revision, "hidden": False}
    if is_new:
        connection.execute(HEADS.insert().values(name=written.name, **values))
    else:
        connection.execute(HEADS.update().where(HEADS.c.name == written.name).values(**values))
