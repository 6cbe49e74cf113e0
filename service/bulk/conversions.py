"""From a request about many orientations to its answer: which format, and who works on it.

Left out: the address (routes/rotations.py).
"""

from functools import partial
from time import time_ns

from starlette.concurrency import run_in_threadpool
from starlette.requests import Request
from starlette.responses import Response

from service.bulk.answering import LONG_BYTES, SHORT_BYTES, answer_of, in_pieces
from service.bulk.conversion_reading import conversions_of_body, conversions_of_table
from service.bulk.conversion_rendering import RENDERINGS, ConversionRendering
from service.bulk.rendering import Stamp
from service.problems import Problem
from service.wire.answers import json_problem
from service.wire.body import media_type_of, parse_json, read_bytes
from service.wire.controller import wanted_tag
from service.wire.formats import BODY_TYPES, Format, answer_format, beside_body
from service.wire.query import known_parameters
from service.wire.rotation_query import BODY_PARAMETERS, TABLE_PARAMETERS
from service.wire.rotations import ConversionsRequest


async def answer_conversions(request: Request) -> Response:
    """Answer a request about many orientations, whatever its format.

    Raises
    ------
    ServiceError, KinematicsError, pydantic.ValidationError : the request is refused.
    """
    body_format = BODY_TYPES.get(media_type_of(request))
    if body_format == "json":
        parameters = beside_body(request, TABLE_PARAMETERS, BODY_PARAMETERS)
    else:
        parameters = known_parameters(request, TABLE_PARAMETERS)
    wanted = answer_format(parameters, request.headers.get("accept", ""), body_format or "json")
    stamp = Stamp(next(request.app.state.sequence), wanted_tag(parameters), time_ns() // 1_000_000)
    raw = await read_bytes(request, *BODY_TYPES)
    bulk = request.app.state.bulk
    if body_format in ("npy", "csv"):
        is_csv, still = body_format == "csv", bulk.threads.refuse_if_stopping
        read = partial(conversions_of_table, raw, is_csv, parameters, wanted, still)
        conversions = await bulk.threads.run(read)
        return await in_pieces(bulk.threads, RENDERINGS[wanted](conversions, stamp))
    if len(raw) > LONG_BYTES:
        worked_out = await bulk.worker.convert(raw, wanted, stamp)
        if isinstance(worked_out, Problem):
            return json_problem(worked_out, request.state.request_id)
        return answer_of(worked_out)
    if len(raw) <= SHORT_BYTES:
        return await run_in_threadpool(_at_once, request, raw, wanted, stamp)
    rendering = await bulk.threads.run(partial(_of_body, request, raw, wanted, stamp))
    return await in_pieces(bulk.threads, rendering)


def _at_once(request: Request, raw: bytes, wanted: Format, stamp: Stamp) -> Response:
    rendering = _of_body(request, raw, wanted, stamp)
    pieces = [rendering.piece(0, rendering.count)] if rendering.count else []
    return answer_of(rendering.outline().answer(pieces))


def _of_body(request: Request, raw: bytes, wanted: Format, stamp: Stamp) -> ConversionRendering:
    body = parse_json(raw)
    request.state.json_body = body
    asked = ConversionsRequest.model_validate(body)
    return RENDERINGS[wanted](conversions_of_body(asked, wanted), stamp)
