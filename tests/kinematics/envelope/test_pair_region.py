"""Postures counted along level lines, against the two triangles a two-link arm can form."""

import numpy as np

from kinematics.envelope.pair_region import PairRegion, clipped
from tests.kinematics.envelope.test_measures import LEVEL, box, two_links


def test_counts_are_those_of_the_two_triangles() -> None:
    """Within limits: at each place none, one or both bends of the elbow fit."""
    limits = (-1.1, 1.4), (-1.9, 2.3)
    found = PairRegion(two_links(0.7, 0.5), box(*limits), LEVEL).stretches(np.array([0.31]))
    ends = found.places[0]
    # The image of a fold is crossed twice at one place, once for each part of the polygon.
    (wide,) = np.nonzero(np.diff(ends) > 1e-9)
    for x, count in zip(0.5 * (ends[wide] + ends[wide + 1]), found.counts[0, wide], strict=True):
        square = x * x + 0.31**2
        bend = np.arccos((square - 0.49 - 0.25) / 0.7) if abs(square - 0.74) < 0.7 else np.nan
        expected = 0
        for elbow in (bend, -bend):
            lean = np.arctan2(0.31, x) - np.arctan2(0.5 * np.sin(elbow), 0.7 + 0.5 * np.cos(elbow))
            lean = (lean + np.pi) % (2.0 * np.pi) - np.pi
            expected += bool(-1.1 <= lean <= 1.4 and -1.9 <= elbow <= 2.3)
        assert count == expected
    assert set(found.counts[0, wide].tolist()) >= {1, 2}
    assert found.counts[0, -1] == 0


def test_what_a_straight_line_leaves_of_a_square() -> None:
    square = box((0.0, 1.0), (0.0, 1.0))
    corner = clipped(square, np.array([1.0, 1.0]), 0.5)
    np.testing.assert_array_equal(corner, [[0.0, 0.0], [0.5, 0.0], [0.0, 0.5]])
    assert len(clipped(square, np.array([1.0, 0.0]), -1.0)) == 0
