"""What a controller asks with one GET about two frames of a stored arm or its cell.

Left out: what the query means (wire/relation_query.py) and what the answer says (operations).
"""

from collections.abc import Mapping
from time import time_ns

from fastapi import APIRouter
from pydantic import ValidationError
from starlette.concurrency import run_in_threadpool
from starlette.requests import Request
from starlette.responses import Response

from kinematics.errors import KinematicsError
from service.errors import ServiceError
from service.operations.relation import single_relation
from service.refusals import problem_at
from service.routes.direct import RelationRoute
from service.web.document import documented
from service.wire import one_answer
from service.wire.controller import (
    FORMATS,
    Format,
    errors_inline,
    wanted_format,
    wanted_tag,
)
from service.wire.controller_answers import FlatPose
from service.wire.formats import JSON
from service.wire.frame_answers import RelationReply
from service.wire.one_answer import Content, Stamp
from service.wire.query import known_parameters
from service.wire.relation_query import (
    PARAMETERS,
    RELATION_PARAMETERS,
    nested_relation,
    relation_question,
)

router = APIRouter(route_class=RelationRoute)


@router.api_route(
    "/v1/arms/{arm}/relation",
    methods=["GET", "HEAD"],
    openapi_extra=documented(
        "One frame of an arm in another",
        "The pose of the frame `of` in the frame `in`, at one posture: tools, frames, `base`, "
        "`flange`, `link-3`, `world`, and what is in the arm's cell, also what moves with another "
        "frame. Joint values are needed only where the way leads through the arm. `format=flat`, "
        "`csv` and `txt` answer with the keys of a flat pose: `tool_no` is the number of `of`, "
        "`frame_no` that of `in`, and nothing is said of singularity.",
        answer=RelationReply,
        answer_media=(JSON, "text/plain", "text/csv"),
        flat_refusal=FlatPose,
        parameters=RELATION_PARAMETERS,
        statuses=(404, 409, 503),
        controller=True,
        examples="relation",
    ),
)
async def relation(request: Request) -> Response:
    """Answer one frame in another."""
    # Read by hand before anything is refused, so that a refusal comes in the format asked for.
    query = request.query_params
    wanted: Format = next((known for known in FORMATS if known == query.get("format")), "json")
    inline = query.get("errors") == "inline"
    stamp: Stamp = {
        "seq": next(request.app.state.sequence),
        "tag": _readable_tag(request),
        "t_ms": time_ns() // 1_000_000,
    }
    try:
        return _response(await _content(request, wanted, stamp))
    except (ServiceError, KinematicsError, ValidationError) as error:
        if wanted == "json" and not inline:
            raise
        problem = problem_at(request, error)
        if wanted == "json":
            content = one_answer.refused_inline(problem, request.state.request_id, stamp)
        else:
            content = one_answer.refused_pose(problem, wanted, stamp)
        return _response(content, 200 if inline else problem.status, problem.headers)


async def _content(request: Request, wanted: Format, stamp: Stamp) -> Content:
    parameters = known_parameters(request, PARAMETERS)
    wanted_tag(parameters)
    errors_inline(parameters)
    wanted_format(parameters)
    asked = relation_question(request.path_params["arm"], parameters, wanted)
    arms, cells = request.app.state.arms, request.app.state.cells
    if arms.answers_at_once and cells.answers_at_once:
        flat, nested = single_relation(arms, cells, asked)
    else:
        flat, nested = await run_in_threadpool(single_relation, arms, cells, asked)
    if wanted == "json":
        return nested_relation(nested, stamp, asked.single.scale)
    return one_answer.pose(flat, asked.single, wanted, stamp)


def _response(
    content: Content, status: int = 200, headers: Mapping[str, str] | None = None
) -> Response:
    kept = {"Cache-Control": "no-store", **(headers or {})}
    return Response(content.body, status, headers=kept, media_type=content.media_type)


def _readable_tag(request: Request) -> int:
    try:
        return wanted_tag(request.query_params)
    except ServiceError:
        return 0
