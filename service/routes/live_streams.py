"""Live poses as streams of events: of one arm, or of all.

Left out: single answers (live.py), and how events are sent (service/event_streams.py).
"""

from collections.abc import Mapping
from functools import partial

from fastapi import APIRouter
from starlette.concurrency import run_in_threadpool
from starlette.requests import Request
from starlette.responses import Response

from kinematics.errors import KinematicsError
from service.errors import ServiceError
from service.event_streams import MEDIA_TYPE, EventStream, event, last_event_id
from service.live.channels import Channels
from service.live.clocks import Clock
from service.live.live_arm import LiveArm
from service.live.live_arms import LiveArms
from service.operations.live import live_answer
from service.operations.single import question_about
from service.problems import problem_of
from service.routes.direct import PostureRoute
from service.routes.joints import identity_of, stored_arm
from service.routes.live import KNOWN, TAG_MEANS
from service.routes.live_changes import NOT_STORED, Known, tag_of, wait_for_change
from service.web.document import documented, parameter
from service.wire import live_told
from service.wire.answers import json_answer, json_bytes
from service.wire.controller import Format
from service.wire.live_models import LiveList
from service.wire.live_query import (
    ALL_SHOWN,
    ALL_STREAM_SHOWN,
    PARAMETERS_OF_ALL,
    PARAMETERS_OF_ALL_STREAM,
    PARAMETERS_OF_STREAM,
    STREAM_SHOWN,
    StreamQuestion,
    live_question,
    stream_question,
)
from service.wire.one_answer import Stamp
from service.wire.query import known_parameters
from service.wire.single import SingleQuestion

router = APIRouter(route_class=PostureRoute)

_ANY = "any"
"""Stands for the arm's name in a question that is asked of every arm."""

_LAST_EVENT = parameter(
    "Last-Event-ID", "`id` of the last that was read; it counts before `after`.", where="header"
)
_STREAM = (
    "Server-sent events named `pose`, one for each change, the newest alone for a reader that is "
    "slow or asks for fewer by `rate`; `id` is `change`. What cannot be told is an event "
    "`problem`, and the stream goes on. The connection is closed at its end; browsers ask again "
    "by themselves. The data is the answer of `/v1/arms/{arm}/live` in the same words, nested or "
    "with `format=flat` on one level."
)
_OF_ALL = (
    " Of each arm the newest wins for itself, and `rate` is that of each; on one level its name "
    "stands last, as `arm`. One that is no longer stored is told once, as an event `removed` with "
    "its name as `arm`."
)


@router.get(
    "/v1/arms/{arm}/live/stream",
    openapi_extra=documented(
        "Watch the live pose of an arm",
        _STREAM,
        answer={"type": "string"},
        parameters=(*STREAM_SHOWN, _LAST_EVENT),
        statuses=(404, 409, 503),
        answer_media=(MEDIA_TYPE,),
    ),
)
async def live_stream(request: Request) -> Response:
    """Answer events of one arm until the reader leaves."""
    name = request.path_params["arm"]
    said = known_parameters(request, PARAMETERS_OF_STREAM)
    stored = await stored_arm(request.app.state.arms, name)
    asked = stream_question(name, said)
    # Refused now, and not in each event.
    question_about(stored, asked.pose)
    return _stream(request, name, asked)


@router.get(
    "/v1/live/stream",
    openapi_extra=documented(
        "Watch the live poses of all arms",
        _STREAM + _OF_ALL,
        answer={"type": "string"},
        parameters=(*ALL_STREAM_SHOWN, _LAST_EVENT),
        statuses=(503,),
        answer_media=(MEDIA_TYPE,),
    ),
)
async def live_stream_of_all(request: Request) -> Response:
    """Answer events of all arms until the reader leaves."""
    said = known_parameters(request, PARAMETERS_OF_ALL_STREAM)
    return _stream(request, None, stream_question(_ANY, said))


@router.api_route(
    "/v1/live",
    methods=["GET", "HEAD"],
    openapi_extra=documented(
        "Live poses of all arms",
        "Each arm of which joint values came, as `/v1/arms/{arm}/live` tells it, by name. One that "
        "cannot be told says why and does not fail the others. `arms_without_values` counts the "
        "stored arms of which none came yet; `/v1/arms` lists all.",
        answer=LiveList,
        parameters=(*ALL_SHOWN, KNOWN),
        statuses=(304, 503),
        headers=TAG_MEANS,
        examples="live-of-all",
    ),
)
async def live_of_all(request: Request) -> Response:
    """Answer where all tools are."""
    said = known_parameters(request, PARAMETERS_OF_ALL)
    asked = live_question(_ANY, said, "json")
    arms: LiveArms = request.app.state.live
    known = Known(request, asked.after)
    if asked.wait_s is not None:
        await wait_for_change(request, None, known, arms.change, asked.wait_s)
    if known.covers(arms.change):
        return Response(status_code=304, headers=NOT_STORED | tag_of(arms.change))
    live = [found for found in map(arms.get, arms.names()) if found is not None]
    for one in live:
        arms.look_at(one.name)
    listed = [_told(asked.pose, arms.clock, one, {}) for one in live]
    # Of another process' arms nothing comes here, and what it removed may still be listed.
    stored = await run_in_threadpool(request.app.state.arms.storage.count)
    without = max(stored - len(listed), 0)
    answer = {"arms": listed, "arms_without_values": without}
    return json_answer(answer, headers=NOT_STORED | tag_of(arms.change))


def _stream(request: Request, name: str | None, asked: StreamQuestion) -> Response:
    state = request.app.state
    channels: Channels = state.channels
    # A browser that comes back asks the same address as at first, and says there what it has read.
    after = last_event_id(request.scope["headers"]) or asked.after or 0
    render = partial(_rendered, asked.pose, asked.wanted, state.live.clock, name is None)
    attach = partial(channels.attach, name, (asked.pose, asked.wanted), render, after)
    return EventStream(state.streams, attach, gap_s=asked.gap_s)


def removed(name: str, change: int) -> bytes:
    """Return the event that tells of an arm that is stored no more."""
    return event("removed", change, json_bytes({"arm": name}))


def _rendered(
    asked: SingleQuestion, wanted: Format, clock: Clock, of_all: bool, live: LiveArm
) -> bytes:
    """Return the event that tells how an arm stands."""
    change = live.standing.change
    stamp: Stamp = {"seq": change, "tag": 0, "t_ms": round(clock.wall_ms())}
    try:
        if wanted == "flat":
            # Of all arms together, each event says whose it is.
            whose = live.name if of_all else None
            told = live_told.flat_event(live_answer(live, asked, clock), asked, stamp, whose)
            return event("pose", change, told)
    except (ServiceError, KinematicsError):
        pass  # told nested below
    answer = _told(asked, clock, live, stamp)
    return event("pose" if answer["ok"] else "problem", change, json_bytes(answer))


def _told(
    asked: SingleQuestion, clock: Clock, live: LiveArm, stamp: Mapping[str, object]
) -> dict[str, object]:
    """Return how an arm stands, or why that cannot be told."""
    try:
        return live_told.nested(live_answer(live, asked, clock), stamp, asked.scale)
    except (ServiceError, KinematicsError) as error:
        standing = live.standing
        return live_told.nested_refusal(problem_of(error), identity_of(standing.stored), standing)
