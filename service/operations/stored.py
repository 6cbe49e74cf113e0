"""Stored documents: create, replace, hide, look up, list; what arms and cells have in common.

Left out: what a document means (subclasses read it) and how revisions are kept (storage).
"""

import re
from abc import ABC, abstractmethod
from collections.abc import Callable, Collection
from dataclasses import dataclass
from datetime import UTC, datetime
from functools import lru_cache
from typing import Any, ClassVar, Generic, Protocol, TypeVar

from kinematics.known_names import alike
from service.operations import stored_refusals
from service.operations.heads import Heads
from service.operations.stored_refusals import version_of
from service.storage.ports import (
    CellMoved,
    CellRevision,
    Document,
    Draft,
    Head,
    HeadDiffers,
    Hiding,
    Kind,
    Revision,
    Storage,
)

# Names and numbers outside these are in no store, and some databases choke on them.
NAME = re.compile(r"[a-z0-9][a-z0-9-]{0,47}", re.ASCII)
_LARGEST_REVISION = 2**31 - 1
# Of so many names those most like another are sought: some milliseconds.
_MOST_COMPARED = 1000
# Each time somebody else has written a cell or an arm of it in the milliseconds between.
_MOST_TRIES = 20


class Digests(Protocol):
    """The digests of a document under the names they have on the wire."""

    @property
    def digest(self) -> str:
        """The 8 hex digits that stand for all."""

    def _asdict(self) -> dict[str, Any]:
        """Return all by name."""


class ReadDocument(Protocol):
    """A document that has been read: checked, normalised, ready to compute with."""

    @property
    def document(self) -> Document:
        """The document as on the wire, normalised: this is what is stored."""

    @property
    def findings(self) -> Collection[Any]:
        """What was mended on the way in."""

    @property
    def digests(self) -> Digests:
        """What the document is told apart by."""

    @property
    def stands_in(self) -> CellRevision | None:
        """The cell it was read with, if it names one."""


Read = TypeVar("Read", bound=ReadDocument)


@dataclass(frozen=True, eq=False, slots=True)
class StoredDocument(Generic[Read]):
    """One revision (``record``) together with what it describes (``read``)."""

    record: Revision
    read: Read


@dataclass(frozen=True, slots=True)
class Page:
    """Part of a list; ``more`` says that further ones follow the last."""

    records: list[Revision]
    more: bool


def draft_of(read: ReadDocument, author: str, reason: str, at: datetime) -> Draft:
    """Return what is written when a document that has been read is stored."""
    digests = read.digests._asdict()
    digest = digests.pop("digest")
    name = str(read.document["name"])
    return Draft(name, read.document, digests, digest, author, reason, at, read.stands_in)


def utc_now() -> datetime:
    """Return the time, UTC."""
    return datetime.now(UTC)


