"""An arm of more than six rows with its outer rows held still: six rows, and a target that moved.

Idea: a row at the base that is held carries the whole arm as one piece, so the rest may as well
stand where it stood at zero and the target be carried back; a row at the tool that is held makes
the tool another one, and the target is carried back on that side. So six rows in one piece, the
same for every value of the held ones, answer for all of them, and their closed form is found once.

Source: none; products of exponentials as in screws.py, regrouped: E_1 .. E_n M = T says of the
rows in between that they bring M to (E_1 ..)^-1 T M^-1 (.. E_n)^-1 M.
Not covered: rows held in between, which would make another arm for each value; they are not
needed: three neighbouring axes of seven that meet or run parallel stay so without the first or
the last row. Which values to hold rows at (redundant.py).
"""

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.found import Found, Solver
from kinematics.inverse.geometry import Regime, geometry_of
from kinematics.inverse.landing import land_all
from kinematics.inverse.screws import Screws
from kinematics.inverse.special_triple import special_triple_of
from kinematics.kernels.compiler import for_kernel
from kinematics.table import FloatArray
from kinematics.transforms import inverse

SIX = 6


@dataclass(frozen=True, eq=False)
class Locked:
    """An arm of n rows, the first and last of which are held, and a solver for the six between.

    Attributes
    ----------
    screws : the arm. before, after : how many of its first and last rows are held.
    six : the rows between, over the arm's length. inner : finds their motions.
    say : what these are found by, for people, with the numbers of the arm's own axes.
    """

    screws: Screws
    before: int
    after: int
    six: Screws
    inner: Solver
    say: str

    @property
    def held(self) -> NDArray[np.intp]:
        """Indices of the rows that are held, (h,)."""
        rows = self.screws.rows
        return np.delete(np.arange(rows), np.arange(self.before, rows - self.after))

    def carried(self, values: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return what targets are carried back by on either side, (count, 4, 4) each, in metres.

        Parameters
        ----------
        values : (count, h), motions of the held rows, rad and metres, in the order of ``held``.
        """
        screws, first, last = self.screws, self.before, self.screws.rows - self.after
        moved = values / np.where(screws.prismatic[self.held], screws.length, 1.0)
        at_base = _landed(screws, slice(0, first), np.eye(4), moved[:, :first])
        at_tool = _landed(screws, slice(last, screws.rows), screws.tool_at_zero, moved[:, first:])
        tool = screws.tool_at_zero.copy()
        tool[:3, 3] *= screws.length
        for poses in (at_base, at_tool):
            poses[:, :3, 3] *= screws.length
        return inverse(at_base), inverse(at_tool) @ tool

    def targets(self, targets: FloatArray, values: FloatArray) -> FloatArray:
        """Return the targets (count, 4, 4) of the six rows for targets and held values, each."""
        before, after = self.carried(values)
        carried: FloatArray = before @ targets @ after
        return carried

    def whole(self, inner: FloatArray, values: FloatArray) -> FloatArray:
        """Return motions (count, n) of all rows from those of the six and of the held ones."""
        parts = (values[:, : self.before], inner, values[:, self.before :])
        return np.concatenate(parts, axis=1)

    def solve(self, targets: FloatArray) -> Found:
        """Return all motions of the six rows for their targets (m, 4, 4), metres."""
        return self.inner.solve(targets)


def lockings_of(screws: Screws) -> list[Locked]:
    """Return the ways to hold the outer rows of an arm so that the six between can be solved.

    Closed forms first, the exact ones before others, and then those that hold the first rows.

    Examples
    --------
    A track under a shoulder, an elbow and a wrist:

    >>> axes, points = np.eye(3)[[0, 2, 1, 1, 2, 1, 2]], np.zeros((7, 3))
    >>> points[3, 2], points[4:, 2] = 0.5, 0.9
    >>> prismatic = np.arange(7) == 0
    >>> first, *others = lockings_of(Screws(axes, points, prismatic, np.eye(4), 1.0))
    >>> first.held.tolist(), first.say
    ([0], 'axes 5, 6 and 7 meet in a point: a spherical wrist')
    """
    spare = screws.rows - SIX
    found = []
    for after in range(spare + 1):
        before = spare - after
        rows = slice(before, screws.rows - after)
        six = Screws(
            for_kernel(screws.axis[rows]),
            for_kernel(screws.point[rows]),
            np.ascontiguousarray(screws.prismatic[rows]),
            screws.tool_at_zero,
            screws.length,
        )
        inner, triples = special_triple_of(six), geometry_of(six).triples
        if inner is not None:
            rank = list(Regime).index(triples[0].regime)
            say = replace(triples[0], first=triples[0].first + before, solved=screws).say
            found.append((rank, after, Locked(screws, before, after, six, inner, say)))
    return [locked for _, _, locked in sorted(found, key=lambda one: one[:2])]


def _landed(screws: Screws, rows: slice, tool_at_zero: FloatArray, moved: FloatArray) -> FloatArray:
    """Return where motions (count, some) of some rows bring a pose, lengths over the arm's."""
    poses = np.empty((len(moved), 4, 4))
    lines = for_kernel(screws.axis[rows]), for_kernel(screws.point[rows])
    slides = np.ascontiguousarray(screws.prismatic[rows])
    land_all(*lines, slides, for_kernel(tool_at_zero), for_kernel(moved), poses)
    return poses
