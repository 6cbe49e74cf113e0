"""Volume of a reach that is no section turned, by places drawn in it.

Idea: space around the reach is cut into cubes and in each one place is drawn at random and searched
for. The volume is that of the cubes whose place is reached. A cube wholly inside or outside always
tells the truth, so only those at the boundary add to the error, and their number is known: a cube
whose neighbours say otherwise. Each errs by at most half a cube in the mean square.

Source: stratified sampling (Haber 1966). Bound: four standard deviations. Not covered: reach far
narrower than a cube.
"""

import numpy as np

from kinematics.envelope.descents import Seeker
from kinematics.envelope.grid_reach import Grid, Samples, fill, shifted
from kinematics.envelope.measures import Measure
from kinematics.envelope.tolerances import DRAWN_BOUND, MOST_CUBES, SHORT_OF


def drawn_volume(seeker: Seeker, samples: Samples, count: int) -> Measure:
    """Return the volume that a point reaches.

    Parameters
    ----------
    seeker, samples : in a view of three coordinates, (count, 3) places.
    count : of places drawn in the box around what is reached.

    Examples
    --------
    Three slides of 1 m.

    >>> from kinematics.envelope.descents import InView
    >>> from kinematics.reach.travel_region import TravelRegion
    >>> one = np.ones((1, 3, 3)) * np.eye(3)
    >>> box = TravelRegion(np.zeros(3), np.ones(3), np.empty((0, 3)), np.empty(0), np.empty(0))
    >>> slides = InView(lambda q: (q, np.repeat(one, len(q), 0)), box, np.ones(3), 1e-9)
    >>> corners = np.array([[0.0, 0.0, 0.0], [1.0, 1.0, 1.0]])
    >>> volume = drawn_volume(slides, Samples(corners, corners), 1728)
    >>> bool(abs(volume.value - 1.0) < volume.error_bound < 0.1)
    True
    """
    least, most = samples.places.min(axis=0), samples.places.max(axis=0)
    sides = most - least
    step = max(float(sides.prod() / count) ** (1.0 / 3.0), float(sides.max()) / MOST_CUBES)
    if sides.min() < 2.0 * step:
        # Too thin for cubes: something between nothing and a box that samples fall short of.
        half = 0.5 * float((SHORT_OF * sides).prod())
        return Measure(half, half)
    margin = 2
    while True:
        shape = tuple((np.ceil((most - least) / step).astype(int) + 2 * margin).tolist())
        shifts = np.random.default_rng(_SEED).random((*shape, 3))
        joints = samples.joint_values.shape[1]
        grid = Grid(least - margin * step, step, shape, joints, shifts)
        fill(grid, seeker, samples)
        inner = grid.reached[1:-1, 1:-1, 1:-1]
        if int(inner.sum()) == int(grid.reached.sum()):
            break
        margin *= 2  # samples fell that short of the extremes
    doubtful = np.zeros(shape, dtype=bool)
    for axis in range(3):
        for by in (-1, 1):
            way = np.zeros(3, dtype=np.intp)
            way[axis] = by
            doubtful |= shifted(grid.reached, way) != grid.reached
    cube = step**3
    spread = 0.5 * float(np.sqrt(np.count_nonzero(doubtful)))
    return Measure(int(grid.reached.sum()) * cube, DRAWN_BOUND * spread * cube)


def between(drawn: Measure, least: float, most: float) -> Measure:
    """Return a drawn volume that is also known to lie between two values.

    Examples
    --------
    >>> between(Measure(3.0, 1.0), 3.5, 9.0)
    Measure(value=3.75, error_bound=0.25)
    """
    low = max(least, drawn.value - drawn.error_bound)
    high = min(most, drawn.value + drawn.error_bound)
    if high < low:
        return drawn
    return Measure(0.5 * (low + high), 0.5 * (high - low))


_SEED = 20260
"""Of the places drawn: the same in each answer."""
