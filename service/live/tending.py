"""Keeps live arms in step with what is stored: a new revision changes the pose without any input.

Left out: inputs and answers, which look the arm up themselves.
"""

import asyncio
import logging
from collections.abc import AsyncIterator
from contextlib import asynccontextmanager, suppress

from service.errors import ServiceError, UnknownArm
from service.live.clocks import SystemClock
from service.live.live_arms import LiveArms
from service.operations.arms import Arms
from service.wire.arms import ReadArm

_LOG = logging.getLogger(__name__)
_EVERY_S = 0.5
"""Who writes a revision and looks at a screen may wait so long; 50 arms take 0.2 ms."""


@asynccontextmanager
async def live_arms(arms: Arms[ReadArm]) -> AsyncIterator[LiveArms]:
    """Have live arms on this event loop, kept in step with the stored ones."""
    live = LiveArms(SystemClock(), asyncio.get_running_loop().call_later)
    tending = asyncio.create_task(_tend(live, arms))
    try:
        yield live
    finally:
        tending.cancel()
        with suppress(asyncio.CancelledError):
            await tending
        live.stop()


async def _tend(live: LiveArms, arms: Arms[ReadArm]) -> None:
    while True:
        await asyncio.sleep(_EVERY_S)
        for name in live.names():
            try:
                look_up = arms.get
                stored = (
                    look_up(name)
                    if arms.answers_at_once
                    else await asyncio.to_thread(look_up, name)
                )
                if live.get(name) is not None:
                    live.of(stored)
            except UnknownArm:
                live.forget(name)
            except ServiceError as error:
                # The store is away for now; what stands, stands.
                _LOG.info("live arms are not looked up: %s", error.say)
            except Exception:
                # A task that ends would leave all arms at the revisions they have.
                _LOG.exception("%s could not be looked up", name)
