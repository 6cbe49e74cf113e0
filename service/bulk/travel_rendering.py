"""Answers about many travels as bytes, piece by piece: items of JSON, or lines of CSV.

Left out: which thread makes a piece, and sending them.
"""

from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import ClassVar

from service.bulk.reach_rendering import REFUSED, Piece, nested
from service.bulk.rendering import Stamp, WorkedOut
from service.operations.travels import ManyTravels
from service.wire import csv_text
from service.wire.answers import json_bytes
from service.wire.formats import JSON, Format
from service.wire.reach_lines import SameInAll
from service.wire.travel_lines import travel_head, travel_lines
from service.wire.travel_reading import FIELD


@dataclass(frozen=True)
class TravelRendering:
    """An answer in one format, made a piece at a time."""

    many: ManyTravels
    stamp: Stamp

    media_type: ClassVar[str]

    def piece(self, begin: int, end: int) -> Piece:
        """Return the part of travels ``begin`` ... ``end``."""
        items = self.many.items(begin, end)
        verdicts = Counter(str(item["verdict"] or REFUSED) for item in items)
        return Piece(self._content(items), verdicts)

    def answer(self, pieces: Sequence[Piece]) -> WorkedOut:
        """Return the whole answer."""
        raise NotImplementedError

    def _content(self, items: Sequence[Mapping[str, object]]) -> bytes:
        raise NotImplementedError


class JsonTravels(TravelRendering):
    """The nested answer; what was found in all stands at its end."""

    media_type = JSON

    def _content(self, items: Sequence[Mapping[str, object]]) -> bytes:
        return json_bytes(items)[1:-1]

    def answer(self, pieces: Sequence[Piece]) -> WorkedOut:
        """Return head, items, and the summary."""
        return nested(self.many.head, FIELD, {FIELD: self.many.count}, pieces)


class CsvTravels(TravelRendering):
    """One line for each leg of each way."""

    media_type = csv_text.MEDIA_TYPE

    def _content(self, items: Sequence[Mapping[str, object]]) -> bytes:
        question = self.many.question
        same = SameInAll(
            *self.stamp,
            units=question.units.name,
            revision=question.meant.revision or 0,
            digest=question.meant.read.digests.digest,
        )
        return travel_lines(items, question.arm.joint_count, same)

    def answer(self, pieces: Sequence[Piece]) -> WorkedOut:
        """Return the line of keys, then all lines."""
        head = travel_head(self.many.question.arm.joint_count)
        refused = sum(piece.verdicts.get(REFUSED, 0) for piece in pieces)
        return WorkedOut(self.media_type, [head, *(piece.content for piece in pieces)], refused)


RENDERINGS: dict[Format, type[TravelRendering]] = {"json": JsonTravels, "csv": CsvTravels}
