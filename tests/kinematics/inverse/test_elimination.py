"""Every solution of six joints in general position: none missed, none made up, no false no.

Full sizes: python -m tests.benchmarks.elimination.
"""

import numpy as np
import pytest
from scipy.optimize import least_squares

from kinematics.inverse.elimination import CHUNK, Elimination, elimination_of
from kinematics.inverse.landing import gap_to, land
from kinematics.inverse.screws import Screws, screws_of
from tests.kinematics.inverse.general_arms import FAMILIES, SIXTEEN, counts_by_order, sliding
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.inverse.triple_arms import Draw
from tests.kinematics.inverse.triple_sets import folds, jacobians_at, tools_at

COUNT = 60
SLIDING = {f"joint {place + 1} slides": sliding(place) for place in range(6)}


def solver_of(draw: Draw, rng: np.random.Generator) -> Elimination:
    solver = elimination_of(screws_of(draw(rng), np.eye(4)))
    assert solver is not None
    return solver


def away(screws: Screws, motions: np.ndarray, others: np.ndarray) -> np.ndarray:
    apart = np.abs(motions - others)
    turned = np.minimum(apart, np.abs(apart - 2 * np.pi))
    return np.where(screws.prismatic, apart, turned).max(axis=1, initial=0.0)


@pytest.mark.parametrize("name", [*FAMILIES, *SLIDING])
def test_the_motions_a_target_was_made_from_come_back(name: str) -> None:
    rng = fresh()
    draw = {**FAMILIES, **SLIDING}[name]
    for _ in range(3):
        solver = solver_of(draw, rng)
        screws = solver.screws
        slides = screws.prismatic
        motions = rng.uniform(-np.pi, np.pi, (COUNT, 6)) * np.where(slides, 0.15, 1.0)
        targets = tools_at(screws, motions)
        found = solver.solve(targets)
        best = np.full(COUNT, np.inf)
        np.minimum.at(best, found.target, away(screws, found.motions, motions[found.target]))
        lost = motions[best > 1e-6]
        # Beside a singular posture two solutions are one, or a target has a continuum of them.
        values = np.linalg.svd(jacobians_at(screws, lost), compute_uv=False)[:, -1]
        assert (values < 1e-6).all()
        reached = tools_at(screws, found.motions)
        np.testing.assert_allclose(reached, targets[found.target], rtol=0.0, atol=1e-9)
        assert found.position_error.max() < 1e-9 * screws.length
        assert (found.count_per_target() <= 16).all()
        assert not (found.open & (found.count_per_target() == 0)).any()


def test_the_arm_with_sixteen_solutions_has_all_of_them() -> None:
    # Motions whose target has sixteen, and each of them leads to the same place.
    solver = elimination_of(screws_of(SIXTEEN, np.eye(4)))
    assert solver is not None
    known = [[-3.108888, 1.888301, 0.563151, -3.042227, -0.267479, -0.007322]]
    target = tools_at(solver.screws, np.array(known))
    found = solver.solve(target)
    assert len(found.motions) == 16
    apart = np.abs(found.motions[:, None] - found.motions[None])
    apart = np.minimum(apart, np.abs(apart - 2 * np.pi)).max(axis=2)
    assert apart[~np.eye(16, dtype=bool)].min() > 1e-3
    assert away(solver.screws, found.motions, np.array(known)).min() < 1e-8
    assert counts_by_order(solver, target)[0].tolist() == [16]


def test_shares_of_four_eight_twelve_and_sixteen() -> None:
    solver = elimination_of(screws_of(SIXTEEN, np.eye(4)))
    assert solver is not None
    targets = tools_at(solver.screws, fresh().uniform(-np.pi, np.pi, (600, 6)))
    counts = solver.solve(targets).count_per_target()
    # 27, 39, 24 and 10.5 in a hundred of 20 000; six standard deviations of 600 are 12.
    for count, share in ((4, 0.27), (8, 0.39), (12, 0.24), (16, 0.105)):
        assert abs((counts == count).mean() - share) < 0.12
    assert not (counts % 4).any()


