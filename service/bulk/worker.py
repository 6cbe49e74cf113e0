"""What runs in the worker process: one large JSON request at a time, parsed, computed, printed.

It is asked in steps, ``begin``, ``go_on`` if the arm is a stored one, ``piece`` ..., ``forget``,
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
from service.bulk.reading import Key, many_of_body, model_of
from service.bulk.rendering import RENDERINGS, Outline, Piece, Rendering, Stamp
from service.details import as_given, shown
from service.errors import ServiceError
from service.operations.arms import Arms, StoredArm
from service.problems import Problem, problem_of
from service.storage.ports import Revision
from service.wire.arms import ReadArm, read_arm
from service.wire.formats import Format
from service.wire.large_json import LargeBody, parse_large_json
from service.wire.models import ArmRevision, PosesRequest


@dataclass(frozen=True)
class ArmWanted:
    """The request names a stored arm: the worker has no store."""

    name: str | ArmRevision


@dataclass(frozen=True)
class _Begun:
    key: Key
    wanted: Format
    stamp: Stamp
    body: LargeBody
    asked: PosesRequest


class _OneArm:
    """Stands in for the store: whatever is asked for, it is this arm."""

    def __init__(self, record: Revision | None) -> None:
        self._record = record

    def get(self, name: str, revision: int | None = None) -> StoredArm[ReadArm]:
        """Return the arm that was sent along."""
        assert self._record is not None
        return StoredArm(self._record, _read(_Sent(self._record)))


class _Sent:
    """A stored arm that is the same as another of the same name, revision and digest."""

    def __init__(self, record: Revision) -> None:
        self.record = record
        self._identity = (record.name, record.revision, record.digest)

    def __hash__(self) -> int:
        return hash(self._identity)

    def __eq__(self, other: object) -> bool:
        return isinstance(other, _Sent) and self._identity == other._identity


@lru_cache(maxsize=64)
def _read(sent: _Sent) -> ReadArm:
    return read_arm(sent.record.document)


_kept: dict[str, Any] = {}


def start() -> None:
    """Make the process fit for its work: it ends with its parent and leaves Ctrl-C to it."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    threading.Thread(target=_end_with_parent, daemon=True).start()
    # A hundred thousand lists are no garbage; looking for some would double the time.
    gc.disable()
    gc.freeze()


def identity() -> int:
    """Return the number of the process."""
    return os.getpid()


def begin(raw: bytes, key: Key, wanted: Format, stamp: Stamp) -> Problem | ArmWanted | Outline:
    """Parse a body; the first step."""
    forget()
    body: object = ...
    try:
        large = parse_large_json(raw)
        body = large.document
        asked = model_of(key, body)
        _kept["begun"] = _Begun(key, wanted, stamp, large, asked)
        if isinstance(asked.arm, str | ArmRevision):
            return ArmWanted(asked.arm)
        return _outline(None)
    except (ServiceError, KinematicsError, ValidationError) as error:
        return _refusal(error, body)


def go_on(record: Revision) -> Problem | Outline:
    """Take the stored arm that the request names; the second step."""
    try:
        return _outline(record)
    except (ServiceError, KinematicsError, ValidationError) as error:
        return _refusal(error, _kept["begun"].body.document)


def piece(first: int, last: int) -> Piece:
    """Return the part of the answer for vectors ``first`` ... ``last``."""
    return cast(Rendering, _kept["rendering"]).piece(first, last)


def forget() -> None:
    """Let go of the request; the last step."""
    _kept.clear()
    gc.collect()


def _outline(record: Revision | None) -> Outline:
    begun = cast(_Begun, _kept["begun"])
    arms = cast(Arms[ReadArm], _OneArm(record))
    many = many_of_body(arms, begun.key, begun.asked, begun.wanted, begun.body.joints)
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
