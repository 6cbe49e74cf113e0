"""Progress of a survey as server-sent events (WHATWG HTML, 9.2): one when something has changed.

Left out: the survey.
"""

import asyncio
from time import monotonic

from starlette.concurrency import run_in_threadpool
from starlette.responses import Response
from starlette.types import Receive, Scope, Send

from service.errors import NotAvailable, ServiceError
from service.storage.ports import OPEN_STATES
from service.surveys.desk import Surveys
from service.wire.answers import json_bytes
from service.wire.surveys import progress

_LOOK_S = 0.25
_ALIVE_S = 15.0
"""Proxies drop connections on which nothing comes for half a minute."""

MOST_STREAMS = 100

_open: set["ProgressStream"] = set()


class ProgressStream(Response):
    """Events until the survey is over or nobody listens.

    Raises
    ------
    NotAvailable : too many are open.
    """

    media_type = "text/event-stream"

    def __init__(self, surveys: Surveys, survey: str) -> None:
        super().__init__(headers={"cache-control": "no-store", "x-accel-buffering": "no"})
        del self.headers["content-length"]
        if len(_open) >= MOST_STREAMS:
            raise NotAvailable(
                f"{MOST_STREAMS} progress streams are open",
                way_out="ask for the survey itself now and then",
                headers={"Retry-After": "10"},
            )
        self._surveys, self._survey = surveys, survey

    async def __call__(self, scope: Scope, receive: Receive, send: Send) -> None:
        """Send events."""
        await send({"type": "http.response.start", "status": 200, "headers": self.raw_headers})
        _open.add(self)
        gone = asyncio.ensure_future(_gone(receive))
        try:
            await self._events(send, gone)
        finally:
            _open.discard(self)
            gone.cancel()
        await send({"type": "http.response.body", "body": b"", "more_body": False})

    async def _events(self, send: Send, gone: "asyncio.Future[None]") -> None:
        last, spoken = None, monotonic()
        while not gone.done():
            try:
                found = await run_in_threadpool(self._surveys.get, self._survey)
            except ServiceError:
                return  # removed meanwhile
            said = (found.state, found.done)
            remaining = self._surveys.runner.remaining_s(found)
            told = json_bytes(progress(found, remaining))
            event = b"event: progress\nid: %d\ndata: %b\n\n" % (found.done, told)
            if said != last:
                await send({"type": "http.response.body", "body": event, "more_body": True})
                last, spoken = said, monotonic()
            elif monotonic() - spoken > _ALIVE_S:
                await send({"type": "http.response.body", "body": b": \n\n", "more_body": True})
                spoken = monotonic()
            if found.state not in OPEN_STATES:
                return
            await asyncio.wait([gone], timeout=_LOOK_S)


async def _gone(receive: Receive) -> None:
    while (await receive())["type"] != "http.disconnect":
        pass
