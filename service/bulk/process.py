"""The life of the worker process: started at the first need, replaced when it dies, ended at once.

One, so that large requests wait for each other and memory stays bounded. Left out: what it does
(worker.py).
"""

import asyncio
import multiprocessing
from collections.abc import Awaitable, Callable
from concurrent.futures import ProcessPoolExecutor
from concurrent.futures.process import BrokenProcessPool
from contextlib import suppress
from functools import partial
from multiprocessing.process import BaseProcess
from typing import TypeVar

from starlette.concurrency import run_in_threadpool

from service.bulk import worker
from service.bulk.reading import Key
from service.bulk.rendering import Outline, Piece, Stamp, WorkedOut
from service.errors import NotAvailable
from service.operations.arms import Arms
from service.operations.meant_arms import named_cell, stored_arm
from service.problems import Problem
from service.storage.ports import Revision
from service.wire.arms import ReadArm
from service.wire.cells import CellAt
from service.wire.formats import Format

Result = TypeVar("Result")
Begin = Callable[[ProcessPoolExecutor], Awaitable[Outline | Problem]]


class WorkerProcess:
    """The worker of one service."""

    def __init__(self) -> None:
        self._pool: ProcessPoolExecutor | None = None
        self._process: BaseProcess | None = None
        self._turn = asyncio.Lock()

    async def answer(
        self, arms: Arms[ReadArm], raw: bytes, key: Key, wanted: Format, stamp: Stamp
    ) -> WorkedOut | Problem:
        """Return the answer to a JSON body, or why it is refused.

        Raises
        ------
        NotAvailable : the worker died; the next request finds a new one.
        ServiceError : the stored arm that the body names cannot be had.
        """
        return await self._in_turn(partial(_begun, arms, raw, key, wanted, stamp))

    async def convert(self, raw: bytes, wanted: Format, stamp: Stamp) -> WorkedOut | Problem:
        """Return the answer to a JSON body that asks for conversions, or why it is refused.

        Raises
        ------
        NotAvailable : the worker died; the next request finds a new one.
        """

        async def begun(pool: ProcessPoolExecutor) -> Outline | Problem:
            return await _asked(pool, worker.begin_conversions, raw, wanted, stamp)

        return await self._in_turn(begun)

    async def _in_turn(self, begin: Begin) -> WorkedOut | Problem:
        async with self._turn:
            try:
                return await self._answer(begin)
            except BrokenProcessPool:
                self.stop()
                raise NotAvailable(
                    "the process for large requests ended before this one was answered",
                    way_out="ask again, in smaller parts if that fails too",
                    headers={"Retry-After": "2"},
                ) from None

    def stop(self) -> None:
        """End the process, whatever it does."""
        if self._pool is not None:
            self._pool.shutdown(wait=False, cancel_futures=True)
        if self._process is not None:
            self._process.kill()
        self._pool = self._process = None

    async def _answer(self, begin: Begin) -> WorkedOut | Problem:
        pool = self._started()
        try:
            begun = await begin(pool)
            if not isinstance(begun, Outline):
                return begun
            pieces: list[Piece] = await asyncio.gather(
                *(
                    _asked(pool, worker.piece, first, first + begun.size)
                    for first in range(0, begun.count, begun.size)
                )
            )
        finally:
            # Not waited for: a stop must not, and the next request comes after it anyway.
            with suppress(RuntimeError):
                pool.submit(worker.forget)
        return begun.answer(pieces)

    def _started(self) -> ProcessPoolExecutor:
        if self._pool is None:
            before = set(multiprocessing.active_children())
            self._pool = ProcessPoolExecutor(
                1, multiprocessing.get_context("spawn"), initializer=worker.start
            )
            # The process is made with the first task; it has no other way to be reached.
            self._pool.submit(worker.identity)
            started = set(multiprocessing.active_children()) - before
            self._process = started.pop() if started else None
        return self._pool


async def _begun(
    arms: Arms[ReadArm],
    raw: bytes,
    key: Key,
    wanted: Format,
    stamp: Stamp,
    pool: ProcessPoolExecutor,
) -> Outline | Problem:
    """Have a body about postures read, and the stored arm and cell that it names."""
    begun = await _asked(pool, worker.begin, raw, key, wanted, stamp)
    if isinstance(begun, worker.ArmWanted):
        sent = await run_in_threadpool(_wanted, arms, begun)
        return await _asked(pool, worker.go_on, *sent)
    return begun


def _wanted(arms: Arms[ReadArm], asked: worker.ArmWanted) -> tuple[Revision | None, CellAt | None]:
    if asked.name is not None:
        record = stored_arm(arms, asked.name).record
        return record, arms.cell_of(record)
    assert asked.cell is not None
    return None, named_cell(arms, asked.cell)


async def _asked(pool: ProcessPoolExecutor, step: Callable[..., Result], *given: object) -> Result:
    return await asyncio.get_running_loop().run_in_executor(pool, step, *given)
