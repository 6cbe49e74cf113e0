"""Between a revision and its row in the database.

Left out: the questions asked of the database (``sql.py``) and its columns (``schema.py``).
"""

import json
from datetime import UTC, datetime, timedelta
from typing import Any

import sqlalchemy as sa

from service.storage.ports import Document, Draft, Hiding, Revision

_EPOCH = datetime(1970, 1, 1, tzinfo=UTC)


def revision_of(draft: Draft, number: int) -> Revision:
    """Return what ``draft`` is once it is stored as revision ``number``."""
    return Revision(
        name=draft.name,
        revision=number,
        document=draft.document,
        table_digest=draft.table_digest,
        setup_digest=draft.setup_digest,
        digest=draft.digest,
        author=draft.author,
        reason=draft.reason,
        created_at=moment(milliseconds(draft.at)),
    )


def row_of(revision: Revision) -> dict[str, Any]:
    """Return the values of the columns of ``arm_revisions`` for a revision not yet hidden."""
    return {
        "name": revision.name,
        "revision": revision.revision,
        "document": _text_of(revision.document),
        "table_digest": revision.table_digest,
        "setup_digest": revision.setup_digest,
        "digest": revision.digest,
        "author": revision.author,
        "reason": revision.reason,
        "created_at_ms": milliseconds(revision.created_at),
    }


def revision_from(row: sa.Row[Any]) -> Revision:
    """Return the revision of a row of ``arm_revisions``."""
    hidden = None
    if row.hidden_at_ms is not None:
        hidden = Hiding(row.hidden_by, row.hidden_reason, moment(row.hidden_at_ms))
    return Revision(
        name=row.name,
        revision=row.revision,
        document=json.loads(row.document),
        table_digest=row.table_digest,
        setup_digest=row.setup_digest,
        digest=row.digest,
        author=row.author,
        reason=row.reason,
        created_at=moment(row.created_at_ms),
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


def _text_of(document: Document) -> str:
    # ASCII only: no database has to agree with another on an encoding.
    return json.dumps(document, ensure_ascii=True, allow_nan=False, separators=(",", ":"))
