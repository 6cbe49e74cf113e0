"""Events as their users see them: read from a change on, page by page, or waited for.

Left out: addresses and formats (routes, wire), and how events come about (watch.py, log.py).
"""

from collections.abc import Callable, Sequence
from time import monotonic
from typing import NamedTuple

from service.errors import UnusableValue
from service.events.log import EventLog
from service.events.ports import Event, EventStorage, Which
from service.slots import Slot


class Page(NamedTuple):
    """Events in the order they changed; ``after`` asks for what follows, ``more`` is there now."""

    events: Sequence[Event]
    after: int
    more: bool


class Events:
    """The events of one service.

    Parameters
    ----------
    on_loop : calls a function on the event loop that readers wait on, from any thread.

    Attributes
    ----------
    asked_s : when somebody last asked, by the steady clock of this machine.
    """

    def __init__(
        self,
        store: EventStorage,
        on_loop: Callable[[Callable[[], None]], object],
        *,
        most: int,
        most_days: int,
    ) -> None:
        self._store, self._on_loop = store, on_loop
        self._slots: set[Slot] = set()
        self.asked_s = float("-inf")
        self.log = EventLog(store, most=most, most_days=most_days, written=self._written)

    def page(self, which: Which, after: int | None, size: int) -> Page:
        """Return up to ``size`` events that changed after ``after``; if None, the newest.

        Raises
        ------
        UnusableValue : nothing has ever changed so late.
        """
        self.asked_s = monotonic()
        last = self._store.last_change()
        if after is None:
            return Page(self._store.newest(which, size), last, False)
        if after > last:
            raise UnusableValue(
                f"the last change has number {last}",
                where=("after",),
                location="query",
                value=after,
                way_out="begin with after=0: these are other events than those counted so far",
            )
        found = self._store.after(which, after, size + 1)
        if len(found) > size:
            return Page(found[:size], found[size - 1].change, True)
        # What changed while this was read comes with the next page.
        return Page(found, max([last, *(event.change for event in found)]), False)

    def follow(self, slot: Slot) -> Callable[[], None]:
        """Have a slot filled whenever events were written; return what ends that."""
        self._slots.add(slot)
        return lambda: self._slots.discard(slot)

    def is_looked_at(self, within_s: float = 10.0) -> bool:
        """Return whether anybody waits for events, or asked a short while ago."""
        return bool(self._slots) or monotonic() - self.asked_s <= within_s

    def _written(self) -> None:
        try:
            self._on_loop(self._tell)
        except RuntimeError:
            return  # the loop is closed: nobody waits any more

    def _tell(self) -> None:
        for slot in self._slots:
            slot.put("", bytes)
