"""Areas and volumes against closed forms, and bounds that hold where branches overlap."""

from itertools import pairwise
from math import pi

import numpy as np
import pytest

from kinematics.envelope.measures import area_of, swept_volume_of
from kinematics.envelope.pair_region import PairRegion, PlaneMap
from tests.kinematics.inverse.seeds import fresh
from tests.published.cases import cases_of

LEVEL = np.array([0.0, 1.0])
CASES = cases_of("reach")


def two_links(first: float, second: float, foot: float = 0.0) -> PlaneMap:
    def place_of(q: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        a, b = q[:, 0], q[:, 0] + q[:, 1]
        upper = first * np.stack([-np.sin(a), np.cos(a)], axis=1)
        fore = second * np.stack([-np.sin(b), np.cos(b)], axis=1)
        places = np.stack([upper[:, 1] + fore[:, 1] + foot, -upper[:, 0] - fore[:, 0]], axis=1)
        return places, np.stack([upper + fore, fore], axis=2)

    return place_of


def spherical(q: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Tilt from the axis, and extension."""
    tilt, out = q.T
    sine, cosine = np.sin(tilt), np.cos(tilt)
    places = out[:, None] * np.stack([sine, cosine], axis=1)
    columns = out[:, None] * np.stack([cosine, -sine], axis=1), np.stack([sine, cosine], axis=1)
    return places, np.stack(columns, axis=2)


def slides(q: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    return q[:, ::-1], np.repeat(np.array([[[0.0, 1.0], [1.0, 0.0]]]), len(q), 0)


def box(first: tuple[float, float], second: tuple[float, float]) -> np.ndarray:
    (a, b), (c, d) = first, second
    return np.array([[a, c], [b, c], [b, d], [a, d]])


TURN = (-pi, pi)
PUBLISHED = {
    "rch-19": lambda: area_of(PairRegion(two_links(0.42, 0.31), box(TURN, TURN), LEVEL)),
    "rch-20": lambda: area_of(
        PairRegion(two_links(0.42, 0.31), box((-1.0, 1.0), (0.3, 2.2)), LEVEL)
    ),
    "rch-21": lambda: swept_volume_of(
        PairRegion(spherical, box((0.0, pi), (0.3, 0.9)), LEVEL), 2.0 * pi
    ),
    "rch-22": lambda: swept_volume_of(
        PairRegion(spherical, box((0.4, 1.7), (0.3, 0.9)), LEVEL), 2.0
    ),
    "rch-25": lambda: swept_volume_of(PairRegion(slides, box((0.0, 0.5), (0.2, 0.7)), LEVEL), 5.0),
    "rch-26": lambda: swept_volume_of(
        PairRegion(two_links(0.5, 0.37), box(TURN, TURN), LEVEL), 2.0 * pi
    ),
}


@pytest.mark.parametrize("case", PUBLISHED)
def test_published_areas_and_volumes(case: str) -> None:
    expected = CASES[case]["expected"]["value"]
    found = PUBLISHED[case]()
    assert abs(found.value - expected) <= found.error_bound
    assert found.error_bound <= 1e-9 * expected
    assert abs(found.value - expected) <= CASES[case]["tolerance"]["rel"] * expected


def union_area(place_of: PlaneMap, polygon: np.ndarray) -> float:
    """Return the area of what is reached, by polar slices about the first joint.

    At each distance the second joint has two values, each with its stretch of bearings.
    """
    (a0, c0), (a1, c1) = polygon[0], polygon[2]
    first, second = 0.7, 0.5
    knots = {abs(c) for c in (c0, c1)} | {0.0 if c0 <= 0 <= c1 else abs(c0)}
    nodes, weights = np.polynomial.legendre.leggauss(400)
    total = 0.0
    for low, high in pairwise(sorted(knots)):
        bends = 0.5 * (low + high) + 0.5 * (high - low) * nodes
        for bend, weight in zip(bends, 0.5 * (high - low) * weights, strict=True):
            bearings = np.arctan2(second * np.sin(bend), first + second * np.cos(bend))
            spans = [
                (a0 + sign * bearings, a1 + sign * bearings)
                for sign in (1.0, -1.0)
                if c0 <= sign * bend <= c1
            ]
            length = a1 - a0
            if len(spans) == 2:
                length += min(abs(spans[0][0] - spans[1][0]), a1 - a0)
            total += weight * first * second * np.sin(bend) * min(length, 2.0 * pi)
    return total


def test_overlapping_branches_are_counted_once() -> None:
    random = fresh()
    for _ in range(3):
        half = random.uniform(0.3, 1.4)
        limits = (-random.uniform(0.2, 2.8), random.uniform(0.2, 2.8))
        polygon = box((-half, half), limits)
        found = area_of(PairRegion(two_links(0.7, 0.5), polygon, LEVEL))
        assert abs(found.value - union_area(two_links(0.7, 0.5), polygon)) < 2e-5
        assert found.error_bound < 1e-7


def test_a_set_off_foot_reaches_behind_the_axis_only_once() -> None:
    """Against a dense grid of places, asked for two-link triangles on both sides."""
    region = PairRegion(two_links(0.6, 0.5, 0.2), box(TURN, TURN), LEVEL)
    found = swept_volume_of(region, 2.0 * pi)
    step = 1.3 / 3000
    radius, height = np.meshgrid(np.arange(3000) * step + step / 2, np.arange(2600) * step)
    reached = np.zeros(radius.shape, bool)
    for side in (1.0, -1.0):
        distance = np.hypot(side * radius - 0.2, height)
        reached |= (distance <= 1.1) & (distance >= 0.1)
    rows = np.where(height == 0.0, 0.5, 1.0)
    expected = 4.0 * pi * (radius * reached * rows).sum() * step * step
    assert abs(found.value - expected) < 2e-3 * expected
