"""Progress of a survey as events: one when something has changed.

Left out: the survey, and the stream (service/event_streams.py).
"""

import asyncio
import logging
from collections.abc import Callable
from functools import partial

from starlette.concurrency import run_in_threadpool

from service.errors import ServiceError
from service.event_streams import event
from service.slots import Slot
from service.storage.ports import OPEN_STATES
from service.surveys.desk import Surveys
from service.wire.answers import json_bytes
from service.wire.surveys import progress

_LOG = logging.getLogger(__name__)
_LOOK_S = 0.25
_NAME = "progress"


def watch(surveys: Surveys, survey: str, slot: Slot) -> Callable[[], None]:
    """Fill a slot with the progress of a survey until it is over; return what ends that."""
    watching = asyncio.ensure_future(_watch(surveys, survey, slot))

    def leave() -> None:
        watching.cancel()

    return leave


async def _watch(surveys: Surveys, survey: str, slot: Slot) -> None:
    last = None
    try:
        while not slot.ended:
            found = await run_in_threadpool(surveys.get, survey)
            said = (found.state, found.done)
            if said != last:
                told = json_bytes(progress(found, surveys.runner.remaining_s(found)))
                slot.put(_NAME, partial(event, _NAME, found.done, told))
                last = said
            if found.state not in OPEN_STATES:
                return
            await asyncio.sleep(_LOOK_S)
    except ServiceError as error:
        # Removed meanwhile, or the store is away: the reader asks again by itself.
        _LOG.info("progress of survey %s ends: %s", survey, error.say)
    finally:
        slot.end()