def test_both_orders_find_as_many() -> None:
    rng = fresh()
    solver = solver_of(FAMILIES["general"], rng)
    targets = tools_at(solver.screws, rng.uniform(-np.pi, np.pi, (200, 6)))
    one, other = counts_by_order(solver, targets)
    assert solver.second is not None
    assert solver.second.positions[2] != solver.first.positions[2]
    assert (one == other).mean() > 0.98
    np.testing.assert_array_equal(solver.solve(targets).count_per_target(), np.maximum(one, other))


def test_what_scipy_finds_is_among_them() -> None:
    rng = fresh()
    solver = solver_of(FAMILIES["general"], rng)
    screws = solver.screws
    target = tools_at(screws, rng.uniform(-np.pi, np.pi, (1, 6)))
    found, scaled = solver.solve(target), screws.scaled(target)[0]
    axis, point, pose, gap = np.empty((6, 3)), np.empty((6, 3)), np.eye(4), np.empty(6)

    def residual(motions: np.ndarray) -> np.ndarray:
        lines = screws.axis, screws.point, screws.prismatic, screws.tool_at_zero
        land(*lines, motions, axis, point, pose)
        gap_to(pose, scaled, gap)
        return gap.copy()

    met = 0
    for start in rng.uniform(-np.pi, np.pi, (30, 6)):
        tried = least_squares(residual, start, method="lm", xtol=1e-14, ftol=1e-14)
        if np.linalg.norm(tried.fun) < 1e-10:
            met += 1
            assert away(screws, found.motions, tried.x[None] % (2 * np.pi)).min() < 1e-5
    assert met >= 5


def test_a_no_is_proved_beyond_reach_and_nothing_is_made_up() -> None:
    rng = fresh()
    solver = solver_of(FAMILIES["general"], rng)
    targets = tools_at(solver.screws, rng.uniform(-np.pi, np.pi, (COUNT, 6)))
    targets[:, 0, 3] += 2.5 * solver.screws.length
    found = solver.solve(targets)
    assert len(found.motions) == 0
    assert found.open.mean() < 0.1
    nearest = tools_at(solver.screws, solver.nearest(targets[:2]))
    left = np.linalg.norm(nearest[:, :3, 3] - targets[:2, :3, 3], axis=1)
    # The arm stretches towards it: at most its length of the distance is made good.
    assert (left > 0.4 * solver.screws.length).all()
    assert (left < np.linalg.norm(targets[:2, :3, 3], axis=1)).all()


@pytest.mark.parametrize("name", ["general", "offset wrist, 2 3 parallel", "right angles"])
def test_at_exact_folds_there_is_a_witness(name: str) -> None:
    rng = fresh()
    solver = solver_of(FAMILIES[name], rng)
    motions = folds(rng, solver.screws, rng.uniform(-np.pi, np.pi, (150, 6)))
    assert len(motions) > 20
    assert (solver.solve(tools_at(solver.screws, motions)).count_per_target() > 0).all()


def test_in_pieces_and_alone_as_in_one() -> None:
    rng = fresh()
    solver = solver_of(FAMILIES["general"], rng)
    targets = tools_at(solver.screws, rng.uniform(-np.pi, np.pi, (CHUNK + 3, 6)))
    found = solver.solve(targets)
    last = solver.solve(targets[-1:])
    mine = found.motions[found.target == CHUNK + 2]
    np.testing.assert_allclose(last.motions, mine, atol=1e-9)
    none = solver.solve(targets[:0])
    assert (len(none.motions), len(none.open)) == (0, 0)


def test_arms_it_is_not_for() -> None:
    rng = fresh()
    two = screws_of(sliding(0)(rng), np.eye(4))
    two.prismatic[3] = True
    assert elimination_of(two) is None
    five = screws_of(FAMILIES["general"](rng), np.eye(4))
    shorter = Screws(five.axis[:5], five.point[:5], five.prismatic[:5], five.tool_at_zero, 1.0)
    assert elimination_of(shorter) is None
    # All axes through one point: whatever the order, nothing fixes where the tool is.
    one_point = Screws(five.axis, np.zeros((6, 3)), five.prismatic, five.tool_at_zero, 1.0)
    assert elimination_of(one_point) is None
