"""Views of a reach by places asked one by one on a grid.

Idea: a grid around what sampled postures reach, wide enough that its rim is not reached; where it
is, the grid is laid wider. Everything else is in the modules used.

Source: as those. Not covered: reach narrower than the resolution.
"""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import cached_property
from typing import NamedTuple

import numpy as np

from kinematics.envelope.descents import Seeker
from kinematics.envelope.grid_chords import Chords, chords_of
from kinematics.envelope.grid_outlines import joined_outlines
from kinematics.envelope.grid_reach import Grid, Samples, fill
from kinematics.envelope.measures import Measure
from kinematics.envelope.shapes import SECTION, Curve, View
from kinematics.envelope.tolerances import DEFAULT_CELLS, FEWEST_CELLS, MOST_CELLS, SHORT_OF
from kinematics.errors import KinematicsError
from kinematics.number_checks import FloatArray


class UnfitResolution(KinematicsError):
    """A resolution that takes too many places for the reach there is, or leaves too few.

    Parameters
    ----------
    resolution, least, most : m, what was asked for and what may be.
    """

    def __init__(self, resolution: float, least: float, most: float) -> None:
        super().__init__(
            f"a resolution of {resolution:g} m does not fit this reach",
            where=("resolution",),
            value=resolution,
            way_out=f"ask for {least:.2g} to {most:.2g} m, or leave it out",
        )
        self.least = least
        self.most = most


@dataclass(frozen=True)
class Fineness:
    """How far apart places are asked for one by one.

    Attributes
    ----------
    resolution : m; None for a share of what is reached.
    most_cells : along what is reached: how long it may take.
    """

    resolution: float | None = None
    most_cells: int = MOST_CELLS

    def step(self, size: float) -> float:
        """Return the resolution, m, for a reach of some size, or refuse it.

        Raises
        ------
        UnfitResolution

        Examples
        --------
        >>> Fineness().step(64.0), Fineness(0.25, most_cells=8).step(2.0)
        (1.0, 0.25)
        """
        if self.resolution is None:
            return size / DEFAULT_CELLS
        least, most = size / self.most_cells, size / FEWEST_CELLS
        if not least <= self.resolution <= most:
            raise UnfitResolution(self.resolution, least, most)
        return self.resolution


@dataclass(frozen=True)
class SampledView:
    """A view, and the integral of its first coordinate over what is reached, m^3.

    ``finer`` is how many steps of its grid are one of the usual grid, at least 1: it is known
    before anything is found.
    """

    view: View
    moment: Measure
    finer: float = 1.0


class Stripe(NamedTuple):
    """What a piece of a view tells: its chords, and the places of the whole grid, both ways."""

    chords: Chords
    shape: tuple[int, ...]


