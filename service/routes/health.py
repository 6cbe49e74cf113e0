"""Whether the service lives, is ready, and how it has been doing.

Left out: anything about arms; none of these asks more of the database than whether it answers.
"""

import asyncio
from time import monotonic

from fastapi import APIRouter
from starlette.requests import Request
from starlette.responses import PlainTextResponse, Response

from service.errors import NotAvailable
from service.metrics import MEDIA_TYPE, Metrics
from service.routes.direct import DirectRoute
from service.web.document import documented
from service.wire.answers import json_answer
from service.wire.query import known_parameters

router = APIRouter(route_class=DirectRoute)
_STATE = {
    "type": "object",
    "required": ["state"],
    "properties": {"state": {"type": "string", "enum": ["alive", "ready"]}},
}
_NOT_KEPT = {"Cache-Control": "no-store"}


@router.api_route(
    "/v1/ping",
    methods=["GET", "HEAD"],
    openapi_extra=documented(
        "Heartbeat",
        "`1;seq;uptime_s` in under 40 bytes: answers given so far, whole seconds since the start. "
        "Asks no database.",
        answer_media=["text/plain"],
        controller=True,
        examples="ping",
        statuses=[422],
    ),
)
async def ping(request: Request) -> Response:
    """Answer ``1;seq;uptime_s``."""
    known_parameters(request, ())
    state = request.app.state
    line = f"1;{next(state.sequence)};{int(monotonic() - state.started)}"
    return PlainTextResponse(line, headers=_NOT_KEPT)


@router.api_route(
    "/livez",
    methods=["GET", "HEAD"],
    openapi_extra=documented(
        "Alive", "The process answers.", answer=_STATE, statuses=[422], examples="livez"
    ),
)
async def livez(request: Request) -> Response:
    """Answer as long as the process can."""
    known_parameters(request, ())
    return json_answer({"state": "alive"}, headers=_NOT_KEPT)


@router.api_route(
    "/readyz",
    methods=["GET", "HEAD"],
    openapi_extra=documented(
        "Ready",
        "The database answers too, and the kernels are compiled. Those for reach are loaded by "
        "the first question about it, which waits.",
        answer=_STATE,
        statuses=[422, 503],
        examples="readyz",
    ),
)
async def readyz(request: Request) -> Response:
    """Answer 503 while the database does not answer, or kernels are still being compiled.

    Not those for reach, which nobody may ever ask for.
    """
    known_parameters(request, ())
    if not request.app.state.readiness.relations.are_ready:
        raise NotAvailable("kernels are being compiled", headers={"Retry-After": "2"})
    await asyncio.to_thread(request.app.state.storage.ping)
    return json_answer({"state": "ready"}, headers=_NOT_KEPT)


@router.api_route(
    "/metrics",
    methods=["GET", "HEAD"],
    openapi_extra=documented(
        "Metrics",
        "Requests and their times by route, as Prometheus reads them.",
        answer_media=["text/plain"],
        statuses=[422],
    ),
)
async def metrics(request: Request) -> Response:
    """Answer the text exposition format."""
    known_parameters(request, ())
    numbers: Metrics = request.app.state.metrics
    return Response(numbers.text(), media_type=MEDIA_TYPE, headers=_NOT_KEPT)
