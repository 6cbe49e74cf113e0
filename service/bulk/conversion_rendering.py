"""Answers about many orientations as bytes, piece by piece, in each of the three formats.

Left out: which thread or process makes a piece, and sending them.
"""

from dataclasses import dataclass

from kinematics.findings import FINE
from kinematics.orientation_forms import shape_of
from service.bulk.rendering import InPieces, Piece, Stamp
from service.operations.conversions import Conversions
from service.wire import conversion_lines, csv_text, npy
from service.wire.answers import json_bytes
from service.wire.csv_rows import NAME
from service.wire.formats import JSON, Format
from service.wire.rotation_query import VALUE_PARAMETERS, width_of

# So many orientations that a piece takes some milliseconds, and stays in the processor's cache.
_BARE, _LINES, _ITEMS = 8192, 2048, 4096


@dataclass(frozen=True)
class ConversionRendering(InPieces):
    """An answer about orientations."""

    conversions: Conversions
    stamp: Stamp

    @property
    def count(self) -> int:
        """Orientations in all."""
        return self.conversions.count


class NpyRendering(ConversionRendering):
    """Bare doubles; a refused orientation is all NaN."""

    media_type = npy.MEDIA_TYPE

    @property
    def head(self) -> bytes:
        """The header of the file."""
        return npy.npy_head((self.count, width_of(self.conversions.to)))

    @property
    def size(self) -> int:
        """Orientations in a piece."""
        return _BARE

    def piece(self, begin: int, end: int) -> Piece:
        """Return the doubles of some orientations."""
        found = self.conversions.piece(begin, end)
        return Piece(npy.npy_bytes(found.values), found.refused)


class CsvRendering(ConversionRendering):
    """One line for each orientation."""

    media_type = csv_text.MEDIA_TYPE

    @property
    def head(self) -> bytes:
        """The line of keys."""
        numbers = VALUE_PARAMETERS[: width_of(self.conversions.to)]
        has_name = self.conversions.names is not None
        return conversion_lines.csv_head(numbers, has_name=has_name)

    @property
    def size(self) -> int:
        """Orientations in a piece."""
        return _LINES

    def piece(self, begin: int, end: int) -> Piece:
        """Return the lines of some orientations."""
        found, names = self.conversions.piece(begin, end), self.conversions.names
        lines = conversion_lines.csv_lines(
            found.values,
            self.conversions.codes(begin, found),
            found.applying,
            (self.stamp.seq, self.stamp.tag, self.stamp.t_ms),
            (self.conversions.to, self.conversions.units.name),
            None if names is None else names[begin:end],
        )
        return Piece(lines, found.refused)


class JsonRendering(ConversionRendering):
    """The nested answer."""

    media_type = JSON
    joint = b","
    tail = b"]}"

    @property
    def head(self) -> bytes:
        """The head of the object, up to where the list of items begins."""
        asked = self.conversions
        head = json_bytes({"units": asked.units.name, "from": asked.form, "to": asked.to})
        return head[:-1] + b',"orientations":['

    @property
    def size(self) -> int:
        """Orientations in a piece."""
        return _ITEMS

    def piece(self, begin: int, end: int) -> Piece:
        """Return the items of some orientations."""
        asked = self.conversions
        found = asked.piece(begin, end)
        more = asked.more(begin, found)
        names = asked.names
        if names is not None:
            more = {
                place: more.get(place, {"code": FINE, "findings": []}) | {NAME: name}
                for place, name in enumerate(names[begin:end])
            }
        values = found.values.reshape(-1, *shape_of(asked.to))
        # Each item says itself whether it is refused.
        return Piece(conversion_lines.item_bytes(values, more), 0)


RENDERINGS: dict[Format, type[ConversionRendering]] = {
    "json": JsonRendering,
    "npy": NpyRendering,
    "csv": CsvRendering,
}
