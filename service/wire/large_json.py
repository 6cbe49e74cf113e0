"""A large JSON body: its one long table as an array, without care for each number on the way.

The long array is cut out of the text and read by itself; the rest, some hundred bytes, is read as
small bodies are (body.py).
"""

import re
from collections.abc import Iterable, Iterator
from contextlib import suppress
from dataclasses import dataclass
from itertools import chain
from math import prod
from typing import Any

import numpy as np
import orjson

from kinematics.table import FloatArray
from service.errors import Unparseable
from service.wire.body import parse_json

JOINTS = "joints"
# Stands in place of the array while the rest is read: no text can hold it, no request knows it.
_MARK = b'{"\\u0000":0}'
_MARKED = {"\0": 0}
# So much that the lists of a piece stay in the processor's cache until they are an array: all at
# once takes nearly twice as long.
_PIECE_BYTES = 64 * 1024
_ROW_ENDS = {2: re.compile(rb"\]\s*,"), 3: re.compile(rb"\]\s*\]\s*,")}
_OF_MATRICES = re.compile(rb"\[\s*\[\s*\[")


@dataclass(frozen=True)
class LargeBody:
    """``document`` as parsed; where ``table`` is an array (count, ...), its field is empty."""

    document: object
    table: FloatArray | None


@dataclass(frozen=True)
class CutBody:
    """``document`` but for its table, which stands in ``raw`` from ``begin`` to ``end``."""

    document: dict[str, Any]
    raw: bytes
    begin: int
    end: int

    def table(self, deepest: int = 2) -> FloatArray | None:
        """Return the table; None if there is more in it than numbers, or rows differ."""
        return _array(self.raw, self.begin, self.end, deepest)


def parse_large_json(raw: bytes, field: str = JOINTS, deepest: int = 2) -> LargeBody:
    """Return what ``raw`` says, as ``parse_json`` does, the long table as an array if possible.

    Parameters
    ----------
    field : of the document, that holds the table.
    deepest : lists within lists that the table may be made of: 2, or 3 for matrices in rows.

    Raises
    ------
    Unparseable, DuplicateKey : as ``parse_json``.

    Examples
    --------
    >>> body = parse_large_json(b'{"arm": "x", "joints": [[1, 2], [3, 4.5]]}')
    >>> body.document, body.table.tolist()
    ({'arm': 'x', 'joints': []}, [[1.0, 2.0], [3.0, 4.5]])
    """
    cut = cut_apart(raw, field)
    table = None if cut is None else cut.table(deepest)
    if cut is None or table is None:
        return LargeBody(parse_json(raw), None)
    return LargeBody(cut.document, table)


def cut_apart(raw: bytes, field: str = JOINTS) -> CutBody | None:
    """Return ``raw`` with the rest parsed and the table not yet; None if it cannot be so cut.

    Raises
    ------
    DuplicateKey : in the rest.

    Examples
    --------
    >>> cut_apart(b'{"arm": "x", "joints": [[1, 2]]}').document
    {'arm': 'x', 'joints': []}
    """
    span = _span(raw, field)
    if span is None:
        return None
    # What is wrong with the rest is told by its place in the whole.
    with suppress(Unparseable):
        document = parse_json(raw[: span[0]] + _MARK + raw[span[1] :])
        # Elsewhere it would be in the middle of a text, or the field of something else.
        if isinstance(document, dict) and document.get(field) == _MARKED:
            return CutBody(document | {field: []}, raw, *span)
    return None


def _span(raw: bytes, field: str) -> tuple[int, int] | None:
    """Return where the array seems to stand: up to the last bracket before another field."""
    found = re.search(rb'"%b"\s*:\s*(?=\[\s*\[)' % field.encode("ascii"), raw)
    if found is None:
        return None
    begin = found.end()
    ends = [end for end in (raw.find(b'"', begin), raw.find(b"}", begin)) if end >= 0]
    end = raw.rfind(b"]", begin, min(ends, default=len(raw))) + 1
    return (begin, end) if end else None


def _array(raw: bytes, begin: int, end: int, deepest: int) -> FloatArray | None:
    """Return the numbers if there is nothing else, in rows of one length, none of them empty."""
    if any(raw.find(letter, begin, end) >= 0 for letter in (b"t", b"f", b"n")):
        return None  # true, false, null
    deep = 3 if deepest == 3 and _OF_MATRICES.match(raw, begin, end) else 2
    parts: list[FloatArray] = []
    row: tuple[int, ...] = ()
    try:
        for text in _pieces(raw, begin + 1, end - 1, _ROW_ENDS[deep]):
            part = _numbers(text, deep)
            if part is None or (parts and part.shape[1:] != row):
                return None
            row = part.shape[1:]
            parts.append(part)
    except (ValueError, TypeError):  # no JSON, or rows that hold more than numbers
        return None
    return np.concatenate(parts)


def _pieces(raw: bytes, begin: int, end: int, row_end: re.Pattern[bytes]) -> Iterator[bytes]:
    """Yield the rows some at a time, without the commas between one time and the next.

    Whatever is cut: if each piece in brackets is JSON and not empty, so is the whole, and says the
    same; if the cut was within a row, the piece is none.
    """
    while found := row_end.search(raw, begin + _PIECE_BYTES, end):
        yield raw[begin : found.end() - 1]
        begin = found.end()
    yield raw[begin:end]


def _numbers(text: bytes, deep: int) -> FloatArray | None:
    """Return the numbers of some rows, None if the rows differ in length or have none."""
    rows = orjson.loads(b"[%b]" % text)
    numbers: Iterable[float] = rows
    shape = [len(rows)]
    for level in range(1, deep):
        widths = set(map(len, rows))
        if len(widths) != 1 or widths == {0}:
            return None
        shape.append(widths.pop())
        numbers = chain.from_iterable(rows)
        if level < deep - 1:
            numbers = rows = list(numbers)
    return np.fromiter(numbers, np.float64, prod(shape)).reshape(shape)
