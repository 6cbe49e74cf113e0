"""Surveys in SQL, one code for SQLite and PostgreSQL.

What became of a piece is written once, in one step with the count of what is done, so that a
process that is killed loses no more than it had in hand. Left out: who works on them.
"""

import json
import threading
from collections import Counter
from collections.abc import Iterable, Sequence
from datetime import datetime
from itertools import islice
from typing import Any

import sqlalchemy as sa

from service.errors import StorageUnavailable, UnknownSurvey
from service.storage.ports import (
    OPEN_STATES,
    QUEUED,
    RUNNING,
    GivenPiece,
    KeyUsed,
    MadePiece,
    Survey,
)
from service.storage.rows import milliseconds, moment
from service.storage.schema import SURVEY_PIECES, SURVEYS
from service.storage.store import SqlStore, unavailable

_WRITTEN_AT_ONCE = 500
"""Pieces of a new survey: some ten megabytes at most."""

_LEADER = int.from_bytes(b"Survey", "big")
"""The lock of the one process on a database server that runs surveys."""

# All pieces of a chunk in one statement: who asks for a pose meanwhile waits for the interpreter.
_UNMADE = sa.select(SURVEY_PIECES.c.number, SURVEY_PIECES.c.size).where(
    SURVEY_PIECES.c.survey == sa.bindparam("of"),
    SURVEY_PIECES.c.number.in_(sa.bindparam("numbers", expanding=True)),
    SURVEY_PIECES.c.made.is_(None),
)
_KEEP = (
    SURVEY_PIECES.update()
    .where(
        SURVEY_PIECES.c.survey == sa.bindparam("of"),
        SURVEY_PIECES.c.number == sa.bindparam("this"),
    )
    .values(made=sa.bindparam("made"))
)


