"""From a request about many travels to its answer: which format, and who works on it.

Left out: the address (routes/reach.py).
"""

from time import time_ns

from starlette.requests import Request
from starlette.responses import Response

from service.bulk.answering import Bulk, answer_of
from service.bulk.limited import Limited
from service.bulk.reach_checks import FORMATS
from service.bulk.reach_rendering import Piece
from service.bulk.rendering import Stamp
from service.bulk.travel_rendering import RENDERINGS, TravelRendering
from service.operations.travels import travels_of_body
from service.wire.body import parse_json, read_bytes
from service.wire.controller import wanted_tag
from service.wire.formats import JSON, answer_format
from service.wire.query import known_parameters
from service.wire.reach_query import BODY_PARAMETERS
from service.wire.travel_reading import FIELD

MOST_BYTES = 4_000_000
"""Of a body: 1000 travels of a few legs have some 1 MB."""

_WHY = "as travels do that start at many postures or at none"


async def answer_travels(request: Request) -> Response:
    """Answer a request about many travels, in JSON or CSV.

    Raises
    ------
    ServiceError, KinematicsError, pydantic.ValidationError : the request is refused.
    """
    parameters = known_parameters(request, BODY_PARAMETERS)
    wanted = answer_format(parameters, request.headers.get("accept", ""), "json", FORMATS)
    stamp = Stamp(next(request.app.state.sequence), wanted_tag(parameters), time_ns() // 1_000_000)
    raw = await read_bytes(request, JSON, most=MOST_BYTES)
    bulk: Bulk = request.app.state.bulk
    arms = request.app.state.arms

    def begun() -> tuple[TravelRendering, list[Piece] | None]:
        body = parse_json(raw)
        request.state.json_body = body
        many = travels_of_body(arms, body)
        many.refuse_long_work()
        # Worked out here, and not in the event loop, which only sends what is there.
        assert many.head
        made = RENDERINGS[wanted](many, stamp)
        is_short = many.count <= many.size
        return made, [made.piece(0, many.count)] if is_short else None

    made, pieces = await bulk.threads.run(begun)
    if pieces is None:
        work = Limited(made.piece, FIELD, made.many.count, _WHY)
        pieces = await bulk.threads.pieces(work.piece, made.many.count, made.many.size)
    return answer_of(made.answer(pieces))
