"""What two joints hold fixed: directions, divisors and shares of pairs of each kind."""

import numpy as np
import pytest

from kinematics.inverse.regional_pairs import (
    ACROSS,
    ALONG,
    E1,
    E2,
    HA,
    HB,
    KIND,
    PA,
    PAIR,
    PB,
    QA,
    QB,
    SHARE_A,
    SHARE_B,
    SLIDE_SLIDE,
    SLIDE_TURN,
    TURN_SLIDE,
    TURN_TURN,
    U,
    write_pair,
)
from tests.kinematics.inverse.regional_cases import Cases, cases_of

KINDS = {
    (False, False): TURN_TURN,
    (False, True): TURN_SLIDE,
    (True, False): SLIDE_TURN,
    (True, True): SLIDE_SLIDE,
}


def pair_of(cases: Cases, case: int) -> np.ndarray:
    pair = np.full(PAIR, np.nan)
    pair[[SHARE_A, SHARE_B]] = 0.0
    write_pair(cases.slides, cases.axes[case], cases.points[case], pair)
    return pair


def vector(pair: np.ndarray, at: int) -> np.ndarray:
    return pair[at : at + 3]


@pytest.mark.parametrize("slides", list(KINDS))
@pytest.mark.parametrize("special", ["", "parallel", "meet", "square"])
def test_directions_are_square_and_the_record_is_whole(
    slides: tuple[bool, bool], special: str
) -> None:
    cases = cases_of(np.random.default_rng(1), 50, (*slides, False), special)
    for case in range(50):
        pair = pair_of(cases, case)
        assert np.isfinite(pair).all()
        assert pair[KIND] == KINDS[slides]
        about = HA if slides == (False, True) else HB
        frame = np.array([vector(pair, at) for at in (E1, E2, about)])
        assert np.abs(frame @ frame.T - np.eye(3)).max() < 1e-14
        assert np.linalg.det(frame) == pytest.approx(1.0)
        assert pair[ALONG] == pytest.approx(vector(pair, HA) @ vector(pair, HB), abs=1e-15)
        assert pair[ACROSS] ** 2 + pair[ALONG] ** 2 == pytest.approx(1.0)


@pytest.mark.parametrize("special", ["", "parallel", "skewed", "meet"])
@pytest.mark.parametrize("off", [0.0, 1e-12, 1e-8, 1e-5, 1e-3])
def test_places_of_turning_axes_are_on_them_and_shares_keep_small(special: str, off: float) -> None:
    cases = cases_of(np.random.default_rng(2), 50, special=special, off=off)
    for case in range(50):
        pair, axes, points = pair_of(cases, case), cases.axes[case], cases.points[case]
        for at, axis, point in ((PA, axes[0], points[0]), (PB, axes[1], points[1])):
            assert np.linalg.norm(np.cross(vector(pair, at) - point, axis)) < 1e-13
        assert np.linalg.norm(vector(pair, U)) < 2.0
        assert max(abs(pair[SHARE_A]), abs(pair[SHARE_B])) <= 1.0 + 1e-9
        if off == 0.0 and special == "meet":
            assert abs(pair[QA]) < 1e-13
        if special == "parallel":
            assert abs(pair[QB]) == pytest.approx(off, rel=1e-6, abs=1e-15)


def test_common_normal_of_axes_square_to_each_other() -> None:
    pair = np.zeros(PAIR)
    axes, points = np.eye(3)[[2, 0]], np.array([[0.0, 0, 5], [7.0, 0.3, 0]])
    write_pair(np.zeros(2, bool), axes, points, pair)
    assert vector(pair, PA) == pytest.approx([0.0, 0.0, 0.0])
    assert vector(pair, PB) == pytest.approx([0.0, 0.3, 0.0])
    assert abs(pair[QA]) == pytest.approx(0.3)
    assert abs(pair[QB]) == pytest.approx(1.0)
