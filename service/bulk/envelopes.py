"""From a request for an envelope to its answer: which format, and who works on it.

Left out: the address (routes/reach_regions.py), what the numbers are (operations), the drawing
(drawings).
"""

from collections.abc import Mapping
from functools import partial
from threading import Event

from starlette.requests import ClientDisconnect, Request
from starlette.responses import Response

from kinematics.envelope.shapes import Envelope
from service.bulk.answering import Bulk
from service.bulk.leaving import unless_left
from service.cautions import CAUTIONS
from service.drawings.envelope_sheet import envelope_sheet
from service.drawings.envelope_words import SheetLabels
from service.operations.envelopes import AT_ONCE, EnvelopeQuestion, envelope_question
from service.wire.answers import json_answer
from service.wire.body import read_json
from service.wire.envelopes import EnvelopeRequest, Within
from service.wire.formats import SVG, Format, answer_format, beside_body

_PARAMETERS = frozenset({"format"})
FORMATS: tuple[Format, ...] = ("json", "svg")
_MOST_WAITING = 8
"""Envelopes, in hand and waiting, before the next is asked to come again: some ten seconds of them
as usual, a minute of the finest."""


async def answer_envelope(request: Request) -> Response:
    """Answer a request for an envelope, as JSON or as a drawing.

    Raises
    ------
    ServiceError, KinematicsError, pydantic.ValidationError : the request is refused.
    """
    parameters = beside_body(request, _PARAMETERS, _PARAMETERS)
    wanted = answer_format(parameters, request.headers.get("accept", ""), "json", FORMATS)
    body = await read_json(request)
    bulk: Bulk = request.app.state.bulk
    arms = request.app.state.arms

    def begun() -> EnvelopeQuestion:
        return envelope_question(arms, EnvelopeRequest.model_validate(body), AT_ONCE)

    asked = await bulk.threads.run(begun)
    found = {within: await _found(request, asked, within) for within in asked.within}
    if wanted == "svg":
        return Response(await bulk.threads.run(partial(drawn, asked, found)), media_type=SVG)
    return json_answer(await bulk.threads.run(partial(asked.answer, found)))


async def _found(request: Request, asked: EnvelopeQuestion, within: Within) -> Envelope:
    """Return an envelope that was worked out lately, or work it out unless the client leaves."""
    bulk: Bulk = request.app.state.bulk
    words = asked.words(within)
    over = Event()

    def between() -> None:
        bulk.estimates.refuse_if_stopping()
        if over.is_set():
            raise ClientDisconnect

    def once() -> Envelope:
        # Who asked the same a little earlier has had it worked out meanwhile.
        found = bulk.envelopes.get(words)
        return found or bulk.envelopes.keep(words, asked.found(within, between))

    kept = bulk.envelopes.get(words)
    if kept is not None:
        return kept
    try:
        # Apart from all that is done in pieces, which would wait behind it for seconds.
        return await unless_left(request, bulk.estimates.run(once, most=_MOST_WAITING))
    finally:
        over.set()


def drawn(asked: EnvelopeQuestion, found: Mapping[Within, Envelope]) -> bytes:
    """Return the drawing, working travel in that of travel."""
    return envelope_sheet([*found.values()], labels_of(asked), asked.question.units)


def labels_of(asked: EnvelopeQuestion) -> SheetLabels:
    """Return what stands in the title block."""
    question = asked.question
    read, shown = question.meant.read, question.tool.shown
    return SheetLabels(
        arm=question.arm.name,
        title=str(read.document.get("title") or ""),
        revision="-" if question.meant.revision is None else str(question.meant.revision),
        digest=read.digests.digest,
        tool=shown if isinstance(shown, str) else "given in the question",
        convention=question.arm.table.convention.value,
        cautions=CAUTIONS[:2],
    )
