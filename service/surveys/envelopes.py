"""Envelopes at a fine resolution: what ``/v1/reach/envelope`` tells, given the time it takes.

Idea: a piece is the envelope within travel, or that within working travel; each is kept as it was
found, so that the answer and the drawing are made from it whenever they are asked for. Left out:
the report (envelope_report.py).
"""

from typing import cast

import orjson

from service.cautions import CAUTIONS
from service.convert import UNITS
from service.drawings.envelope_sheet import envelope_sheet
from service.drawings.envelope_words import SheetLabels
from service.errors import UnusableValue
from service.operations.arms import Arms
from service.operations.envelopes import EnvelopeQuestion, envelope_question
from service.storage.ports import Document, GivenPiece, MadePiece, Survey, SurveyStorage
from service.surveys.envelope_kept import envelope_document, envelope_from
from service.surveys.envelope_report import report_of
from service.surveys.kinds import Accepted, Report, SentTargets, Told
from service.surveys.pinned import OneArm, Setup, pinned, setup_of
from service.wire.answers import json_bytes
from service.wire.arms import ReadArm
from service.wire.envelopes import EnvelopeRequest, Within
from service.wire.formats import JSON, SVG, Format

_ON_THE_SHEET = 2
"""Cautions that have room in the title block."""


class Envelopes:
    """How far an arm reaches at all: section, plan and volume."""

    name = "envelope"
    formats: tuple[Format, ...] = ("json", "svg")

    def accept(
        self, arms: Arms[ReadArm], request: Document, sent: SentTargets | None = None
    ) -> Accepted:
        """See ``Kind.accept``."""
        if sent is not None:
            raise UnusableValue(
                "an envelope is not asked for by a table",
                way_out='send JSON: {"kind": "envelope"}',
            )
        asked = envelope_question(arms, EnvelopeRequest.model_validate(request))
        question = asked.question
        about = {
            **question.head,
            "point": asked.asked.point,
            "resolution": asked.asked.resolution,
            "within": asked.within,
            "convention": question.arm.table.convention.value,
        }
        pieces = [
            GivenPiece(number, 1, within.encode("ascii"))
            for number, within in enumerate(asked.within)
        ]
        return Accepted(pinned(request, question.meant), about, len(pieces), pieces)

    def setup(self, arms: Arms[ReadArm], survey: Survey) -> Setup:
        """See ``Kind.setup``."""
        return setup_of(arms, survey, EnvelopeRequest.model_validate(survey.request).arm)

    def prepare(self, setup: Setup) -> EnvelopeQuestion:
        """See ``Kind.prepare``."""
        asked = EnvelopeRequest.model_validate(setup.request)
        return envelope_question(cast(Arms[ReadArm], OneArm(setup)), asked)

    def make(self, prepared: EnvelopeQuestion, piece: GivenPiece) -> MadePiece:
        """See ``Kind.make``."""
        within = cast(Within, piece.given.decode("ascii"))
        found = prepared.found(within)
        kept = {"answer": prepared.answer({within: found}), "found": envelope_document(found)}
        return MadePiece(piece.number, json_bytes(kept), {})

    def told(self, survey: Survey, wanted: Format, store: SurveyStorage) -> Told:
        """See ``Kind.told``; all of it stands at the head, for the drawing shows both."""
        kept = _kept(survey, store)
        if wanted == "svg":
            return Told(SVG, sheet_of(survey, kept), _nothing)
        answer = {"survey": survey.id, **answer_of(kept), "software": survey.about["software"]}
        return Told(JSON, json_bytes(answer), _nothing)

    def reported(self, survey: Survey, store: SurveyStorage) -> Report:
        """See ``Kind.reported``."""
        kept = _kept(survey, store)
        # A page of HTML takes the drawing itself, without the head of a file.
        drawing = "<svg" + sheet_of(survey, kept).decode().partition("<svg")[2]
        return report_of(survey, answer_of(kept), drawing)


def answer_of(kept: list[Document]) -> Document:
    """Return the answer of all pieces; what a piece has not made is null in its own."""
    answer: Document = {}
    for one in kept:
        for key, value in one["answer"].items():
            if value is not None or key not in answer:
                answer[key] = value
    return answer


def sheet_of(survey: Survey, kept: list[Document]) -> bytes:
    """Return the drawing, working travel in that of travel."""
    envelopes = [envelope_from(one["found"]) for one in kept]
    return envelope_sheet(envelopes, _labels(survey), UNITS[survey.about["units"]])


def _labels(survey: Survey) -> SheetLabels:
    about = survey.about
    arm, tool = about["arm"], about["tool"]
    return SheetLabels(
        arm=arm["name"],
        title=survey.title,
        revision="-" if arm["revision"] is None else str(arm["revision"]),
        digest=arm["digest"],
        tool=tool if isinstance(tool, str) else "given in the question",
        convention=about["convention"],
        cautions=CAUTIONS[:_ON_THE_SHEET],
    )


def _kept(survey: Survey, store: SurveyStorage) -> list[Document]:
    return [orjson.loads(store.made(survey.id, number)) for number in range(survey.total)]


def _nothing(_number: int, _made: bytes) -> bytes:
    return b""
