"""What is kept of a pose for years, and what records ask of a store.

Left out: how they are kept (service/storage), how they come about (desk.py).
"""

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime
from typing import Any, NamedTuple, Protocol

Document = dict[str, Any]


@dataclass(frozen=True, slots=True)
class Record:
    """One pose as it was told, with what leads back to it; nothing in it ever changes.

    ``document`` is the record as on the wire; the others repeat what is searched for, and how many
    columns a line of it takes. Times are UTC, in whole milliseconds. Ids sort by the time of their
    making.
    """

    id: str
    arm: str
    serial: str | None
    tag: int | None
    quality: str
    sampled_at: datetime
    joint_count: int
    orientation_count: int
    document: Document


class Filter(NamedTuple):
    """Which records are meant; what is None is not looked at. ``since`` <= sampled < ``before``."""

    arm: str | None = None
    serial: str | None = None
    tag: int | None = None
    quality: str | None = None
    since: datetime | None = None
    before: datetime | None = None


class Widths(NamedTuple):
    """The most joint values, and numbers of an orientation, that one of some records has."""

    joints: int
    orientation: int


class Sent(NamedTuple):
    """A record together with the digest of the request that made it."""

    record: Record
    digest: str


class RecordKeyUsed(Exception):
    """The sender's key came before; ``sent`` is what was made then."""

    def __init__(self, sent: Sent) -> None:
        super().__init__("the key was used before")
        self.sent = sent


class RecordStorage(Protocol):
    """Records. What is raised, and by whom it is called, is as in ``Storage`` of the arms."""

    def add(self, record: Record, *, key: str | None, digest: str) -> None:
        """Store a record; once this returns it survives the process and the power.

        Raises
        ------
        RecordKeyUsed : one was stored with this key before.
        """

    def sent(self, key: str) -> Sent | None:
        """Return the record that was stored with a key."""

    def get(self, record: str) -> Record | None:
        """Return one record."""

    def newest(self, which: Filter, before: str, limit: int) -> Sequence[Record]:
        """Return up to ``limit`` records, the newest first, those older than ``before`` if said."""

    def oldest(self, which: Filter, after: str, limit: int) -> Sequence[Record]:
        """Return up to ``limit`` records, the oldest first, those newer than ``after`` if said."""

    def widths(self, which: Filter) -> Widths:
        """Return the largest counts; zeros where there is no record."""
