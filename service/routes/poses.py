"""Tool poses and Jacobians for many joint vectors of one arm: JSON, NPY or CSV, in and out.

Left out: what the answers say (operations) and who works on them (bulk).
"""

from typing import Any

from fastapi import APIRouter
from starlette.requests import Request
from starlette.responses import Response

from service.bulk.answering import answer_many
from service.routes.direct import PostureRoute
from service.web.document import documented
from service.web.schemas import BYTES, TEXT
from service.wire import csv_rows, npy
from service.wire.answer_models import JacobiansAnswer, PosesAnswer
from service.wire.formats import JSON
from service.wire.models import JacobiansRequest, PosesRequest
from service.wire.question_parameters import TABLE_PARAMETERS

router = APIRouter(route_class=PostureRoute)

_TABLES = (
    "\n\nJoint vectors may also come as a table, with all else in the query: `application/x-npy` "
    "(version 1.0, N x n little-endian doubles, C order) or `text/csv` (header `q1..qn[,name]`). "
    "The answer has the format of the body, that of `Accept`, or that of `format`, which wins: "
    "{npy} as NPY, where a vector that cannot be used is all NaN; as CSV one line with the keys of "
    "a flat answer for each vector. At most 200 000 vectors, 20 000 with singularity, which NPY "
    "leaves out."
)
_OTHER_BODIES: dict[str, dict[str, Any]] = {
    npy.MEDIA_TYPE: BYTES,
    "application/octet-stream": BYTES,
    csv_rows.MEDIA_TYPE: TEXT,
}
_ANSWERS = (JSON, npy.MEDIA_TYPE, csv_rows.MEDIA_TYPE)
_HEADERS = {"X-Bad-Rows": "Vectors that cannot be used, in an NPY or CSV answer."}


@router.post(
    "/v1/poses",
    openapi_extra=documented(
        "Tool poses",
        "Where the tool is for each joint vector, and how near the posture is to singular. One "
        "vector that cannot be used does not fail the others; if none can, the request is refused."
        + _TABLES.format(npy="N x 7 (x y z w x y z)"),
        request=PosesRequest,
        answer=PosesAnswer,
        parameters=TABLE_PARAMETERS,
        statuses=(409, 503),
        other_requests=_OTHER_BODIES,
        answer_media=_ANSWERS,
        headers=_HEADERS,
        examples="poses",
    ),
)
async def poses(request: Request) -> Response:
    """Answer tool poses."""
    return await answer_many(request, "poses")


@router.post(
    "/v1/jacobians",
    openapi_extra=documented(
        "Jacobians",
        "The Jacobian of the tool point for each joint vector, in axes of `frame`. `speeds` "
        "become twists, `twists` become joint speeds (damped near singular postures, and saying "
        "so), `loads` become joint efforts: the force and moment that the tool exerts on its "
        "surroundings, so a hanging weight is held by a load that points up."
        + _TABLES.format(npy="N x 6 x n"),
        request=JacobiansRequest,
        answer=JacobiansAnswer,
        parameters=TABLE_PARAMETERS,
        statuses=(409, 503),
        other_requests=_OTHER_BODIES,
        answer_media=_ANSWERS,
        headers=_HEADERS,
        examples="jacobians",
    ),
)
async def jacobian_matrices(request: Request) -> Response:
    """Answer Jacobians."""
    return await answer_many(request, "jacobians")
