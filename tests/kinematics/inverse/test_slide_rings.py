"""Six rows read as a ring: any reading closes with the same motions."""

from itertools import combinations

import numpy as np
import pytest

from kinematics.inverse.landing import land_all
from kinematics.inverse.screws import screws_of
from kinematics.inverse.slide_rings import lines_around, rings_of
from kinematics.transforms import inverse
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.inverse.six_rows import drawn_motions, targets_of
from tests.kinematics.inverse.triple_arms import _rows, arm_of


@pytest.mark.parametrize("slides", [*combinations(range(6), 2)], ids=str)
def test_every_reading_closes_with_the_same_motions(slides: tuple[int, int]) -> None:
    random = fresh()
    kinds = "".join("P" if row in slides else "R" for row in range(6))
    screws = screws_of(arm_of(_rows(random), kinds), np.eye(4))
    motions = drawn_motions(random, screws, 1)
    scaled = screws.scaled(targets_of(screws, motions))
    own = motions / np.where(screws.prismatic, screws.length, 1.0)
    rings = rings_of(screws.prismatic)
    assert len(rings) in (2, 4)
    for ring in rings:
        assert ring.between in (1, 2, 3)
        lines = lines_around(ring, screws, scaled @ inverse(screws.tool_at_zero))
        rows, pose = list(ring.rows), np.empty((1, 4, 4))
        around = np.ascontiguousarray(lines.axis[0]), np.ascontiguousarray(lines.point[0])
        turned = ring.sign * own[:, rows]
        land_all(*around, screws.prismatic[rows], np.eye(4), turned, pose)
        np.testing.assert_allclose(pose, lines.closing, atol=1e-12)
