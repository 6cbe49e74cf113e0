"""Who makes pieces: processes of our own, or a cluster; both are asked in the same four words.

Processes are spawned at the first need, replaced together when one dies, and ended when there has
been nothing to do for a while. Left out: what they are given (runner.py).
"""

import os
from collections.abc import Callable
from concurrent.futures import Executor, ProcessPoolExecutor
from contextlib import suppress
from typing import Any, Protocol

from service.errors import NotAvailable
from service.own_processes import NotingContext
from service.surveys import worker

ANSWERS_WITHIN_S = 3

_AHEAD = 2
"""Chunks in hand for each process, so that none waits for the store."""


_PIPE_BYTES = 2**20
"""What Linux lets anybody have; a chunk gives some two megabytes."""


class Pool(Protocol):
    """Makes pieces somewhere."""

    def executor(self) -> Executor:
        """Return what takes pieces, started if need be.

        Raises
        ------
        NotAvailable : there is none.
        """

    @property
    def room(self) -> int:
        """How many chunks it is to have in hand now."""

    def stop(self) -> None:
        """End all work at once; the next ``executor`` starts anew."""


class OwnProcesses:
    """Processes of this machine.

    Parameters
    ----------
    count : how many; 0: one for each processor.
    is_busy : whether this machine is asked for more than surveys just now. Then one of several
        processes rests: low priority gives the others' processor away at once, but not its caches.
    """

    def __init__(self, count: int = 0, is_busy: Callable[[], bool] = lambda: False) -> None:
        self._count, self._is_busy = count or os.cpu_count() or 1, is_busy
        self._pool: ProcessPoolExecutor | None = None
        self._own = NotingContext()

    def executor(self) -> Executor:
        """See ``Pool.executor``."""
        if self._pool is None:
            self._pool = ProcessPoolExecutor(self._count, self._own, initializer=worker.start)
            _widen(self._pool)
            # One process is made for each task that finds none idle.
            for _ in range(self._count):
                self._pool.submit(worker.identity)
        return self._pool

    @property
    def room(self) -> int:
        """See ``Pool.room``."""
        # None ahead: the process that is to rest would take it.
        return self._count - 1 if self._count > 1 and self._is_busy() else _AHEAD * self._count

    def stop(self) -> None:
        """See ``Pool.stop``."""
        if self._pool is not None:
            self._own.end(self._pool)
        self._pool = None


def _widen(pool: Any) -> None:
    """Let what a chunk gives pass from process to process in some steps instead of dozens.

    In each step one of the two waits to be woken. Linux alone can, and an executor has no public
    way to its pipes: where they are not found they stay as they are.
    """
    with suppress(ImportError, AttributeError, OSError):
        from fcntl import F_SETPIPE_SZ, fcntl

        for queue in (pool._call_queue, pool._result_queue):
            fcntl(queue._reader.fileno(), F_SETPIPE_SZ, _PIPE_BYTES)


class Cluster:
    """A scheduler of the package ``distributed``, at an address."""

    def __init__(self, address: str) -> None:
        self._address = address
        self._client: Any = None
        self.room = _AHEAD

    def executor(self) -> Executor:
        """See ``Pool.executor``."""
        try:
            from distributed import Client
        except ModuleNotFoundError:
            raise NotAvailable(
                "surveys are to go to a cluster, and its package is not installed",
                way_out="install armspan[cluster]",
            ) from None
        try:
            if self._client is None:
                self._client = Client(self._address, timeout=ANSWERS_WITHIN_S)
            self.room = _AHEAD * max(sum(self._client.nthreads().values()), 1)
            executor: Executor = self._client.get_executor(pure=False)
            return executor
        except (OSError, ValueError) as error:
            self.stop()
            raise NotAvailable(
                f"the cluster at {self._address} does not answer",
                way_out="start its scheduler, or leave ARMSPAN_CLUSTER out",
            ) from error

    def stop(self) -> None:
        """See ``Pool.stop``."""
        if self._client is not None:
            self._client.close(timeout=1)
        self._client = None


def pool_of(cluster: str, processes: int, is_busy: Callable[[], bool]) -> Pool:
    """Return the cluster at an address, or where there is none so many processes of our own."""
    return Cluster(cluster) if cluster else OwnProcesses(processes, is_busy)
