"""Stored arms: create, replace, hide, look up, list; what a route or a command asks for.

Left out: what a document means (``read_arm`` is passed in) and how revisions are kept (storage).
"""

import re
from collections.abc import Callable, Collection
from dataclasses import dataclass
from datetime import UTC, datetime
from functools import lru_cache
from typing import Any, Generic, Protocol, TypeVar

from service.errors import NameTaken, RevisionDiffers, UnknownArm, UnknownRevision, UnusableValue
from service.operations.heads import Heads
from service.storage.ports import (
    ArmStorage,
    Document,
    Draft,
    Head,
    HeadDiffers,
    Hiding,
    Revision,
)

# An arm that has been read takes some 20 kB; a plant has tens of arms, a test bench hundreds.
READ_ARMS_KEPT = 256
# Names and numbers outside these are in no store, and some databases choke on them.
NAME = re.compile(r"[a-z0-9][a-z0-9-]{0,47}", re.ASCII)
_LARGEST_REVISION = 2**31 - 1


class Digests(Protocol):
    """The three digests of an arm, as the contract defines them."""

    @property
    def table_digest(self) -> str:
        """Of rows, drive map, travel and speeds."""

    @property
    def setup_digest(self) -> str:
        """Of base, tools, frames, cell revision, thresholds and uncertainty."""

    @property
    def digest(self) -> str:
        """The first 8 hex digits of both joined."""


class ReadArm(Protocol):
    """An arm that has been read: checked, normalised, ready to compute with."""

    @property
    def document(self) -> Document:
        """The arm as on the wire, normalised: this is what is stored."""

    @property
    def findings(self) -> Collection[Any]:
        """What was mended on the way in."""

    @property
    def digests(self) -> Digests:
        """What the arm is told apart by."""


Read = TypeVar("Read", bound=ReadArm)


@dataclass(frozen=True, eq=False, slots=True)
class StoredArm(Generic[Read]):
    """One revision (``record``) together with the arm it describes (``read``)."""

    record: Revision
    read: Read


@dataclass(frozen=True, slots=True)
class Page:
    """Part of a list; ``more`` says that further ones follow the last."""

    records: list[Revision]
    more: bool


def version_of(record: Revision) -> str:
    """Return what tells this state of the arm from any other: ``<revision>-<digest>``."""
    return f"{record.revision}-{record.digest}"


def _now() -> datetime:
    return datetime.now(UTC)


