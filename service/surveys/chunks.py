"""Which pieces of a survey are handed out together, and which next.

How many pieces make a chunk follows from how long the last ones took; the bits of a piece do not
depend on it. Left out: who makes them, and what becomes of them (runner.py).
"""

from collections.abc import Iterator, Sequence
from itertools import islice

from service.storage.ports import GivenPiece, SurveyStorage

CHUNK_S = 2.0
"""Of work in a chunk. Shorter, and its way to the process and into the store, which low priority
cannot keep from those who ask for a pose, is taken more often than they notice; longer, and a
worker that dies loses more and progress stands still for long. The price: what runs when a survey
is cancelled is mostly not waited for, and processes take seconds to start anew."""

MOST_IN_CHUNK = 64
"""Pieces; a chunk is one write to the store, and what a worker that dies has to do again."""


class Chunks:
    """Unmade pieces of a survey, some at a time, in order; those given back come first.

    Parameters
    ----------
    gathers : whether the last piece is put together of all others.
    """

    def __init__(self, store: SurveyStorage, survey: str, *, gathers: bool) -> None:
        self._store, self._survey = store, survey
        self._count, self._handed_out = len(store.sizes(survey)), 0
        self._last = self._count - 1 if gathers else None
        self._pieces = self._stored()
        self._whole: Sequence[GivenPiece] = ()
        self._again: list[Sequence[GivenPiece]] = []
        self._length = 1

    def next(self, room: int, *, none_in_hand: bool) -> Sequence[GivenPiece]:
        """Return the next chunk; nothing when all pieces are made, or have to wait.

        Parameters
        ----------
        room : how many chunks are to be in hand; at the end they share what is left.
        """
        if self._again:
            return self._again.pop(0)
        share = -(-(self._count - self._handed_out) // room)
        chunk = list(islice(self._pieces, min(self._length, max(share, 1))))
        if chunk:
            self._handed_out = chunk[-1].number + 1
        if chunk or not none_in_hand:
            return chunk
        whole, self._whole = self._whole, ()
        return whole

    def others(self, pieces: Sequence[GivenPiece]) -> Sequence[bytes] | None:
        """Return what became of all other pieces, for the one that is put together of them."""
        if self._last is None or pieces[0].number != self._last:
            return None
        return [self._store.made(self._survey, number) for number in range(self._last)]

    def back(self, pieces: Sequence[GivenPiece]) -> None:
        """Take a chunk back that nobody has made."""
        self._again.append(pieces)

    def took(self, seconds: float, pieces: int) -> None:
        """Learn how long a chunk took."""
        fitting = int(CHUNK_S * pieces / max(seconds, 1e-6))
        # At most twice as many as before: the first chunk also waits for the process to be ready.
        self._length = max(1, min(fitting, 2 * self._length, MOST_IN_CHUNK))

    def _stored(self) -> Iterator[GivenPiece]:
        """Yield unmade pieces, and keep back the one that has to wait for all others."""
        after = -1
        while pieces := self._store.left(self._survey, after, MOST_IN_CHUNK):
            for piece in pieces:
                if piece.number == self._last:
                    self._whole = (piece,)
                else:
                    yield piece
            after = pieces[-1].number
