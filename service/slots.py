"""What one reader is still to be told: of each thing the newest, and nothing older.

Left out: who puts something in, and how it is sent.
"""

import asyncio
from collections.abc import Callable

Event = Callable[[], bytes]
"""Makes what is told, when it is told."""


class Slot:
    """What one reader is still to be told: of each thing the newest event.

    Examples
    --------
    >>> async def said():
    ...     slot = Slot()
    ...     slot.put("a", lambda: b"1")
    ...     slot.put("a", lambda: b"2")
    ...     await slot.filled()
    ...     return slot.taken()
    >>> asyncio.run(said())
    b'2'
    """

    def __init__(self) -> None:
        self.ended = False
        self._events: dict[str, Event] = {}
        self._waiting: asyncio.Future[None] | None = None

    @property
    def is_filled(self) -> bool:
        """Whether something is to be told."""
        return bool(self._events)

    def put(self, key: str, event: Event) -> None:
        """Tell something; what was to be told of the same is not told any more."""
        self._events[key] = event
        self._wake()

    def end(self) -> None:
        """Tell no more; what stands here still goes out."""
        self.ended = True
        self._wake()

    async def filled(self) -> bool:
        """Return when there is something to be told; False if there never will be."""
        while not self._events:
            if self.ended:
                return False
            self._waiting = asyncio.get_running_loop().create_future()
            await self._waiting
        return True

    def taken(self) -> bytes:
        """Return all that is to be told, made now."""
        events, self._events = self._events, {}
        return b"".join([event() for event in events.values()])

    def _wake(self) -> None:
        if self._waiting is not None and not self._waiting.done():
            self._waiting.set_result(None)
