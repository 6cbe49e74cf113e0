"""Tables that are nearly special: nothing is lost by taking them as special first."""

import numpy as np
import pytest

from kinematics.inverse.measured_tables import MeasuredTable
from kinematics.inverse.screws import Screws, screws_of
from kinematics.inverse.six_joints import six_joints_of
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.inverse.six_rows import drawn_motions, lost, targets_of
from tests.kinematics.inverse.triple_arms import FAMILIES, arm_of


def measured(random: np.random.Generator, name: str, off: float) -> Screws:
    """Return an arm of a family with each number of its table off by up to ``off``."""
    rows = np.array(
        [[row.a, row.alpha, row.d, row.theta] for row in FAMILIES[name](random).table.rows]
    )
    return screws_of(arm_of(rows + random.uniform(-off, off, rows.shape)), np.eye(4))


@pytest.mark.parametrize("off", [1e-6, 1e-4, 5e-3])
@pytest.mark.parametrize("name", ["elbow with offsets", "three parallel, right angles"])
def test_every_known_posture_of_a_measured_arm_comes_back(name: str, off: float) -> None:
    random = fresh()
    screws = measured(random, name, off)
    solver = six_joints_of(screws)
    assert isinstance(solver, MeasuredTable)
    assert solver.proof == "elimination"
    assert not lost(solver, screws, drawn_motions(random, screws, 300)).any()


def test_the_closed_form_alone_would_lose_some() -> None:
    """A measured wrist: beside folds the special arm nearby has no posture where this one has."""
    random, alone, both = fresh(), 0, 0
    for _ in range(6):
        screws = measured(random, "elbow without offsets", 3e-3)
        solver = six_joints_of(screws)
        assert isinstance(solver, MeasuredTable)
        motions = drawn_motions(random, screws, 400)
        alone += int(lost(solver.closed, screws, motions).sum())
        both += int(lost(solver, screws, motions).sum())
    assert alone > 10
    assert both == 0


def test_what_both_find_is_told_once_and_a_no_is_proved() -> None:
    random = fresh()
    screws = measured(random, "elbow with offsets", 1e-4)
    solver = six_joints_of(screws)
    assert isinstance(solver, MeasuredTable)
    targets = targets_of(screws, drawn_motions(random, screws, 50))
    counts = solver.solve(targets).count_per_target()
    # Of a wrist with an elbow there are eight at most, and they come in pairs.
    assert counts.max() <= 8
    assert (counts % 2 == 0).mean() > 0.95
    targets[:, 2, 3] += 20.0
    found = solver.solve(targets)
    assert not len(found.motions)
    assert not found.open.any()
    assert (found.stage > 0).all()
    assert "as measured" in solver.geometry.say
