"""Targets of a survey as its pieces hold them: JSON as it came, or rows of a table of doubles.

Left out: what is done with them (reach_checks.py, reach_report.py).
"""

import json
from collections.abc import Iterable, Sequence
from typing import Any

import orjson

from kinematics.table import FloatArray
from service.storage.ports import GivenPiece
from service.wire.npy import npy_bytes, npy_head, read_npy
from service.wire.reach_table import table_rows

_TABLE = npy_head((1, 1))[:6]


def given_rows(rows: Sequence[Any]) -> bytes:
    """Return some targets as a piece holds them.

    Examples
    --------
    >>> rows_of(given_rows([{"position": [1, 2.5, 3]}]))
    [{'position': [1, 2.5, 3]}]
    """
    try:
        return orjson.dumps(rows)
    except TypeError:
        return json.dumps(rows).encode()  # an integer beyond 64 bits: to be refused as it came


def table_pieces(table: FloatArray, size: int) -> Iterable[GivenPiece]:
    """Yield pieces of ``size`` rows of a table (targets, 3 or 7)."""
    for number, begin in enumerate(range(0, len(table), size)):
        part = table[begin : begin + size]
        yield GivenPiece(number, len(part), npy_head(part.shape) + npy_bytes(part))


def table_of(given: bytes) -> FloatArray | None:
    """Return the table of a piece; None where it holds targets as a body has them."""
    return read_npy(given) if given.startswith(_TABLE) else None


def rows_of(given: bytes) -> list[Any]:
    """Return the targets of a piece as a body has them."""
    table = table_of(given)
    if table is not None:
        return table_rows(table)
    try:
        rows: list[Any] = orjson.loads(given)
    except orjson.JSONDecodeError:
        rows = json.loads(given)  # an integer beyond all doubles
    return rows
