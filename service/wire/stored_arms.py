"""Stored arms as answered: one revision, a list of arms, a list of revisions.

Left out: the arm itself, whose document is answered as it is stored.
"""

from collections.abc import Mapping, Sequence

from service.convert import finding_out
from service.storage.ports import Revision
from service.wire.answer_models import Finding, Open
from service.wire.arms import ReadArm
from service.wire.models import Arm
from service.wire.stored import HidingAnswer, Trace, trace_of


class ArmTrace(Trace):
    """Which revision of an arm this is; ``cell_revision`` where it names a cell."""

    table_digest: str
    setup_digest: str
    cell_revision: int | None = None


class StoredArmAnswer(ArmTrace):
    """One revision of a stored arm, its digests, and who stored it when and why."""

    name: str
    units: str
    findings: list[Finding]
    arm: Arm


class ListedArm(Open):
    """A stored arm in a list: ``joints`` counts the driven rows, ``cell`` is the one it names."""

    name: str
    title: str | None
    revision: int
    digest: str
    status: str | None
    joints: int
    convention: str
    units: str
    cell: str | None


class ArmListAnswer(Open):
    """Stored arms by name; ``next_page_token`` asks for those that follow."""

    arms: list[ListedArm]
    next_page_token: str | None


class ListedRevision(ArmTrace):
    """A revision in a list; ``hidden`` is set where the arm was removed at it."""

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
        **trace_of(record),
        "units": read.units.name,
        "findings": [finding_out(read.units, finding) for finding in read.findings],
        "arm": record.document,
    }


def arm_list_answer(records: Sequence[Revision], next_token: str | None) -> dict[str, object]:
    """Return an ``ArmListAnswer``."""
    return {"arms": [_listed(record) for record in records], "next_page_token": next_token}


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
        "cell": document.get("cell"),
    }
