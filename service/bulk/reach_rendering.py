"""Answers about many targets as bytes, piece by piece: items of JSON, or lines of CSV.

Left out: which thread makes a piece, and sending them.
"""

from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import ClassVar, NamedTuple

from kinematics.reach.targets import VERDICTS
from service.bulk.rendering import Stamp, WorkedOut
from service.operations.reach import ManyTargets
from service.operations.reach_columns import columns_of
from service.wire import csv_text
from service.wire.answers import json_bytes
from service.wire.formats import JSON, Format
from service.wire.reach_lines import SameInAll, reach_head, reach_lines

REFUSED = "refused"


class Piece(NamedTuple):
    """Some items' part of an answer, and how many of them there are of each verdict."""

    content: bytes
    verdicts: Mapping[str, int]


def nested(
    head: Mapping[str, object], field: str, counted: dict[str, int], pieces: Sequence[Piece]
) -> WorkedOut:
    """Return head, the items of all pieces under ``field``, and a summary of their verdicts.

    ``counted`` begins the summary: how many items there are.
    """
    found = sum((Counter(piece.verdicts) for piece in pieces), Counter[str]())
    verdicts = {verdict.replace("-", "_"): found[verdict] for verdict in (*VERDICTS, REFUSED)}
    parts = [json_bytes(head)[:-1] + f',"{field}":['.encode("ascii")]
    for place, piece in enumerate(pieces):
        parts += [b",", piece.content] if place else [piece.content]
    parts.append(b'],"summary":' + json_bytes(counted | verdicts) + b"}")
    return WorkedOut(JSON, parts, found[REFUSED])


@dataclass(frozen=True)
class ReachRendering:
    """An answer in one format, made a piece at a time."""

    many: ManyTargets
    stamp: Stamp

    media_type: ClassVar[str]

    @property
    def count(self) -> int:
        """Targets in all."""
        return self.many.read.count

    def piece(self, begin: int, end: int) -> Piece:
        """Return the part of targets ``begin`` ... ``end``."""
        raise NotImplementedError

    def answer(self, pieces: Sequence[Piece]) -> WorkedOut:
        """Return the whole answer."""
        raise NotImplementedError


class JsonRendering(ReachRendering):
    """The nested answer; what was found in all stands at its end."""

    media_type = JSON

    def piece(self, begin: int, end: int) -> Piece:
        """Return the items of some targets."""
        items = self.many.items(begin, end)
        verdicts = Counter(str(item["verdict"] or REFUSED) for item in items)
        return Piece(json_bytes(items)[1:-1], verdicts)

    def answer(self, pieces: Sequence[Piece]) -> WorkedOut:
        """Return head, items, and the summary."""
        return nested(self.many.head, "results", {"targets": self.count}, pieces)


class CsvRendering(ReachRendering):
    """One line for each target, or for each solution."""

    media_type = csv_text.MEDIA_TYPE

    def piece(self, begin: int, end: int) -> Piece:
        """Return the lines of some targets."""
        many, question = self.many, self.many.question
        same = SameInAll(
            *self.stamp,
            units=question.units.name,
            revision=question.meant.revision or 0,
            digest=question.meant.read.digests.digest,
        )
        refused = sum(place in many.read.refused for place in range(begin, end))
        places = many.read.positions_out(question.units)[begin:end]
        lines = reach_lines(columns_of(many, begin, end), places, same)
        return Piece(lines, {REFUSED: refused})

    def answer(self, pieces: Sequence[Piece]) -> WorkedOut:
        """Return the line of keys, then all lines."""
        head = reach_head(self.many.question.arm.joint_count)
        refused = sum(piece.verdicts[REFUSED] for piece in pieces)
        return WorkedOut(self.media_type, [head, *(piece.content for piece in pieces)], refused)


RENDERINGS: dict[Format, type[ReachRendering]] = {"json": JsonRendering, "csv": CsvRendering}
