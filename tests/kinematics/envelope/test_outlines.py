"""Closed curves from level lines: regions known by hand, holes, flat sides, crossings."""

from itertools import pairwise

import numpy as np
import pytest

from kinematics.envelope.outlines import Ends, LevelLines, clean, outlines_of
from kinematics.envelope.shapes import Curve


def ring(heights: np.ndarray) -> list[Ends]:
    lines = []
    for height in heights.tolist():
        outer, inner = np.sqrt(max(1.0 - height**2, 0.0)), 0.25 - height**2
        hole = np.sqrt(max(inner, 0.0))
        lines.append(
            np.array([[-outer, -hole], [hole, outer]] if inner > 0.0 else [[-outer, outer]])
        )
    return lines


def steps(heights: np.ndarray) -> list[Ends]:
    """A block on two feet: flat sides at every height."""
    feet, block = np.array([[0.0, 1.0], [2.0, 3.0]]), np.array([[0.0, 3.0]])
    return [feet if height < 1.0 else block for height in heights.tolist()]


def lens_and_disc(heights: np.ndarray) -> list[Ends]:
    """Two discs that overlap: their curves cross where no corner is told."""
    lines = []
    for height in heights.tolist():
        half = np.sqrt(max(1.0 - height**2, 0.0))
        near = [[-0.9 - half, -0.9 + half], [0.9 - half, 0.9 + half]]
        lines.append(np.array([[near[0][0], near[1][1]]] if half >= 0.9 else near))
    return lines


def lens_area() -> float:
    """Of two unit discs 1.8 apart, each place once; source: circular segments."""
    half = np.arccos(0.9)
    return float(2.0 * np.pi - 2.0 * (half - 0.9 * np.sin(half)))


CASES = {
    "ring": (ring, [-1.0, -0.5, 0.5, 1.0], [np.pi, -np.pi / 4.0]),
    "steps": (steps, [0.0, 1.0, 2.0], [5.0]),
    "two discs": (lens_and_disc, [-1.0, 1.0], [lens_area()]),
}


@pytest.mark.parametrize("case", CASES)
def test_areas_and_orientation(case: str) -> None:
    lines, corners, areas = CASES[case]
    curves = outlines_of(lines, np.array(corners), 1e-4)
    assert [curve.outer for curve in curves] == [area > 0.0 for area in areas]
    for curve, area in zip(curves, areas, strict=True):
        assert curve.signed_area == pytest.approx(area, abs=1e-4 * 7.0)
        assert not crossings(curve)


def crossings(curve: Curve) -> list[tuple[int, int]]:
    """Return which edges of a curve cross, each tested against each."""
    points = np.vstack([curve.points, curve.points[:1]])
    begin, end = points[:-1], points[1:]

    def side(place: np.ndarray) -> np.ndarray:
        step, part = end - begin, place[:, None] - begin
        return np.sign(step[:, 0] * part[..., 1] - step[:, 1] * part[..., 0])

    one, other = side(begin), side(end)
    apart = (one * other < 0.0) & (one * other < 0.0).T
    return [(a, b) for a, b in np.argwhere(apart).tolist() if a < b]


def test_chords_are_as_near_as_asked() -> None:
    curves = outlines_of(ring, np.array([-1.0, -0.5, 0.5, 1.0]), 1e-3)
    for curve, radius in zip(curves, (1.0, 0.5), strict=True):
        points = np.vstack([curve.points, curve.points[:1]])
        for first, last in pairwise(points):
            assert abs(np.hypot(*(0.5 * (first + last))) - radius) < 2e-3


def test_a_flat_side_is_one_edge() -> None:
    (curve,) = outlines_of(steps, np.array([0.0, 1.0, 2.0]), 1e-4)
    assert len(curve.points) == 8


def test_what_does_not_bend_is_left_out() -> None:
    points = np.array([[0.0, 0.0], [0.5, 0.0], [1.0, 0.0], [1.0, 0.0], [1.0, 1.0]])
    assert len(clean(points, 1e-9)) == 3


def test_the_lines_type_is_what_tests_pass() -> None:
    lines: LevelLines = ring
    assert len(lines(np.zeros(2))) == 2
