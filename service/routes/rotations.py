"""Rotations: turns one after the other, many orientations in another form, one by query string.

Left out: what the query means (wire/rotation_query.py) and what the answers say (operations).
"""

from fastapi import APIRouter
from starlette.concurrency import run_in_threadpool
from starlette.requests import Request
from starlette.responses import Response

from kinematics.errors import KinematicsError
from service.bulk.conversions import answer_conversions
from service.errors import TooLarge
from service.operations.rotations import converted, rotations_answer
from service.problems import Problem
from service.routes.direct import RelationRoute
from service.routes.in_format import MEDIA_TYPES, Asked, answered_in_format
from service.web.document import documented
from service.web.schemas import BYTES, TEXT
from service.wire import csv_rows, npy
from service.wire.answers import json_answer
from service.wire.body import parse_json, read_bytes
from service.wire.formats import JSON
from service.wire.one_answer import Content
from service.wire.query import known_parameters
from service.wire.rotation_flat import conversion_content, refused_conversion
from service.wire.rotation_query import (
    CONVERSION_PARAMETERS,
    CONVERSION_TABLE_PARAMETERS,
    FLAT_FORM,
    PARAMETERS,
    conversion_question,
    value_parameter,
)
from service.wire.rotations import (
    ConversionReply,
    ConversionsAnswer,
    ConversionsRequest,
    FlatConversion,
    RotationsAnswer,
    RotationsRequest,
)

router = APIRouter(route_class=RelationRoute)
_MOST_BYTES = 2**20
"""Of a body with turns: a thousand of them, with room for every digit, are a fifth of it."""


@router.post(
    "/v1/rotations",
    openapi_extra=documented(
        "Turns one after the other",
        "Where `steps` lead from `start` (no rotation if left out), each about `fixed` axes, which "
        "stand still, or about `current` ones, which move along; in the `forms` asked for, or in "
        "all 28. `steps` come back with neighbours about one axis made one, all about fixed axes "
        "and all about current axes; each list leads from `start` to the same orientation. With "
        "`goal`, `between` is the turn from `start` to it and `left` that from where the steps "
        "end, about fixed and about current axes. At most 1 000 steps.",
        request=RotationsRequest,
        answer=RotationsAnswer,
        examples="rotations",
    ),
)
async def rotations(request: Request) -> Response:
    """Answer where turns lead."""
    known_parameters(request, ())
    raw = await read_bytes(request, JSON)
    if len(raw) > _MOST_BYTES:
        raise TooLarge(
            f"the body is larger than {_MOST_BYTES} bytes",
            value=len(raw),
            way_out="give at most 1000 steps; many orientations go to /v1/rotations/conversions",
            status=422,  # it has been read, and the connection is as good as before
        )

    def answer() -> Response:
        body = parse_json(raw)
        request.state.json_body = body
        return json_answer(rotations_answer(RotationsRequest.model_validate(body)))

    return await run_in_threadpool(answer)


@router.post(
    "/v1/rotations/conversions",
    openapi_extra=documented(
        "Many orientations in another form",
        "Each of `values` is an orientation in the form `from`, and comes back in the form `to`. "
        "One that cannot be used does not fail the others; if none can, the request is refused."
        "\n\nThey may also come as a table, with all else in the query: `application/x-npy` "
        "(version 1.0, N x 3, 4 or 9 little-endian doubles, C order, a matrix by rows) or "
        "`text/csv` (header `r1..r3`, `r4` or `r9`, and `,name`). The answer has the format of the "
        "body, that of `Accept`, or that of `format`, which wins; in NPY an orientation that "
        "cannot be used is all NaN. At most 200 000 orientations.",
        request=ConversionsRequest,
        answer=ConversionsAnswer,
        parameters=CONVERSION_TABLE_PARAMETERS,
        other_requests={
            npy.MEDIA_TYPE: BYTES,
            "application/octet-stream": BYTES,
            csv_rows.MEDIA_TYPE: TEXT,
        },
        answer_media=(JSON, npy.MEDIA_TYPE, csv_rows.MEDIA_TYPE),
        headers={"X-Bad-Rows": "Orientations that cannot be used, in an NPY or CSV answer."},
        examples="rotations-conversions",
    ),
)
async def rotation_conversions(request: Request) -> Response:
    """Answer many orientations in another form."""
    return await answer_conversions(request)


@router.api_route(
    "/v1/rotations",
    methods=["GET", "HEAD"],
    openapi_extra=documented(
        "One orientation in another form",
        "By query string: `r1` ... `r3`, `r4` or `r9` are the numbers of the form `from`, a matrix "
        "by rows. `format=flat` answers one level in fixed order, `r1` ... those of the form `to`; "
        "`csv` the same with a head line, `txt` one line with each field at its place: degrees "
        "with four decimals, radians and pure numbers with nine.",
        answer=ConversionReply,
        answer_media=MEDIA_TYPES,
        flat_refusal=FlatConversion,
        parameters=CONVERSION_PARAMETERS,
        controller=True,
        examples="rotation",
    ),
)
async def rotation(request: Request) -> Response:
    """Answer one orientation in another form."""
    return await answered_in_format(request, PARAMETERS, _rotation, _refused_rotation)


async def _rotation(asked: Asked) -> Content:
    question = conversion_question(asked.said, flat=asked.wanted != "json")
    try:
        orientation, head = converted(question.form, question.values, question.to, question.units)
    except KinematicsError as error:
        error.where = (value_parameter(error.where),)
        error.value = asked.said[error.where[0]]
        raise
    return conversion_content(orientation, head, question, asked.wanted, asked.stamp)


async def _refused_rotation(asked: Asked, problem: Problem) -> Content:
    to = asked.said.get("to", FLAT_FORM)
    return refused_conversion(problem.number, to, asked.wanted, asked.stamp)
