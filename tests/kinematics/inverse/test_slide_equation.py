"""The equation of two slides: known turns are its roots, and the tool misses nothing there."""

from itertools import combinations

import numpy as np
import pytest

from kinematics.inverse.screws import screws_of
from kinematics.inverse.slide_equation import closure_of, near_turns, other_turn, placed, roots_of
from kinematics.inverse.slide_rings import lines_around, rings_of
from kinematics.transforms import inverse
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.inverse.six_rows import drawn_motions, targets_of
from tests.kinematics.inverse.triple_arms import _rows, arm_of


@pytest.mark.parametrize("slides", [*combinations(range(6), 2)], ids=str)
def test_known_turns_are_roots(slides: tuple[int, int]) -> None:
    random = fresh()
    kinds = "".join("P" if row in slides else "R" for row in range(6))
    screws = screws_of(arm_of(_rows(random), kinds), np.eye(4))
    motions = drawn_motions(random, screws, 5)
    moved = screws.scaled(targets_of(screws, motions)) @ inverse(screws.tool_at_zero)
    for ring in rings_of(screws.prismatic):
        closure = closure_of(ring, lines_around(ring, screws, moved))
        b, c = (ring.sign * motions[:, ring.rows[ring.turning[k]], None, None] for k in (1, 2))
        stands = placed(ring, closure, (np.cos(b), np.sin(b)), (np.cos(c), np.sin(c)))
        np.testing.assert_allclose(stands.miss, 0.0, atol=1e-12)
        for scan_last, scanned, other in ((False, b, c), (True, c, b)):
            cosine, sine, rest = other_turn(closure, scan_last, np.cos(scanned), np.sin(scanned))
            left = cosine * np.cos(other) + sine * np.sin(other) + rest
            np.testing.assert_allclose(left, 0.0, atol=1e-12)
            roots, size = roots_of(ring, closure, scan_last)
            assert roots.shape[1] == 4 * (1 + ring.between)
            assert (size > 0.0).all()
            of, turns, _ = near_turns(roots)
            for target in range(5):
                apart = turns[of == target] - scanned[target, 0, 0]
                assert np.abs(np.exp(1j * apart) - 1.0).min() < 1e-5