class Stored(ABC, Generic[Read]):
    """The stored documents of one kind, of one service.

    Every method blocks on the store and may raise ``StorageUnavailable``. Reading a document
    raises what ``_read`` raises.

    Parameters
    ----------
    storage : where revisions are kept.
    now : the clock that stamps revisions, UTC.

    Attributes
    ----------
    after_writing : called whenever this process has written.
    """

    kind: ClassVar[Kind]
    # An arm that has been read takes some 20 kB; a plant has tens of arms, a test bench hundreds.
    revisions_kept: ClassVar[int] = 256

    def __init__(self, storage: Storage, now: Callable[[], datetime] = utc_now) -> None:
        self.storage = storage
        self._now = now
        # Revisions never change, so neither does what was read from one.
        self._read_revision = lru_cache(maxsize=self.revisions_kept)(self._fetch)
        self._heads = Heads(storage)
        self.after_writing: list[Callable[[], None]] = [self._heads.forget]

    @abstractmethod
    def _read(self, document: object, record: Revision | None) -> Read:
        """Return what a document describes; ``record`` is its revision, if it is stored."""

    def read(self, document: object) -> Read:
        """Return what a document describes that is not stored, or not yet."""
        return self._read(document, None)

    @property
    def answers_at_once(self) -> bool:
        """Whether looking up a name takes no more than a look into a local file.

        Such a look-up need not be handed to a thread, which takes longer than the look itself.
        """
        return self._heads.at_once

    def get(self, name: str, revision: int | None = None) -> StoredDocument[Read]:
        """Return a document to compute with: its newest revision, or the one asked for.

        The newest is looked up again whenever anything was written, since other processes write
        too; reading is kept.

        Raises
        ------
        UnknownArm : no such name, or it is hidden and no revision was asked for.
        UnknownRevision : the name never had that revision.
        """
        if revision is not None:
            return self._read_revision(name, revision)
        number = self._heads.number(name) if NAME.fullmatch(name) else None
        if number is None:
            raise stored_refusals.unknown(self.kind, name)
        return self._read_revision(name, number)

    def names_like(self, name: str, most: int = 3) -> list[str]:
        """Return the names most like one that is not there, the most like first."""
        known = [record.name for record in self.storage.heads("", _MOST_COMPARED)]
        return alike(name, known, most)

    def create(
        self, document: object, *, author: str = "", reason: str = "", seed: bool = False
    ) -> StoredDocument[Read]:
        """Store a new document under the name it gives.

        ``seed`` marks what ships with the service: see ``Storage.write``.

        Raises
        ------
        NameTaken : there is one of that name.
        """

        def once() -> StoredDocument[Read]:
            read = self._read(document, None)
            draft = draft_of(read, author, reason, self._now())
            try:
                return StoredDocument(self._write(draft, Head.ABSENT, read, seed=seed), read)
            except HeadDiffers as error:
                raise stored_refusals.taken(self.kind, draft.name) from error

        return self._tried(once)

    def replace(
        self,
        name: str,
        document: object,
        expected: Head | Collection[str],
        *,
        author: str = "",
        reason: str = "",
    ) -> StoredDocument[Read]:
        """Store the next revision of ``name`` if its state is as expected.

        Parameters
        ----------
        expected : versions (see ``version_of``) one of which the head must be; or ``Head.ANY``,
            or ``Head.ABSENT`` to create only.

        Raises
        ------
        RevisionDiffers : the head is not as expected.
        UnusableValue : the document bears another name.
        """

        def once() -> StoredDocument[Read]:
            try:
                number = self._expected_number(name, expected)
                read = self._read(document, None)
                draft = draft_of(read, author, reason, self._now())
                if draft.name != name:
                    raise stored_refusals.other_name(self.kind, name, draft.name)
                return StoredDocument(self._write(draft, number, read, seed=False), read)
            except HeadDiffers as error:
                raise stored_refusals.differs(self.kind, name, error.current, expected) from error

        return self._tried(once)

    def remove(
        self,
        name: str,
        expected: Head | Collection[str] = Head.ANY,
        *,
        author: str = "",
        reason: str = "",
    ) -> None:
        """Hide ``name`` if its state is as expected; its revisions stay.

        Raises
        ------
        UnknownArm : there is none to hide.
        RevisionDiffers : the head is not as expected.
        """
        try:
            number = self._expected_number(name, expected)
            self.storage.hide(name, number, Hiding(author, reason, self._now()))
            self._written()
        except HeadDiffers as error:
            if error.current is None:
                raise stored_refusals.unknown(self.kind, name) from error
            raise stored_refusals.differs(self.kind, name, error.current, expected) from error

    def page(self, after_name: str, size: int) -> Page:
        """Return up to ``size`` heads, by name, that follow ``after_name`` ("" for the first)."""
        records = self.storage.heads(after_name, size + 1)
        return Page(list(records[:size]), len(records) > size)

    def revisions_page(self, name: str, after: int, size: int) -> Page:
        """Return up to ``size`` revisions of ``name``, hidden or not, that follow ``after``.

        Raises
        ------
        UnknownArm : the name never had a revision.
        """
        self._refuse_unknown(name)
        records = self.storage.revisions(name, after, size + 1)
        return Page(list(records[:size]), len(records) > size)

    def count(self) -> int:
        """Return the number of names that are not hidden."""
        return self.storage.count()

    def _fetch(self, name: str, number: int) -> StoredDocument[Read]:
        record = None
        if NAME.fullmatch(name) and 1 <= number <= _LARGEST_REVISION:
            record = self.storage.revision(name, number)
        if record is None:
            self._refuse_unknown(name)
            raise stored_refusals.no_revision(self.kind, name, number)
        return StoredDocument(record, self._read(record.document, record))

    def _write(self, draft: Draft, expected: int | Head, read: Read, *, seed: bool) -> Revision:
        """Write a draft of ``read``; a subclass writes what follows from it in the same step."""
        return self.storage.write(draft, expected, seed=seed)

    def _tried(self, once: Callable[[], StoredDocument[Read]]) -> StoredDocument[Read]:
        """Do it again while others change a cell, or its arms, between reading and writing."""
        for _ in range(_MOST_TRIES):
            try:
                stored = once()
            except CellMoved:
                continue
            self._written()
            return stored
        raise stored_refusals.too_lively(self.kind)

    def _written(self) -> None:
        for call in self.after_writing:
            call()

    def _refuse_unknown(self, name: str) -> None:
        if not NAME.fullmatch(name) or not self.storage.revisions(name, 0, 1):
            raise stored_refusals.unknown(self.kind, name)

    def _expected_number(self, name: str, expected: Head | Collection[str]) -> int | Head:
        """Turn expected versions into the revision number the store then checks as it writes."""
        if not NAME.fullmatch(name):
            raise HeadDiffers(None)
        if isinstance(expected, Head):
            return expected
        head = self.storage.head(name)
        if head is None or version_of(head) not in expected:
            raise HeadDiffers(head)
        return head.revision
