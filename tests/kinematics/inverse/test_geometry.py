"""Special triples of tables as drawn, as typed, and as measured."""

import numpy as np
import pytest

from kinematics.inverse.geometry import Regime, geometry_of, meeting_point
from kinematics.inverse.screws import Screws, screws_of
from kinematics.table import Row
from tests.kinematics.example_arms import FIVE, SEVEN, SIX, arm_of, prismatic, revolute

QUARTER = np.pi / 2


def of(*rows: Row) -> Screws:
    return screws_of(arm_of(*rows), np.eye(4))


def three_parallel(alpha: float = 0.0) -> tuple[Row, ...]:
    return (
        revolute(alpha=QUARTER, d=0.2),
        revolute(a=0.4, alpha=alpha),
        revolute(a=0.35, alpha=alpha),
        revolute(alpha=QUARTER, d=0.1),
        revolute(alpha=-QUARTER, d=0.1),
        revolute(d=0.08),
    )


def perturbed(rows: tuple[Row, ...], size: float, random: np.random.Generator) -> tuple[Row, ...]:
    return tuple(
        Row(row.joint, *(np.array([row.a, row.alpha, row.d, row.theta]) + of_row))
        for row, of_row in zip(rows, random.uniform(-size, size, size=(len(rows), 4)), strict=True)
    )


def test_a_wrist_that_meets() -> None:
    geometry = geometry_of(of(*SIX))
    wrist = geometry.triples[0]
    assert (wrist.first, wrist.parallel, wrist.regime) == (3, False, Regime.EXACT)
    assert geometry.say == "axes 4, 5 and 6 meet in a point: a spherical wrist"
    assert geometry.regime is Regime.EXACT
    assert geometry.residual < 1e-15


def test_three_parallel_axes() -> None:
    geometry = geometry_of(of(*three_parallel()))
    triple = geometry.triples[0]
    assert (triple.first, triple.parallel, triple.regime) == (1, True, Regime.EXACT)
    assert geometry.say == "axes 2, 3 and 4 are parallel"


def test_axes_of_opposite_sense_are_parallel_too() -> None:
    triple = geometry_of(of(*three_parallel(np.pi))).triples[0]
    assert triple.parallel
    assert triple.regime is Regime.EXACT


@pytest.mark.parametrize(
    ("alpha", "regime"), [(3.1416, Regime.ROUNDED), (3.142, Regime.CALIBRATED), (3.2, None)]
)
def test_angles_typed_with_few_decimals(alpha: float, regime: Regime | None) -> None:
    screws = of(*three_parallel(alpha))
    geometry = geometry_of(screws)
    assert geometry.regime is regime
    if regime is Regime.ROUNDED:
        assert geometry.say == "axes 2, 3 and 4 are parallel within 7.3 urad: treated as parallel"
    if regime is not None:
        assert geometry.residual == pytest.approx(alpha - np.pi, rel=0.4)


def test_quarter_turns_typed_with_four_decimals_still_meet_exactly() -> None:
    rows = tuple(Row(row.joint, row.a, round(row.alpha, 4), row.d, row.theta) for row in SIX)
    triple = geometry_of(of(*rows)).triples[0]
    assert triple.first == 3
    assert triple.regime is Regime.EXACT


@pytest.mark.parametrize(
    ("size", "regime"), [(1e-7, Regime.ROUNDED), (1e-4, Regime.CALIBRATED), (0.1, None)]
)
def test_measured_tables(size: float, regime: Regime | None) -> None:
    random = np.random.default_rng(11)
    for _ in range(20):
        geometry = geometry_of(of(*perturbed(SIX, size, random)))
        assert geometry.regime is regime
    if regime is Regime.CALIBRATED:
        assert "nearly a spherical wrist, some solutions may be missed" in geometry.say
        assert " um: " in geometry.say or " mm: " in geometry.say
    if regime is None:
        assert geometry.say == "no three neighbouring axes meet in a point or are parallel"
        assert geometry.residual == 0.0


@pytest.mark.parametrize("rows", [SIX, three_parallel()])
def test_the_arm_that_is_solved_has_the_triple_exactly_and_is_close(rows: tuple[Row, ...]) -> None:
    random = np.random.default_rng(12)
    for size in (1e-7, 1e-5, 1e-3):
        screws = of(*perturbed(rows, size, random))
        for triple in geometry_of(screws).triples:
            again = [
                other
                for other in geometry_of(triple.solved).triples
                if (other.first, other.parallel) == (triple.first, triple.parallel)
            ]
            assert again[0].regime is Regime.EXACT
            assert np.abs(triple.solved.axis - screws.axis).max() <= 3.0 * triple.residual
            # Points may be moved along their axes as far as one likes: they stay on the line.
            moved = np.cross(triple.solved.point - screws.point, screws.axis)
            assert np.abs(moved).max() <= 2.0 * triple.residual
            assert (triple.solved.tool_at_zero == screws.tool_at_zero).all()


def test_a_shoulder_that_meets_is_told_apart_from_a_wrist() -> None:
    rows = (
        revolute(alpha=-QUARTER, d=0.3),
        revolute(alpha=QUARTER),
        revolute(a=0.3, alpha=1.0, d=0.2),
        revolute(a=0.2, alpha=0.7, d=0.1),
        revolute(a=0.1, alpha=-0.9, d=0.15),
        revolute(a=0.05, d=0.1),
    )
    geometry = geometry_of(of(*rows))
    assert geometry.triples[0].first == 0
    assert geometry.say == "axes 1, 2 and 3 meet in a point: a spherical shoulder"


def test_sliding_joints_and_joints_that_do_the_same_are_no_triple() -> None:
    slide_in_the_wrist = (*SIX[:4], prismatic(alpha=QUARTER), SIX[5])
    assert not [t for t in geometry_of(of(*slide_in_the_wrist)).triples if t.first == 3]
    on_one_line = (revolute(d=0.3), revolute(d=0.2), revolute(alpha=QUARTER))
    assert geometry_of(of(*on_one_line)).triples == ()


def test_arms_of_any_number_of_rows() -> None:
    # Shoulder, elbow and wrist.
    assert [t.first for t in geometry_of(of(*SEVEN)).triples if not t.parallel] == [4, 2, 0]
    assert [t.first for t in geometry_of(of(*FIVE)).triples if t.parallel] == [1]
    assert geometry_of(of(revolute(), revolute())).triples == ()


def test_meeting_point_far_from_the_base_keeps_its_digits() -> None:
    random = np.random.default_rng(5)
    axis = random.normal(size=(3, 3))
    axis /= np.linalg.norm(axis, axis=1, keepdims=True)
    met = np.array([1e3, -2e3, 5e2])
    found = meeting_point(axis, met + random.uniform(-0.3, 0.3, (3, 1)) * axis)
    assert np.abs(found - met).max() < 1e-11
