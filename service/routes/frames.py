"""Relations between frames: those not measured from those that are, loops, the estimate.

Left out: what is answered (operations).
"""

from fastapi import APIRouter
from pydantic import ValidationError
from starlette.concurrency import run_in_threadpool
from starlette.requests import Request
from starlette.responses import Response

from service.bulk.answering import Bulk
from service.operations.frames import frames_answer
from service.routes.direct import RelationRoute
from service.web.document import documented
from service.wire.answers import json_answer
from service.wire.body import read_bytes
from service.wire.formats import JSON
from service.wire.frame_answers import FramesAnswer
from service.wire.frames import FramesBody
from service.wire.frames_request import FramesRequest
from service.wire.query import known_parameters
from service.wire.worded_alike import SHORT_BYTES

router = APIRouter(route_class=RelationRoute)

_MOST_BYTES = 8_000_000
"""Of a body: 20 000 relations have some 5 MB."""

_MOST_ESTIMATES = 3
"""Long ones, in hand and waiting, before the next is asked to come again."""


@router.post(
    "/v1/frames",
    openapi_extra=documented(
        "Relations between frames",
        "Any unknown pose from known `relations`, from `arms` at joint values and from a stored "
        "`cell`: poses are inverted and put together along the fewest relations, and the way is "
        "told. Every independent loop comes with what it is off by. With `estimate` all relations "
        "give way in proportion to their variances (weighted least squares), and the one that "
        "most likely is wrong is named (data snooping, Baarda 1968). Frames of an arm are called "
        "`<arm>.base`, `<arm>.flange`, `<arm>.link-3`, `<arm>.<tool or frame>`; those of the cell, "
        "`world` and your own stand alone. An arm that stands in a cell brings it along. At most "
        "20 000 relations; with `estimate` deviations at most 100 000 to 1 apart, and 20 s of "
        "work.",
        request=FramesRequest,
        answer=FramesAnswer,
        statuses=(503,),
        examples="frames",
    ),
)
async def frames(request: Request) -> Response:
    """Answer relations between frames."""
    known_parameters(request, ())
    raw = await read_bytes(request, JSON, most=_MOST_BYTES)
    if len(raw) <= SHORT_BYTES:
        body = FramesBody(raw)
        # What looks at nothing far away is answered sooner than a thread would begin.
        if _is_quick(request, body):
            return _answered(request, body)
        return await run_in_threadpool(_answered, request, body)
    bulk: Bulk = request.app.state.bulk

    def answer() -> Response:
        return _answered(request, FramesBody(raw))

    # With an escape in it, it may be called by any name.
    if b"\\" in raw or b'"estimate"' in raw:
        return await bulk.estimates.run(answer, most=_MOST_ESTIMATES)
    return await bulk.threads.run(answer)


def _is_quick(request: Request, body: FramesBody) -> bool:
    try:
        asked = body.asked
    except ValidationError:  # which is told where the answer would be
        return True
    if asked.estimate:
        return False
    arms, cells = request.app.state.arms, request.app.state.cells
    names_stored = bool(asked.arms) or asked.cell is not None
    return not names_stored or (arms.answers_at_once and cells.answers_at_once)


def _answered(request: Request, body: FramesBody) -> Response:
    state = request.app.state
    try:
        between = state.bulk.threads.refuse_if_stopping
        return json_answer(frames_answer(state.arms, state.cells, body, between))
    except Exception:
        request.state.json_body = body.document
        raise
