"""What the worker process does with the targets of a survey: reads them, and cuts them into pieces.

Left out: the life of the process (process.py), and who asks (survey_targets.py).
"""

from collections.abc import Sequence
from typing import Any, NamedTuple

from service.convert import Units
from service.errors import ServiceError
from service.storage.ports import GivenPiece
from service.surveys.reach_pieces import given_rows, rows_as_json
from service.surveys.targets_sent import MOST_TARGETS, listed_targets
from service.wire.body import parse_json
from service.wire.reach_csv_rows import csv_rows
from service.wire.reach_gathered import FIELD
from service.wire.reach_request import MOST_TARGETS as READ_AT_ONCE

REQUEST = "request"


class RowsRead(NamedTuple):
    """A body without its targets (None of CSV), how many those are, and the first, as JSON."""

    document: Any
    total: int
    first: bytes


def rows_of_body(raw: bytes, form: str | None) -> tuple[RowsRead, Sequence[Any]]:
    """Return what a body holds, and its targets.

    Parameters
    ----------
    form : of the angles of CSV; None for JSON.

    Raises
    ------
    ServiceError : it cannot be read, or its targets are no list; ``where`` is in the body.
    """
    if form is not None:
        rows: Sequence[Any] = csv_rows(raw, form, MOST_TARGETS)
        return RowsRead(None, len(rows), _first(rows)), rows
    document = parse_json(raw)
    if not isinstance(document, dict) or not isinstance(document.get(REQUEST), dict):
        return RowsRead(document, 0, b"[]"), ()
    if FIELD not in document[REQUEST]:
        return RowsRead(document, 0, b"[]"), ()
    try:
        rows = listed_targets(document[REQUEST][FIELD])
    except ServiceError as error:
        error.where = (REQUEST, *error.where)
        raise
    without = {**document, REQUEST: {**document[REQUEST], FIELD: []}}
    return RowsRead(without, len(rows), _first(rows)), rows


def pieces_of(
    rows: Sequence[Any], begin: int, end: int, size: int, units: Units
) -> list[GivenPiece]:
    """Return pieces ``begin`` ... ``end`` of targets cut into such of ``size``."""
    spans = ((number, rows[number * size : (number + 1) * size]) for number in range(begin, end))
    return [GivenPiece(number, len(part), given_rows(part, units)) for number, part in spans]


def _first(rows: Sequence[Any]) -> bytes:
    return rows_as_json(rows[:READ_AT_ONCE])
