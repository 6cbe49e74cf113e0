"""Has live arms watched while a service runs: what it noted is written when it ends.

Left out: what is watched (watch.py) and asked (desk.py).
"""

import asyncio
from collections.abc import Iterator
from contextlib import contextmanager

from service.events.desk import Events
from service.events.ports import EventStorage
from service.events.watch import EventWatch
from service.live.live_arms import LiveArms
from service.settings import Settings


@contextmanager
def watched_events(live: LiveArms, store: EventStorage, settings: Settings) -> Iterator[Events]:
    """Have the events of live arms noted, on the event loop this is called on."""
    on_loop = asyncio.get_running_loop().call_soon_threadsafe
    events = Events(store, on_loop, most=settings.events_kept, most_days=settings.events_days)
    events.log.begin()
    watch = EventWatch(events.log.put, live.clock)
    live.observers.append(watch)
    try:
        yield events
    finally:
        live.observers.remove(watch)
        watch.leave()
        events.log.stop()
