"""Two threads that work through long answers a piece at a time, several requests taking turns.

The kernels release the interpreter while they run, and pieces are short, so that the event loop
gets its turn in between. Left out: what a piece is.
"""

import asyncio
import threading
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from typing import TypeVar

from service.errors import NotAvailable

Result = TypeVar("Result")
THREADS = 2


class Threads:
    """Some threads of one service; ``stop`` ends them after the pieces in hand."""

    def __init__(self, count: int = THREADS) -> None:
        self._pool = ThreadPoolExecutor(count, thread_name_prefix="bulk")
        self._count = count
        self._given = 0
        self._stopping = threading.Event()

    def refuse_if_stopping(self) -> None:
        """Give up work that nobody waits for any more; called by long work now and then.

        Raises
        ------
        NotAvailable
        """
        if self._stopping.is_set():
            raise NotAvailable("the service is stopping")

    async def run(self, work: Callable[[], Result], *, most: int | None = None) -> Result:
        """Return what ``work`` returns, done in one of the threads.

        Parameters
        ----------
        most : how much work there may be before this, in hand or waiting.

        Raises
        ------
        NotAvailable : there is more.
        """
        if most is not None and self._given > most:
            raise NotAvailable(
                "others have asked for as long work before",
                way_out="ask again when it is done",
                headers={"Retry-After": "5"},
            )
        self._given += 1
        try:
            return await asyncio.get_running_loop().run_in_executor(self._pool, work)
        finally:
            self._given -= 1

    async def pieces(
        self, work: Callable[[int, int], Result], count: int, size: int
    ) -> list[Result]:
        """Return what ``work(begin, end)`` returns for each piece of ``count``, in order.

        No more pieces are waiting than there are threads, so that requests take turns.
        """
        loop = asyncio.get_running_loop()
        begins = range(0, count, size)
        left = iter(enumerate(begins))
        results: dict[int, Result] = {}

        async def take_turns() -> None:
            for place, begin in left:
                end = min(begin + size, count)
                results[place] = await loop.run_in_executor(self._pool, work, begin, end)

        await asyncio.gather(*(take_turns() for _ in range(min(self._count, len(begins)))))
        return [results[place] for place in range(len(begins))]

    def stop(self) -> None:
        """Drop what waits and let the threads end."""
        self._stopping.set()
        self._pool.shutdown(wait=False, cancel_futures=True)
