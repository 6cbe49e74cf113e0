"""The least distance against shapes whose distance is known, and against scipy from many starts."""

import numpy as np
import pytest
from scipy.optimize import least_squares

from kinematics.inverse.regional_nearest import carry, nearest_regional
from tests.kinematics.inverse.regional_cases import Cases, carried, cases_of, directions


def nearest(cases: Cases, case: int) -> tuple[float, np.ndarray]:
    best = np.zeros(3)
    miss = nearest_regional(
        cases.slides,
        cases.axes[case],
        cases.points[case],
        cases.is_plane,
        cases.starts[case],
        cases.goals[case],
        best,
    )
    return miss, best


def one(cases: Cases, case: int) -> Cases:
    picked = slice(case, case + 1)
    return Cases(
        cases.slides,
        cases.axes[picked],
        cases.points[picked],
        cases.is_plane,
        cases.starts[picked],
        cases.motions[picked],
        cases.goals[picked],
    )


@pytest.mark.parametrize("is_plane", [False, True])
def test_no_start_of_scipy_comes_nearer(is_plane: bool) -> None:
    random = np.random.default_rng(20)
    nearer = 0
    for slides in ((False, False, False), (False, False, True), (True, False, False)):
        cases = cases_of(random, 6, slides, is_plane=is_plane)
        goals = cases.goals.copy()
        goals[:, :3] = directions(random, 6) * (1.0 if is_plane else 1.5)
        cases = cases._replace(goals=goals)
        for case in range(6):
            alone = one(cases, case)
            miss, best = nearest(cases, case)

            def gap(motions: np.ndarray, alone: Cases = alone) -> np.ndarray:
                return (carried(alone, motions[None]) - alone.goals)[0]

            assert np.linalg.norm(gap(best)) == pytest.approx(miss, abs=1e-12)
            by_scipy = min(
                np.sqrt(2.0 * least_squares(gap, random.uniform(-np.pi, np.pi, 3)).cost)
                for _ in range(8)
            )
            nearer += by_scipy < miss - 1e-7
    assert nearer <= 1


@pytest.mark.parametrize(("away", "left"), [(2.0, 1.3), (0.8, 0.1), (0.5, 0.0), (0.05, 0.05)])
def test_the_shell_that_two_links_on_a_waist_reach(away: float, left: float) -> None:
    axes = np.array([[0.0, 0, 1], [0, 1, 0], [0, 1, 0]])
    points = np.array([[0.0, 0, 0], [0, 0, 0], [0.4, 0, 0]])
    start, best = np.array([0.7, 0, 0, 0]), np.zeros(3)
    for goal in directions(np.random.default_rng(4), 20) * away:
        of_goal = axes, points, False, start, np.append(goal, 0.0), best
        assert nearest_regional(np.zeros(3, bool), *of_goal) == pytest.approx(left, abs=1e-9)


def test_a_joint_carries_directions_without_its_place() -> None:
    axis, point, out = np.array([0.0, 0, 1]), np.array([5.0, 0, 0]), np.zeros(4)
    carry(False, axis, point, False, np.pi / 2, np.array([1.0, 0, 0, 0]), out)
    assert out == pytest.approx([0.0, 1.0, 0.0, 0.0])
    carry(True, axis, point, False, 3.0, np.array([1.0, 0, 0, 0]), out)
    assert out == pytest.approx([1.0, 0.0, 0.0, 0.0])
    carry(True, axis, point, True, 3.0, np.array([0.0, 0, 1, 0.5]), out)
    assert out == pytest.approx([0.0, 0.0, 1.0, 3.5])
