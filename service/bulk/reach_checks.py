"""From a request about many targets to its answer: which format, and who works on it.

Left out: the address (routes/reach.py).
"""

from time import perf_counter, time_ns

from starlette.requests import Request
from starlette.responses import Response

from service.bulk.answering import Bulk, answer_of
from service.bulk.reach_reading import targets_of_body, targets_of_table
from service.bulk.reach_rendering import RENDERINGS, Piece, ReachRendering
from service.bulk.rendering import Stamp
from service.errors import TooLarge
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

LONGEST_S = 20.0
"""Of work on one request, whatever was estimated: near singular postures whole families are
followed, which takes a hundred times as long as to find one solution."""

_MOST_OF_PIECE_S = 3.0
"""What one piece counts of that: the first may have waited until kernels were compiled."""


async def answer_checks(request: Request) -> Response:
    """Answer a request about many targets, in JSON or CSV.

    Raises
    ------
    ServiceError, KinematicsError, pydantic.ValidationError : the request is refused.
    """
    is_csv = media_type_of(request) == CSV
    if is_csv:
        parameters = known_parameters(request, TABLE_PARAMETERS)
    else:
        parameters = beside_body(request, TABLE_PARAMETERS, BODY_PARAMETERS)
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
        work = _Limited(made)
        pieces = await bulk.threads.pieces(work.piece, made.count, made.many.size)
    return answer_of(made.answer(pieces))


class _Limited:
    """Makes pieces of an answer as long as they do not take too long together."""

    def __init__(self, rendering: ReachRendering) -> None:
        self._rendering = rendering
        self._taken_s: list[float] = []

    def piece(self, begin: int, end: int) -> Piece:
        """Return a piece.

        Raises
        ------
        TooLarge : those before have taken all the time there is.
        """
        if sum(self._taken_s) > LONGEST_S:
            raise TooLarge(
                f"this takes more than {LONGEST_S:.0f} s of work, as targets do that are searched "
                "for in vain or lie at singular postures",
                where=(FIELD,),
                value=self._rendering.count,
                way_out=f"send fewer than {max(begin, 1)} of these targets at a time",
                status=422,
            )
        started = perf_counter()
        made = self._rendering.piece(begin, end)
        self._taken_s.append(min(perf_counter() - started, _MOST_OF_PIECE_S))
        return made
