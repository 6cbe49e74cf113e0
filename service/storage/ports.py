"""What the service asks of a store of arms: revisions that never change and a head for each name.

Left out: how it is kept (``sql.py``), where (``opening.py``), and what a document means.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime
from enum import Enum
from typing import Any, Protocol

Document = dict[str, Any]


@dataclass(frozen=True, slots=True)
class Hiding:
    """Who took a name out of the list, why and when (UTC)."""

    author: str
    reason: str
    at: datetime


@dataclass(frozen=True, slots=True)
class Revision:
    """One stored state of one arm; nothing in it changes but ``hidden``, which is set once.

    ``document`` is the arm as on the wire. ``created_at`` is UTC, in whole milliseconds.
    An author or reason that was not said is the empty string.
    """

    name: str
    revision: int
    document: Document
    table_digest: str
    setup_digest: str
    digest: str
    author: str
    reason: str
    created_at: datetime
    hidden: Hiding | None = None


@dataclass(frozen=True, slots=True)
class Draft:
    """What becomes the next revision of ``name`` when it is written."""

    name: str
    document: Document
    table_digest: str
    setup_digest: str
    digest: str
    author: str
    reason: str
    at: datetime


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


class ArmStorage(Protocol):
    """Revisions of arms by name.

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

    def write(self, draft: Draft, expected: int | Head, *, seed: bool = False) -> Revision:
        """Store ``draft`` as the next revision if the head is as expected, in one step.

        ``seed`` writes what ships with the service also into a store in memory that users
        cannot write to.

        Raises
        ------
        HeadDiffers : the head is another one, or there is one (``Head.ABSENT``), or there is none.
        """

    def hide(self, name: str, expected: int | Head, hiding: Hiding) -> None:
        """Take ``name`` out of the list; its revisions stay.

        Raises
        ------
        HeadDiffers : the head is another one, or there is none.
        """

    def state(self) -> int | None:
        """Return a number that is another one after every write, whoever wrote, at no cost.

        None where that cannot be told without asking a database server.
        """

    def ping(self) -> None:
        """Return when the store answers a question."""
