"""Answers about many postures as bytes, piece by piece, in each of the three formats.

Left out: which thread or process makes a piece, and sending them.
"""

from abc import ABC, abstractmethod
from collections.abc import Sequence
from dataclasses import dataclass
from typing import ClassVar, NamedTuple

import numpy as np

from service.operations.many import Many
from service.wire import csv_text, npy
from service.wire.answers import json_bytes, plain_items
from service.wire.csv_rows import NAME
from service.wire.flat import POSE_KEYS, jacobian_keys
from service.wire.formats import JSON, Format

# So many vectors that a piece takes some milliseconds: a judgement in words takes 0.1 ms.
_BARE, _LINES, _ITEMS, _JUDGED_ITEMS = 4096, 2048, 4096, 64


class Stamp(NamedTuple):
    """What tells an answer from a late one, as flat answers carry it."""

    seq: int
    tag: int
    t_ms: int


class Piece(NamedTuple):
    """Some vectors' part of an answer; ``refused`` counts for the header of NPY and CSV."""

    content: bytes | memoryview
    refused: int


@dataclass(frozen=True)
class Outline:
    """An answer but for its pieces: ``head``, pieces with ``joint`` between them, ``tail``.

    Attributes
    ----------
    size : vectors in a piece.
    count : vectors in all.
    """

    media_type: str
    head: bytes
    joint: bytes
    tail: bytes
    size: int
    count: int

    def answer(self, pieces: Sequence[Piece]) -> "WorkedOut":
        """Return the answer whose pieces are there."""
        parts: list[bytes | memoryview] = [self.head]
        for place, piece in enumerate(pieces):
            parts += [self.joint, piece.content] if place and self.joint else [piece.content]
        parts.append(self.tail)
        return WorkedOut(self.media_type, parts, sum(piece.refused for piece in pieces))


class WorkedOut(NamedTuple):
    """An answer but for its sending."""

    media_type: str
    parts: Sequence[bytes | memoryview]
    refused: int


class InPieces(ABC):
    """One answer in one format, made a piece at a time."""

    media_type: ClassVar[str]
    joint: ClassVar[bytes] = b""
    tail: ClassVar[bytes] = b""

    @property
    @abstractmethod
    def head(self) -> bytes:
        """What stands before the first piece."""

    @property
    @abstractmethod
    def size(self) -> int:
        """Vectors in a piece."""

    @abstractmethod
    def piece(self, begin: int, end: int) -> Piece:
        """Return the part of vectors ``begin`` ... ``end``."""

    @property
    @abstractmethod
    def count(self) -> int:
        """Vectors in all."""

    def outline(self) -> Outline:
        """Return the answer but for its pieces."""
        return Outline(self.media_type, self.head, self.joint, self.tail, self.size, self.count)


@dataclass(frozen=True)
class Rendering(InPieces):
    """An answer about postures."""

    many: Many
    stamp: Stamp

    @property
    def count(self) -> int:
        """Vectors in all."""
        return self.many.rows.count


class NpyRendering(Rendering):
    """Bare doubles; a refused vector is all NaN."""

    media_type = npy.MEDIA_TYPE

    @property
    def head(self) -> bytes:
        """The header of the file."""
        return npy.npy_head((self.count, *self.many.shape))

    @property
    def size(self) -> int:
        """Vectors in a piece."""
        return _BARE

    def piece(self, begin: int, end: int) -> Piece:
        """Return the doubles of some vectors."""
        numbers, refused = self.many.numbers(begin, end)
        return Piece(npy.npy_bytes(numbers), refused)


class CsvRendering(Rendering):
    """One line for each vector."""

    media_type = csv_text.MEDIA_TYPE

    @property
    def head(self) -> bytes:
        """The line of keys."""
        is_pose = self.many.key == "poses"
        joints = self.many.question.arm.joint_count
        numbers = POSE_KEYS if is_pose else jacobian_keys(joints)
        has_name = self.many.names is not None
        return csv_text.csv_head(numbers, has_form=is_pose, has_name=has_name)

    @property
    def size(self) -> int:
        """Vectors in a piece."""
        return _LINES

    def piece(self, begin: int, end: int) -> Piece:
        """Return the lines of some vectors."""
        columns = self.many.columns(begin, end)
        names = self.many.names
        content = csv_text.csv_lines(
            columns, self._same(), None if names is None else names[begin:end]
        )
        return Piece(content, int(np.count_nonzero(columns.refused)))

    def _same(self) -> csv_text.SameInAll:
        question = self.many.question
        frame = question.arm.frames.get(question.frame)
        return csv_text.SameInAll(
            seq=self.stamp.seq,
            tag=self.stamp.tag,
            t_ms=self.stamp.t_ms,
            form=question.form if self.many.key == "poses" else None,
            units=question.units.name,
            tool_no=question.tool.number or 0,
            frame_no=0 if frame is None else frame.number or 0,
            revision=question.meant.revision or 0,
            digest=question.meant.read.digests.digest,
        )


class JsonRendering(Rendering):
    """The nested answer."""

    media_type = JSON
    joint = b","
    tail = b"]}"

    @property
    def head(self) -> bytes:
        """The head of the object, up to where the list of items begins."""
        head = json_bytes(self.many.question.head)
        return head[:-1] + f',"{self.many.key}":['.encode("ascii")

    @property
    def size(self) -> int:
        """Vectors in a piece."""
        return _JUDGED_ITEMS if self.many.singularity else _ITEMS

    def piece(self, begin: int, end: int) -> Piece:
        """Return the items of some vectors."""
        plain = self.many.plain(begin, end) if self.many.names is None else None
        if plain is not None:
            return Piece(plain_items(self.many.question.form, *plain), 0)
        items = self.many.items(begin, end)
        if self.many.names is not None:
            for item, name in zip(items, self.many.names[begin:end], strict=True):
                item[NAME] = name
        # Each item says itself whether it is refused.
        return Piece(json_bytes(items)[1:-1], 0)


RENDERINGS: dict[Format, type[Rendering]] = {
    "json": JsonRendering,
    "npy": NpyRendering,
    "csv": CsvRendering,
}
