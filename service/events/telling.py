"""Events told as they change: each change once and in order, also to a reader who left meanwhile.

Idea: a page is read from the store when something was written, and the next one when the reader has
taken it, so that a slow reader costs one page. Left out: the stream (service/event_streams.py), and
how an event looks in it (``render``).
"""

import asyncio
import logging
from collections.abc import Callable, Sequence
from functools import partial

from service.errors import ServiceError
from service.events.desk import Events
from service.events.ports import Event, Which
from service.slots import Slot

_LOG = logging.getLogger(__name__)
_NAME = "events"
_PAGE = 200
_TAKEN_S = 0.05
"""So often it is looked whether a reader has taken a page."""

Render = Callable[[Sequence[Event]], bytes]


def tell(
    events: Events, which: Which, after: int, render: Render, slot: Slot
) -> Callable[[], None]:
    """Fill a slot with events that changed after ``after``; return what ends that."""
    telling = asyncio.ensure_future(_tell(events, which, after, render, slot))

    def leave() -> None:
        telling.cancel()

    return leave


async def _tell(events: Events, which: Which, after: int, render: Render, slot: Slot) -> None:
    written = Slot()
    leave = events.follow(written)
    try:
        while not slot.ended:
            page = await asyncio.to_thread(events.page, which, after, _PAGE)
            after = page.after
            if page.events:
                slot.put(_NAME, partial(render, page.events))
            while slot.is_filled and not slot.ended:
                await asyncio.sleep(_TAKEN_S)
            if not page.more:
                await written.filled()
                written.taken()
    except ServiceError as error:
        # The store is away: the reader asks again by itself, and misses nothing.
        _LOG.info("events are told no more: %s", error.say)
    finally:
        leave()
        slot.end()
