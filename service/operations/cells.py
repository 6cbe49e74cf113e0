"""Stored cells: when one is written, the arms that stand in it are written with it, in one step.

So poses, digests and ETags of those arms follow at the very next question, in every process.
Left out: what a document means (wire).
"""

from collections.abc import Callable, Collection
from datetime import datetime

from kinematics.errors import KinematicsError
from kinematics.known_names import way_out_of_unknown
from service.errors import InUse, ServiceError, UnknownArm, UnusableValue
from service.operations.stored import ReadDocument, Stored, draft_of, utc_now
from service.storage.ports import (
    CellInUse,
    CellMoved,
    Draft,
    Following,
    Head,
    HeadDiffers,
    Revision,
    Storage,
)
from service.wire.cells import CellAt, CellOf, ReadCell, read_cell, unknown_cell

_MOST_NAMES = 200
_MOST_TOLD = 12


class Cells(Stored[ReadCell]):
    """The stored cells of one service.

    Parameters
    ----------
    storage : where revisions of cells are kept.
    arms : where those of arms are kept.
    read_arm : an arm's document and what gives the cell it names -> read arm.
    now : the clock that stamps revisions, UTC.
    """

    kind = "cell"
    # The largest take 2 MB each; arms hold what they need of theirs.
    revisions_kept = 32

    def __init__(
        self,
        storage: Storage,
        arms: Storage,
        read_arm: Callable[[object, CellOf], ReadDocument],
        *,
        now: Callable[[], datetime] = utc_now,
    ) -> None:
        super().__init__(storage, now)
        self._arms = arms
        self._read_arm = read_arm

    def named(self, name: str) -> CellAt:
        """Return the newest revision of a cell that an arm names.

        Raises
        ------
        UnknownArm : there is none; ``where`` is the arm's field.
        """
        try:
            stored = self.get(name)
        except UnknownArm:
            known = [record.name for record in self.storage.heads("", _MOST_NAMES)]
            raise unknown_cell(name, way_out_of_unknown(name, known)) from None
        return CellAt(stored.read, stored.record.revision)

    def remove(
        self,
        name: str,
        expected: Head | Collection[str] = Head.ANY,
        *,
        author: str = "",
        reason: str = "",
    ) -> None:
        """Hide ``name`` if its state is as expected and no arm stands in it.

        Raises
        ------
        UnknownArm, RevisionDiffers : see ``Stored.remove``.
        InUse : arms stand in the cell.
        """
        try:
            super().remove(name, expected, author=author, reason=reason)
        except CellInUse as error:
            arms = ", ".join(error.arms[:_MOST_TOLD])
            more = " and others" if len(error.arms) > _MOST_TOLD else ""
            raise InUse(
                f"arms stand in cell {name!r}: {arms}{more}",
                where=("cell",),
                location="path",
                value=name,
                way_out="remove those arms, or store them without this cell, and then the cell",
            ) from error

    def _read(self, document: object, record: Revision | None) -> ReadCell:
        return read_cell(document)

    def _write(self, draft: Draft, expected: int | Head, read: ReadCell, *, seed: bool) -> Revision:
        if expected is Head.ABSENT:
            return self.storage.write(draft, expected, seed=seed)
        number = expected
        if isinstance(number, Head):
            head = self.storage.head_number(draft.name)
            if head is None:
                raise HeadDiffers(None)
            number = head
        following = [
            self._following(record, draft, CellAt(read, number + 1))
            for record in self._arms.standing_in(draft.name)
        ]
        try:
            return self.storage.write(draft, number, seed=seed, following=following)
        except HeadDiffers as error:
            if expected is Head.ANY and error.current is not None:
                raise CellMoved from error
            raise

    def _following(self, record: Revision, cell: Draft, at: CellAt) -> Following:
        """Return the next revision of an arm whose cell is written."""
        try:
            read = self._read_arm(record.document, lambda _: at)
        except (ServiceError, KinematicsError) as error:
            raise UnusableValue(
                f"arm {record.name} stands in this cell and could not any more: {error.say}",
                where=("frames" if "frames" in error.where else "arms",),
                value=record.name,
                way_out="change the arm first, or keep in the cell what it needs",
            ) from error
        reason = f"cell {cell.name} revision {at.revision}"
        said = f"{reason}: {cell.reason}" if cell.reason else reason
        return Following(draft_of(read, cell.author, said, cell.at), record.revision)
