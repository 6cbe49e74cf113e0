"""Between a revision and its row in the database.

Left out: the questions asked of the database (``sql.py``) and its columns (``schema.py``).
"""

import json
from collections.abc import Mapping
from datetime import UTC, datetime, timedelta
from typing import Any

import sqlalchemy as sa

from service.storage.ports import CellRevision, Draft, Hiding, Revision

_EPOCH = datetime(1970, 1, 1, tzinfo=UTC)


def revision_of(draft: Draft, number: int) -> Revision:
    """Return what ``draft`` is once it is stored as revision ``number``."""
    return Revision(
        name=draft.name,
        revision=number,
        document=draft.document,
        digests=draft.digests,
        digest=draft.digest,
        author=draft.author,
        reason=draft.reason,
        created_at=moment(milliseconds(draft.at)),
        cell=draft.cell,
    )


def row_of(revision: Revision) -> dict[str, Any]:
    """Return the columns of ``REVISIONS``, but for the kind, for a revision not yet hidden."""
    cell = revision.cell
    return {
        "name": revision.name,
        "revision": revision.revision,
        "document": _text_of(revision.document),
        "digests": _text_of(revision.digests),
        "digest": revision.digest,
        "author": revision.author,
        "reason": revision.reason,
        "created_at_ms": milliseconds(revision.created_at),
        "cell": None if cell is None else cell.name,
        "cell_revision": None if cell is None else cell.revision,
    }


def revision_from(row: sa.Row[Any]) -> Revision:
    """Return the revision of a row of ``REVISIONS``."""
    hidden = None
    if row.hidden_at_ms is not None:
        hidden = Hiding(row.hidden_by, row.hidden_reason, moment(row.hidden_at_ms))
    return Revision(
        name=row.name,
        revision=row.revision,
        document=json.loads(row.document),
        digests=json.loads(row.digests),
        digest=row.digest,
        author=row.author,
        reason=row.reason,
        created_at=moment(row.created_at_ms),
        cell=None if row.cell is None else CellRevision(row.cell, row.cell_revision),
        hidden=hidden,
    )


def milliseconds(at: datetime) -> int:
    """Return Unix time in whole milliseconds, rounded down.

    Examples
    --------
    >>> milliseconds(datetime(1970, 1, 1, 0, 0, 1, 999, tzinfo=UTC))
    1000
    """
    return (at - _EPOCH) // timedelta(milliseconds=1)


def moment(unix_milliseconds: int) -> datetime:
    """Return the UTC time of ``unix_milliseconds``.

    Examples
    --------
    >>> moment(1500).isoformat()
    '1970-01-01T00:00:01.500000+00:00'
    """
    return _EPOCH + timedelta(milliseconds=unix_milliseconds)


def _text_of(document: Mapping[str, Any]) -> str:
    # ASCII only: no database has to agree with another on an encoding.
    return json.dumps(document, ensure_ascii=True, allow_nan=False, separators=(",", ":"))
