"""Six rows with two slides among them, read as a ring that the target closes.

Idea: E_1 ... E_6 = D says that six motions and the target's, taken backwards, come round to where
they began. A ring can be entered at any of its rows and walked either way: rows that are passed
over at the beginning come again at the end, their lines as D^-1 moves them. So any two slides can
be brought to stand first behind the first turning row, and up to two turning rows further on: R P P
R R R, R P R P R R and R P R R P R are all there is.

Source: cyclic shifts and the reversal of the closure are in common use with eliminations, e.g.
Raghavan and Roth, Inverse kinematics of the general 6R manipulator and related linkages, 1993.
Not covered: what is asked of a ring (slide_equation.py), and which to take (two_slides.py).
"""

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.screws import Screws
from kinematics.number_checks import FloatArray
from kinematics.transforms import inverse

ROWS = 6


class Ring(NamedTuple):
    """One way to read six rows.

    Attributes
    ----------
    rows : (6,), which row stands at each place. sign : +1, or -1 where it is walked backwards.
    again : (6,), which places are behind the target: their lines are moved by D^-1.
    turning : places of the four turning rows; sliding : of the two others.
    between : turning rows before the second slide, 1, 2 or 3.
    """

    rows: tuple[int, ...]
    sign: float
    again: tuple[bool, ...]
    turning: tuple[int, ...]
    sliding: tuple[int, ...]
    between: int

    @property
    def turning_rows(self) -> tuple[int, ...]:
        """Rows of the four turning places, in the order of the ring."""
        return tuple(self.rows[place] for place in self.turning)


class Lines(NamedTuple):
    """The lines of a ring for m targets: axis, point (m, 6, 3), and what closes it (m, 4, 4)."""

    axis: FloatArray
    point: FloatArray
    closing: FloatArray


def rings_of(prismatic: NDArray[np.bool_]) -> tuple[Ring, ...]:
    """Return the ways to read six rows, two of which slide, in one of the three orders.

    Examples
    --------
    >>> slides = np.array([True, False, False, True, False, False])
    >>> [ring.rows for ring in rings_of(slides)]
    [(2, 3, 4, 5, 0, 1), (5, 0, 1, 2, 3, 4), (4, 3, 2, 1, 0, 5), (1, 0, 5, 4, 3, 2)]
    """
    found = []
    for sign in (1.0, -1.0):
        order = tuple(range(ROWS))[:: int(sign)]
        for passed in range(ROWS):
            rows = order[passed:] + order[:passed]
            sliding = tuple(place for place, row in enumerate(rows) if prismatic[row])
            turning = tuple(place for place, row in enumerate(rows) if not prismatic[row])
            if len(sliding) == 2 and sliding[0] == 1 and sliding[1] < ROWS - 1:
                again = tuple(place >= ROWS - passed for place in range(ROWS))
                found.append(Ring(rows, sign, again, turning, sliding, sliding[1] - 1))
    return tuple(found)


def lines_around(ring: Ring, screws: Screws, moved: FloatArray) -> Lines:
    """Return the lines of a ring for motions D (m, 4, 4) of the whole arm, lengths over L.

    Examples
    --------
    A shift by 2 along x: the row that is passed over stands that much further back.

    >>> slides = np.array([False, False, True, True, False, False])
    >>> screws = Screws(np.eye(3)[[2] * 6], np.zeros((6, 3)), slides, np.eye(4), 1.0)
    >>> shift = np.eye(4)[None].copy()
    >>> shift[0, 0, 3] = 2.0
    >>> ring = rings_of(slides)[0]
    >>> ring.rows, lines_around(ring, screws, shift).point[0, :, 0].tolist()
    ((1, 2, 3, 4, 5, 0), [0.0, 0.0, 0.0, 0.0, 0.0, -2.0])
    """
    back: FloatArray = inverse(moved)
    closing = moved if ring.sign > 0.0 else back
    if ring.sign < 0.0:
        back = moved
    rows = list(ring.rows)
    axis = np.tile(screws.axis[rows], (len(moved), 1, 1))
    point = np.tile(screws.point[rows], (len(moved), 1, 1))
    again = list(ring.again)
    turn = np.swapaxes(back[:, :3, :3], 1, 2)
    axis[:, again] = axis[:, again] @ turn
    point[:, again] = point[:, again] @ turn + back[:, None, :3, 3]
    return Lines(axis, point, closing)
