"""Work that is given up when who asked for it has left: nobody would read the answer.

Idea: the server says by ``receive`` that a client is gone; whichever comes first, that or the
answer, ends the other. Work that waits for a thread is taken back; work in hand has to look itself
whether it is over.
Left out: answers that are sent while they are made, which fail by themselves.
"""

import asyncio
from collections.abc import Coroutine
from contextlib import suppress
from typing import Any, TypeVar

from starlette.requests import ClientDisconnect, Request

Result = TypeVar("Result")


async def unless_left(request: Request, work: Coroutine[Any, Any, Result]) -> Result:
    """Return what ``work`` returns, unless the client leaves before.

    Parameters
    ----------
    request : its body has been read.

    Raises
    ------
    ClientDisconnect : the client has left; ``work`` was cancelled.
    """
    working, leaving = asyncio.ensure_future(work), asyncio.ensure_future(_left(request))
    try:
        await asyncio.wait((working, leaving), return_when=asyncio.FIRST_COMPLETED)
        if not working.done():
            raise ClientDisconnect
        return working.result()
    finally:
        for task in (working, leaving):
            task.cancel()
            with suppress(asyncio.CancelledError, Exception):
                await task


async def _left(request: Request) -> None:
    while (await request.receive())["type"] != "http.disconnect":
        pass
