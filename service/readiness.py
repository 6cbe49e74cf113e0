"""Has the kernels ready before the first question, and lets questions wait until they are.

On a machine that has never run them they are compiled, which takes seconds. Two processes do it at
once and leave what they made in the cache; this one loads it, and answers meanwhile what needs no
kernels. Those for reach come last, and are loaded when somebody first asks: they are many, and who
never asks need not hold them. Left out: which requests need them (routes/direct.py).
"""

import asyncio
import gc
import logging
import subprocess
import sys
import threading
from collections.abc import Sequence
from contextlib import suppress
from pathlib import Path
from time import monotonic

from kinematics import warm_up as warm_up_module
from kinematics.warm_up import POSTURES, REACH, RELATIONS, to_be_compiled, warm_up

_LOG = logging.getLogger(__name__)

_HOME = Path(warm_up_module.__file__).parents[1]
"""The folder that this process has its own kernels from."""

_LONG_S = 1.0
_LONGEST_S = 120.0
"""Then this process compiles for itself, whatever keeps the other one."""

_COMPILING = (
    "  compiling for this machine, once: poses in some seconds, reach in some tens of seconds;\n"
    "  questions wait for it"
)


class Kernels:
    """Some of the kernels: whether they are ready, and a way to wait for it.

    Ready from the beginning, so that an app without a server answers; ``prepare`` takes it back.

    Attributes
    ----------
    parts : of ``warm_up``.
    wanted : whether to load them: set from the beginning, or by who first waits.
    """

    def __init__(self, parts: Sequence[str], *, when_wanted: bool = False) -> None:
        self.parts = parts
        self.are_ready = True
        self.wanted = threading.Event()
        if not when_wanted:
            self.wanted.set()
        self._event = asyncio.Event()

    async def wait(self) -> None:
        """Return as soon as they are ready."""
        if not self.are_ready:
            self.wanted.set()
            await self._event.wait()

    def are_ready_now(self, loop: asyncio.AbstractEventLoop) -> None:
        """Let go who waits; called from another thread than the loop's."""
        self.are_ready = True
        with suppress(RuntimeError):  # the loop may be closed by now
            loop.call_soon_threadsafe(self._event.set)


class Readiness:
    """The kernels of one service: for postures first, then for rotations and frames, then reach."""

    def __init__(self) -> None:
        self.postures, self.relations = Kernels(POSTURES), Kernels(RELATIONS)
        self.reach = Kernels(REACH, when_wanted=True)
        self._compiling: list[subprocess.Popen[bytes]] = []
        self._stopped = False
        self._lock = threading.Lock()

    def prepare(self) -> None:
        """Begin to get the kernels ready, in a daemon thread: a stop does not wait for it."""
        for kernels in (self.postures, self.relations, self.reach):
            kernels.are_ready = False
        loop = asyncio.get_running_loop()
        threading.Thread(target=self._prepare, args=(loop,), daemon=True).start()

    def stop(self) -> None:
        """End what compiles, and leave no more to do at the end than there is."""
        with self._lock:
            self._stopped = True
            for process in self._compiling:
                process.kill()
        # Else the interpreter searches it all for garbage once more as it ends, for 0.5 s.
        gc.freeze()

    def _prepare(self, loop: asyncio.AbstractEventLoop) -> None:
        started = monotonic()
        told = threading.Timer(_LONG_S, print, (_COMPILING,), {"flush": True})
        told.daemon = True
        told.start()
        compiled = False
        for kernels in (self.postures, self.relations, self.reach):
            try:
                missing = to_be_compiled(kernels.parts)
                compiled = compiled or bool(missing)
                self._compile_beside(missing)
                told.cancel()
                if kernels is self.reach and compiled:
                    print(f"  compiled in {monotonic() - started:.1f} s", flush=True)
                kernels.wanted.wait()
                if self._stopped:
                    return
                warm_up(kernels.parts)
                # What is here now stays: a search for garbage among it would hold up every
                # answer for 0.1 s.
                gc.freeze()
            except Exception:
                # A question that needs them tries again, and tells what is wrong.
                _LOG.exception("the kernels for %s are not ready", ", ".join(kernels.parts))
            finally:
                told.cancel()
                kernels.are_ready_now(loop)

    def _compile_beside(self, parts: Sequence[str]) -> None:
        for part in parts:
            with self._lock, suppress(OSError):
                if self._stopped:
                    return
                # What goes wrong there goes wrong here again, and is told here.
                beside = subprocess.Popen(
                    [sys.executable, "-m", "kinematics.warm_up", part],
                    # Of packages of one name the one in the folder it starts in would win: inside
                    # a clone, the clone's, for a service that is installed elsewhere.
                    cwd=_HOME,
                    stdin=subprocess.DEVNULL,
                    stdout=subprocess.DEVNULL,
                    stderr=subprocess.DEVNULL,
                )
                self._compiling.append(beside)
        for process in self._compiling:
            with suppress(subprocess.TimeoutExpired):
                process.wait(_LONGEST_S)
