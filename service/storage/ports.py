"""What the service asks of a store: revisions that never change, and a head for each name.

There is one such store for each kind of document, arms and cells; an arm may name a cell, and then
stands in one revision of it. Surveys have a store of their own: what is asked, and its pieces.

Left out: how they are kept (``sql.py``), where (``opening.py``), and what a document means.
"""

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from datetime import datetime
from enum import Enum
from typing import Any, Literal, NamedTuple, Protocol

Document = dict[str, Any]
Kind = Literal["arm", "cell"]


class CellRevision(NamedTuple):
    """The revision of a cell that a revision of an arm stands in."""

    name: str
    revision: int


@dataclass(frozen=True, slots=True)
class Hiding:
    """Who took a name out of the list, why and when (UTC)."""

    author: str
    reason: str
    at: datetime


@dataclass(frozen=True, slots=True)
class Revision:
    """One stored state of one document; nothing in it changes but ``hidden``, which is set once.

    ``document`` is as on the wire, ``digests`` are under the names they have there, and ``digest``
    stands for all of them. ``created_at`` is UTC, in whole milliseconds. An author or reason that
    was not said is the empty string.
    """

    name: str
    revision: int
    document: Document
    digests: Mapping[str, str]
    digest: str
    author: str
    reason: str
    created_at: datetime
    cell: CellRevision | None = None
    hidden: Hiding | None = None


@dataclass(frozen=True, slots=True)
class Draft:
    """What becomes the next revision of ``name`` when it is written."""

    name: str
    document: Document
    digests: Mapping[str, str]
    digest: str
    author: str
    reason: str
    at: datetime
    cell: CellRevision | None = None


class Following(NamedTuple):
    """An arm's next revision, for the next revision of its cell: if its head is still ``head``."""

    draft: Draft
    head: int


class Head(Enum):
    """What a writer may expect of a name instead of one revision number."""

    ABSENT = "absent"
    ANY = "any"


class HeadDiffers(Exception):
    """The head is not what the writer expected; ``current`` is the head there is, or None.

    Examples
    --------
    >>> HeadDiffers(None).current is None
    True
    """

    def __init__(self, current: Revision | None) -> None:
        super().__init__("the head of the name is not the expected one")
        self.current = current


class CellMoved(Exception):
    """While a write was prepared the cell was changed, or which arms stand in it: read again."""


class CellInUse(Exception):
    """The cell cannot be hidden: ``arms`` stand in it.

    Examples
    --------
    >>> CellInUse(["press-arm"]).arms
    ['press-arm']
    """

    def __init__(self, arms: Sequence[str]) -> None:
        super().__init__("arms stand in the cell")
        self.arms = arms


class Storage(Protocol):
    """Revisions of documents of one kind, by name.

    Revision numbers of a name count from 1 and are never used again, also after the name was
    hidden and created anew. Every method may raise ``StorageUnavailable``; a write that raises
    has left nothing behind. Calls block: an event loop hands them to a thread.
    """

    def head(self, name: str) -> Revision | None:
        """Return the newest revision of ``name``; None when it is unknown or hidden."""

    def head_number(self, name: str) -> int | None:
        """Return the number of ``head(name)`` without fetching its document."""

    def revision(self, name: str, number: int) -> Revision | None:
        """Return one revision, of a hidden name too; None when there is none."""

    def revisions(self, name: str, after: int, limit: int) -> Sequence[Revision]:
        """Return up to ``limit`` revisions numbered above ``after``, of a hidden name too."""

    def heads(self, after_name: str, limit: int) -> Sequence[Revision]:
        """Return up to ``limit`` heads whose names sort after ``after_name``, hidden left out."""

    def count(self) -> int:
        """Return the number of names that are not hidden."""

    def standing_in(self, cell: str) -> Sequence[Revision]:
        """Return the heads that stand in a cell, by name, hidden left out."""

    def write(
        self,
        draft: Draft,
        expected: int | Head,
        *,
        seed: bool = False,
        following: Sequence[Following] = (),
    ) -> Revision:
        """Store ``draft`` as the next revision if the head is as expected, in one step.

        ``seed`` writes what ships with the service also into a store in memory that users
        cannot write to. ``following`` are the arms that stand in a cell, written with it.

        Raises
        ------
        HeadDiffers : the head is another one, or there is one (``Head.ABSENT``), or there is none.
        CellMoved : the draft's cell is at another revision, or is hidden; or ``following`` are not
            the arms that stand in the cell, at the heads they have.
        """

    def hide(self, name: str, expected: int | Head, hiding: Hiding) -> None:
        """Take ``name`` out of the list; its revisions stay.

        Raises
        ------
        HeadDiffers : the head is another one, or there is none.
        CellInUse : arms stand in the cell.
        """

    def state(self) -> int | None:
        """Return a number that is another one after every write, whoever wrote, at no cost.

        None where that cannot be told without asking a database server.
        """

    def ping(self) -> None:
        """Return when the store answers a question."""


