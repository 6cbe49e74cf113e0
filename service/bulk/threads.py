"""Two threads that work through long answers a piece at a time, several requests taking turns.

The kernels release the interpreter while they run, and pieces are short, so that the event loop
gets its turn in between. Left out: what a piece is.
"""

import asyncio
import threading
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from time import perf_counter
from typing import TypeVar

from service.errors import NotAvailable

Result = TypeVar("Result")
THREADS = 2
TURN_S = 0.005
"""As long as the interpreter lets a thread work before another may."""


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

        A thread gives way to other requests after each turn of some milliseconds. The first turn
        is one thread's alone: what ends in it would take longer by two that wait for each other.
        """
        loop = asyncio.get_running_loop()
        begins = range(0, count, size)
        left = iter(begins)
        results: dict[int, Result] = {}
        failed = threading.Event()

        def turn() -> bool:
            """Make pieces for a while; return whether there may be more."""
            until = perf_counter() + TURN_S
            for begin in () if failed.is_set() else left:
                results[begin] = work(begin, min(begin + size, count))
                if perf_counter() > until:
                    return True
            return False

        async def take_turns() -> None:
            try:
                while await loop.run_in_executor(self._pool, turn):
                    pass
            except BaseException:
                failed.set()
                raise

        if count and await loop.run_in_executor(self._pool, turn):
            takers = [take_turns() for _ in range(self._count)]
            # Nobody is told of a failure while another thread is still at work on the same.
            for end in await asyncio.gather(*takers, return_exceptions=True):
                if end is not None:
                    raise end
        return [results[begin] for begin in begins]

    def stop(self) -> None:
        """Drop what waits and let the threads end."""
        self._stopping.set()
        self._pool.shutdown(wait=False, cancel_futures=True)
