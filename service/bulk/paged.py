"""A long list sent page by page as it is read from the store, so that it never stands in memory.

Idea: a page is read in a thread and sent before the next one is asked for; who reads slowly makes
the store wait for nothing, since nothing is held open between two pages. Left out: what is on a
page. Nothing can be refused any more once the first is sent: a store that fails then ends the
connection, and the client sees an answer that is cut off.
"""

import asyncio
from collections.abc import Callable, Mapping
from typing import NamedTuple

from starlette.concurrency import run_in_threadpool
from starlette.responses import Response
from starlette.types import Receive, Scope, Send


class Part(NamedTuple):
    """The bytes of a page, and what the next one follows; None after the last."""

    content: bytes
    last: str | None


class PagedAnswer(Response):
    """An answer of unknown length.

    Parameters
    ----------
    first : what has been read already: so a refusal comes before anything is sent.
    page : reads the page that follows another.
    """

    def __init__(
        self,
        first: Part,
        page: Callable[[str], Part],
        *,
        media_type: str,
        headers: Mapping[str, str] | None = None,
    ) -> None:
        super().__init__(headers={**(headers or {}), "content-type": media_type})
        del self.headers["content-length"]
        self._first, self._page = first, page

    async def __call__(self, scope: Scope, receive: Receive, send: Send) -> None:
        """Send page after page while somebody reads."""
        await send({"type": "http.response.start", "status": 200, "headers": self.raw_headers})
        gone = asyncio.ensure_future(_gone(receive))
        try:
            part = self._first
            while not gone.done():
                more = part.last is not None
                message = {"type": "http.response.body", "body": part.content, "more_body": more}
                await send(message)
                if part.last is None:
                    return
                part = await run_in_threadpool(self._page, part.last)
        finally:
            gone.cancel()


async def _gone(receive: Receive) -> None:
    while (await receive())["type"] != "http.disconnect":
        pass
