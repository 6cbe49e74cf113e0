"""Server-sent events (WHATWG HTML, 9.2): streams that hold the newest alone, and end when told to.

Idea: each stream has one place for each thing it tells of. What is newer takes it, so that a reader
who is slow, or reads no more, costs one event and what the network's buffers hold, and never sees
an old value after a newer one. An event is made when it is sent, not when it happens.
Left out: what is told (channels of live poses, progress of surveys).
"""

import asyncio
import socket
from collections.abc import Callable, Sequence
from contextlib import suppress
from time import monotonic
from typing import Any

from starlette.responses import Response
from starlette.types import Receive, Scope, Send

from service.errors import NotAvailable
from service.slots import Slot

Attach = Callable[[Slot], Callable[[], None]]

MEDIA_TYPE = "text/event-stream"
MOST_STREAMS = 400
"""Of all kinds together; below the connections that are served at once, so that others get in."""

_RETRY_MS = 2000
_ALIVE_S = 5.0
"""A screen that hears nothing for twice as long says so: it must not show what may be over. Proxies
drop connections on which nothing comes for half a minute."""

_BLOCKED_S = 10.0
"""Who takes nothing for so long has left without a word; its connection is cut."""

_SWEEP_S = 1.0
_LEAST_GAP_S = 0.005
"""No screen shows 200 values a second: inputs that are faster are not told one by one."""

_BUFFER_BYTES = 32 * 1024
"""What is under way to one reader; more would be old values that it has yet to read."""


class EventStreams:
    """All streams of one service, and those who wait for a change without one."""

    def __init__(self, now: Callable[[], float] = monotonic) -> None:
        self.open: set[EventStream] = set()
        self.waiting: set[Slot] = set()
        self._now = now
        self._sweep: asyncio.TimerHandle | None = None
        self._stopped = False

    def add(self, stream: "EventStream") -> None:
        """Take care of a stream from now on."""
        self.open.add(stream)
        if self._stopped:
            stream.slot.end()
        if self._sweep is None:
            self._sweep = asyncio.get_running_loop().call_later(_SWEEP_S, self._look_after)

    def check_room(self) -> None:
        """Refuse one stream more than are served.

        Raises
        ------
        NotAvailable
        """
        if len(self.open) + len(self.waiting) >= MOST_STREAMS:
            raise NotAvailable(
                f"{MOST_STREAMS} event streams are open",
                way_out="ask without a stream, now and then",
                headers={"Retry-After": "10"},
            )

    async def wait(self, slot: Slot, most_s: float, receive: Receive) -> bool:
        """Wait for something in a slot.

        Parameters
        ----------
        receive : of the request: who has left is not waited for, and gives its room to others.

        Returns
        -------
        False where nothing came in time, the asker left or the service stops.
        """
        self.check_room()
        self.waiting.add(slot)
        gone = asyncio.ensure_future(_gone(receive, slot))
        try:
            async with asyncio.timeout(0.0 if self._stopped else most_s):
                return await slot.filled()
        except TimeoutError:
            return False
        finally:
            gone.cancel()
            self.waiting.discard(slot)

    def stop(self) -> None:
        """End all streams at once."""
        self._stopped = True
        if self._sweep is not None:
            self._sweep.cancel()
        for slot in self.waiting:
            slot.end()
        for stream in self.open:
            stream.stop()

    def _look_after(self) -> None:
        now = self._now()
        for stream in self.open:
            stream.look_after(now)
        loop = asyncio.get_running_loop()
        self._sweep = loop.call_later(_SWEEP_S, self._look_after) if self.open else None


