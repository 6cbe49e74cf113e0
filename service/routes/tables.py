"""A table in the other convention.

Left out: the regrouping (the core's).
"""

from fastapi import APIRouter
from starlette.concurrency import run_in_threadpool
from starlette.requests import Request
from starlette.responses import Response

from service.operations.tables import converted_table
from service.routes.direct import PostureRoute
from service.web.document import documented
from service.wire.answer_models import ConversionAnswer
from service.wire.answers import json_answer
from service.wire.body import read_json
from service.wire.models import ConversionRequest
from service.wire.query import known_parameters

router = APIRouter(route_class=PostureRoute)


@router.post(
    "/v1/tables/conversions",
    openapi_extra=documented(
        "Table in the other convention",
        "The same arm as a standard or modified table, with the base or tools it then needs; "
        "nothing is approximated.",
        request=ConversionRequest,
        answer=ConversionAnswer,
        statuses=(503,),
        examples="tables-conversions",
    ),
)
async def conversions(request: Request) -> Response:
    """Answer the arm in the convention asked for."""
    known_parameters(request, ())
    asked = ConversionRequest.model_validate(await read_json(request))
    return json_answer(await run_in_threadpool(converted_table, request.app.state.arms, asked))
