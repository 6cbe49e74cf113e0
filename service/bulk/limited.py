"""Pieces of one answer, made as long as they do not take too long together.

Left out: which thread makes a piece, and what it is.
"""

from collections.abc import Callable
from time import perf_counter
from typing import Generic, TypeVar

from service.errors import TooLarge

Piece = TypeVar("Piece")

LONGEST_S = 20.0
"""Of work on one request, whatever was estimated: near singular postures whole families are
followed, which takes a hundred times as long as to find one solution."""

_MOST_OF_PIECE_S = 3.0
"""What one piece counts of that: the first may have waited until kernels were compiled."""


class Limited(Generic[Piece]):
    """Makes pieces by ``make(begin, end)`` until there is no time left.

    Parameters
    ----------
    field : of the request, that holds what is worked on; ``count`` of them.
    why : what takes long, to follow "this takes more than 20 s of work".
    """

    def __init__(self, make: Callable[[int, int], Piece], field: str, count: int, why: str) -> None:
        self._make, self._field, self._count, self._why = make, field, count, why
        self._taken_s: list[float] = []

    def piece(self, begin: int, end: int) -> Piece:
        """Return a piece.

        Raises
        ------
        TooLarge : those before have taken all the time there is.
        """
        if sum(self._taken_s) > LONGEST_S:
            raise TooLarge(
                f"this takes more than {LONGEST_S:.0f} s of work, {self._why}",
                where=(self._field,),
                value=self._count,
                way_out=f"send fewer than {max(begin, 1)} of these {self._field} at a time",
                status=422,
            )
        started = perf_counter()
        made = self._make(begin, end)
        self._taken_s.append(min(perf_counter() - started, _MOST_OF_PIECE_S))
        return made
