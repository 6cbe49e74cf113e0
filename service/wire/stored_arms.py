"""Stored arms as answered: one revision, a list of arms, a list of revisions.

Left out: the arm itself, whose document is answered as it is stored.
"""

from collections.abc import Mapping, Sequence
from datetime import datetime

from service.convert import finding_out
from service.storage.ports import Revision
from service.wire.answer_models import Finding, Open
from service.wire.arms import ReadArm
from service.wire.models import Arm


class StoredArmAnswer(Open):
    """One revision of a stored arm, its digests, and who stored it when and why."""

    name: str
    revision: int
    digest: str
    table_digest: str
    setup_digest: str
    author: str
    reason: str
    created_at: datetime
    units: str
    findings: list[Finding]
    arm: Arm


class ListedArm(Open):
    """A stored arm in a list: ``joints`` counts the driven rows."""

    name: str
    title: str | None
    revision: int
    digest: str
    status: str | None
    joints: int
    convention: str
    units: str


class ArmListAnswer(Open):
    """Stored arms by name; ``next_page_token`` asks for those that follow."""

    arms: list[ListedArm]
    next_page_token: str | None


class HidingAnswer(Open):
    """Who removed an arm that stood at this revision, why and when."""

    author: str
    reason: str
    at: datetime


class ListedRevision(Open):
    """A revision in a list; ``hidden`` is set where the arm was removed at it."""

    revision: int
    digest: str
    table_digest: str
    setup_digest: str
    author: str
    reason: str
    created_at: datetime
    hidden: HidingAnswer | None


class RevisionListAnswer(Open):
    """Revisions of one name, oldest first, those before a removal too."""

    name: str
    revisions: list[ListedRevision]
    next_page_token: str | None


def stored_arm_answer(record: Revision, read: ReadArm) -> dict[str, object]:
    """Return a ``StoredArmAnswer``; findings say what was mended in the document."""
    return {
        "name": record.name,
        **_trace(record),
        "units": read.units.name,
        "findings": [finding_out(read.units, finding) for finding in read.findings],
        "arm": record.document,
    }


def arm_list_answer(records: Sequence[Revision], next_token: str | None) -> dict[str, object]:
    """Return an ``ArmListAnswer``."""
    return {"arms": [_listed(record) for record in records], "next_page_token": next_token}


def revision_list_answer(
    name: str, records: Sequence[Revision], next_token: str | None
) -> dict[str, object]:
    """Return a ``RevisionListAnswer``."""
    return {
        "name": name,
        "revisions": [{**_trace(record), "hidden": _hidden(record)} for record in records],
        "next_page_token": next_token,
    }


def driven_rows(document: Mapping[str, object]) -> int:
    """Return the number of joint values an arm's document takes: rows that are not passive.

    Examples
    --------
    >>> driven_rows({"rows": [{"joint": "revolute"}, {"joint": "revolute", "passive": True}]})
    1
    """
    rows = document["rows"]
    assert isinstance(rows, list)
    return sum(not row.get("passive", False) for row in rows)


def time_of(at: datetime) -> str:
    """Return a UTC time as RFC 3339 has it, with milliseconds.

    Examples
    --------
    >>> from datetime import UTC
    >>> time_of(datetime(2026, 1, 2, 3, 4, 5, 678_000, tzinfo=UTC))
    '2026-01-02T03:04:05.678Z'
    """
    return at.isoformat(timespec="milliseconds").replace("+00:00", "Z")


def _trace(record: Revision) -> dict[str, object]:
    return {
        "revision": record.revision,
        "digest": record.digest,
        "table_digest": record.table_digest,
        "setup_digest": record.setup_digest,
        "author": record.author,
        "reason": record.reason,
        "created_at": time_of(record.created_at),
    }


def _hidden(record: Revision) -> dict[str, object] | None:
    if record.hidden is None:
        return None
    hidden = record.hidden
    return {"author": hidden.author, "reason": hidden.reason, "at": time_of(hidden.at)}


def _listed(record: Revision) -> dict[str, object]:
    document = record.document
    return {
        "name": record.name,
        "title": document.get("title"),
        "revision": record.revision,
        "digest": record.digest,
        "status": document.get("status"),
        "joints": driven_rows(document),
        "convention": document["convention"],
        "units": document["units"],
    }
