"""From a request about many postures to its answer: which format, and who works on it.

Left out: the addresses (routes/poses.py).
"""

from functools import partial
from time import time_ns

from starlette.concurrency import run_in_threadpool
from starlette.requests import Request
from starlette.responses import Response

from kinematics.envelope.shapes import Envelope
from service.bulk.process import WorkerProcess
from service.bulk.reading import Key, bare_poses_of, many_of_body, many_of_table, model_of
from service.bulk.rendering import RENDERINGS, InPieces, Rendering, Stamp, WorkedOut
from service.bulk.threads import Threads
from service.problems import Problem
from service.wire.answers import FreshAnswer, PartsAnswer, json_problem
from service.wire.body import media_type_of, parse_json, read_bytes
from service.wire.controller import wanted_tag
from service.wire.formats import (
    BODY_TYPES,
    JSON,
    Format,
    answer_format,
    question_parameters,
)
from service.wire.kept_by_words import KeptByWords

# Parsed, worked on and printed in a few milliseconds; more is done in pieces.
SHORT_BYTES = 64 * 1024
# A few postures of an arm of some rows take less than to hand them to a thread.
_TINY_BYTES, _FEW = 4096, 4
# So few that to copy them into one costs less than to send them one by one.
_FEW_PARTS = 4
# Parsing as a whole holds the interpreter: beyond this size for longer than others should wait.
LONG_BYTES = 2_000_000
# Some 50 kB each.
_ENVELOPES_KEPT = 64


class Bulk:
    """The means of one service to answer long requests."""

    def __init__(self) -> None:
        self.threads = Threads()
        # Takes a whole turn of seconds: nobody who asks for less is to wait behind it.
        self.estimates = Threads(1)
        # A page that is opened again asks for the same again.
        self.envelopes: KeptByWords[Envelope] = KeptByWords(_ENVELOPES_KEPT)
        self.worker = WorkerProcess()

    def stop(self) -> None:
        """End all work at once."""
        self.threads.stop()
        self.estimates.stop()
        self.worker.stop()


async def answer_many(request: Request, key: Key) -> Response:
    """Answer a request about many postures, whatever its format.

    Raises
    ------
    ServiceError, KinematicsError, pydantic.ValidationError : the request is refused.
    """
    known = BODY_TYPES.get(media_type_of(request))
    parameters = question_parameters(request, known)
    body_format = known or "json"
    wanted = answer_format(parameters, request.headers.get("accept", ""), body_format)
    stamp = Stamp(next(request.app.state.sequence), wanted_tag(parameters), time_ns() // 1_000_000)
    raw = await read_bytes(request, *BODY_TYPES)
    bulk, arms = request.app.state.bulk, request.app.state.arms
    if body_format != "json":
        read = partial(
            many_of_table, arms, key, raw, body_format == "csv", parameters, wanted,
            bulk.threads.refuse_if_stopping,
        )  # fmt: skip
        many = await bulk.threads.run(read)
        return await in_pieces(bulk.threads, RENDERINGS[wanted](many, stamp))
    if len(raw) > LONG_BYTES:
        bare = await bulk.threads.run(partial(bare_poses_of, raw, key, wanted))
        if bare is not None:
            request.state.json_body = bare.document
            read = partial(many_of_body, arms, key, bare.asked, wanted, bare.table)
            many = await bulk.threads.run(read)
            return await in_pieces(bulk.threads, RENDERINGS[wanted](many, stamp))
        worked_out = await bulk.worker.answer(arms, raw, key, wanted, stamp)
        if isinstance(worked_out, Problem):
            return json_problem(worked_out, request.state.request_id)
        return answer_of(worked_out)
    return await _of_body(request, raw, key, wanted, stamp)


async def _of_body(
    request: Request, raw: bytes, key: Key, wanted: Format, stamp: Stamp
) -> Response:
    bulk, arms = request.app.state.bulk, request.app.state.arms
    if len(raw) > SHORT_BYTES:
        body = await bulk.threads.run(partial(parse_json, raw))
    else:
        body = parse_json(raw)
    request.state.json_body = body
    asked = model_of(key, body)

    def rendering() -> Rendering:
        return RENDERINGS[wanted](many_of_body(arms, key, asked, wanted), stamp)

    if len(raw) > SHORT_BYTES:
        return await in_pieces(bulk.threads, await bulk.threads.run(rendering))
    if len(raw) <= _TINY_BYTES and len(asked.joints) <= _FEW and arms.answers_at_once:
        return _at_once(rendering())
    return await run_in_threadpool(lambda: _at_once(rendering()))


def _at_once(rendering: Rendering) -> Response:
    piece = rendering.piece(0, rendering.count)
    whole = rendering.head + piece.content + rendering.tail
    if rendering.media_type == JSON:
        return FreshAnswer(whole, JSON)
    return answer_of(WorkedOut(rendering.media_type, [whole], piece.refused))


async def in_pieces(threads: Threads, rendering: InPieces) -> Response:
    """Return the answer whose pieces the threads have made."""
    pieces = await threads.pieces(rendering.piece, rendering.count, rendering.size)
    return answer_of(rendering.outline().answer(pieces))


def answer_of(worked_out: WorkedOut) -> Response:
    """Return an answer that is all there, with its count of refusals where items do not tell."""
    is_json = worked_out.media_type.startswith("application/json")
    headers = {} if is_json else {"X-Bad-Rows": str(worked_out.refused)}
    if len(worked_out.parts) <= _FEW_PARTS:
        whole = b"".join(worked_out.parts)
        return Response(whole, headers=headers, media_type=worked_out.media_type)
    return PartsAnswer(worked_out.parts, media_type=worked_out.media_type, headers=headers)
