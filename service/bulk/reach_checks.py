"""From a request about many targets to its answer: which format, and who works on it.

Left out: the address (routes/reach.py).
"""

from time import time_ns

from starlette.requests import Request
from starlette.responses import Response

from service.bulk.answering import Bulk, answer_of
from service.bulk.limited import Limited
from service.bulk.reach_reading import targets_of_body, targets_of_table
from service.bulk.reach_rendering import RENDERINGS, Piece, ReachRendering
from service.bulk.rendering import Stamp
from service.wire.body import media_type_of, parse_json, read_bytes
from service.wire.controller import wanted_tag
from service.wire.csv_rows import MEDIA_TYPE as CSV
from service.wire.formats import JSON, Format, answer_format, beside_body
from service.wire.query import known_parameters
from service.wire.reach_gathered import FIELD
from service.wire.reach_query import BODY_PARAMETERS, TABLE_PARAMETERS

MOST_BYTES = 8_000_000
"""Of a body: 10 000 poses as matrices have some 4 MB."""

FORMATS: tuple[Format, ...] = ("json", "csv")

_WHY = "as targets do that are searched for in vain or lie at singular postures"


async def answer_checks(request: Request) -> Response:
    """Answer a request about many targets, in JSON or CSV.

    Raises
    ------
    ServiceError, KinematicsError, pydantic.ValidationError : the request is refused.
    """
    media_type = media_type_of(request)
    is_csv = media_type == CSV
    if media_type == JSON:
        parameters = beside_body(request, TABLE_PARAMETERS, BODY_PARAMETERS)
    else:
        parameters = known_parameters(request, TABLE_PARAMETERS)
    accept = request.headers.get("accept", "")
    wanted = answer_format(parameters, accept, "csv" if is_csv else "json", FORMATS)
    stamp = Stamp(next(request.app.state.sequence), wanted_tag(parameters), time_ns() // 1_000_000)
    raw = await read_bytes(request, JSON, CSV, most=MOST_BYTES)
    bulk: Bulk = request.app.state.bulk
    arms = request.app.state.arms

    def begun() -> tuple[ReachRendering, list[Piece] | None]:
        if is_csv:
            many = targets_of_table(arms, raw, parameters, bulk.threads.refuse_if_stopping)
        else:
            body = parse_json(raw)
            request.state.json_body = body
            many = targets_of_body(arms, body)
        many.refuse_long_work()
        made = RENDERINGS[wanted](many, stamp)
        # Worked out here, and not in the event loop, which only sends what is there.
        assert many.head
        is_short = made.count <= many.size
        return made, [made.piece(0, made.count)] if is_short else None

    made, pieces = await bulk.threads.run(begun)
    if pieces is None:
        work = Limited(made.piece, FIELD, made.count, _WHY)
        pieces = await bulk.threads.pieces(work.piece, made.count, made.many.size)
    return answer_of(made.answer(pieces))