class AskedView:
    """A view that is found by a grid, in pieces that do not depend on each other.

    Idea: a grid of the usual fineness is filled first, whole; it is the answer where no finer one
    is asked for. Otherwise what it reaches leads to the places of the finer grid, which is cut into
    stripes of columns. The columns that two stripes share are asked alone, so that both find the
    same of them, and then what lies between.

    Parameters
    ----------
    seeker, samples : in the view.
    directions : (2, 3), of its coordinates in the base.
    fineness : of the grid.

    Attributes
    ----------
    size : m, of what is reached, as far as samples tell; step : m, of the grid asked for.
    pieces : how many stripes it has; places : of the grid, in all, as far as samples tell.

    Raises
    ------
    UnfitResolution : it would take too many places, or leave too few.

    Examples
    --------
    A table of two slides of 1 m, from above.

    >>> from kinematics.envelope.descents import InView
    >>> from kinematics.envelope.shapes import PLAN
    >>> from kinematics.reach.travel_region import TravelRegion
    >>> one = np.ones((1, 2, 2)) * np.eye(2)
    >>> box = TravelRegion(np.zeros(2), np.ones(2), np.empty((0, 2)), np.empty(0), np.empty(0))
    >>> slides = InView(lambda q: (q, np.repeat(one, len(q), 0)), box, np.ones(2), 1e-9)
    >>> corners = np.array([[0.0, 0.0], [1.0, 1.0]])
    >>> asked = AskedView(slides, Samples(corners, corners), PLAN, np.eye(3)[:2], Fineness(0.2))
    >>> found = asked.told([asked.piece(number) for number in range(asked.pieces)])
    >>> asked.pieces, round(found.view.area.value, 1), found.view.exact
    (1, 1.0, False)
    """

    def __init__(
        self,
        seeker: Seeker,
        samples: Samples,
        kind: str,
        directions: FloatArray,
        fineness: Fineness,
    ) -> None:
        self._seeker, self._samples = seeker, samples
        self._kind, self._directions = kind, directions
        self._least, self._most = samples.places.min(axis=0), samples.places.max(axis=0)
        self.size = float((self._most - self._least).max())
        self.step = fineness.step(self.size)
        self._first_step = max(self.step, self.size / DEFAULT_CELLS)
        self._finer = max(self.size / DEFAULT_CELLS / self.step, 1.0)
        across, along = (np.ceil((self._most - self._least) / self.step) + 2.0).tolist()
        self._is_finer = self.step < self._first_step
        self.pieces = int(np.ceil(across / _STRIPE)) if self._is_finer else 1
        self.places = int(across * along)

    @cached_property
    def _first(self) -> Grid:
        """The grid of the usual fineness, filled; its rim is not reached."""
        step, margin = self._first_step, 2
        while True:
            origin = self._least - margin * step
            if self._kind == SECTION:
                origin[0] = 0.0  # axis 1: nothing is beyond it
            shape = tuple((np.ceil((self._most - origin) / step).astype(int) + margin).tolist())
            grid = Grid(origin, step, shape, self._samples.joint_values.shape[1])
            fill(grid, self._seeker, self._samples)
            rim = grid.reached.copy()
            rim[0 if self._kind == SECTION else 1 : -1, 1:-1] = False
            if not rim.any():
                return grid
            margin *= 2  # samples fell that short of the extremes

    @cached_property
    def _shape(self) -> tuple[int, ...]:
        """Places of the whole grid along both coordinates, with the same ends as the first one."""
        first = self._first
        if not self._is_finer:
            return first.shape
        ends = first.step / self.step * (np.array(first.shape) - 1)
        return tuple((np.ceil(ends).astype(int) + 1).tolist())

    @cached_property
    def _seeds(self) -> Samples:
        return self._samples.with_those_of(self._first)

    def piece(self, number: int) -> Stripe:
        """Return the chords of a stripe; they do not depend on any other."""
        seeker, shown = self._seeker, self._samples.places
        if not self._is_finer:
            return Stripe(chords_of(self._first, seeker, shown), self._shape)
        columns, rows = self._shape
        begin, end = (part * (columns - 1) // self.pieces for part in (number, number + 1))
        stripe = self._part(begin, end - begin + 1, rows)
        for side in (0, end - begin):
            column = self._part(begin + side, 1, rows)
            fill(column, seeker, self._seeds, self._first_step)
            stripe.reached[side], stripe.off[side] = column.reached[0], column.off[0]
            stripe.joint_values[side], stripe.settled[side] = column.joint_values[0], True
        fill(stripe, seeker, self._seeds, self._first_step)
        chords = chords_of(stripe, seeker, shown, (begin == 0, end == columns - 1))
        return Stripe(chords, self._shape)

    def _part(self, first: int, columns: int, rows: int) -> Grid:
        joints = self._samples.joint_values.shape[1]
        return Grid(self._first.origin, self.step, (columns, rows), joints, first=(first, 0))

    def told(self, pieces: Sequence[Stripe]) -> SampledView:
        """Return the view that all pieces make, in their order."""
        chords = [one.chords for one in pieces]
        found = joined_outlines(chords, self.step, pieces[0].shape)
        if not found.curves:
            return self.unasked()
        # Bent chords are two to a step: a curve of the reach's own size is this far from them.
        chord = self.step * self.step / (8.0 * self.size)
        view = View(self._kind, found.curves, found.area, self.step, chord, self._directions)
        return SampledView(view, found.moment, self._finer)

    def unasked(self) -> SampledView:
        """Return what is known without asking: a box that holds it, half of it reached."""
        box = _box_around(self._least, self._most, self._kind, self._directions, self.step)
        return replace(box, finer=self._finer)


_STRIPE = 32
"""Steps of a grid in a stripe: of a fine grid a second's work."""


def _box_around(
    least: FloatArray, most: FloatArray, kind: str, directions: FloatArray, step: float
) -> SampledView:
    """Return the view of a box around samples; of what is too thin for a grid that is all."""
    sides = SHORT_OF * (most - least)
    low = 0.5 * (least + most) - 0.5 * sides
    if kind == SECTION:
        low[0] = max(low[0], 0.0)
    corners = low + np.array([[0.0, 0.0], [1.0, 0.0], [1.0, 1.0], [0.0, 1.0]]) * sides
    half = 0.5 * float(sides.prod())
    view = View(kind, (Curve(corners, outer=True),), Measure(half, half), step, step, directions)
    farthest = float(np.abs(corners[:, 0]).max())
    return SampledView(view, Measure(half * farthest, half * farthest))
