"""Spawned processes that are known to who had them started, so that they can be ended at once.

An executor of processes keeps them to itself, and a list of all children of this process would
hold those of others, started in the same moment. Left out: what they do, and when they end.
"""

from concurrent.futures import ProcessPoolExecutor
from contextlib import suppress
from multiprocessing.context import SpawnContext, SpawnProcess
from time import sleep
from typing import Any

_SETTLE_S = 0.05
"""In which an executor's own thread drops what was cancelled. If its process ends before, it fails
at what was, and leaves a thread behind that the end of the service would wait for."""


class NotingContext(SpawnContext):
    """Starts processes as ``get_context("spawn")`` does, and notes them.

    Attributes
    ----------
    started : all of them, the oldest first.
    """

    def __init__(self) -> None:
        super().__init__()
        self.started: list[SpawnProcess] = []

    def Process(self, *given: Any, **named: Any) -> SpawnProcess:  # type: ignore[override] # noqa: N802
        """Return a process that has been noted."""
        process = SpawnProcess(*given, **named)
        self.started.append(process)
        return process

    def end(self, pool: ProcessPoolExecutor) -> None:
        """End an executor of such processes at once, whatever it does."""
        pool.shutdown(wait=False, cancel_futures=True)
        sleep(_SETTLE_S)
        self.kill()

    def kill(self) -> None:
        """End all that still run."""
        for process in self.started:
            with suppress(ValueError):  # it is over, and cleared away
                if process.pid is not None:
                    process.kill()
        self.started.clear()
