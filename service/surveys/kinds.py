"""What a kind of survey is: one class that accepts a request, makes its pieces, tells the result.

A survey is cut into pieces when it is accepted, once and for all: each is worked on alone, so that
its bits depend on nothing but itself, in whatever order, process or company it is made; but for the
last one of a kind that gathers (``Gathers``), which is put together of all others. Left out:
who makes pieces (runner.py) and keeps them (storage).
"""

from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any, NamedTuple, Protocol, runtime_checkable

from service.convert import Units
from service.operations.arms import Arms
from service.storage.ports import Document, GivenPiece, MadePiece, Survey, SurveyStorage
from service.wire.arms import ReadArm
from service.wire.formats import Format

PIECE_S = 0.1
"""Of estimated work in a piece: what a killed worker loses, and a cancelled survey still does."""

LARGEST_PIECE = 2048
"""Of what should be quick: a target at a singular posture takes a hundred times as long."""


class Accepted(NamedTuple):
    """A request that has been found good.

    Attributes
    ----------
    request : as it is kept, its arm pinned to a revision, without what the pieces hold.
    about : what the result is of: stands at its head.
    total : what ``done`` counts up to; the sum of the sizes of the pieces.
    """

    request: Document
    about: Document
    total: int
    pieces: Iterable[GivenPiece]


@dataclass(frozen=True)
class Told:
    """A result in one format: what stands before, between and behind its parts, one for a piece.

    Without ``part`` all of it stands at the head.
    """

    media_type: str
    head: bytes
    part: Callable[[int, bytes], bytes] | None = None
    tail: bytes = b""
    headers: Mapping[str, str] = field(default_factory=dict)


@dataclass(frozen=True)
class Point:
    """Where a target is, in the user's units, and what became of it."""

    position: tuple[float, float, float]
    verdict: str


class ReportTable(NamedTuple):
    """A table on paper; a whole number in it stands to the right."""

    title: str
    head: Sequence[str]
    lines: Sequence[Sequence[object]]
    said: str = ""


@dataclass(frozen=True)
class Report:
    """What is put on paper of a result, in words and numbers of the user's units.

    Attributes
    ----------
    asked : what was asked beside arm, tool and frame: name and value.
    tables : in their order.
    points : drawn in two views; none for a kind that has none.
    drawings : whole drawings, as SVG, each with the words below it.
    said : what is to be known of all, such as that not all is drawn.
    """

    asked: Sequence[tuple[str, object]]
    tables: Sequence[ReportTable]
    points: Sequence[Point] = ()
    drawings: Sequence[tuple[str, str]] = ()
    said: str = ""


class SentTargets(Protocol):
    """Targets that are there, wherever that is."""

    @property
    def count(self) -> int:
        """How many there are."""

    def first(self, most: int) -> Sequence[Any]:
        """Return the first of them as a body has them."""

    def pieces(self, size: int, units: Units) -> Iterable[GivenPiece]:
        """Return all of them, cut into pieces."""


class Kind(Protocol):
    """One kind of survey; plug another in by adding it to ``registry.py``."""

    name: str
    formats: tuple[Format, ...]

    def accept(
        self, arms: Arms[ReadArm], request: Document, sent: SentTargets | None = None
    ) -> Accepted:
        """Check a request and cut it into pieces; ``where`` of refusals is below ``request``.

        Parameters
        ----------
        sent : targets that came beside the request, for a kind that takes some.
        """

    def setup(self, arms: Arms[ReadArm], survey: Survey) -> Any:
        """Return what every piece needs, to be sent to the process that makes it.

        Raises
        ------
        ServiceError : the arm is not what it was when the survey was accepted.
        """

    def prepare(self, setup: Any) -> Any:
        """Return what pieces are made with; called once in each process."""

    def make(self, prepared: Any, piece: GivenPiece) -> MadePiece:
        """Make one piece."""

    def told(self, survey: Survey, wanted: Format, store: SurveyStorage) -> Told:
        """Return how the result of a survey that succeeded is told."""

    def reported(self, survey: Survey, store: SurveyStorage) -> Report:
        """Return what is put on paper of it."""


@runtime_checkable
class Gathers(Protocol):
    """A kind whose last piece is put together of all others, when they are there."""

    def gather(self, prepared: Any, piece: GivenPiece, made: Sequence[bytes]) -> MadePiece:
        """Make the last piece.

        Parameters
        ----------
        made : what became of the others, by number.
        """


def piece_size(seconds_each: float) -> int:
    """Return how many of what takes so long go into a piece.

    Examples
    --------
    >>> piece_size(1e-6), piece_size(0.01), piece_size(7.0)
    (2048, 10, 1)
    """
    return int(min(max(PIECE_S / max(seconds_each, 1e-9), 1), LARGEST_PIECE))


def cut(
    rows: Sequence[Any], size: int, given: Callable[[Sequence[Any]], bytes]
) -> Iterable[GivenPiece]:
    """Yield pieces of ``size`` rows.

    Examples
    --------
    >>> [tuple(piece) for piece in cut([b"a", b"b", b"c"], 2, b"".join)]
    [(0, 2, b'ab'), (1, 1, b'c')]
    """
    for number, begin in enumerate(range(0, len(rows), size)):
        part = rows[begin : begin + size]
        yield GivenPiece(number, len(part), given(part))
