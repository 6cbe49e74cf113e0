"""What happened to an arm while it was watched, and what events ask of a store.

Left out: how they are kept (service/storage), when one begins (detector.py).
"""

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime
from typing import Any, NamedTuple, Protocol

Document = dict[str, Any]

OPEN, ENDED, UNKNOWN = EVENT_STATES = ("open", "ended", "unknown")


@dataclass(frozen=True, slots=True)
class Event:
    """One event: from when to when something was so.

    ``seen_at`` is when it was last seen to be so, as far as that was written; ``ended_at`` is None
    while it is open, and for ever where the watching stopped before the event did (``unknown``).
    ``document`` holds peak, thresholds and what else belongs to its kind; ``simulated`` says that
    no arm stood there. ``change`` counts the writings of all events: this one's last. Times are
    UTC, in whole milliseconds.
    """

    id: str
    arm: str
    kind: str
    state: str
    began_at: datetime
    seen_at: datetime
    ended_at: datetime | None
    document: Document
    simulated: bool = False
    change: int = 0


class Which(NamedTuple):
    """Which events are meant; what is None is not looked at."""

    arm: str | None = None
    kind: str | None = None
    state: str | None = None


class EventStorage(Protocol):
    """Events. What is raised, and by whom it is called, is as in ``Storage`` of the arms."""

    def watch(self, watcher: int) -> None:
        """Begin to write as ``watcher``; what watchers left open that are gone becomes unknown."""

    def write(self, events: Sequence[Event], watcher: int) -> int:
        """Store new events and what became of known ones, in one step; return the last change."""

    def after(self, which: Which, change: int, limit: int) -> Sequence[Event]:
        """Return up to ``limit`` events that changed after ``change``, in the order they did."""

    def newest(self, which: Which, limit: int) -> Sequence[Event]:
        """Return the ``limit`` events that changed last, in the order they did."""

    def last_change(self) -> int:
        """Return the number of the last change; 0 where there never was one."""

    def trim(self, most: int, before: datetime) -> int:
        """Remove what is over and too much or too old; return how many.

        Of simulated arms a tenth of ``most`` are kept: they must not drive out real ones. The
        newest stays, whatever its age: the next change counts on from it.
        """
