"""The four terms, held against the place that known motions of a and b lead to."""

import numpy as np
import pytest

from kinematics.inverse.regional_equations import (
    BESIDE,
    V1,
    V2,
    A,
    B,
    write_equations,
    write_path,
)
from kinematics.inverse.regional_nearest import carry
from kinematics.inverse.regional_pairs import (
    E1,
    E2,
    HA,
    HB,
    PA,
    PAIR,
    PB,
    QA,
    QB,
    write_pair,
)
from kinematics.inverse.trig_roots import CONSTANT, SINE, TERMS, WEIGHT
from tests.kinematics.inverse.regional_cases import Cases, cases_of

CASES = 30


def equations_of(cases: Cases, case: int) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return pair, path and equations."""
    pair, path, equations = np.zeros(PAIR), np.zeros((3, 4)), np.zeros((5, 6))
    axes, points, slides = cases.axes[case], cases.points[case], cases.slides
    write_pair(slides, axes, points, pair)
    write_path(slides[2], axes[2], points[2], cases.is_plane, cases.starts[case], path)
    write_equations(pair, path, cases.is_plane, cases.goals[case], 1e-9, equations)
    return pair, path, equations


def moved(cases: Cases, case: int, joint: int, given: np.ndarray) -> np.ndarray:
    of_joint = cases.slides[joint], cases.axes[case, joint], cases.points[case, joint]
    out = np.zeros(4)
    carry(*of_joint, cases.is_plane, cases.motions[case, joint], given, out)
    return out


def swing_of(cases: Cases, case: int) -> np.ndarray:
    c = cases.motions[case, 2]
    return np.array([1.0, c, 0.0]) if cases.slides[2] else np.array([1.0, np.cos(c), np.sin(c)])


@pytest.mark.parametrize("slides", [(False, False, False), (True, False, False)])
@pytest.mark.parametrize("is_plane", [False, True])
def test_the_path_is_where_joint_c_carries_the_start(
    slides: tuple[bool, ...], is_plane: bool
) -> None:
    cases = cases_of(np.random.default_rng(1), CASES, slides[::-1], is_plane=is_plane)
    for case in range(CASES):
        _, path, _ = equations_of(cases, case)
        start = cases.starts[case].copy()
        if not is_plane:
            start[3] = 1.0
        size = 4 if is_plane and not slides[0] else 3
        at = (swing_of(cases, case) @ path)[:size]
        if not (is_plane and slides[0]):
            assert at == pytest.approx(moved(cases, case, 2, start)[:size], abs=1e-14)


@pytest.mark.parametrize(
    ("slides", "is_plane"),
    [
        ((False, False, False), False),
        ((False, False, False), True),
        ((False, True, False), False),
        ((True, False, False), False),
        ((False, True, True), False),
        ((True, False, True), False),
    ],
)
@pytest.mark.parametrize("special", ["", "parallel", "skewed", "meet", "square"])
def test_terms_tell_the_place_that_b_leads_to(
    slides: tuple[bool, ...], is_plane: bool, special: str
) -> None:
    cases = cases_of(np.random.default_rng(2), CASES, slides, special, is_plane, off=1e-3)
    for case in range(CASES):
        pair, _, equations = equations_of(cases, case)
        at_c = equations[:, CONSTANT : SINE + 1] @ swing_of(cases, case)
        start = cases.starts[case].copy()
        if not is_plane:
            start[3] = 1.0
        after_c = moved(cases, case, 2, start)
        after_b = moved(cases, case, 1, after_c)
        about, place = (HB, PB) if slides[:2] != (False, True) else (HA, PA)
        frame = np.array([pair[at : at + 3] for at in (E1, E2, about)])
        origin = np.zeros(3) if is_plane else pair[place : place + 3]
        if slides[0]:
            # What a leaves to b: the goal without the slide of a.
            back = cases.goals[case, :3] - cases.motions[case, 0] * cases.axes[case, 0]
            y = frame @ (back - origin)
        else:
            y = frame @ (after_b[:3] - origin)
        assert at_c[A] == pytest.approx(pair[QA] * y[0], abs=1e-13)
        assert at_c[B] == pytest.approx(pair[QB] * y[1], abs=1e-13)
        assert np.hypot(at_c[V1], at_c[V2]) == pytest.approx(np.hypot(y[0], y[1]), abs=1e-13)
        if slides[:2] == (False, False):
            assert at_c[BESIDE] == pytest.approx(y[2], abs=1e-13)
        squares = equations[:TERMS, WEIGHT] * at_c[:TERMS] ** 2
        assert abs(squares.sum()) < 1e-14
        assert np.abs(equations[:TERMS, WEIGHT]).max() <= 1.0 + 1e-12
