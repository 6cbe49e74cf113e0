"""The stores in SQL, one code for SQLite and PostgreSQL.

Left out: opening, migrating and closing the database (``opening.py``), the questions it is asked
(``statements.py``), and how stores ask and write (``store.py``).
"""

from collections.abc import Callable, Sequence
from contextlib import AbstractContextManager
from typing import Any

import sqlalchemy as sa

from service.storage import statements
from service.storage.ports import (
    CellInUse,
    CellMoved,
    CellRevision,
    Draft,
    Following,
    Head,
    HeadDiffers,
    Hiding,
    Kind,
    Revision,
)
from service.storage.rows import milliseconds, revision_from, revision_of, row_of
from service.storage.schema import HEADS, REVISIONS
from service.storage.store import asking, storing


class SqlStorage:
    """``Storage`` of one kind of document over an engine whose database has the present layout.

    Parameters
    ----------
    engine : the database.
    kind : of the documents.
    refuses_writes : why users cannot write, or "" when they can.
    takes_seeds : whether a refused write is let through with ``seed``.
    state : see ``Storage.state``; None where it cannot be told.
    """

    def __init__(
        self,
        engine: sa.Engine,
        kind: Kind,
        *,
        refuses_writes: str = "",
        takes_seeds: bool = True,
        state: Callable[[], int | None] | None = None,
    ) -> None:
        self._engine = engine
        self._kind = kind
        self._state = state
        self._refuses_writes = refuses_writes
        self._takes_seeds = takes_seeds

    def head(self, name: str) -> Revision | None:
        """See ``Storage.head``."""
        with self._asking() as connection:
            return _head(connection, self._kind, name)

    def head_number(self, name: str) -> int | None:
        """See ``Storage.head_number``."""
        with self._asking() as connection:
            return connection.execute(
                statements.HEAD_NUMBER, {"kind": self._kind, "name": name}
            ).scalar()

    def revision(self, name: str, number: int) -> Revision | None:
        """See ``Storage.revision``."""
        found = self._revisions(statements.REVISION, {"name": name, "number": number})
        return found[0] if found else None

    def revisions(self, name: str, after: int, limit: int) -> Sequence[Revision]:
        """See ``Storage.revisions``."""
        bounds = {"name": name, "after": after, "limit": limit}
        return self._revisions(statements.REVISIONS_AFTER, bounds)

    def heads(self, after_name: str, limit: int) -> Sequence[Revision]:
        """See ``Storage.heads``."""
        return self._revisions(statements.HEADS_AFTER, {"after": after_name, "limit": limit})

    def standing_in(self, cell: str) -> Sequence[Revision]:
        """See ``Storage.standing_in``."""
        return self._revisions(statements.STANDING_IN, {"cell": cell})

    def count(self) -> int:
        """See ``Storage.count``."""
        with self._asking() as connection:
            return connection.execute(statements.COUNT, {"kind": self._kind}).scalar_one()

    def write(
        self,
        draft: Draft,
        expected: int | Head,
        *,
        seed: bool = False,
        following: Sequence[Following] = (),
    ) -> Revision:
        """See ``Storage.write``."""
        try:
            with self._writing(seed) as connection:
                # A cell before its arms, here and below: two writers that wait for each other
                # would both wait for ever.
                if draft.cell is not None:
                    _hold(connection, draft.cell)
                written = _write(connection, self._kind, draft, expected)
                if self._kind == "cell":
                    _write_following(connection, written, following)
                return written
        except sa.exc.IntegrityError:
            # Two created the same name at once, and this one came second: no row to lock yet.
            raise HeadDiffers(self.head(draft.name)) from None

    def hide(self, name: str, expected: int | Head, hiding: Hiding) -> None:
        """See ``Storage.hide``."""
        with self._writing(seed=False) as connection:
            last = _locked_number(connection, self._kind, name)
            _check(connection, self._kind, name, expected)
            if self._kind == "cell":
                arms = _standing_in(connection, name)
                if arms:
                    raise CellInUse(list(arms))
            _update(connection, HEADS, {"kind": self._kind, "name": name}, hidden=True)
            _update(
                connection,
                REVISIONS,
                {"kind": self._kind, "name": name, "revision": last},
                hidden_by=hiding.author,
                hidden_reason=hiding.reason,
                hidden_at_ms=milliseconds(hiding.at),
            )

    def state(self) -> int | None:
        """See ``Storage.state``."""
        return None if self._state is None else self._state()

    def ping(self) -> None:
        """See ``Storage.ping``."""
        with self._asking() as connection:
            connection.execute(sa.select(1))

    def _revisions(self, question: sa.Select[Any], bounds: dict[str, Any]) -> list[Revision]:
        with self._asking() as connection:
            rows = connection.execute(question, {"kind": self._kind, **bounds})
            return [revision_from(row) for row in rows]

    def _asking(self) -> AbstractContextManager[sa.Connection]:
        return asking(self._engine, f"{self._kind}s")

    def _writing(self, seed: bool) -> AbstractContextManager[sa.Connection]:
        refused = "" if seed and self._takes_seeds else self._refuses_writes
        return storing(self._engine, f"{self._kind}s", refused)


