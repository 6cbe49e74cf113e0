"""What runs in the worker process: one large JSON request at a time, parsed, computed, printed.

It is asked in steps, ``begin``, ``go_on`` if arm or cell is stored, ``piece`` ..., ``forget``,
and keeps the request between them. Left out: the life of the process (process.py).
"""

import gc
import os
import signal
import threading
from dataclasses import dataclass, replace
from functools import lru_cache
from multiprocessing import connection, parent_process
from typing import Any, cast

from pydantic import ValidationError

from kinematics.errors import KinematicsError
from service.bulk import conversion_rendering
from service.bulk.conversion_reading import VALUES, conversions_of_body
from service.bulk.reading import Key, many_of_body, model_of
from service.bulk.rendering import RENDERINGS, InPieces, Outline, Piece, Stamp
from service.bulk.target_rows import RowsRead, pieces_of, rows_of_body
from service.convert import Units
from service.details import as_given, shown
from service.errors import ServiceError
from service.operations.arms import Arms, StoredArm
from service.problems import Problem, problem_of
from service.storage.ports import GivenPiece, Revision
from service.wire.arms import ReadArm, read_arm
from service.wire.cells import CellAt, no_cell
from service.wire.formats import Format
from service.wire.large_json import LargeBody, parse_large_json
from service.wire.models import ArmRevision, PosesRequest
from service.wire.rotations import ConversionsRequest


@dataclass(frozen=True)
class ArmWanted:
    """The request names a stored arm, or gives one whole that names a cell: here is no store."""

    name: str | ArmRevision | None
    cell: str | None = None


@dataclass(frozen=True)
class _Begun:
    key: Key
    wanted: Format
    stamp: Stamp
    body: LargeBody
    asked: PosesRequest


class _OneArm:
    """Stands in for the store: whatever is asked for, it is this arm, and this cell."""

    def __init__(self, record: Revision | None, cell: CellAt | None) -> None:
        self._record = record
        self._cell = cell

    def get(self, name: str, revision: int | None = None) -> StoredArm[ReadArm]:
        """Return the arm that was sent along."""
        assert self._record is not None
        return StoredArm(self._record, _read(_Sent(self._record, self._cell)))

    def newest_cell(self, name: str) -> CellAt:
        """Return the cell that was sent along."""
        assert self._cell is not None
        return self._cell


class _Sent:
    """A stored arm, in its cell, that is the same as another of the same revision and digest."""

    def __init__(self, record: Revision, cell: CellAt | None) -> None:
        self.record = record
        self.cell = cell
        self._identity = (record.name, record.revision, record.digest)

    def __hash__(self) -> int:
        return hash(self._identity)

    def __eq__(self, other: object) -> bool:
        return isinstance(other, _Sent) and self._identity == other._identity


@lru_cache(maxsize=64)
def _read(sent: _Sent) -> ReadArm:
    cell = sent.cell
    return read_arm(sent.record.document, no_cell if cell is None else lambda _: cell)


_kept: dict[str, Any] = {}


def start() -> None:
    """Make the process fit for its work: it ends with its parent and leaves Ctrl-C to it."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    threading.Thread(target=_end_with_parent, daemon=True).start()
    # A hundred thousand lists are no garbage; looking for some would double the time.
    gc.disable()
    gc.freeze()


def begin(raw: bytes, key: Key, wanted: Format, stamp: Stamp) -> Problem | ArmWanted | Outline:
    """Parse a body; the first step, and the only one where the rest is quick work."""
    forget()
    body: object = ...
    try:
        large = parse_large_json(raw)
        body = large.document
        asked = model_of(key, body)
        _kept["begun"] = _Begun(key, wanted, stamp, large, asked)
        if isinstance(asked.arm, str | ArmRevision):
            return ArmWanted(asked.arm)
        if asked.arm.cell is not None:
            return ArmWanted(None, asked.arm.cell)
        return _outline(None, None)
    except (ServiceError, KinematicsError, ValidationError) as error:
        return _refusal(error, body)


def go_on(record: Revision | None, cell: CellAt | None) -> Problem | Outline:
    """Take the stored arm that the request names, and the cell it stands in; the second step."""
    try:
        return _outline(record, cell)
    except (ServiceError, KinematicsError, ValidationError) as error:
        return _refusal(error, _kept["begun"].body.document)


def begin_conversions(raw: bytes, wanted: Format, stamp: Stamp) -> Problem | Outline:
    """Parse a body that asks for conversions; the first step, after which the pieces come."""
    forget()
    body: object = ...
    try:
        large = parse_large_json(raw, VALUES, deepest=3)
        body = large.document
        asked = ConversionsRequest.model_validate(body)
        conversions = conversions_of_body(asked, wanted, large.table)
        rendering = conversion_rendering.RENDERINGS[wanted](conversions, stamp)
        _kept["rendering"] = rendering
        return rendering.outline()
    except (ServiceError, KinematicsError, ValidationError) as error:
        return _refusal(error, body)


def take(part: bytes) -> None:
    """Take a part of a body whose targets are wanted; the first steps."""
    _kept.setdefault("parts", []).append(part)


def begin_targets(form: str | None) -> Problem | RowsRead:
    """Parse the body that was taken, of CSV with angles of a form; the pieces come next."""
    raw = b"".join(_kept.pop("parts", ()))
    try:
        read, _kept["rows"] = rows_of_body(raw, form)
    except ServiceError as error:
        return _refusal(error, ...)
    return read


def target_pieces(begin: int, end: int, size: int, units: Units) -> list[GivenPiece]:
    """Return some of the pieces of ``size`` that the targets are cut into."""
    return pieces_of(_kept["rows"], begin, end, size, units)


def piece(first: int, last: int) -> Piece:
    """Return the part of the answer for vectors ``first`` ... ``last``."""
    made = cast(InPieces, _kept["rendering"]).piece(first, last)
    # A view of an array cannot leave the process.
    return made._replace(content=bytes(made.content))


def forget() -> None:
    """Let go of the request; the last step."""
    _kept.clear()
    gc.collect()


def _outline(record: Revision | None, cell: CellAt | None) -> Outline:
    begun = cast(_Begun, _kept["begun"])
    arms = cast(Arms[ReadArm], _OneArm(record, cell))
    many = many_of_body(arms, begun.key, begun.asked, begun.wanted, begun.body.table)
    rendering = RENDERINGS[begun.wanted](many, begun.stamp)
    _kept["rendering"] = rendering
    return rendering.outline()


def _refusal(error: Exception, body: object) -> Problem:
    """Return the problem with values as they will be shown: whole ones may be megabytes."""
    problem = problem_of(error, body=body)
    details = tuple(
        replace(as_given(detail, body), value=shown(detail.value)) for detail in problem.errors
    )
    return replace(problem, errors=details)


def _end_with_parent() -> None:
    parent = parent_process()
    assert parent is not None
    connection.wait([parent.sentinel])
    os._exit(1)
