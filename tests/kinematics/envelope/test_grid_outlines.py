"""Outlines of grids against regions with known curves: holes, corners, two parts, thin reach."""

import numpy as np
import pytest

from kinematics.envelope.descents import InView
from kinematics.envelope.grid_outlines import Outlines, outlines_of_grid
from kinematics.envelope.grid_reach import Grid, Samples, fill
from kinematics.reach.travel_region import TravelRegion


def box_of(lower: list[float], upper: list[float]) -> TravelRegion:
    none = np.empty(0)
    return TravelRegion(np.array(lower), np.array(upper), np.empty((0, 2)), none, none)


def polar(q: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    turn, out = q.T
    ways = np.stack([np.cos(turn), np.sin(turn)], axis=1)
    across = np.stack([-ways[:, 1], ways[:, 0]], axis=1)
    places = out[:, None] * ways + 2.0
    return places, np.stack([out[:, None] * across, ways], axis=2)


def slides(q: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    return q + 2.0, np.repeat(np.eye(2)[None], len(q), 0)


def drawn(view: object, limits: TravelRegion, step: float) -> Outlines:
    seeker = InView(view, limits, np.ones(2), 1e-10)  # type: ignore[arg-type]
    random = np.random.default_rng(6)
    joint_values = random.uniform(limits.lower, limits.upper, (4000, 2))
    samples = Samples(joint_values, seeker.view(joint_values)[0])
    grid = Grid(np.array([0.5, 0.5]), step, (int(3.0 / step), int(3.0 / step)), 2)
    fill(grid, seeker, samples)
    return outlines_of_grid(grid, seeker, samples.places)


@pytest.mark.parametrize("step", [0.2, 0.11, 0.04])
@pytest.mark.parametrize("hole", [0.0, 0.3])
def test_a_ring_with_and_without_a_hole(step: float, hole: float) -> None:
    found = drawn(polar, box_of([-np.pi, hole], [np.pi, 1.0]), step)
    expected = np.pi * (1.0 - hole**2)
    assert abs(found.area.value - expected) <= found.area.error_bound
    # Its middle is at x = 2: the moment is that of all its area there.
    assert abs(found.moment.value - 2.0 * expected) <= found.moment.error_bound
    assert [curve.outer for curve in found.curves] == [True, False][: 1 + (hole > 0.0)]
    for curve, radius in zip(found.curves, (1.0, hole), strict=False):
        off = np.abs(np.hypot(*(curve.points - 2.0).T) - radius)
        assert off.max() < 0.6 * step * step  # corners of the seam apart, on the boundary
        assert np.median(off) < 1e-3 * step


def test_bounds_shrink_with_the_step() -> None:
    bounds = [
        drawn(polar, box_of([-2.0, 0.3], [2.0, 1.0]), step).area.error_bound
        for step in (0.1, 0.05, 0.025)
    ]
    assert bounds[1] < 0.6 * bounds[0]
    assert bounds[2] < 0.6 * bounds[1]


@pytest.mark.parametrize("sides", [(0.83, 0.57), (1.0, 0.031)])
def test_corners_and_what_is_thinner_than_the_grid(sides: tuple[float, float]) -> None:
    """A box of slides, off the grid; a thin one may be missed, and the bound says so."""
    found = drawn(slides, box_of([0.013, 0.027], [0.013 + sides[0], 0.027 + sides[1]]), 0.1)
    assert abs(found.area.value - sides[0] * sides[1]) <= found.area.error_bound


def test_the_left_half_is_as_good_as_the_right() -> None:
    """A ring about the origin: chords beyond it are bent too, and their bound is as true."""

    def about_zero(q: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        places, jacobians = polar(q)
        return places - 2.0, jacobians

    limits = box_of([-np.pi, 0.3], [np.pi, 1.0])
    seeker = InView(about_zero, limits, np.ones(2), 1e-10)
    joint_values = np.random.default_rng(6).uniform(limits.lower, limits.upper, (4000, 2))
    samples = Samples(joint_values, seeker.view(joint_values)[0])
    grid = Grid(np.array([-1.5, -1.5]), 0.11, (28, 28), 2)
    fill(grid, seeker, samples)
    found = outlines_of_grid(grid, seeker, samples.places)
    expected = np.pi * (1.0 - 0.09)
    assert abs(found.area.value - expected) <= min(found.area.error_bound, 1e-3)
    for curve, radius in zip(found.curves, (1.0, 0.3), strict=True):
        off = np.abs(np.hypot(*curve.points.T) - radius)
        left = curve.points[:, 0] < 0.0
        assert np.median(off[left]) < 2.0 * np.median(off[~left]) + 1e-9