def _head(connection: sa.Connection, kind: Kind, name: str) -> Revision | None:
    row = connection.execute(statements.HEAD, {"kind": kind, "name": name}).first()
    return None if row is None else revision_from(row)


def _locked_number(connection: sa.Connection, kind: Kind, name: str) -> int | None:
    """Return the last number given to ``name``, hidden or not, and keep others from writing it."""
    return connection.execute(statements.LAST_NUMBER, {"kind": kind, "name": name}).scalar()


def _check(connection: sa.Connection, kind: Kind, name: str, expected: int | Head) -> None:
    current = _head(connection, kind, name)
    found = Head.ABSENT if current is None else current.revision
    if found == expected or (expected is Head.ANY and current is not None):
        return
    raise HeadDiffers(current)


def _hold(connection: sa.Connection, cell: CellRevision) -> None:
    """Keep the cell at the revision the arm was read against, until the arm is stored."""
    asked = {"kind": "cell", "name": cell.name}
    if connection.execute(statements.HELD_NUMBER, asked).scalar() != cell.revision:
        raise CellMoved


def _standing_in(connection: sa.Connection, cell: str) -> dict[str, int]:
    """Return the head numbers of the arms that stand in a cell."""
    rows = connection.execute(statements.STANDING_IN, {"kind": "arm", "cell": cell})
    return {row.name: row.revision for row in rows}


def _write_following(
    connection: sa.Connection, cell: Revision, following: Sequence[Following]
) -> None:
    prepared = {each.draft.name: each.head for each in following}
    if prepared != _standing_in(connection, cell.name):
        raise CellMoved
    for each in sorted(following, key=lambda each: each.draft.name):
        try:
            _write(connection, "arm", each.draft, each.head)
        except HeadDiffers as error:
            raise CellMoved from error


def _write(connection: sa.Connection, kind: Kind, draft: Draft, expected: int | Head) -> Revision:
    last = _locked_number(connection, kind, draft.name)
    _check(connection, kind, draft.name, expected)
    written = revision_of(draft, 1 if last is None else last + 1)
    connection.execute(REVISIONS.insert().values(kind=kind, **row_of(written)))
    head = {"kind": kind, "name": written.name}
    values = {"revision": written.revision, "hidden": False}
    if last is None:
        connection.execute(HEADS.insert().values(**head, **values))
    else:
        _update(connection, HEADS, head, **values)
    return written


def _update(
    connection: sa.Connection, table: sa.Table, which: dict[str, Any], **values: object
) -> None:
    rows = [table.c[column] == value for column, value in which.items()]
    connection.execute(table.update().where(*rows).values(**values))
