"""The life of the worker process: started at the first need, replaced when it dies, ended at once.

One, so that large requests wait for each other and memory stays bounded. Left out: what it does
(worker.py).
"""

import asyncio
from collections.abc import Awaitable, Callable, Iterable, Sequence
from concurrent.futures import ProcessPoolExecutor
from concurrent.futures.process import BrokenProcessPool
from contextlib import suppress
from functools import partial
from typing import Any, TypeVar

from starlette.concurrency import run_in_threadpool

from service.bulk import worker
from service.bulk.reading import Key
from service.bulk.rendering import Outline, Piece, Stamp, WorkedOut
from service.bulk.target_rows import RowsRead
from service.convert import Units
from service.errors import NotAvailable
from service.operations.arms import Arms
from service.operations.meant_arms import named_cell, stored_arm
from service.own_processes import NotingContext
from service.problems import Problem
from service.storage.ports import GivenPiece, Revision
from service.surveys.reach_pieces import rows_of
from service.wire.arms import ReadArm
from service.wire.cells import CellAt
from service.wire.formats import Format

Result = TypeVar("Result")
Begin = Callable[[ProcessPoolExecutor], Awaitable[Outline | Problem]]


_PART_BYTES = 4 * 2**20
"""Of a body on its way to the process: copied in some milliseconds, while others wait."""
_ROWS_AT_ONCE = 32 * 1024
"""Of targets that come back in one step, some two megabytes."""


class WorkerProcess:
    """The worker of one service."""

    def __init__(self) -> None:
        self._pool: ProcessPoolExecutor | None = None
        self._own = NotingContext()
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
        begun = partial(_begun, arms, raw, key, wanted, stamp)
        return await self._in_turn(partial(_answered, begun))

    async def convert(self, raw: bytes, wanted: Format, stamp: Stamp) -> WorkedOut | Problem:
        """Return the answer to a JSON body that asks for conversions, or why it is refused.

        Raises
        ------
        NotAvailable : the worker died; the next request finds a new one.
        """

        async def begun(pool: ProcessPoolExecutor) -> Outline | Problem:
            return await _asked(pool, worker.begin_conversions, raw, wanted, stamp)

        return await self._in_turn(partial(_answered, begun))

    async def targets(
        self, raw: bytes, form: str | None, go_on: Callable[["ReadThere"], Awaitable[Result]]
    ) -> Result | Problem:
        """Return what ``go_on`` makes of a body with targets, or why it cannot be read.

        Parameters
        ----------
        form : of the angles of CSV; None for JSON.
        go_on : the process keeps the targets until it has ended.

        Raises
        ------
        NotAvailable : the worker died; the next request finds a new one.
        """

        async def work(pool: ProcessPoolExecutor) -> Result | Problem:
            # In parts: whoever copies all at once holds everybody else up.
            for begin in range(0, len(raw), _PART_BYTES):
                await _asked(pool, worker.take, raw[begin : begin + _PART_BYTES])
            read = await _asked(pool, worker.begin_targets, form)
            return read if isinstance(read, Problem) else await go_on(ReadThere(pool, read))

        return await self._in_turn(work)

    async def _in_turn(self, work: Callable[[ProcessPoolExecutor], Awaitable[Result]]) -> Result:
        async with self._turn:
            pool = self._started()
            try:
                return await work(pool)
            except BrokenProcessPool:
                self.stop()
                raise NotAvailable(
                    "the process for large requests ended before this one was answered",
                    way_out="ask again, in smaller parts if that fails too",
                    headers={"Retry-After": "2"},
                ) from None
            finally:
                # Not waited for: a stop must not, and the next request comes after it anyway.
                with suppress(RuntimeError):
                    pool.submit(worker.forget)

    def stop(self) -> None:
        """End the process, whatever it does."""
        if self._pool is not None:
            self._own.end(self._pool)
        self._pool = None

    def _started(self) -> ProcessPoolExecutor:
        if self._pool is None:
            self._pool = ProcessPoolExecutor(1, self._own, initializer=worker.start)
        return self._pool


class ReadThere:
    """Targets of a survey that the worker process has read (``kinds.SentTargets``).

    Asked by a thread, while the event loop waits for that.
    """

    def __init__(self, pool: ProcessPoolExecutor, read: RowsRead) -> None:
        self._pool, self._read = pool, read
        self._looked_at: list[Any] | None = None
        self.count, self.document = read.total, read.document

    def looked_at(self) -> list[Any]:
        """Return those that are looked at before the survey is accepted."""
        if self._looked_at is None:
            self._looked_at = rows_of(self._read.first)
        return self._looked_at

    def first(self, most: int) -> Sequence[Any]:
        """See ``kinds.SentTargets.first``; no more than ``looked_at``."""
        return self.looked_at()[:most]

    def pieces(self, size: int, units: Units) -> Iterable[GivenPiece]:
        """See ``kinds.SentTargets.pieces``: all are there before the first is stored."""
        last, made = -(-self.count // size), list[GivenPiece]()
        some = max(_ROWS_AT_ONCE // size, 1)
        for begin in range(0, last, some):
            asked = (begin, min(begin + some, last), size, units)
            made += self._pool.submit(worker.target_pieces, *asked).result()
        return made


async def _answered(begin: Begin, pool: ProcessPoolExecutor) -> WorkedOut | Problem:
    """Return the answer that a request begins, piece by piece."""
    begun = await begin(pool)
    if not isinstance(begun, Outline):
        return begun
    pieces: list[Piece] = await asyncio.gather(
        *(
            _asked(pool, worker.piece, first, first + begun.size)
            for first in range(0, begun.count, begun.size)
        )
    )
    return begun.answer(pieces)


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