class Arms(Generic[Read]):
    """The stored arms of one service.

    Every method blocks on the store and may raise ``StorageUnavailable``. Reading an arm raises
    what ``read_arm`` raises.

    Parameters
    ----------
    storage : where revisions are kept.
    read_arm : document -> read arm.
    now : the clock that stamps revisions, UTC.
    """

    def __init__(
        self,
        storage: ArmStorage,
        read_arm: Callable[[object], Read],
        *,
        now: Callable[[], datetime] = _now,
    ) -> None:
        self.storage = storage
        self._read_arm = read_arm
        self._now = now
        # Revisions never change, so neither does what was read from one.
        self._read_revision = lru_cache(maxsize=READ_ARMS_KEPT)(self._fetch)
        self._heads = Heads(storage)

    @property
    def answers_at_once(self) -> bool:
        """Whether looking up an arm takes no more than a look into a local file.

        Such a look-up need not be handed to a thread, which takes longer than the look itself.
        """
        return self._heads.at_once

    def get(self, name: str, revision: int | None = None) -> StoredArm[Read]:
        """Return an arm to compute with: its newest revision, or the one asked for.

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
            raise _unknown_arm(name)
        return self._read_revision(name, number)

    def create(
        self, document: object, *, author: str = "", reason: str = "", seed: bool = False
    ) -> StoredArm[Read]:
        """Store a new arm under the name its document gives.

        ``seed`` marks arms that ship with the service: see ``ArmStorage.write``.

        Raises
        ------
        NameTaken : an arm of that name is there.
        """
        read = self._read_arm(document)
        draft = self._draft(read, author, reason)
        try:
            return StoredArm(self._written(draft, Head.ABSENT, seed=seed), read)
        except HeadDiffers as error:
            raise NameTaken(
                f"there is an arm {draft.name!r} already",
                where=("name",),
                value=draft.name,
                way_out=f"PUT /v1/arms/{draft.name} with If-Match changes it",
            ) from error

    def replace(
        self,
        name: str,
        document: object,
        expected: Head | Collection[str],
        *,
        author: str = "",
        reason: str = "",
    ) -> StoredArm[Read]:
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
        try:
            number = self._expected_number(name, expected)
            read = self._read_arm(document)
            draft = self._draft(read, author, reason)
            if draft.name != name:
                raise _other_name(name, draft.name)
            return StoredArm(self._written(draft, number), read)
        except HeadDiffers as error:
            raise _differs(name, error.current, expected) from error

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
        UnknownArm : there is no such arm to hide.
        RevisionDiffers : the head is not as expected.
        """
        try:
            number = self._expected_number(name, expected)
            self.storage.hide(name, number, Hiding(author, reason, self._now()))
            self._heads.forget()
        except HeadDiffers as error:
            if error.current is None:
                raise _unknown_arm(name) from error
            raise _differs(name, error.current, expected) from error

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
        """Return the number of arms that are not hidden."""
        return self.storage.count()

    def _written(self, draft: Draft, expected: int | Head, *, seed: bool = False) -> Revision:
        written = self.storage.write(draft, expected, seed=seed)
        self._heads.forget()
        return written

    def _fetch(self, name: str, number: int) -> StoredArm[Read]:
        record = None
        if NAME.fullmatch(name) and 1 <= number <= _LARGEST_REVISION:
            record = self.storage.revision(name, number)
        if record is None:
            self._refuse_unknown(name)
            raise UnknownRevision(
                f"arm {name!r} has no revision {number}",
                where=("n",),
                location="path",
                value=number,
                way_out=f"GET /v1/arms/{name}/revisions lists them",
            )
        return StoredArm(record, self._read_arm(record.document))

    def _refuse_unknown(self, name: str) -> None:
        if not NAME.fullmatch(name) or not self.storage.revisions(name, 0, 1):
            raise _unknown_arm(name)

    def _draft(self, read: Read, author: str, reason: str) -> Draft:
        return Draft(
            name=str(read.document["name"]),
            document=read.document,
            table_digest=read.digests.table_digest,
            setup_digest=read.digests.setup_digest,
            digest=read.digests.digest,
            author=author,
            reason=reason,
            at=self._now(),
        )

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


def _other_name(name: str, given: str) -> UnusableValue:
    return UnusableValue(
        f"the arm is called {given!r}, but the address says {name!r}",
        where=("name",),
        value=given,
        way_out="names cannot be changed: create a new arm and remove the old one",
    )


def _unknown_arm(name: str) -> UnknownArm:
    return UnknownArm(
        f"there is no arm {name!r}",
        where=("arm",),
        location="path",
        value=name,
        way_out="GET /v1/arms lists the arms",
    )


def _differs(
    name: str, current: Revision | None, expected: Head | Collection[str]
) -> RevisionDiffers:
    header = "if-none-match" if expected is Head.ABSENT else "if-match"
    if current is None:
        say, way_out = f"there is no arm {name!r} now", "create it with If-None-Match: *"
    elif expected is Head.ABSENT:
        say = f"there is an arm {name!r} already"
        way_out = f'change it with If-Match: "{version_of(current)}"'
    else:
        say = f"arm {name!r} is at {version_of(current)} now"
        way_out = "get it again, put the change into what it has become, and send its ETag"
    return RevisionDiffers(
        say,
        where=(header,),
        location="header",
        value=None if isinstance(expected, Head) else ", ".join(sorted(expected)),
        way_out=way_out,
    )
