"""Events over HTTP: read from a change on, waited for, or told as they change.

Left out: what an event is (service/events).
"""

from collections.abc import Collection, Mapping, Sequence
from functools import partial
from time import monotonic
from typing import Any

from fastapi import APIRouter
from starlette.concurrency import run_in_threadpool
from starlette.requests import Request
from starlette.responses import Response

from service.event_streams import MEDIA_TYPE, EventStream, EventStreams, event, last_event_id
from service.events.desk import Events, Page
from service.events.kinds import KINDS
from service.events.ports import EVENT_STATES, Event
from service.events.telling import tell
from service.operations.meant_arms import check_was_stored
from service.routes.direct import DirectRoute
from service.slots import Slot
from service.web.document import documented, parameter
from service.wire import paging
from service.wire.answers import json_answer, json_bytes
from service.wire.events import (
    LONGEST_WAIT_S,
    PARAMETERS,
    EventListAnswer,
    EventQuestion,
    event_list_answer,
    event_question,
    event_told,
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
_SHOWN = tuple(parameter(name, meaning, _SCHEMAS.get(name)) for name, meaning in PARAMETERS.items())
_OF_STREAM = PARAMETERS.keys() - {"page_size", "wait"}
_LAST_EVENT = parameter(
    "Last-Event-ID", "`id` of the last that was read; it counts before `after`.", where="header"
)


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
        parameters=_SHOWN,
        statuses=(503,),
        examples="events",
    ),
)
async def events(request: Request) -> Response:
    """Answer events."""
    question = await _question(request, PARAMETERS)
    page = await _page(request, question)
    return json_answer(event_list_answer(*page), headers=_NO_STORE)


@router.get(
    "/v1/events/stream",
    openapi_extra=documented(
        "Watch the events of arms",
        "Server-sent events named `change`, one for each event that began, goes on or ended, in "
        "that order and without a gap: the data is an event as `/v1/events` lists it, `id` its "
        "`change`. Browsers that lost the connection go on where they were by themselves. Without "
        "`after` what changes from now on.",
        answer={"type": "string"},
        parameters=(*(one for one in _SHOWN if one["name"] in _OF_STREAM), _LAST_EVENT),
        statuses=(503,),
        answer_media=(MEDIA_TYPE,),
    ),
)
async def events_stream(request: Request) -> Response:
    """Answer events until the reader leaves."""
    kept: Events = request.app.state.events
    question = await _question(request, _OF_STREAM)
    after = await run_in_threadpool(_begin, request, kept, question)
    attach = partial(tell, kept, question.which, after, _rendered)
    return EventStream(request.app.state.streams, attach)


def _begin(request: Request, kept: Events, question: EventQuestion) -> int:
    """Return after which change a stream begins."""
    seen = last_event_id(request.scope["headers"])
    last = kept.page(question.which, None, 1).after
    if seen:
        # Counted in another database: of this one the reader has seen nothing.
        return seen if seen <= last else 0
    if question.after is not None:
        kept.page(question.which, question.after, 1)
    return last if question.after is None else question.after


def _rendered(found: Sequence[Event]) -> bytes:
    return b"".join([event("change", one.change, json_bytes(event_told(one))) for one in found])


async def _question(request: Request, allowed: Collection[str]) -> EventQuestion:
    question = event_question(known_parameters(request, allowed))
    if question.which.arm is not None:
        arms, arm = request.app.state.arms, question.which.arm
        await run_in_threadpool(check_was_stored, arms, arm, "query")
    return question


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
            if page.events or left <= 0.0 or not await streams.wait(slot, left, request.receive):
                return page
            slot.taken()
            # Where only the newest were asked for, what comes now is what is new.
            after = page.after
    finally:
        leave()
