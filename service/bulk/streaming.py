"""Long tables sent while they are made, so that a million lines never stand in memory at once.

Idea: each of two threads makes one piece ahead; the next is begun when one has been handed to the
network, which takes no more than its buffers hold. Left out: what a piece is, and answers that are
refused for a single line: nothing can be refused any more once a part is sent.
"""

import asyncio
from collections import deque
from collections.abc import Callable, Mapping
from functools import partial

from starlette.responses import Response
from starlette.types import Receive, Scope, Send

from service.bulk.threads import THREADS, Threads


class StreamedAnswer(Response):
    """An answer whose pieces are made while others are sent.

    Parameters
    ----------
    head : what stands before the first piece.
    piece : makes the bytes of lines ``begin`` ... ``end``.
    count, size : lines in all, and in a piece.
    length : bytes in all, where that can be known before.
    """

    def __init__(
        self,
        threads: Threads,
        head: bytes,
        piece: Callable[[int, int], bytes | memoryview],
        count: int,
        size: int,
        *,
        media_type: str,
        headers: Mapping[str, str] | None = None,
        length: int | None = None,
    ) -> None:
        known = {} if length is None else {"content-length": str(length)}
        super().__init__(headers={**(headers or {}), **known, "content-type": media_type})
        if length is None:
            del self.headers["content-length"]
        self._threads, self._head, self._piece = threads, head, piece
        self._begins = range(0, count, size)
        self._count, self._size = count, size

    async def __call__(self, scope: Scope, receive: Receive, send: Send) -> None:
        """Send head and pieces in their order."""
        start = {"status": self.status_code, "headers": self.raw_headers}
        await send({"type": "http.response.start", **start})
        await send({"type": "http.response.body", "body": self._head, "more_body": True})
        ahead: deque[asyncio.Task[bytes | memoryview]] = deque()
        try:
            for begin in self._begins:
                work = partial(self._piece, begin, min(begin + self._size, self._count))
                ahead.append(asyncio.ensure_future(self._threads.run(work)))
                if len(ahead) >= THREADS:
                    await _send_part(send, await ahead.popleft())
            while ahead:
                await _send_part(send, await ahead.popleft())
        finally:
            for task in ahead:
                task.cancel()
        await send({"type": "http.response.body", "body": b"", "more_body": False})


async def _send_part(send: Send, part: bytes | memoryview) -> None:
    await send({"type": "http.response.body", "body": part, "more_body": True})
