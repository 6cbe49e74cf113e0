"""Views of a reach by places asked one by one on a grid.

Idea: a grid around what sampled postures reach, wide enough that its rim is not reached; where it
is, the grid is laid wider. Everything else is in the modules used.

Source: as those. Not covered: reach narrower than the resolution.
"""

from dataclasses import dataclass

import numpy as np

from kinematics.envelope.descents import Seeker
from kinematics.envelope.grid_outlines import outlines_of_grid
from kinematics.envelope.grid_reach import Grid, Samples, fill
from kinematics.envelope.measures import Measure
from kinematics.envelope.plan_axes import PlanAxes
from kinematics.envelope.shapes import PLAN, SECTION, Curve, View
from kinematics.envelope.tolerances import CHORD, DEFAULT_CELLS, FEWEST_CELLS, MOST_CELLS, SHORT_OF
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
    """A view, and the integral of its first coordinate over what is reached, m^3."""

    view: View
    moment: Measure


def sampled_view(
    seeker: Seeker, samples: Samples, kind: str, directions: FloatArray, fineness: Fineness
) -> SampledView:
    """Return a view of what is reached, by a grid.

    Parameters
    ----------
    seeker, samples : in the view.
    directions : (2, 3), of its coordinates in the base.
    fineness : of the grid.

    Raises
    ------
    UnfitResolution : it would take too many places, or leave too few.

    Examples
    --------
    A table of two slides of 1 m, from above.

    >>> from kinematics.envelope.descents import InView
    >>> from kinematics.reach.travel_region import TravelRegion
    >>> one = np.ones((1, 2, 2)) * np.eye(2)
    >>> box = TravelRegion(np.zeros(2), np.ones(2), np.empty((0, 2)), np.empty(0), np.empty(0))
    >>> slides = InView(lambda q: (q, np.repeat(one, len(q), 0)), box, np.ones(2), 1e-9)
    >>> corners = np.array([[0.0, 0.0], [1.0, 1.0]])
    >>> found = sampled_view(slides, Samples(corners, corners), PLAN, np.eye(3)[:2], Fineness(0.2))
    >>> round(found.view.area.value, 1), found.view.exact
    (1.0, False)
    """
    least, most = samples.places.min(axis=0), samples.places.max(axis=0)
    size = float((most - least).max())
    step = fineness.step(size)
    margin = 2
    while True:
        origin = least - margin * step
        if kind == SECTION:
            origin[0] = 0.0  # axis 1: nothing is beyond it
        shape = tuple((np.ceil((most - origin) / step).astype(int) + margin).tolist())
        grid = Grid(origin, step, shape, samples.joint_values.shape[1])
        fill(grid, seeker, samples)
        rim = grid.reached.copy()
        rim[0 if kind == SECTION else 1 : -1, 1:-1] = False
        if not rim.any():
            break
        margin *= 2  # samples fell that short of the extremes
    found = outlines_of_grid(grid, seeker, samples.places)
    if not found.curves:
        return _box_around(least, most, kind, directions, step)
    # Bent chords are two to a step: a curve of the reach's own size is this far from them.
    chord = step * step / (8.0 * size)
    view = View(kind, found.curves, found.area, step, chord, directions)
    return SampledView(view, found.moment)


def _box_around(
    least: FloatArray, most: FloatArray, kind: str, directions: FloatArray, step: float
) -> SampledView:
    """Return the view of what is too thin for the grid: a box that holds it, half of it reached."""
    sides = SHORT_OF * (most - least)
    low = 0.5 * (least + most) - 0.5 * sides
    if kind == SECTION:
        low[0] = max(low[0], 0.0)
    corners = low + np.array([[0.0, 0.0], [1.0, 0.0], [1.0, 1.0], [0.0, 1.0]]) * sides
    half = 0.5 * float(sides.prod())
    view = View(kind, (Curve(corners, outer=True),), Measure(half, half), step, step, directions)
    farthest = float(np.abs(corners[:, 0]).max())
    return SampledView(view, Measure(half * farthest, half * farthest))


def ring_view(
    axes: PlanAxes, radii: tuple[float, float], slack: float, resolution: float | None
) -> View:
    """Return the plan of what turns a whole turn about axis 1: a disc, a ring, or a circle.

    Parameters
    ----------
    radii : the least and the greatest, m, each within ``slack``.
    resolution : m, of the search for them.

    Examples
    --------
    >>> axes = PlanAxes(np.eye(3)[:2], np.zeros(2), 1.0)
    >>> ring = ring_view(axes, (1.0, 2.0), 1e-9, None)
    >>> round(ring.area.value / np.pi, 9), [curve.outer for curve in ring.curves]
    (3.0, [True, False])
    """
    least, most = radii
    least = 0.0 if least <= slack else least
    count = int(np.ceil(np.pi / np.arccos(1.0 - CHORD)))
    turns = np.linspace(0.0, 2.0 * np.pi, count, endpoint=False)
    circle = np.stack([np.cos(turns), np.sin(turns)], axis=1)
    curves = [Curve(axes.centre + most * circle, outer=True)]
    area = Measure(0.0, 0.0)
    if most - least > slack:
        area = Measure(np.pi * (most**2 - least**2), 2.0 * np.pi * (most + least) * slack)
        if least:
            curves.append(Curve(axes.centre + least * circle[::-1], outer=False))
    return View(PLAN, tuple(curves), area, resolution, CHORD * most, axes.directions)