QUEUED, RUNNING, SUCCEEDED, FAILED, CANCELLED = SURVEY_STATES = (
    *("queued", "running", "succeeded", "failed", "cancelled"),
)
OPEN_STATES = (QUEUED, RUNNING)


@dataclass(frozen=True, slots=True)
class Survey:
    """A piece of long work: what was asked, how far it is, what was counted on the way.

    ``request`` is as on the wire but for what its pieces hold, ``about`` what the result is of;
    ``reason`` says why it failed. Ids sort by the time of their making.
    """

    id: str
    kind: str
    title: str
    request: Document
    about: Document
    total: int
    created_at: datetime
    state: str = QUEUED
    done: int = 0
    counts: Mapping[str, int] = field(default_factory=dict)
    reason: str = ""
    started_at: datetime | None = None
    finished_at: datetime | None = None


class GivenPiece(NamedTuple):
    """Part of what a survey is to work through: ``size`` of its ``total``."""

    number: int
    size: int
    given: bytes


class MadePiece(NamedTuple):
    """What became of a piece, and what was counted in it."""

    number: int
    made: bytes
    counts: Mapping[str, int]


class KeyUsed(Exception):
    """The sender's key came before, with a request of this digest, and made this survey."""

    def __init__(self, survey: Survey, digest: str) -> None:
        super().__init__("the key was used before")
        self.survey, self.digest = survey, digest


class SurveyStorage(Protocol):
    """Surveys and their pieces. What is raised, and by whom it is called, is as in ``Storage``."""

    def add(
        self, survey: Survey, pieces: Iterable[GivenPiece], *, key: str | None, digest: str
    ) -> None:
        """Store a survey with all its pieces, in one step.

        Raises
        ------
        KeyUsed : one was stored with this key before.
        """

    def sent(self, key: str) -> tuple[Survey, str] | None:
        """Return the survey stored with a sender's key, and the digest of what came with it."""

    def get(self, survey: str) -> Survey | None:
        """Return one survey."""

    def page(self, before: str, limit: int) -> Sequence[Survey]:
        """Return up to ``limit`` surveys, the newest first, those older than ``before`` if said."""

    def next_open(self) -> Survey | None:
        """Return the oldest one that is queued or running."""

    def count_open(self) -> int:
        """Return how many are queued or running."""

    def begin(self, survey: str, at: datetime) -> bool:
        """Let a queued one run; return whether it runs."""

    def left(self, survey: str, after: int, limit: int) -> Sequence[GivenPiece]:
        """Return pieces numbered above ``after`` that are not made yet."""

    def keep(self, survey: str, made: Sequence[MadePiece]) -> bool:
        """Keep what was made, in one step, unless it was before; return whether it still runs."""

    def end(self, survey: str, state: str, at: datetime, reason: str = "") -> bool:
        """Bring an open one to its last state; return whether it was open."""

    def made(self, survey: str, number: int) -> bytes:
        """Return what became of a piece."""

    def beginnings(self, survey: str, length: int) -> Sequence[bytes]:
        """Return the first bytes of what became of each piece, by number."""

    def given(self, survey: str, number: int) -> bytes:
        """Return what a piece was given."""

    def sizes(self, survey: str) -> Sequence[int]:
        """Return the sizes of all pieces, by number."""

    def remove(self, survey: str) -> None:
        """Remove a survey and its pieces."""

    def over_before(self, at: datetime, limit: int) -> Sequence[str]:
        """Return the ids of surveys that were over before a moment, the oldest first."""

    def may_lead(self) -> bool:
        """Return whether this process is the one to run surveys; asking makes it, if none is."""
