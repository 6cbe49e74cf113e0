"""The arm of a survey, as it was when the survey was taken in, in whatever process works on it.

Idea: a request that names an arm is kept with the revision it meant, so that it means the same
later; what is sent to a process is that revision's document and its cell, and the process reads
them as the service does. Left out: what is asked about the arm (the kinds).
"""

from typing import NamedTuple

from service.errors import DigestDiffers
from service.operations.arms import Arms, StoredArm
from service.operations.meant_arms import MeantArm, meant_arm
from service.storage.ports import Document, Revision, Survey
from service.wire.arms import ReadArm, read_arm
from service.wire.cells import CellAt, no_cell
from service.wire.models import AnyArm


class Setup(NamedTuple):
    """What a process needs beside its pieces: the request, and the stored arm with its cell."""

    request: Document
    record: Revision | None
    cell: CellAt | None


def pinned(request: Document, meant: MeantArm) -> Document:
    """Return a request that names the revision of the arm it meant."""
    if meant.revision is None:
        return request
    return {**request, "arm": {"name": meant.arm.name, "revision": meant.revision}}


def setup_of(arms: Arms[ReadArm], survey: Survey, asked: AnyArm) -> Setup:
    """Return what a process needs to work on a survey.

    Raises
    ------
    DigestDiffers : the arm is not what it was when the survey was taken in.
    """
    meant = meant_arm(arms, asked)
    if meant.identity() != survey.about["arm"]:
        raise DigestDiffers("the arm, or the cell it stands in, has changed since it was asked")
    if meant.revision is None:
        cell = meant.read.document.get("cell")
        return Setup(survey.request, None, arms.newest_cell(cell) if cell else None)
    record = arms.get(meant.arm.name, meant.revision).record
    return Setup(survey.request, record, arms.cell_of(record))


class OneArm:
    """Stands in for the store: whatever is asked for, it is this arm, and this cell."""

    def __init__(self, setup: Setup) -> None:
        self._record, self._cell = setup.record, setup.cell

    def get(self, name: str, revision: int | None = None) -> StoredArm[ReadArm]:
        """Return the arm that was sent along."""
        assert self._record is not None
        cell = self._cell
        read = read_arm(self._record.document, no_cell if cell is None else lambda _: cell)
        return StoredArm(self._record, read)

    def newest_cell(self, name: str) -> CellAt:
        """Return the cell that was sent along."""
        assert self._cell is not None
        return self._cell
