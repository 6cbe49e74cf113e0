"""Six joints of which two slide: every known posture comes back, and no other way finds more."""

from itertools import combinations

import numpy as np
import pytest
from scipy.optimize import least_squares

from kinematics.inverse.screws import Screws, screws_of
from kinematics.inverse.two_slides import two_slides_of
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.inverse.six_rows import drawn_motions, lost, targets_of
from tests.kinematics.inverse.triple_arms import _rows, arm_of

PAIRS = [
    "".join("P" if row in pair else "R" for row in range(6)) for pair in combinations(range(6), 2)
]


def drawn(random: np.random.Generator, kinds: str) -> Screws:
    return screws_of(arm_of(_rows(random), kinds), np.eye(4))


@pytest.mark.parametrize("kinds", PAIRS)
def test_every_known_posture_comes_back(kinds: str) -> None:
    random = fresh()
    for _ in range(2):
        screws = drawn(random, kinds)
        solver = two_slides_of(screws)
        assert solver is not None
        assert not lost(solver, screws, drawn_motions(random, screws, 100)).any()


def test_solutions_land_and_their_counts_are_even() -> None:
    random = fresh()
    screws = drawn(random, "PRRPRR")
    solver = two_slides_of(screws)
    assert solver is not None
    motions = drawn_motions(random, screws, 100)
    found = solver.solve(targets_of(screws, motions))
    assert found.position_error.max() < 1e-9 * screws.length
    assert found.angle_error.max() < 1e-9
    counts = found.count_per_target()
    assert (counts[~found.open] % 2 == 0).all()
    # As many as there are: one target has more than one pair.
    assert counts.max() > 2


def residuals(screws: Screws, target: np.ndarray, motions: np.ndarray) -> np.ndarray:
    """Return all entries by which the tool misses a target: no angle, nothing of the solver."""
    gap: np.ndarray = (targets_of(screws, motions[None])[0] - target)[:3].ravel()
    return gap


@pytest.mark.parametrize("kinds", ["PRRPRR", "RPRPRR"])
def test_many_starts_find_no_other(kinds: str) -> None:
    random = fresh()
    screws = drawn(random, kinds)
    solver = two_slides_of(screws)
    assert solver is not None
    for target in targets_of(screws, drawn_motions(random, screws, 2)):
        found = solver.solve(target[None])
        met = 0
        for start in drawn_motions(random, screws, 30):
            sought = least_squares(lambda q, to=target: residuals(screws, to, q), start)
            if sought.cost > 1e-20:
                continue
            apart = found.motions - sought.x
            turns = np.where(screws.prismatic, 0.0, 2.0 * np.pi * np.rint(apart / (2.0 * np.pi)))
            assert np.abs(apart - turns).max(axis=1).min() < 1e-4
            met += 1
        assert met > 2


def test_out_of_reach_is_told_without_doubt_and_with_the_nearest() -> None:
    """Turns that an axis a little off the others cannot make: no slide helps."""
    random = fresh()
    rows = _rows(random)
    rows[:, 1] = 0.2, 0.3, 0.2, 0.3, 0.2, 0.1
    screws = screws_of(arm_of(rows, "PRRPRR"), np.eye(4))
    solver = two_slides_of(screws)
    assert solver is not None
    over = targets_of(screws, np.zeros((1, 6)))
    over[0, :3, :3] = over[0, :3, :3] @ np.diag([1.0, -1.0, -1.0])
    found = solver.solve(over)
    assert not len(found.motions)
    assert not found.open.any()
    nearest = solver.nearest(over)
    assert np.abs(targets_of(screws, nearest)[0] - over[0]).max() > 1e-3


def test_slides_that_are_always_parallel_and_other_arms_have_none() -> None:
    random = fresh()
    rows = _rows(random)
    rows[0, 1] = 0.0
    assert two_slides_of(screws_of(arm_of(rows, "PPRRRR"), np.eye(4))) is None
    assert two_slides_of(drawn(random, "PRRRRR")) is None
    assert two_slides_of(drawn(random, "PPPRRR")) is None


def test_the_order_of_targets_does_not_matter() -> None:
    random = fresh()
    screws = drawn(random, "RRPRRP")
    solver = two_slides_of(screws)
    assert solver is not None
    targets = targets_of(screws, drawn_motions(random, screws, 300))
    together, alone = solver.solve(targets), solver.solve(targets[-1:])
    np.testing.assert_allclose(together.motions[together.target == 299], alone.motions, atol=1e-9)
    assert not len(solver.solve(targets[:0]).motions)