class SqlSurveys(SqlStore):
    """``SurveyStorage`` over an engine whose database has the present layout."""

    def __init__(self, engine: sa.Engine, *, refuses_writes: str = "") -> None:
        super().__init__(engine, "surveys", refuses_writes=refuses_writes)
        self._lead: sa.Connection | None = None
        self._lock = threading.Lock()

    def add(
        self, survey: Survey, pieces: Iterable[GivenPiece], *, key: str | None, digest: str
    ) -> None:
        """See ``SurveyStorage.add``."""
        values = {**_row_of(survey), "sent_key": key, "sent_digest": digest if key else None}
        left = iter(pieces)
        try:
            with self._writing() as connection:
                connection.execute(SURVEYS.insert().values(**values))
                while rows := [
                    {"survey": survey.id, **piece._asdict()}
                    for piece in islice(left, _WRITTEN_AT_ONCE)
                ]:
                    connection.execute(SURVEY_PIECES.insert(), rows)
        except sa.exc.IntegrityError:
            used = self.sent(key) if key else None
            if used is None:  # removed meanwhile
                raise StorageUnavailable(
                    "another request was stored at the same moment", way_out="send it again"
                ) from None
            raise KeyUsed(*used) from None

    def sent(self, key: str) -> tuple[Survey, str] | None:
        """See ``SurveyStorage.sent``."""
        with self._asking() as connection:
            asked = sa.select(SURVEYS).where(SURVEYS.c.sent_key == key)
            row = connection.execute(asked).first()
        return None if row is None else (_survey_from(row), row.sent_digest)

    def get(self, survey: str) -> Survey | None:
        """See ``SurveyStorage.get``."""
        with self._asking() as connection:
            row = connection.execute(sa.select(SURVEYS).where(SURVEYS.c.id == survey)).first()
        return None if row is None else _survey_from(row)

    def page(self, before: str, limit: int) -> Sequence[Survey]:
        """See ``SurveyStorage.page``."""
        asked = sa.select(SURVEYS).order_by(SURVEYS.c.id.desc()).limit(limit)
        with self._asking() as connection:
            rows = connection.execute(asked.where(before > SURVEYS.c.id) if before else asked)
            return [_survey_from(row) for row in rows]

    def next_open(self) -> Survey | None:
        """See ``SurveyStorage.next_open``."""
        asked = (
            sa.select(SURVEYS)
            .where(SURVEYS.c.state.in_(OPEN_STATES))
            .order_by(SURVEYS.c.id)
            .limit(1)
        )
        with self._asking() as connection:
            row = connection.execute(asked).first()
        return None if row is None else _survey_from(row)

    def count_open(self) -> int:
        """See ``SurveyStorage.count_open``."""
        asked = sa.select(sa.func.count()).select_from(SURVEYS)
        with self._asking() as connection:
            return connection.execute(asked.where(SURVEYS.c.state.in_(OPEN_STATES))).scalar_one()

    def begin(self, survey: str, at: datetime) -> bool:
        """See ``SurveyStorage.begin``."""
        with self._writing() as connection:
            found = _locked(connection, survey)
            if found is not None and found.state == QUEUED:
                _update(connection, survey, state=RUNNING, started_at_ms=milliseconds(at))
            return found is not None and found.state in OPEN_STATES

    def left(self, survey: str, after: int, limit: int) -> Sequence[GivenPiece]:
        """See ``SurveyStorage.left``."""
        pieces = SURVEY_PIECES.c
        asked = sa.select(pieces.number, pieces.size, pieces.given).where(
            pieces.survey == survey, pieces.number > after, pieces.made.is_(None)
        )
        with self._asking() as connection:
            rows = connection.execute(asked.order_by(pieces.number).limit(limit))
            return [GivenPiece(*row) for row in rows]

    def keep(self, survey: str, made: Sequence[MadePiece]) -> bool:
        """See ``SurveyStorage.keep``."""
        with self._writing() as connection:
            found = _locked(connection, survey)
            if found is None or found.state != RUNNING:
                return False
            asked = {"of": survey, "numbers": [piece.number for piece in made]}
            unmade = {row.number: row.size for row in connection.execute(_UNMADE, asked)}
            kept = [piece for piece in made if piece.number in unmade]
            if kept:
                rows = [{"of": survey, "this": piece.number, "made": piece.made} for piece in kept]
                connection.execute(_KEEP, rows)
            counts = Counter[str](json.loads(found.counts))
            for piece in kept:
                counts.update(piece.counts)
            done = found.done + sum(unmade[piece.number] for piece in kept)
            _update(connection, survey, counts=json.dumps(counts, sort_keys=True), done=done)
        return True

    def end(self, survey: str, state: str, at: datetime, reason: str = "") -> bool:
        """See ``SurveyStorage.end``."""
        with self._writing() as connection:
            found = _locked(connection, survey)
            is_open = found is not None and found.state in OPEN_STATES
            if is_open:
                values = {"state": state, "finished_at_ms": milliseconds(at), "reason": reason}
                _update(connection, survey, **values)
            return is_open

    def made(self, survey: str, number: int) -> bytes:
        """See ``SurveyStorage.made``."""
        return self._of_piece(SURVEY_PIECES.c.made, survey, number)

    def beginnings(self, survey: str, length: int) -> Sequence[bytes]:
        """See ``SurveyStorage.beginnings``."""
        begin = sa.func.substr(SURVEY_PIECES.c.made, 1, length, type_=sa.LargeBinary)
        asked = sa.select(begin).where(SURVEY_PIECES.c.survey == survey)
        with self._asking() as connection:
            rows = connection.execute(asked.order_by(SURVEY_PIECES.c.number)).scalars()
            return [bytes(row) for row in rows]

    def given(self, survey: str, number: int) -> bytes:
        """See ``SurveyStorage.given``."""
        return self._of_piece(SURVEY_PIECES.c.given, survey, number)

    def sizes(self, survey: str) -> Sequence[int]:
        """See ``SurveyStorage.sizes``."""
        asked = sa.select(SURVEY_PIECES.c.size).where(SURVEY_PIECES.c.survey == survey)
        with self._asking() as connection:
            return list(connection.execute(asked.order_by(SURVEY_PIECES.c.number)).scalars())

    def remove(self, survey: str) -> None:
        """See ``SurveyStorage.remove``."""
        with self._writing() as connection:
            connection.execute(SURVEY_PIECES.delete().where(SURVEY_PIECES.c.survey == survey))
            connection.execute(SURVEYS.delete().where(SURVEYS.c.id == survey))

    def over_before(self, at: datetime, limit: int) -> Sequence[str]:
        """See ``SurveyStorage.over_before``."""
        over = SURVEYS.c.state.not_in(OPEN_STATES), SURVEYS.c.finished_at_ms < milliseconds(at)
        asked = sa.select(SURVEYS.c.id).where(*over).order_by(SURVEYS.c.id).limit(limit)
        with self._asking() as connection:
            return list(connection.execute(asked).scalars())

    def may_lead(self) -> bool:
        """See ``SurveyStorage.may_lead``."""
        if self._engine.dialect.name != "postgresql":
            return True  # a file is one server's alone
        with self._lock:
            if self._lead is not None and self._still_leads(self._lead):
                return True
            self._lead = None
            try:
                connection = self._engine.connect().execution_options(isolation_level="AUTOCOMMIT")
                if connection.execute(sa.select(sa.func.pg_try_advisory_lock(_LEADER))).scalar():
                    # Held for as long as the connection is: a process that dies gives it back.
                    self._lead = connection
                    return True
                connection.close()
            except (sa.exc.DBAPIError, sa.exc.TimeoutError) as error:
                raise unavailable(error, f"{self._what} cannot be read") from error
            return False

    @staticmethod
    def _still_leads(connection: sa.Connection) -> bool:
        """Return whether a connection holds the lock: a server that was restarted took it back."""
        held = sa.text(
            "SELECT EXISTS (SELECT FROM pg_locks WHERE locktype = 'advisory' AND granted"
            " AND pid = pg_backend_pid() AND (classid::bigint << 32) + objid::bigint = :lock)"
        )
        try:
            return bool(connection.execute(held, {"lock": _LEADER}).scalar())
        except sa.exc.DBAPIError:
            connection.invalidate()
            connection.close()
            return False

    def close(self) -> None:
        """Let another process run the surveys: whoever asks after this returns may lead."""
        with self._lock:
            if self._lead is None:
                return
            try:
                # Asked for and answered: a connection that is only hung up holds the lock for as
                # long as the database takes to notice.
                self._lead.execute(sa.select(sa.func.pg_advisory_unlock(_LEADER)))
            except sa.exc.DBAPIError:
                self._lead.invalidate()
            self._lead.close()
            self._lead = None

    def _of_piece(self, column: sa.Column[Any], survey: str, number: int) -> bytes:
        this = (SURVEY_PIECES.c.survey == survey, SURVEY_PIECES.c.number == number)
        with self._asking() as connection:
            found = connection.execute(sa.select(column).where(*this)).scalar_one_or_none()
        if found is None:  # somebody removed it while another reads it
            raise UnknownSurvey(
                f"there is no survey {survey!r} any more",
                where=("survey",),
                location="path",
                value=survey,
                way_out="GET /v1/surveys lists them",
            )
        return bytes(found)


