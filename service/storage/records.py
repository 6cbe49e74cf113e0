"""Records in SQL, one code for SQLite and PostgreSQL: written once, never changed.

Left out: what a record says.
"""

import json
from collections.abc import Sequence
from typing import Any

import sqlalchemy as sa

from service.records.ports import Filter, Record, RecordKeyUsed, Sent, Widths
from service.storage.rows import milliseconds, moment
from service.storage.schema import RECORDS
from service.storage.store import SqlStore

_COLUMNS = RECORDS.c


class SqlRecords(SqlStore):
    """``RecordStorage`` over an engine whose database has the present layout."""

    def __init__(self, engine: sa.Engine, *, refuses_writes: str = "") -> None:
        super().__init__(engine, "records", refuses_writes=refuses_writes)

    def add(self, record: Record, *, key: str | None, digest: str) -> None:
        """See ``RecordStorage.add``."""
        values = {**_row_of(record), "sent_key": key, "sent_digest": digest if key else None}
        try:
            with self._writing() as connection:
                connection.execute(RECORDS.insert().values(**values))
        except sa.exc.IntegrityError:
            sent = None if key is None else self.sent(key)
            if sent is None:
                raise
            raise RecordKeyUsed(sent) from None

    def sent(self, key: str) -> Sent | None:
        """See ``RecordStorage.sent``."""
        with self._asking() as connection:
            row = connection.execute(sa.select(RECORDS).where(_COLUMNS.sent_key == key)).first()
        return None if row is None else Sent(_record_from(row), row.sent_digest)

    def get(self, record: str) -> Record | None:
        """See ``RecordStorage.get``."""
        with self._asking() as connection:
            row = connection.execute(sa.select(RECORDS).where(_COLUMNS.id == record)).first()
        return None if row is None else _record_from(row)

    def newest(self, which: Filter, before: str, limit: int) -> Sequence[Record]:
        """See ``RecordStorage.newest``."""
        asked = sa.select(RECORDS).where(*_those(which)).order_by(_COLUMNS.id.desc())
        return self._listed(asked.where(_COLUMNS.id < before) if before else asked, limit)

    def oldest(self, which: Filter, after: str, limit: int) -> Sequence[Record]:
        """See ``RecordStorage.oldest``."""
        asked = sa.select(RECORDS).where(*_those(which)).order_by(_COLUMNS.id)
        return self._listed(asked.where(_COLUMNS.id > after) if after else asked, limit)

    def widths(self, which: Filter) -> Widths:
        """See ``RecordStorage.widths``."""
        most = (sa.func.max(_COLUMNS.joint_count), sa.func.max(_COLUMNS.orientation_count))
        with self._asking() as connection:
            joints, orientation = connection.execute(sa.select(*most).where(*_those(which))).one()
        return Widths(joints or 0, orientation or 0)

    def _listed(self, asked: sa.Select[Any], limit: int) -> list[Record]:
        with self._asking() as connection:
            return [_record_from(row) for row in connection.execute(asked.limit(limit))]


def _those(which: Filter) -> list[sa.ColumnElement[bool]]:
    equal = {"arm": which.arm, "serial": which.serial, "tag": which.tag, "quality": which.quality}
    found = [_COLUMNS[name] == value for name, value in equal.items() if value is not None]
    if which.since is not None:
        found.append(_COLUMNS.sampled_at_ms >= milliseconds(which.since))
    if which.before is not None:
        found.append(_COLUMNS.sampled_at_ms < milliseconds(which.before))
    return found


def _row_of(record: Record) -> dict[str, Any]:
    return {
        "id": record.id,
        "arm": record.arm,
        "serial": record.serial,
        "tag": record.tag,
        "quality": record.quality,
        "sampled_at_ms": milliseconds(record.sampled_at),
        "joint_count": record.joint_count,
        "orientation_count": record.orientation_count,
        # ASCII only: no database has to agree with another on an encoding.
        "document": json.dumps(record.document, ensure_ascii=True, allow_nan=False),
    }


def _record_from(row: sa.Row[Any]) -> Record:
    return Record(
        id=row.id,
        arm=row.arm,
        serial=row.serial,
        tag=row.tag,
        quality=row.quality,
        sampled_at=moment(row.sampled_at_ms),
        joint_count=row.joint_count,
        orientation_count=row.orientation_count,
        document=json.loads(row.document),
    )
