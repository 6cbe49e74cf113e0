"""Targets as they were sent with a survey, however: as rows of a body, or as a table of doubles.

Left out: what another process has read (bulk/survey_targets.py), and what a piece holds
(reach_pieces.py).
"""

from collections.abc import Iterable, Sequence
from functools import partial
from typing import Any

from kinematics.table import FloatArray
from service.convert import Units
from service.errors import UnusableValue
from service.storage.ports import GivenPiece
from service.surveys.kinds import cut
from service.surveys.reach_pieces import given_rows, table_pieces
from service.wire.reach_gathered import FIELD, refuse_same_names
from service.wire.reach_table import table_rows

MOST_TARGETS = 1_000_000


class Rows:
    """Targets as a body has them."""

    def __init__(self, rows: Sequence[Any]) -> None:
        self._rows, self.count = rows, len(rows)

    def first(self, most: int) -> Sequence[Any]:
        """See ``kinds.SentTargets.first``."""
        return self._rows[:most]

    def pieces(self, size: int, units: Units) -> Iterable[GivenPiece]:
        """See ``kinds.SentTargets.pieces``."""
        return cut(self._rows, size, partial(given_rows, units=units))


class TableOfDoubles:
    """Targets as rows ``x y z``, or ``x y z w x y z`` with a quaternion."""

    def __init__(self, table: FloatArray) -> None:
        self._table, self.count = table, len(table)

    def first(self, most: int) -> Sequence[Any]:
        """See ``kinds.SentTargets.first``.

        Raises
        ------
        UnusableValue : the table has another number of columns.
        """
        return table_rows(self._table[:most])

    def pieces(self, size: int, units: Units) -> Iterable[GivenPiece]:
        """See ``kinds.SentTargets.pieces``."""
        return table_pieces(self._table, size)


def listed_targets(given: object) -> list[Any]:
    """Return the targets of a request as a list.

    Raises
    ------
    UnusableValue : they are none, or a name stands twice.
    """
    if not isinstance(given, list):
        raise UnusableValue(
            "targets must be a list" if given is not None else "there are no targets",
            where=(FIELD,),
            value=given,
            way_out='give a list: [{"name": "part-1", "position": [...]}]',
        )
    names = [row.get("name") if isinstance(row, dict) else None for row in given]
    refuse_same_names(
        [name if isinstance(name, str) else None for name in names],
        lambda place: (FIELD, place, "name"),
    )
    return given
