"""Events over HTTP: read from a change on, or waited for.

Left out: what an event is (service/events).
"""

from collections.abc import Mapping
from time import monotonic
from typing import Any

from fastapi import APIRouter
from starlette.concurrency import run_in_threadpool
from starlette.requests import Request
from starlette.responses import Response

from service.event_streams import EventStreams
from service.events.desk import Events, Page
from service.events.kinds import KINDS
from service.events.ports import EVENT_STATES
from service.operations.meant_arms import check_was_stored
from service.routes.direct import DirectRoute
from service.slots import Slot
from service.web.document import documented, parameter
from service.wire import paging
from service.wire.answers import json_answer
from service.wire.events import (
    LONGEST_WAIT_S,
    PARAMETERS,
    EventListAnswer,
    EventQuestion,
    event_list_answer,
    event_question,
)
from service.wire.query import known_parameters

router = APIRouter(route_class=DirectRoute)

_NO_STORE = {"cache-control": "no-store"}
_SCHEMAS: Mapping[str, dict[str, Any]] = {
    "after": {"type": "integer", "minimum": 0},
    "kind": {"type": "string", "enum": list(KINDS)},
    "state": {"type": "string", "enum": list(EVENT_STATES)},
    "page_size": {"type": "integer", "minimum": 1, "maximum": paging.LARGEST_SIZE},
    "wait": {"type": "number", "minimum": 0, "maximum": LONGEST_WAIT_S},
}


@router.api_route(
    "/v1/events",
    methods=["GET", "HEAD"],
    openapi_extra=documented(
        "Events of arms",
        "Near singular, singular, outside working travel, stale, another revision, another source: "
        "each with begin, end and peak, and a value at which it ends that is not the one at which "
        "it began. Without `after` the newest; with it all that began, went on or ended since, in "
        "that order: take `after` from each answer for the next, and the `id` to tell which event "
        "has changed. With `wait` the answer comes when there is one. Kept for as long, and as "
        "many, as the operator has set.",
        answer=EventListAnswer,
        parameters=tuple(
            parameter(name, meaning, _SCHEMAS.get(name)) for name, meaning in PARAMETERS.items()
        ),
        statuses=(503,),
        examples="events",
    ),
)
async def events(request: Request) -> Response:
    """Answer events."""
    question = event_question(known_parameters(request, PARAMETERS))
    if question.which.arm is not None:
        arms, arm = request.app.state.arms, question.which.arm
        await run_in_threadpool(check_was_stored, arms, arm, "query")
    page = await _page(request, question)
    return json_answer(event_list_answer(*page), headers=_NO_STORE)


async def _page(request: Request, question: EventQuestion) -> Page:
    kept: Events = request.app.state.events
    streams: EventStreams = request.app.state.streams
    until, after = monotonic() + question.wait_s, question.after
    slot = Slot()
    leave = kept.follow(slot)
    try:
        while True:
            page = await run_in_threadpool(kept.page, question.which, after, question.size)
            left = until - monotonic()
            if page.events or left <= 0.0 or not await streams.wait(slot, left):
                return page
            slot.taken()
            # Where only the newest were asked for, what comes now is what is new.
            after = page.after
    finally:
        leave()
