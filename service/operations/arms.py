"""Stored arms: each read with its own cell, as that was when the arm was stored.

When a cell is written, the arms in it get a next revision (cells.py): so a revision of an arm is
the same for ever, and a logged one leads back to the exact numbers. Left out: what a document
means (``read_arm`` is passed in).
"""

from collections.abc import Callable
from datetime import datetime
from typing import TypeVar

from service.operations.cells import Cells
from service.operations.stored import ReadDocument, Stored, StoredDocument, utc_now
from service.storage.ports import Revision, Storage
from service.wire.cells import CellAt, CellOf, no_cell

Read = TypeVar("Read", bound=ReadDocument)
StoredArm = StoredDocument


class Arms(Stored[Read]):
    """The stored arms of one service.

    Parameters
    ----------
    storage : where revisions are kept.
    read_arm : document and what gives the cell it names -> read arm.
    cells : the cells that arms stand in; without them an arm can name none.
    now : the clock that stamps revisions, UTC.
    """

    kind = "arm"

    def __init__(
        self,
        storage: Storage,
        read_arm: Callable[[object, CellOf], Read],
        cells: Cells | None = None,
        *,
        now: Callable[[], datetime] = utc_now,
    ) -> None:
        super().__init__(storage, now)
        self._read_arm = read_arm
        self._cells = cells
        if cells is not None:
            # A cell's arms get their next revision with it.
            cells.after_writing.append(self._heads.forget)

    def newest_cell(self, name: str) -> CellAt:
        """Return the cell that an arm names which is not stored, or not yet.

        Raises
        ------
        UnknownArm : there is no such cell; ``where`` is the arm's field.
        """
        return no_cell(name) if self._cells is None else self._cells.named(name)

    def cell_of(self, record: Revision) -> CellAt | None:
        """Return the cell that a stored arm stands in; None where it names none."""
        if record.cell is None or self._cells is None:
            return None
        stored = self._cells.get(*record.cell)
        return CellAt(stored.read, stored.record.revision)

    def _read(self, document: object, record: Revision | None) -> Read:
        at = None if record is None else self.cell_of(record)
        return self._read_arm(document, self.newest_cell if at is None else lambda _: at)
