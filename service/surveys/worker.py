"""What runs where pieces are made: in a process of our own at low priority, or in a cluster.

A process prepares a survey once, for whatever pieces of it come. Left out: the life of processes
(pool.py), and which piece goes where (runner.py).
"""

import gc
import os
import signal
import threading
from collections.abc import Sequence
from contextlib import suppress
from multiprocessing import connection, parent_process
from time import perf_counter
from typing import Any

from service.storage.ports import GivenPiece, MadePiece
from service.surveys.kinds import Gathers
from service.surveys.registry import SURVEY_KINDS

NICENESS = 15
"""Whoever asks for a pose meanwhile has the processor some thirty times as much (Linux: weight 36
to 1024), and at once: among equals who wakes up may have to wait out the other's turn, some ms."""

_prepared: tuple[str, Any] = ("", None)


def start() -> None:
    """Make the process fit for its work: it gives way, ends with its parent, ignores Ctrl-C."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    give_way()
    with suppress(AttributeError, OSError):  # of Linux: gives way at once, not at the next turn
        os.sched_setscheduler(0, os.SCHED_IDLE, os.sched_param(0))
    # Collected between chunks instead: amid the many small lists that targets are read from,
    # looking for cycles takes ten times as long as reading them.
    gc.disable()
    threading.Thread(target=_end_with_parent, daemon=True).start()


def give_way() -> None:
    """Put this thread, and what it starts from now on, behind who waits for an answer.

    Called in a process's first thread it counts for the whole process. Only on Linux a thread has a
    priority of its own.
    """
    with suppress(AttributeError, OSError):  # there is no such call on Windows; or it is lower
        os.setpriority(os.PRIO_PROCESS, 0, NICENESS)


def identity() -> int:
    """Return the number of the process."""
    return os.getpid()


def make(
    kind: str,
    survey: str,
    setup: Any,
    pieces: Sequence[GivenPiece],
    others: Sequence[bytes] | None = None,
) -> tuple[list[MadePiece], float]:
    """Return pieces made, and the seconds it took.

    Parameters
    ----------
    others : what became of all other pieces, for one that is put together of them.
    """
    global _prepared
    started = perf_counter()
    maker = SURVEY_KINDS[kind]
    ours, prepared = _prepared
    if ours != survey:
        prepared = maker.prepare(setup)
        _prepared = (survey, prepared)
        gc.collect()
        gc.freeze()  # all that stays is not looked at again
    if others is None:
        made = [maker.make(prepared, piece) for piece in pieces]
    else:
        assert isinstance(maker, Gathers)
        made = [maker.gather(prepared, piece, others) for piece in pieces]
    gc.collect()
    return made, perf_counter() - started


def _end_with_parent() -> None:
    parent = parent_process()
    assert parent is not None
    connection.wait([parent.sentinel])
    os._exit(1)
