"""Has the kernels ready before the first question, and lets questions wait until they are.

On a machine that has never run them they are compiled, which takes seconds. Two processes do it at
once and leave what they made in the cache; this one loads it, and answers meanwhile what needs no
kernels. Left out: which requests need them (routes/direct.py).
"""

import asyncio
import gc
import subprocess
import sys
import threading
from contextlib import suppress
from time import monotonic

from kinematics.warm_up import PARTS, warm_up, would_be_kept

_LONG_S = 1.0
_COMPILING = "  compiling for this machine, some seconds; the first questions wait for it"


class Readiness:
    """Whether the kernels of one service are ready.

    Ready from the beginning, so that an app without a server answers; ``prepare`` takes it back.
    """

    def __init__(self) -> None:
        self.is_ready = True
        self._event = asyncio.Event()
        self._compiling: list[subprocess.Popen[bytes]] = []
        self._stopped = False

    async def wait(self) -> None:
        """Return as soon as the kernels are ready."""
        if not self.is_ready:
            await self._event.wait()

    def prepare(self) -> None:
        """Begin to get the kernels ready, in a daemon thread: a stop does not wait for it."""
        self.is_ready = False
        loop = asyncio.get_running_loop()
        threading.Thread(target=self._prepare, args=(loop,), daemon=True).start()

    def stop(self) -> None:
        """End what compiles, and leave no more to do at the end than there is."""
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
        try:
            if would_be_kept():
                self._compile_beside()
            warm_up()
            # What is here now stays: a search for garbage among it would hold up every answer
            # for 0.1 s.
            gc.freeze()
        finally:
            told.cancel()
            # Also if it failed: a question then says why.
            self.is_ready = True
            with suppress(RuntimeError):  # the loop may be closed by now
                loop.call_soon_threadsafe(self._event.set)
        if monotonic() - started > _LONG_S:
            print(f"  compiled in {monotonic() - started:.1f} s", flush=True)

    def _compile_beside(self) -> None:
        for part in PARTS:
            if self._stopped:
                return
            command = [sys.executable, "-m", "kinematics.warm_up", part]
            with suppress(OSError):
                # What goes wrong there goes wrong here again, and is told here.
                beside = subprocess.Popen(
                    command, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL
                )
                self._compiling.append(beside)
        for process in self._compiling:
            process.wait()
