"""Stored cells as answered: one revision, a list of cells, a list of revisions.

Left out: the cell itself, whose document is answered as it is stored.
"""

from collections.abc import Sequence

from service.convert import finding_out
from service.storage.ports import Revision
from service.wire.answer_models import Finding, Open
from service.wire.cells import ReadCell
from service.wire.models import Cell
from service.wire.stored import HidingAnswer, Trace, trace_of


class CellTrace(Trace):
    """Which revision of a cell this is; ``digest`` is the start of ``cell_digest``."""

    cell_digest: str


class StoredCellAnswer(CellTrace):
    """One revision of a stored cell, its digest, and who stored it when and why."""

    name: str
    units: str
    findings: list[Finding]
    cell: Cell


class ListedCell(Open):
    """A stored cell in a list: which arms stand in it, and how many frames there are."""

    name: str
    title: str | None
    revision: int
    digest: str
    arms: list[str]
    frames: int
    units: str


class CellListAnswer(Open):
    """Stored cells by name; ``next_page_token`` asks for those that follow."""

    cells: list[ListedCell]
    next_page_token: str | None


class ListedCellRevision(CellTrace):
    """A revision in a list; ``hidden`` is set where the cell was removed at it."""

    hidden: HidingAnswer | None


class CellRevisionListAnswer(Open):
    """Revisions of one name, oldest first, those before a removal too."""

    name: str
    revisions: list[ListedCellRevision]
    next_page_token: str | None


def stored_cell_answer(record: Revision, read: ReadCell) -> dict[str, object]:
    """Return a ``StoredCellAnswer``; findings say what was mended in the document."""
    return {
        "name": record.name,
        **trace_of(record),
        "units": read.units.name,
        "findings": [finding_out(read.units, finding) for finding in read.findings],
        "cell": record.document,
    }


def cell_list_answer(records: Sequence[Revision], next_token: str | None) -> dict[str, object]:
    """Return a ``CellListAnswer``."""
    return {"cells": [_listed(record) for record in records], "next_page_token": next_token}


def _listed(record: Revision) -> dict[str, object]:
    document = record.document
    return {
        "name": record.name,
        "title": document.get("title"),
        "revision": record.revision,
        "digest": record.digest,
        "arms": list(document.get("arms", {})),
        "frames": len(document.get("frames", {})),
        "units": document["units"],
    }
