"""Targets of a survey as its pieces hold them: as arrays where all are said alike, or a table of
doubles, else JSON as it came.

Idea: a piece is read where it is worked on, and what is an array there already takes a tenth of
the time that text takes. Left out: what is done with targets (reach_checks.py, reach_report.py).
"""

import json
from collections.abc import Iterable, Sequence
from typing import Any

import numpy as np
import orjson

from kinematics.orientation_forms import shape_of
from kinematics.table import FloatArray
from service.convert import Units
from service.storage.ports import GivenPiece
from service.wire.npy import npy_bytes, npy_head, read_npy
from service.wire.plain_relations import WHOLE
from service.wire.reach_alike import PLACE, AlikeTargets, alike_targets, read_alike
from service.wire.reach_gathered import ReadTargets
from service.wire.reach_table import table_rows, table_targets

_TABLE = npy_head((1, 1))[:6]
_ALIKE = b"\0targets"
"""Begins a piece of arrays; no JSON does."""

_WORD = 8
"""Bytes that say how long the JSON before the arrays is, which is filled up to a multiple."""

_SHAPES = {PLACE: (0,), WHOLE: (4, 4)}
"""Of the values of one target, where they are no orientation."""


def given_rows(rows: Sequence[Any], units: Units) -> bytes:
    """Return some targets as a piece holds them.

    Examples
    --------
    >>> from service.convert import UNITS
    >>> rows_of(given_rows([{"position": [1, 2.5, 3], "freedom": "orientation"}], UNITS["mm-deg"]))
    [{'position': [1, 2.5, 3], 'freedom': 'orientation'}]
    """
    alike = alike_targets(rows)
    # What is to be mended, or refused, is told as it came.
    if alike is not None and read_alike(alike, units) is not None:
        return given_alike(alike)
    return rows_as_json(rows)


def rows_as_json(rows: Sequence[Any]) -> bytes:
    """Return some targets as JSON, whatever numbers they hold.

    Examples
    --------
    >>> rows_of(rows_as_json([{"position": [10**20, 0, 1]}]))
    [{'position': [1e+20, 0, 1]}]
    """
    try:
        return orjson.dumps(rows)
    except TypeError:
        return json.dumps(rows).encode()  # an integer beyond 64 bits: to be refused as it came


def given_alike(alike: AlikeTargets) -> bytes:
    """Return targets that are said alike as a piece holds them.

    Examples
    --------
    >>> alike = AlikeTargets(PLACE, np.empty((1, 0)), np.array([[1.0, 2.5, 3.0]]), ["lug-1"])
    >>> rows_of(given_alike(alike))
    [{'name': 'lug-1', 'position': [1.0, 2.5, 3.0]}]
    """
    told = orjson.dumps({"form": alike.form, "count": len(alike.values), "names": alike.names})
    told += b" " * (-len(told) % _WORD)
    parts: list[bytes | memoryview] = [
        _ALIKE,
        len(told).to_bytes(_WORD, "little"),
        told,
        npy_bytes(alike.values),
    ]
    if alike.positions is not None:
        parts.append(npy_bytes(alike.positions))
    return b"".join(parts)


def table_pieces(table: FloatArray, size: int) -> Iterable[GivenPiece]:
    """Yield pieces of ``size`` rows of a table (targets, 3 or 7)."""
    for number, begin in enumerate(range(0, len(table), size)):
        part = table[begin : begin + size]
        yield GivenPiece(number, len(part), npy_head(part.shape) + npy_bytes(part))


def quickly_read(given: bytes, units: Units) -> ReadTargets | None:
    """Return the targets of a piece of doubles in SI; None of JSON, and where one is odd."""
    if given.startswith(_ALIKE):
        return read_alike(_alike_of(given), units)
    return table_targets(read_npy(given), units) if given.startswith(_TABLE) else None


def rows_of(given: bytes) -> list[Any]:
    """Return the targets of a piece as a body has them."""
    if given.startswith(_ALIKE):
        return _alike_of(given).rows()
    if given.startswith(_TABLE):
        return table_rows(read_npy(given))
    try:
        rows: list[Any] = orjson.loads(given)
    except orjson.JSONDecodeError:
        rows = json.loads(given)  # an integer beyond all doubles
    return rows


def _alike_of(given: bytes) -> AlikeTargets:
    begin = len(_ALIKE) + _WORD
    end = begin + int.from_bytes(given[len(_ALIKE) : begin], "little")
    head: dict[str, Any] = orjson.loads(given[begin:end])
    form, count = head["form"], head["count"]
    of_one = _SHAPES.get(form) or shape_of(form)
    numbers = np.frombuffer(given, "<f8", offset=end)
    split = count * int(np.prod(of_one))
    values = numbers[:split].reshape(count, *of_one)
    positions = None if form == WHOLE else numbers[split:].reshape(count, 3)
    return AlikeTargets(form, values, positions, head["names"])
