"""Events in SQL, one code for SQLite and PostgreSQL.

Every writing of an event gets the next number of one count, so that who has read up to a number
misses neither a beginning nor an end. Writers take turns: numbers become visible in their order.
Left out: what happened, and when it is written.
"""

import json
from collections.abc import Sequence
from contextlib import suppress
from datetime import datetime
from typing import Any

import sqlalchemy as sa

from service.events.ports import OPEN, UNKNOWN, Event, Which
from service.storage.rows import milliseconds, moment
from service.storage.schema import EVENTS
from service.storage.store import SqlStore, unavailable

_COLUMNS = EVENTS.c
_LOCK = int.from_bytes(b"Even", "big")
"""On a database server: of writers while they write, and, with a watcher's number, of its life."""

_OF_SIMULATED = 10
"""One of so many may be an event of a simulated arm."""

_LAST = sa.select(sa.func.coalesce(sa.func.max(_COLUMNS.change), 0))

_UPDATE = (
    EVENTS.update()
    .where(_COLUMNS.id == sa.bindparam("new_id"))
    .values({column.name: sa.bindparam(f"new_{column.name}") for column in _COLUMNS})
)


class SqlEvents(SqlStore):
    """``EventStorage`` over an engine whose database has the present layout."""

    def __init__(self, engine: sa.Engine, *, refuses_writes: str = "") -> None:
        super().__init__(engine, "events", refuses_writes=refuses_writes)
        self._alive: sa.Connection | None = None

    def watch(self, watcher: int) -> None:
        """See ``EventStorage.watch``."""
        self.close()
        if self._on_server:
            try:
                self._live_as(watcher)
            except (sa.exc.DBAPIError, sa.exc.TimeoutError) as error:
                raise unavailable(error, "events cannot be stored") from error
        with self._writing() as connection:
            self._take_turn(connection)
            asked = sa.select(_COLUMNS.id, _COLUMNS.watcher).where(_COLUMNS.state == OPEN)
            left = connection.execute(asked.order_by(_COLUMNS.change)).all()
            gone = {number for number in {row.watcher for row in left} if self._is_gone(number)}
            change = connection.execute(_LAST).scalar_one()
            for row in left:
                if row.watcher in gone:
                    change += 1
                    this = EVENTS.update().where(_COLUMNS.id == row.id)
                    connection.execute(this.values(state=UNKNOWN, change=change))

    def write(self, events: Sequence[Event], watcher: int) -> int:
        """See ``EventStorage.write``."""
        with self._writing() as connection:
            self._take_turn(connection)
            change: int = connection.execute(_LAST).scalar_one()
            # The last state of each is what counts, and is written where that came.
            last: dict[str, Event] = {}
            for event in events:
                last.pop(event.id, None)
                last[event.id] = event
            rows = [
                {**_row_of(event), "change": change + number, "watcher": watcher}
                for number, event in enumerate(last.values(), start=1)
            ]
            asked = sa.select(_COLUMNS.id).where(_COLUMNS.id.in_(last))
            known = set(connection.execute(asked).scalars())
            if known:
                values = [{f"new_{key}": row[key] for key in row} for row in rows]
                connection.execute(_UPDATE, [row for row in values if row["new_id"] in known])
            if len(known) < len(rows):
                connection.execute(EVENTS.insert(), [row for row in rows if row["id"] not in known])
            return change + len(rows)

    def after(self, which: Which, change: int, limit: int) -> Sequence[Event]:
        """See ``EventStorage.after``."""
        asked = sa.select(EVENTS).where(*_those(which), _COLUMNS.change > change)
        return self._listed(asked.order_by(_COLUMNS.change).limit(limit))

    def newest(self, which: Which, limit: int) -> Sequence[Event]:
        """See ``EventStorage.newest``."""
        asked = sa.select(EVENTS).where(*_those(which))
        return self._listed(asked.order_by(_COLUMNS.change.desc()).limit(limit))[::-1]

    def last_change(self) -> int:
        """See ``EventStorage.last_change``."""
        with self._asking() as connection:
            return int(connection.execute(_LAST).scalar_one())

    def trim(self, most: int, before: datetime) -> int:
        """See ``EventStorage.trim``."""
        over = (_COLUMNS.state != OPEN, _COLUMNS.change < _LAST.scalar_subquery())
        with self._writing() as connection:
            self._take_turn(connection)
            old = EVENTS.delete().where(*over, _COLUMNS.seen_at_ms < milliseconds(before))
            removed = connection.execute(old).rowcount
            for those, bound in (((_COLUMNS.simulated,), most // _OF_SIMULATED), ((), most)):
                counted = sa.select(sa.func.count()).select_from(EVENTS).where(*those)
                count = connection.execute(counted).scalar_one()
                if count > bound:
                    oldest = sa.select(_COLUMNS.id).where(*over, *those).order_by(_COLUMNS.change)
                    these = _COLUMNS.id.in_(oldest.limit(count - bound))
                    removed += connection.execute(EVENTS.delete().where(these)).rowcount
        return removed

    def close(self) -> None:
        """Let other processes tell that this one watches no more."""
        if self._alive is not None:
            # A connection's end is noticed a little later: who starts just then would still see it.
            with suppress(sa.exc.DBAPIError):
                self._alive.execute(sa.select(sa.func.pg_advisory_unlock_all()))
            self._alive.invalidate()
            self._alive.close()
            self._alive = None

    @property
    def _on_server(self) -> bool:
        return self._engine.dialect.name == "postgresql"

    def _live_as(self, watcher: int) -> None:
        """Hold a lock for as long as a connection is there: a process that dies gives it back."""
        self._alive = self._engine.connect().execution_options(isolation_level="AUTOCOMMIT")
        self._alive.execute(sa.select(sa.func.pg_advisory_lock(_LOCK, watcher)))

    def _take_turn(self, connection: sa.Connection) -> None:
        # A file has one writer at a time anyway.
        if self._on_server:
            connection.execute(sa.select(sa.func.pg_advisory_xact_lock(_LOCK)))

    def _is_gone(self, watcher: int) -> bool:
        """Return whether a watcher lives no more; a file is one server's alone."""
        if self._alive is None:
            return True
        tried = sa.select(sa.func.pg_try_advisory_lock(_LOCK, watcher))
        if not self._alive.execute(tried).scalar():
            return False
        self._alive.execute(sa.select(sa.func.pg_advisory_unlock(_LOCK, watcher)))
        return True

    def _listed(self, asked: sa.Select[Any]) -> list[Event]:
        with self._asking() as connection:
            return [_event_from(row) for row in connection.execute(asked)]


def _those(which: Which) -> list[sa.ColumnElement[bool]]:
    return [_COLUMNS[name] == value for name, value in which._asdict().items() if value is not None]


def _row_of(event: Event) -> dict[str, Any]:
    return {
        "id": event.id,
        "arm": event.arm,
        "kind": event.kind,
        "state": event.state,
        "began_at_ms": milliseconds(event.began_at),
        "seen_at_ms": milliseconds(event.seen_at),
        "ended_at_ms": None if event.ended_at is None else milliseconds(event.ended_at),
        "simulated": event.simulated,
        "document": json.dumps(event.document, ensure_ascii=True, allow_nan=False),
    }


def _event_from(row: sa.Row[Any]) -> Event:
    return Event(
        id=row.id,
        arm=row.arm,
        kind=row.kind,
        state=row.state,
        began_at=moment(row.began_at_ms),
        seen_at=moment(row.seen_at_ms),
        ended_at=None if row.ended_at_ms is None else moment(row.ended_at_ms),
        document=json.loads(row.document),
        simulated=row.simulated,
        change=row.change,
    )