def _locked(connection: sa.Connection, survey: str) -> Any:
    """Return what changes of a survey, and keep others from changing it; None if it is gone."""
    columns = SURVEYS.c
    asked = sa.select(columns.state, columns.counts, columns.done).where(SURVEYS.c.id == survey)
    return connection.execute(asked.with_for_update()).first()


def _update(connection: sa.Connection, survey: str, **values: object) -> None:
    connection.execute(SURVEYS.update().where(SURVEYS.c.id == survey).values(**values))


def _row_of(survey: Survey) -> dict[str, Any]:
    return {
        "id": survey.id,
        "kind": survey.kind,
        # As JSON, because PostgreSQL takes no text with a NUL in it.
        "title": json.dumps(survey.title),
        "state": survey.state,
        "request": json.dumps(survey.request, allow_nan=False),
        "about": json.dumps(survey.about, allow_nan=False),
        "counts": json.dumps(dict(survey.counts), sort_keys=True),
        "total": survey.total,
        "done": survey.done,
        "reason": survey.reason,
        "created_at_ms": milliseconds(survey.created_at),
    }


def _survey_from(row: sa.Row[Any]) -> Survey:
    started, finished = row.started_at_ms, row.finished_at_ms
    return Survey(
        id=row.id,
        kind=row.kind,
        title=json.loads(row.title),
        state=row.state,
        request=json.loads(row.request),
        about=json.loads(row.about),
        counts=json.loads(row.counts),
        total=row.total,
        done=row.done,
        reason=row.reason,
        created_at=moment(row.created_at_ms),
        started_at=None if started is None else moment(started),
        finished_at=None if finished is None else moment(finished),
    )
