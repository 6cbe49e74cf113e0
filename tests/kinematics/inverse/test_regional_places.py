"""Tables of places: room that runs out, and motions that are one."""

import numpy as np
import pytest

from kinematics.inverse.regional_arm import regional_arm_of
from kinematics.inverse.regional_places import solve_places
from kinematics.inverse.regional_rows import MOST_ROWS_FOUND
from tests.kinematics.example_arms import PLANAR, SHOULDER_AND_ELBOW, arm_of


def places(count: int) -> np.ndarray:
    drawn = np.random.default_rng(1).uniform(-0.4, 0.4, size=(count, 4))
    drawn[:, 2] = 0.4
    return drawn


def test_a_table_that_runs_full_is_gone_on_with() -> None:
    solver = regional_arm_of(arm_of(*SHOULDER_AND_ELBOW), np.eye(4))
    assert solver is not None
    at = places(40)
    begin, rounds, rows = 0, 0, 0
    while begin < 40:
        room = MOST_ROWS_FOUND + 20
        motions, errors = np.zeros((room, 3)), np.zeros(room)
        of, flags = np.zeros(room, np.int64), np.zeros(40, np.int64)
        begin, count = solve_places(solver.ways, at, begin, 1e-9, 1e-9, motions, of, errors, flags)
        rows, rounds = rows + count, rounds + 1
        assert (of[:count] < begin).all()
    whole = np.tile(np.eye(4), (40, 1, 1))
    whole[:, :3, 3] = at[:, :3] * solver.screws.length
    assert rounds > 3
    assert rows == len(solver.solve(whole).motions)


def test_a_stretched_arm_is_listed_once() -> None:
    solver = regional_arm_of(arm_of(*PLANAR), np.eye(4))
    assert solver is not None
    target = np.tile(np.eye(4), (2, 1, 1))
    target[0, 0, 3] = 0.42 + 0.31
    target[1, :2, 3] = 0.0, 0.11
    found = solver.solve(target)
    assert found.count_per_target().tolist() == [1, 1]
    assert found.motions[0] == pytest.approx([0.0, 0.0], abs=1e-7)
    assert np.abs(found.motions[1]) == pytest.approx([np.pi / 2, np.pi], abs=1e-7)
