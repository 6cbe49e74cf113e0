"""Writes events into the store, many in one step, in a thread of its own.

Idea: whoever watches puts an event here and goes on. The thread takes all that has come since the
last writing; an event that began and ended meanwhile is written once. While the store is away they
wait, up to a bound. The thread sleeps until something comes. Left out: what happens (watch.py).
"""

import logging
import secrets
import threading
from collections.abc import Callable
from contextlib import suppress
from datetime import datetime, timedelta
from time import monotonic

from service.errors import StorageUnavailable
from service.events.ports import OPEN, Event, EventStorage
from service.operations.stored import utc_now

_LOG = logging.getLogger(__name__)

GATHERED_S = 0.1
"""So long events are gathered: a commit that reaches the disk takes some milliseconds, and a screen
hears of an event a tenth of a second later."""

MOST_WAITING = 10_000
"""Events that wait for a store that is away, some 10 MB; then the oldest that are over are lost."""

_AGAIN_S = 2.0
_TRIM_EVERY_S, _TRIM_EVERY = 600.0, 1000
"""What is too old or too much goes that often, or after so many writings."""


class EventLog:
    """The events of one service on their way into the store.

    Parameters
    ----------
    most, most_days : how many are kept, and for how long.
    written : called in the thread whenever something was written.
    """

    def __init__(
        self,
        store: EventStorage,
        *,
        most: int,
        most_days: int,
        written: Callable[[], None],
        now: Callable[[], datetime] = utc_now,
    ) -> None:
        self._store, self._now, self._written = store, now, written
        self._most, self._kept_for = most, timedelta(days=most_days)
        # Of 31 bits, as a database server's locks take them.
        self._watcher = secrets.randbits(31)
        self._is_watching = False
        self._waiting: dict[str, Event] = {}
        self._lost = 0
        self._lock = threading.Lock()
        self._wanted, self._stopping = threading.Event(), threading.Event()
        self._thread: threading.Thread | None = None
        self._trimmed_at, self._since_trim = float("-inf"), 0

    def begin(self) -> None:
        """Close what a former process left open, if the store is there; else later."""
        with suppress(StorageUnavailable):
            self._watch()

    def put(self, event: Event) -> None:
        """Have an event written; a later state of the same takes the place of an earlier."""
        with self._lock:
            self._waiting[event.id] = event
            if len(self._waiting) > MOST_WAITING:
                self._lose_one()
            if self._thread is None and not self._stopping.is_set():
                self._thread = threading.Thread(target=self._work, name="events", daemon=True)
                self._thread.start()
        self._wanted.set()

    def stop(self, patience_s: float = 1.0) -> None:
        """Write what is still waiting, and end."""
        self._stopping.set()
        self._wanted.set()
        if self._thread is not None:
            self._thread.join(patience_s)

    def _work(self) -> None:
        while not self._stopping.is_set():
            self._wanted.wait()
            self._stopping.wait(GATHERED_S)
            self._wanted.clear()
            if not self._write():
                # What waits is tried again, also when nothing new comes.
                self._wanted.set()
                self._stopping.wait(_AGAIN_S)
        self._write()

    def _write(self) -> bool:
        with self._lock:
            events, self._waiting = self._waiting, {}
        try:
            self._watch()
            if events:
                self._store.write(list(events.values()), self._watcher)
        except StorageUnavailable:
            with self._lock:
                self._waiting = {**events, **self._waiting}
                while len(self._waiting) > MOST_WAITING:
                    self._lose_one()
            return False
        except Exception:
            # A thread that ends would leave all later events unwritten.
            _LOG.exception("%d events could not be written", len(events))
        if events:
            self._written()
            self._trim(len(events))
        return True

    def _watch(self) -> None:
        if not self._is_watching:
            self._store.watch(self._watcher)
            self._is_watching = True

    def _trim(self, count: int) -> None:
        self._since_trim += count
        if self._since_trim < _TRIM_EVERY and monotonic() - self._trimmed_at < _TRIM_EVERY_S:
            return
        try:
            self._store.trim(self._most, self._now() - self._kept_for)
            self._trimmed_at, self._since_trim = monotonic(), 0
        except StorageUnavailable:
            pass  # next time
        except Exception:
            _LOG.exception("events could not be trimmed")

    def _lose_one(self) -> None:
        over = (key for key, event in self._waiting.items() if event.state != OPEN)
        del self._waiting[next(over, next(iter(self._waiting)))]
        if self._lost == 0:
            _LOG.error("the store is away and too many events wait: the oldest are lost")
        self._lost += 1
