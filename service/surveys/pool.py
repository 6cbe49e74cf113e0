"""Who makes pieces: processes of our own, or a cluster; both are asked in the same four words.

Processes are spawned at the first need, replaced together when one dies, and ended when there has
been nothing to do for a while. Left out: what they are given (runner.py).
"""

import os
from concurrent.futures import Executor, ProcessPoolExecutor
from typing import Any, Protocol

from service.errors import NotAvailable
from service.own_processes import NotingContext
from service.surveys import worker

ANSWERS_WITHIN_S = 3


class Pool(Protocol):
    """Makes pieces somewhere."""

    def executor(self) -> Executor:
        """Return what takes pieces, started if need be.

        Raises
        ------
        NotAvailable : there is none.
        """

    @property
    def width(self) -> int:
        """How many are worked on at once."""

    def stop(self) -> None:
        """End all work at once; the next ``executor`` starts anew."""


class OwnProcesses:
    """Processes of this machine, so many; 0: one for each processor."""

    def __init__(self, count: int = 0) -> None:
        self.width = count or os.cpu_count() or 1
        self._pool: ProcessPoolExecutor | None = None
        self._own = NotingContext()

    def executor(self) -> Executor:
        """See ``Pool.executor``."""
        if self._pool is None:
            self._pool = ProcessPoolExecutor(self.width, self._own, initializer=worker.start)
            # One process is made for each task that finds none idle.
            for _ in range(self.width):
                self._pool.submit(worker.identity)
        return self._pool

    def stop(self) -> None:
        """See ``Pool.stop``."""
        if self._pool is not None:
            self._own.end(self._pool)
        self._pool = None


class Cluster:
    """A scheduler of the package ``distributed``, at an address."""

    def __init__(self, address: str) -> None:
        self._address = address
        self._client: Any = None
        self.width = 1

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
            self.width = max(sum(self._client.nthreads().values()), 1)
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


def pool_of(cluster: str, processes: int) -> Pool:
    """Return the cluster at an address, or where there is none so many processes of our own."""
    return Cluster(cluster) if cluster else OwnProcesses(processes)
