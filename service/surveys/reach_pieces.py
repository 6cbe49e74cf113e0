"""Targets of a survey as its pieces hold them: JSON as it came, or rows of a table of doubles.

Left out: what is done with them (reach_checks.py, reach_report.py).
"""

import json
import zlib
from collections.abc import Iterable, Sequence
from typing import Any

import orjson

from kinematics.table import FloatArray
from service.errors import UnusableValue
from service.storage.ports import GivenPiece
from service.wire.npy import npy_bytes, npy_head, read_npy

LEVEL = 1
"""Of compression: targets repeat themselves, and more effort would take longer than the work."""

PLACES, POSES = 3, 7
_TABLE = npy_head((1, 1))[:6]


def given_rows(rows: Sequence[Any]) -> bytes:
    """Return some targets as a piece holds them.

    Examples
    --------
    >>> rows_of(given_rows([{"position": [1, 2.5, 3]}]))
    [{'position': [1, 2.5, 3]}]
    """
    try:
        text = orjson.dumps(rows)
    except TypeError:
        text = json.dumps(rows).encode()  # an integer beyond 64 bits: to be refused as it came
    return zlib.compress(text, LEVEL)


def table_pieces(table: FloatArray, size: int) -> Iterable[GivenPiece]:
    """Yield pieces of ``size`` rows of a table (targets, 3 or 7)."""
    for number, begin in enumerate(range(0, len(table), size)):
        part = table[begin : begin + size]
        yield GivenPiece(number, len(part), npy_head(part.shape) + npy_bytes(part))


def rows_of(given: bytes) -> list[Any]:
    """Return the targets of a piece as a body has them."""
    if given.startswith(_TABLE):
        return table_rows(read_npy(given))
    rows: list[Any] = orjson.loads(zlib.decompress(given))
    return rows


def table_rows(table: FloatArray) -> list[dict[str, Any]]:
    """Return rows ``x y z``, or ``x y z w x y z`` with a quaternion, as a body has targets.

    Raises
    ------
    UnusableValue : the table has another number of columns.

    Examples
    --------
    >>> import numpy as np
    >>> table_rows(np.array([[1.0, 2.0, 3.0]]))
    [{'position': [1.0, 2.0, 3.0]}]
    """
    if table.shape[1] == PLACES:
        return [{"position": row} for row in table.tolist()]
    if table.shape[1] == POSES:
        form = "quaternion-wxyz"
        return [
            {"pose": {"position": row[:3], "orientation": {"form": form, "values": row[3:]}}}
            for row in table.tolist()
        ]
    raise UnusableValue(
        f"a table of {table.shape[1]} columns is none of targets",
        value=table.shape[1],
        way_out="send x, y, z, or x, y, z and the quaternion w, x, y, z",
    )
