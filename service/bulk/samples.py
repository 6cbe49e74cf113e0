"""From a request for samples of reach to its answer: which format, and who works on it.

Left out: the address (routes/reach_regions.py) and what the numbers are (operations).
"""

from collections.abc import Callable
from functools import partial

from starlette.requests import Request
from starlette.responses import Response

from service.bulk.answering import Bulk
from service.bulk.streaming import StreamedAnswer
from service.operations.samples import ManySamples, samples_asked
from service.wire import csv_text, npy
from service.wire.answers import PartsAnswer, json_bytes
from service.wire.body import read_json
from service.wire.formats import JSON, Format, answer_format, beside_body
from service.wire.samples import SamplesRequest

PARAMETERS = frozenset({"format"})
_ITEMS, _LINES, _BARE = 2048, 4096, 16384
"""Samples in a piece of JSON, CSV and NPY: some milliseconds."""

_MOST_WAITING = 8
"""Of those that take seconds, in hand and waiting, before the next is asked to come again."""

_TABLES = {
    "npy": (npy.MEDIA_TYPE, _BARE),
    "csv": (csv_text.MEDIA_TYPE, _LINES),
}


async def answer_samples(request: Request) -> Response:
    """Answer a request for samples, in JSON, NPY or CSV.

    Raises
    ------
    ServiceError, KinematicsError, pydantic.ValidationError : the request is refused.
    """
    parameters = beside_body(request, PARAMETERS, PARAMETERS)
    wanted = answer_format(parameters, request.headers.get("accept", ""), "json")
    body = await read_json(request)
    bulk: Bulk = request.app.state.bulk
    arms = request.app.state.arms

    def begun() -> ManySamples:
        return samples_asked(arms, SamplesRequest.model_validate(body), wanted)

    many = await bulk.threads.run(begun)
    if not many.samples.region.is_box:
        # Limits that leave too little to draw from are found by drawing, for seconds where it is
        # nearly too little, and nothing can be refused any more once a table is being sent.
        first = partial(many.samples.piece, 0, 1)
        await bulk.estimates.run(first, most=_MOST_WAITING)
    if wanted != "json":
        return _table(bulk, many, wanted)
    summaries = await bulk.threads.pieces(many.summary_piece, many.count, _BARE)
    summary = await bulk.threads.run(partial(many.summary, summaries))
    head = json_bytes({**many.head, "summary": summary})
    parts = [head[:-1] + b',"samples":[']
    if many.columns:
        pieces = await bulk.threads.pieces(_items(many), many.count, _ITEMS)
        for place, piece in enumerate(pieces):
            parts += [b",", piece] if place else [piece]
    return PartsAnswer([*parts, b"]}"], media_type=JSON)


def _items(many: ManySamples) -> Callable[[int, int], bytes]:
    def items(begin: int, end: int) -> bytes:
        return json_bytes(many.items(begin, end))[1:-1]

    return items


def _table(bulk: Bulk, many: ManySamples, wanted: Format) -> Response:
    media_type, size = _TABLES[wanted]
    columns = many.columns
    is_npy = wanted == "npy"
    head = (
        npy.npy_head((many.count, len(columns)))
        if is_npy
        else (",".join(columns) + "\r\n").encode("ascii")
    )

    def piece(begin: int, end: int) -> bytes | memoryview:
        numbers = many.numbers(begin, end)
        return npy.npy_bytes(numbers) if is_npy else csv_text.plain_lines(numbers)

    return StreamedAnswer(
        bulk.threads,
        head,
        piece,
        many.count,
        size,
        media_type=media_type,
        headers={"X-Columns": ",".join(columns)},
        length=len(head) + 8 * many.count * len(columns) if is_npy else None,
    )
