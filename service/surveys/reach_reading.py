"""Targets of a piece of a survey, read; those that spoil the reading of all are refused alone.

Idea: what a piece holds is read wherever it is needed, when it is made and when its result is told,
so that where targets are is kept once, as it came. Left out: how a piece holds them
(reach_pieces.py).
"""

from dataclasses import replace
from typing import Any

import numpy as np

from service.convert import Units
from service.details import Detail
from service.errors import ServiceError
from service.problems import KINDS
from service.surveys.reach_pieces import quickly_read, rows_of
from service.wire.reach_gathered import ReadTargets
from service.wire.reach_targets import read_targets


def read_piece(given: bytes, units: Units) -> ReadTargets:
    """Return the targets of a piece in SI, each used or refused.

    Examples
    --------
    >>> from service.convert import UNITS
    >>> from service.surveys.reach_pieces import rows_as_json
    >>> piece = rows_as_json([{"position": [1, 2.5, 3]}, {"position": [4, 5]}])
    >>> read_piece(piece, UNITS["mm-deg"]).places
    array([0])
    """
    read = quickly_read(given, units)
    return _read_rows(rows_of(given), units) if read is None else read


def _read_rows(rows: list[Any], units: Units) -> ReadTargets:
    """Return targets read; those that spoil the reading of all are refused alone."""
    try:
        return read_targets(rows, units)
    except ServiceError:
        parts = [_read_alone(row, units) for row in rows]
    usable = [place for place, part in enumerate(parts) if isinstance(part, ReadTargets)]
    read = [part for part in parts if isinstance(part, ReadTargets)]
    names = [row.get("name") if isinstance(row, dict) else None for row in rows]

    def joined(field: str, shape: tuple[int, ...] = (0,), dtype: Any = float) -> Any:
        return np.concatenate([np.empty(shape, dtype), *(getattr(part, field) for part in read)])

    return ReadTargets(
        names=[name if isinstance(name, str) else None for name in names],
        places=np.array(usable, dtype=np.intp),
        tool_in_frame=joined("tool_in_frame", (0, 4, 4)),
        freedom=joined("freedom", dtype=np.int64),
        cone=joined("cone"),
        position_tolerance=joined("position_tolerance"),
        angle_tolerance=joined("angle_tolerance"),
        forms=[part.forms[0] for part in read],
        repaired={at: part.repaired[0] for at, part in enumerate(read) if 0 in part.repaired},
        approaches={at: part.approaches[0] for at, part in enumerate(read) if 0 in part.approaches},
        refused={at: part for at, part in enumerate(parts) if isinstance(part, Detail)},
    )


def _read_alone(row: object, units: Units) -> ReadTargets | Detail:
    try:
        return read_targets([row], units)
    except ServiceError as error:
        worst = max(error.details(), key=lambda detail: KINDS[detail.code].number)
        return replace(worst, where=worst.where[2:])
