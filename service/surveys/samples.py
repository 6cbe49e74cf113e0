"""Many samples of reach: what ``/v1/reach/samples`` tells, up to ten million, kept.

Idea: a sample is known by its number, so a piece is a stretch of numbers, and its bits do not
depend on which stretch. What is told of the samples is kept as it stands in an NPY file; before it
stands how far the samples of the piece get. Left out: telling it (sample_results.py).
"""

from collections.abc import Iterable
from typing import cast

from service.errors import UnusableValue
from service.operations.arms import Arms
from service.operations.samples import ManySamples, samples_asked
from service.storage.ports import Document, GivenPiece, MadePiece, Survey, SurveyStorage
from service.surveys.kinds import Accepted, Report, SentTargets, Told
from service.surveys.pinned import OneArm, Setup, pinned, setup_of
from service.surveys.sample_extremes import extremes_bytes
from service.surveys.sample_report import report_of
from service.surveys.sample_results import JUDGED, NEAR, SINGULAR, told_results
from service.wire import npy
from service.wire.arms import ReadArm
from service.wire.formats import FORMATS, Format
from service.wire.samples import SamplesRequest

MOST_SURVEYED = 10_000_000
"""Samples of one survey: positions alone are 24 bytes each, with all else some 100."""

_PIECE = 16384
"""Samples: some 10 ms of work, the first ones, which are judged, some 100."""

_TABLE: Format = "npy"
"""What is kept is what an NPY answer holds."""


class Samples:
    """Postures spread over all that travel allows, and where they bring the tool."""

    name = "samples"
    formats = FORMATS

    def accept(
        self, arms: Arms[ReadArm], request: Document, sent: SentTargets | None = None
    ) -> Accepted:
        """See ``Kind.accept``."""
        if sent is not None:
            raise UnusableValue(
                "samples are not asked for by a table", way_out='send JSON: {"kind": "samples"}'
            )
        many = _many(arms, request)
        prepared = many.question.prepared
        assert prepared is not None  # an arm without joints has no samples
        about = {
            **many.head,
            "joints": many.question.arm.joint_count,
            "columns": many.columns,
            "task": prepared[0].task,
        }
        kept = pinned(request, many.question.meant)
        return Accepted(kept, about, many.count, stretches(many.count, _PIECE))

    def setup(self, arms: Arms[ReadArm], survey: Survey) -> Setup:
        """See ``Kind.setup``."""
        return setup_of(arms, survey, SamplesRequest.model_validate(survey.request).arm)

    def prepare(self, setup: Setup) -> ManySamples:
        """See ``Kind.prepare``."""
        return _many(cast(Arms[ReadArm], OneArm(setup)), setup.request)

    def make(self, prepared: ManySamples, piece: GivenPiece) -> MadePiece:
        """See ``Kind.make``."""
        begin = int(piece.given)
        end = begin + piece.size
        found = prepared.summary_piece(begin, end)
        numbers = npy.npy_bytes(prepared.numbers(begin, end))
        counts = {JUDGED: found.judged, NEAR: found.near, SINGULAR: found.singular}
        return MadePiece(piece.number, extremes_bytes(prepared, found) + numbers, counts)

    def told(self, survey: Survey, wanted: Format, store: SurveyStorage) -> Told:
        """See ``Kind.told``."""
        return told_results(survey, wanted, store)

    def reported(self, survey: Survey, store: SurveyStorage) -> Report:
        """See ``Kind.reported``."""
        return report_of(survey, store)


def stretches(count: int, size: int) -> Iterable[GivenPiece]:
    """Yield pieces of ``size`` numbers from 0 to ``count``; each is given its first.

    Examples
    --------
    >>> [tuple(piece) for piece in stretches(5, 3)]
    [(0, 3, b'0'), (1, 2, b'3')]
    """
    for number, begin in enumerate(range(0, count, size)):
        yield GivenPiece(number, min(size, count - begin), b"%d" % begin)


def _many(arms: Arms[ReadArm], request: Document) -> ManySamples:
    asked = SamplesRequest.model_validate(request)
    if not 1 <= asked.count <= MOST_SURVEYED:
        raise UnusableValue(
            f"{asked.count} samples in one survey",
            where=("count",),
            value=asked.count,
            way_out=f"ask for 1 to {MOST_SURVEYED}",
        )
    if not (asked.positions or asked.orientations or asked.joints):
        raise UnusableValue(
            "samples of nothing: positions, orientations and joints are all false",
            where=("positions",),
            value=False,
            way_out="let one of them be true; the result has the summary as well",
        )
    return samples_asked(arms, asked, _TABLE, MOST_SURVEYED)
