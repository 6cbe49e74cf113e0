"""Six joints of which three slide: two solutions in closed form, and how far a turn is missed."""

from itertools import combinations

import numpy as np
import pytest

from kinematics.inverse.found import TILT
from kinematics.inverse.screws import screws_of
from kinematics.inverse.three_slides import three_slides_of
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.inverse.six_rows import drawn_motions, lost, targets_of
from tests.kinematics.inverse.triple_arms import _rows, arm_of

TRIPLES = [
    "".join("P" if row in slides else "R" for row in range(6))
    for slides in combinations(range(6), 3)
]


@pytest.mark.parametrize("kinds", TRIPLES)
def test_every_known_posture_comes_back_with_one_other(kinds: str) -> None:
    random = fresh()
    screws = screws_of(arm_of(_rows(random), kinds), np.eye(4))
    solver = three_slides_of(screws)
    assert solver is not None
    motions = drawn_motions(random, screws, 50)
    assert not lost(solver, screws, motions).any()
    assert (solver.solve(targets_of(screws, motions)).count_per_target() == 2).all()


def test_a_turn_that_is_missed_is_told() -> None:
    """Axes 0.2 and 0.3 rad apart tilt the last one by 0.5 rad at most: 0.7 lacks 0.2."""
    axes = np.eye(3)[[0, 1, 2, 2, 2, 2]]
    axes[4] = 0.0, np.sin(0.2), np.cos(0.2)
    axes[5] = 0.0, np.sin(0.5), np.cos(0.5)
    screws = screws_of(arm_of(_rows(fresh()), "PPPRRR"), np.eye(4))
    slides = np.arange(6) < 3
    solver = three_slides_of(type(screws)(axes, np.zeros((6, 3)), slides, np.eye(4), 1.0))
    assert solver is not None
    target = np.eye(4)[None].copy()
    target[0, 1:3, 1:3] = [[np.cos(0.2), np.sin(0.2)], [-np.sin(0.2), np.cos(0.2)]]
    found = solver.solve(target)
    assert not len(found.motions)
    assert found.stage.tolist() == [TILT]
    np.testing.assert_allclose(found.shortfall, 0.2, atol=1e-12)


def test_slides_in_one_plane_and_parallel_axes_have_none() -> None:
    rows = _rows(fresh())
    rows[:2, 1] = 0.0
    assert three_slides_of(screws_of(arm_of(rows, "PPPRRR"), np.eye(4))) is None
    rows = _rows(fresh())
    rows[4, 1] = 0.0
    assert three_slides_of(screws_of(arm_of(rows, "PPPRRR"), np.eye(4))) is None