class EventStream(Response):
    """Events for one reader, until it leaves, or there will be no more.

    Parameters
    ----------
    attach : given the slot, has it filled from now on; returns what ends that.
    gap_s : least time between two sendings.

    Raises
    ------
    NotAvailable : too many are open.
    """

    media_type = MEDIA_TYPE

    def __init__(self, streams: EventStreams, attach: Attach, *, gap_s: float = 0.0) -> None:
        # Closed at its end: its buffers are made small, which others should not inherit.
        headers = {"cache-control": "no-store", "x-accel-buffering": "no", "connection": "close"}
        super().__init__(headers=headers)
        del self.headers["content-length"]
        streams.check_room()
        self.slot = Slot()
        self._streams, self._attach = streams, attach
        self._gap_s = max(gap_s, _LEAST_GAP_S)
        self._connection: Any = None
        self._sent_at = self._told_at = float("-inf")
        self._is_sending = False

    async def __call__(self, scope: Scope, receive: Receive, send: Send) -> None:
        """Send events."""
        self._connection = scope.get("state", {}).get("connection")
        if self._connection is not None:
            _keep_little(self._connection)
        self._streams.add(self)
        gone = asyncio.ensure_future(_gone(receive, self.slot))
        leave: Callable[[], None] | None = None
        try:
            leave = self._attach(self.slot)
            await send({"type": "http.response.start", "status": 200, "headers": self.raw_headers})
            await self._send(send, b"retry: %d\n\n" % _RETRY_MS)
            while await self.slot.filled() and not gone.done():
                await self._rest()
                await self._send(send, self.slot.taken())
                self._told_at = self._sent_at
        finally:
            if leave is not None:
                leave()
            gone.cancel()
            self._streams.open.discard(self)
        await send({"type": "http.response.body", "body": b"", "more_body": False})

    def look_after(self, now: float) -> None:
        """Keep a quiet connection alive, cut one that is blocked."""
        if self._is_sending:
            if now - self._sent_at > _BLOCKED_S:
                self._cut()
        elif now - self._sent_at > _ALIVE_S:
            self.slot.put("", lambda: b": \n\n")

    def stop(self) -> None:
        """End at once, whatever the reader takes."""
        self.slot.end()
        if self._is_sending:
            self._cut()

    async def _rest(self) -> None:
        """Wait until enough time has passed since the last event; the first comes at once."""
        left = self._told_at + self._gap_s - monotonic()
        while left > 0.0 and not self.slot.ended:
            await asyncio.sleep(min(left, _SWEEP_S / 4))
            left = self._told_at + self._gap_s - monotonic()

    async def _send(self, send: Send, body: bytes) -> None:
        self._sent_at, self._is_sending = monotonic(), True
        try:
            await send({"type": "http.response.body", "body": body, "more_body": True})
        finally:
            self._is_sending = False

    def _cut(self) -> None:
        # Ends the sending too: the server lets go who writes to a connection that is lost.
        if self._connection is not None:
            self._connection.abort()


def event(name: str, number: int, data: bytes) -> bytes:
    """Return one event; ``data`` is a single line.

    Examples
    --------
    >>> event("pose", 7, b"{}")
    b'event: pose\\nid: 7\\ndata: {}\\n\\n'
    """
    return b"event: %b\nid: %d\ndata: %b\n\n" % (name.encode("ascii"), number, data)


def last_event_id(headers: Sequence[tuple[bytes, bytes]]) -> int:
    """Return the number of the last event a reader had before, 0 where it says none.

    Examples
    --------
    >>> last_event_id([(b"last-event-id", b"41")]), last_event_id([(b"last-event-id", b"x")])
    (41, 0)
    """
    for name, value in headers:
        if name == b"last-event-id" and value.isdigit() and len(value) < 19:
            return int(value)
    return 0


def _keep_little(connection: Any) -> None:
    """Have the network hold no more of what is sent than a reader takes at once."""
    connection.set_write_buffer_limits(high=_BUFFER_BYTES)
    network = connection.get_extra_info("socket")
    if network is not None:
        # Who has left already has no socket any more; the stream ends by itself.
        with suppress(OSError):
            network.setsockopt(socket.SOL_SOCKET, socket.SO_SNDBUF, _BUFFER_BYTES)


async def _gone(receive: Receive, slot: Slot) -> None:
    while (await receive())["type"] != "http.disconnect":
        pass
    slot.end()
