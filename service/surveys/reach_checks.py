"""Large reach checks: the question of ``/v1/reach/checks`` with up to a million targets.

Idea: targets are kept as they came, some hundred in a piece, and read where they are worked on;
what is kept of them are the columns that the CSV answer tells. Up to 10 000 are read before the
survey is accepted, so that mistakes are refused at once; of more, the others are refused one by
one in the result. Left out: how results are told (reach_results.py).
"""

from typing import NamedTuple, cast

from service.errors import TooLarge, UnusableValue
from service.operations.arms import Arms
from service.operations.questions import Question
from service.operations.reach import ManyTargets, Wanted, reach_question, wanted_solutions
from service.operations.reach_columns import columns_of
from service.storage.ports import Document, GivenPiece, MadePiece, Survey, SurveyStorage
from service.surveys.kinds import Accepted, Report, SentTargets, Told, piece_size
from service.surveys.pinned import OneArm, Setup, pinned, setup_of
from service.surveys.reach_kept import columns_bytes, counts_of
from service.surveys.reach_reading import read_piece
from service.surveys.reach_report import report_of
from service.surveys.reach_results import told_results
from service.surveys.targets_sent import MOST_TARGETS, Rows, listed_targets
from service.wire.arms import ReadArm
from service.wire.formats import FORMATS, Format
from service.wire.reach_gathered import FIELD
from service.wire.reach_request import MOST_TARGETS as READ_AT_ONCE
from service.wire.reach_request import ReachRequest
from service.wire.reach_targets import read_targets


class Prepared(NamedTuple):
    """What targets are answered with."""

    question: Question
    wanted: Wanted


class ReachChecks:
    """Whether, and how, an arm gets to each of many targets."""

    name = "reach-checks"
    formats = FORMATS

    def accept(
        self, arms: Arms[ReadArm], request: Document, sent: SentTargets | None = None
    ) -> Accepted:
        """See ``Kind.accept``."""
        sent = sent or Rows(listed_targets(request.get(FIELD)))
        first = sent.first(READ_AT_ONCE)
        request = {**request, FIELD: []}
        _refuse_count(sent.count)
        asked = ReachRequest.model_validate(request)
        prepared = _prepared(arms, asked)
        question = prepared.question
        many = ManyTargets(question, read_targets(first, question.units), prepared.wanted)
        about = {**many.head, "solutions": asked.solutions, "joints": question.arm.joint_count}
        each = many.seconds / max(len(many.targets), 1)
        without = {key: value for key, value in request.items() if key != FIELD}
        kept = pinned(without, question.meant)
        pieces = sent.pieces(piece_size(each), question.units)
        return Accepted(kept, about, sent.count, pieces)

    def setup(self, arms: Arms[ReadArm], survey: Survey) -> Setup:
        """See ``Kind.setup``."""
        asked = ReachRequest.model_validate({**survey.request, FIELD: []})
        return setup_of(arms, survey, asked.arm)

    def prepare(self, setup: Setup) -> Prepared:
        """See ``Kind.prepare``."""
        asked = ReachRequest.model_validate({**setup.request, FIELD: []})
        return _prepared(cast(Arms[ReadArm], OneArm(setup)), asked)

    def make(self, prepared: Prepared, piece: GivenPiece) -> MadePiece:
        """See ``Kind.make``."""
        question = prepared.question
        read = read_piece(piece.given, question.units)
        many = ManyTargets(question, read, prepared.wanted)
        columns = columns_of(many, 0, read.count, whole_reasons=True)
        return MadePiece(piece.number, columns_bytes(columns), counts_of(columns))

    def told(self, survey: Survey, wanted: Format, store: SurveyStorage) -> Told:
        """See ``Kind.told``."""
        return told_results(survey, wanted, store)

    def reported(self, survey: Survey, store: SurveyStorage) -> Report:
        """See ``Kind.reported``."""
        return report_of(survey, store)


def _prepared(arms: Arms[ReadArm], asked: ReachRequest) -> Prepared:
    question = reach_question(arms, asked)
    return Prepared(question, wanted_solutions(question, asked.solutions, asked.order, asked.near))


def _refuse_count(count: int) -> None:
    if not count:
        raise UnusableValue("there are no targets", where=(FIELD,), value=0, way_out="give one")
    if count > MOST_TARGETS:
        raise TooLarge(
            f"more than {MOST_TARGETS} targets in one survey",
            where=(FIELD,),
            value=count,
            way_out="ask in several surveys",
            status=422,
        )
