"""What a controller asks with one GET about two frames of a stored arm or its cell.

Left out: what the query means (wire/relation_query.py) and what the answer says (operations).
"""

from fastapi import APIRouter
from starlette.concurrency import run_in_threadpool
from starlette.requests import Request
from starlette.responses import Response

from service.operations.relation import single_relation
from service.routes.direct import RelationRoute
from service.routes.in_format import MEDIA_TYPES, Asked, answered_in_format, refused_pose
from service.web.document import documented
from service.wire import one_answer
from service.wire.controller_answers import FlatPose
from service.wire.frame_answers import RelationReply
from service.wire.one_answer import Content
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
        answer_media=MEDIA_TYPES,
        flat_refusal=FlatPose,
        parameters=RELATION_PARAMETERS,
        statuses=(404, 409, 503),
        controller=True,
        examples="relation",
    ),
)
async def relation(request: Request) -> Response:
    """Answer one frame in another."""
    return await answered_in_format(request, PARAMETERS, _relation, refused_pose)


async def _relation(asked: Asked) -> Content:
    request, wanted = asked.request, asked.wanted
    question = relation_question(request.path_params["arm"], asked.said, wanted)
    arms, cells = request.app.state.arms, request.app.state.cells
    if arms.answers_at_once and cells.answers_at_once:
        flat, nested = single_relation(arms, cells, question)
    else:
        flat, nested = await run_in_threadpool(single_relation, arms, cells, question)
    if wanted == "json":
        return nested_relation(nested, asked.stamp, question.single.scale)
    return one_answer.pose(flat, question.single, wanted, asked.stamp)
