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
from kinematics.envelope.tolerances import CHORD, DEFAULT_CELLS, MOST_CELLS
from kinematics.errors import KinematicsError
from kinematics.number_checks import FloatArray


@dataclass(frozen=True)
class SampledView:
    """A view, and the integral of its first coordinate over what is reached, m^3."""

    view: View
    moment: Measure


def sampled_view(
    seeker: Seeker, samples: Samples, kind: str, directions: FloatArray, resolution: float | None
) -> SampledView:
    """Return a view of what is reached, by a grid.

    Parameters
    ----------
    seeker, samples : in the view.
    directions : (2, 3), of its coordinates in the base.
    resolution : m, of the grid; None for a share of what is reached.

    Raises
    ------
    KinematicsError : a resolution that would take too many places.
    """
    least, most = samples.places.min(axis=0), samples.places.max(axis=0)
    size = float((most - least).max())
    step = checked_resolution(resolution, size) or size / DEFAULT_CELLS
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
    # Bent chords are two to a step: a curve of the reach's own size is this far from them.
    chord = step * step / (8.0 * size)
    view = View(kind, found.curves, found.area, step, chord, directions)
    return SampledView(view, found.moment)


def checked_resolution(resolution: float | None, size: float) -> float | None:
    """Return a resolution that is fit for a reach of some size, m, or refuse it."""
    if resolution is None:
        return None
    if not size / MOST_CELLS <= resolution <= size / 4.0:
        raise KinematicsError(
            f"a resolution of {resolution:g} m does not fit a reach of {size:.4g} m",
            where=("resolution",),
            value=resolution,
            way_out=f"ask for {size / MOST_CELLS:.2g} to {size / 4.0:.2g} m, or leave it out",
        )
    return resolution


def ring_view(
    axes: PlanAxes, radii: tuple[float, float], slack: float, resolution: float | None
) -> View:
    """Return the plan of what turns a whole turn about axis 1: a disc, a ring, or a circle.

    Parameters
    ----------
    radii : the least and the greatest, m, each within ``slack``.
    resolution : m, of the search for them.
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
