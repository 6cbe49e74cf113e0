"""Envelopes at a fine resolution: what ``/v1/reach/envelope`` tells, given the time it takes.

Idea: what has to be sampled is found in pieces of about a second, each a stripe of a view or a slab
of space; the last piece puts all of them together, and the others are not looked at any more. It is
kept as it was found, so that the answer and the drawing are made from it whenever they are asked
for. The envelope is that of the answer at once, to the last bit. Left out: how it comes in parts
(the core), tables (envelope_tables.py), the report (envelope_report.py).
"""

from collections.abc import Iterator, Mapping, Sequence
from functools import cache
from typing import NamedTuple, cast

import orjson

from kinematics.envelope.shapes import Envelope
from service.cautions import CAUTIONS
from service.convert import UNITS
from service.drawings.envelope_sheet import envelope_sheet
from service.drawings.envelope_words import SheetLabels
from service.errors import UnusableValue
from service.operations.arms import Arms
from service.operations.envelopes import TRAVEL, WORKING, EnvelopeQuestion, envelope_question
from service.storage.ports import Document, GivenPiece, MadePiece, Survey, SurveyStorage
from service.surveys.envelope_kept import envelope_document, envelope_from
from service.surveys.envelope_parts import (
    Named,
    Part,
    named,
    names_of,
    part_document,
    part_from,
)
from service.surveys.envelope_report import report_of
from service.surveys.envelope_tables import told_as_csv, told_as_npy
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
    formats: tuple[Format, ...] = ("json", "csv", "npy", "svg")

    def accept(
        self, arms: Arms[ReadArm], request: Document, sent: SentTargets | None = None
    ) -> Accepted:
        """See ``Kind.accept``; the last piece is the whole."""
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
        given = [*(one.given for one in Prepared(asked).names()), _WHOLE]
        pieces = [GivenPiece(number, 1, name) for number, name in enumerate(given)]
        return Accepted(pinned(request, question.meant), about, len(pieces), pieces)

    def setup(self, arms: Arms[ReadArm], survey: Survey) -> Setup:
        """See ``Kind.setup``."""
        return setup_of(arms, survey, EnvelopeRequest.model_validate(survey.request).arm)

    def prepare(self, setup: Setup) -> "Prepared":
        """See ``Kind.prepare``."""
        asked = EnvelopeRequest.model_validate(setup.request)
        return Prepared(envelope_question(cast(Arms[ReadArm], OneArm(setup)), asked))

    def make(self, prepared: "Prepared", piece: GivenPiece) -> MadePiece:
        """See ``Kind.make``."""
        if piece.given in _TRAVELS:
            return _at_once(prepared.asked, piece)
        within, name, number = named(piece.given)
        part = prepared.parts(within).piece(name, number)
        return MadePiece(piece.number, json_bytes(part_document(part)), {})

    def gather(self, prepared: "Prepared", piece: GivenPiece, made: Sequence[bytes]) -> MadePiece:
        """See ``Gathers.gather``."""
        asked = prepared.asked
        if piece.given in _TRAVELS:
            return _at_once(asked, piece)
        found: dict[Within, dict[str, list[Part]]] = {within: {} for within in asked.within}
        for one, kept in zip(prepared.names(), made, strict=True):
            found[one.within].setdefault(one.name, []).append(part_from(orjson.loads(kept)))
        whole = {within: prepared.parts(within).told(of) for within, of in found.items()}
        kept_whole = {
            "answer": asked.answer(whole),
            "found": [envelope_document(one) for one in whole.values()],
        }
        return MadePiece(piece.number, json_bytes(kept_whole), {})

    def told(self, survey: Survey, wanted: Format, store: SurveyStorage) -> Told:
        """See ``Kind.told``; all of it stands at the head, for it is in the last piece."""
        kept = _kept(survey, store)
        if wanted == "svg":
            return Told(SVG, sheet_of(survey, kept))
        if wanted in ("csv", "npy"):
            tell = told_as_csv if wanted == "csv" else told_as_npy
            return tell(kept.answer, UNITS[survey.about["units"]].length)
        answer = {"survey": survey.id, **kept.answer, "software": survey.about["software"]}
        return Told(JSON, json_bytes(answer))

    def reported(self, survey: Survey, store: SurveyStorage) -> Report:
        """See ``Kind.reported``."""
        kept = _kept(survey, store)
        # A page of HTML takes the drawing itself, without the head of a file.
        drawing = "<svg" + sheet_of(survey, kept).decode().partition("<svg")[2]
        return report_of(survey, *kept, drawing)


_WHOLE = b"whole"
"""Given to the last piece."""

_TRAVELS: Mapping[bytes, Within] = {within.encode(): within for within in (TRAVEL, WORKING)}
"""Given to the pieces of surveys that were taken in when each travel was one."""


def _at_once(asked: EnvelopeQuestion, piece: GivenPiece) -> MadePiece:
    within = _TRAVELS[piece.given]
    found = asked.found(within)
    kept = {"answer": asked.answer({within: found}), "found": envelope_document(found)}
    return MadePiece(piece.number, json_bytes(kept), {})


class Prepared:
    """An envelope that is asked for, in parts; each travel is looked at when it is first needed."""

    def __init__(self, asked: EnvelopeQuestion) -> None:
        self.asked = asked
        self.parts = cache(asked.in_parts)

    def names(self) -> Iterator[Named]:
        """Yield the pieces of all that is asked, in their order."""
        for within in self.asked.within:
            yield from names_of(within, self.parts(within))


class Kept(NamedTuple):
    """What a survey found: the answer, and the envelopes that it tells of."""

    answer: Document
    envelopes: Sequence[Envelope]


def sheet_of(survey: Survey, kept: Kept) -> bytes:
    """Return the drawing, working travel in that of travel."""
    return envelope_sheet(kept.envelopes, _labels(survey), UNITS[survey.about["units"]])


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


def _kept(survey: Survey, store: SurveyStorage) -> Kept:
    last = orjson.loads(store.made(survey.id, survey.total - 1))
    if isinstance(last["found"], list):
        return Kept(last["answer"], [envelope_from(one) for one in last["found"]])
    # What was kept before has a piece for each travel, which is null in the other's answer.
    pieces = [orjson.loads(store.made(survey.id, number)) for number in range(survey.total)]
    answer: Document = {}
    for one in pieces:
        for key, value in one["answer"].items():
            if value is not None or key not in answer:
                answer[key] = value
    return Kept(answer, [envelope_from(one["found"]) for one in pieces])
