"""Stored documents as answered, as far as arms and cells are alike: revisions, their trace, lists.

Left out: what is in a document (stored_arms.py, stored_cells.py).
"""

from collections.abc import Sequence
from datetime import datetime

from service.storage.ports import Revision
from service.wire.answer_models import Open


class Trace(Open):
    """Which revision this is, and who stored it when and why."""

    revision: int
    digest: str
    author: str
    reason: str
    created_at: datetime


class HidingAnswer(Open):
    """Who removed what stood at this revision, why and when."""

    author: str
    reason: str
    at: datetime


def trace_of(record: Revision) -> dict[str, object]:
    """Return a ``Trace`` with the digests of the document under their own names."""
    return {
        "revision": record.revision,
        "digest": record.digest,
        **record.digests,
        **({} if record.cell is None else {"cell_revision": record.cell.revision}),
        "author": record.author,
        "reason": record.reason,
        "created_at": time_of(record.created_at),
    }


def revision_list_answer(
    name: str, records: Sequence[Revision], next_token: str | None
) -> dict[str, object]:
    """Return the revisions of a name as listed."""
    return {
        "name": name,
        "revisions": [{**trace_of(record), "hidden": _hidden(record)} for record in records],
        "next_page_token": next_token,
    }


def time_of(at: datetime) -> str:
    """Return a UTC time as RFC 3339 has it, with milliseconds.

    Examples
    --------
    >>> from datetime import UTC
    >>> time_of(datetime(2026, 1, 2, 3, 4, 5, 678_000, tzinfo=UTC))
    '2026-01-02T03:04:05.678Z'
    """
    return at.isoformat(timespec="milliseconds").replace("+00:00", "Z")


def _hidden(record: Revision) -> dict[str, object] | None:
    if record.hidden is None:
        return None
    hidden = record.hidden
    return {"author": hidden.author, "reason": hidden.reason, "at": time_of(hidden.at)}
