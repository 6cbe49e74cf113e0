"""Which rows are refused, where and why, and the constants a table becomes."""

import math
from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from kinematics.errors import InvalidArm, KinematicsError, NotFinite, OutOfRange, TooManyRows
from kinematics.table import (
    Convention,
    Coupling,
    JointKind,
    Table,
    Travel,
    check_number,
    check_travel,
    link_of,
    turn_about_z,
)
from tests.kinematics.example_arms import QUARTER, prismatic, revolute

GOOD = revolute(a=0.4, alpha=0.1, d=0.2, theta=0.3)


def refusal_of(**changes: Any) -> KinematicsError:
    """Return what a table says to a third row with these changes."""
    with pytest.raises(KinematicsError) as caught:
        Table(Convention.STANDARD, (GOOD, GOOD, replace(GOOD, **changes)))
    assert caught.value.way_out
    return caught.value


@pytest.mark.parametrize("name", ["a", "alpha", "d", "theta", "top_speed"])
@pytest.mark.parametrize(
    ("value", "kind"),
    [(math.nan, NotFinite), (math.inf, NotFinite), (-math.inf, NotFinite), (1.01e9, OutOfRange)],
)
def test_numbers_that_cannot_be_used(name: str, value: float, kind: type) -> None:
    error = refusal_of(**{name: value})
    assert type(error) is kind
    assert error.where == ("rows", 2, name)
    assert error.value is value


def test_the_largest_magnitude_is_still_taken() -> None:
    row = revolute(a=1e9, alpha=-1e9, d=-1e9, theta=1e9)
    assert Table(Convention.STANDARD, (row,)).rows == (row,)
    check_number(-1e9, ())


@pytest.mark.parametrize("which", ["travel", "working_travel"])
@pytest.mark.parametrize("bounds", [(1.0, -1.0), (0.5, 0.5)])
def test_reversed_and_empty_travel(which: str, bounds: tuple[float, float]) -> None:
    error = refusal_of(**{which: Travel(*bounds)})
    assert type(error) is InvalidArm
    assert error.where == ("rows", 2, which)
    assert error.value == list(bounds)
    assert f"{which.replace('_', ' ')} of row 3" in str(error)


@pytest.mark.parametrize("which", ["travel", "working_travel"])
@pytest.mark.parametrize("position", [0, 1])
@pytest.mark.parametrize(("bound", "kind"), [(math.nan, NotFinite), (2e9, OutOfRange)])
def test_bounds_that_cannot_be_used(which: str, position: int, bound: float, kind: type) -> None:
    bounds = [-1.0, 1.0]
    bounds[position] = bound
    error = refusal_of(**{which: Travel(*bounds)})
    assert type(error) is kind
    assert error.where == ("rows", 2, which, position)


@pytest.mark.parametrize("working", [(-1.1, 0.5), (-0.5, 1.1), (-2.0, 2.0)])
def test_working_travel_stays_inside_travel(working: tuple[float, float]) -> None:
    error = refusal_of(travel=Travel(-1.0, 1.0), working_travel=Travel(*working))
    assert type(error) is InvalidArm
    assert error.where == ("rows", 2, "working_travel")
    inside = replace(GOOD, travel=Travel(-1.0, 1.0), working_travel=Travel(-1.0, 1.0))
    assert Table(Convention.STANDARD, (inside,)).rows == (inside,)


@pytest.mark.parametrize("speed", [0.0, -1.0])
def test_a_top_speed_is_positive(speed: float) -> None:
    error = refusal_of(top_speed=speed)
    assert type(error) is InvalidArm
    assert error.where == ("rows", 2, "top_speed")


@pytest.mark.parametrize("direction", [0, 2, -3])
def test_a_direction_is_1_or_minus_1(direction: int) -> None:
    error = refusal_of(direction=direction)
    assert type(error) is InvalidArm
    assert error.where == ("rows", 2, "direction")
    assert error.value == direction


@pytest.mark.parametrize(("ratio", "kind"), [(math.nan, NotFinite), (1e10, OutOfRange)])
def test_ratios_that_cannot_be_used(ratio: float, kind: type) -> None:
    error = refusal_of(couplings=(Coupling(1, 1.0), Coupling(2, ratio)))
    assert type(error) is kind
    assert error.where == ("rows", 2, "couplings", 1, "ratio")


def test_thirty_two_rows_and_no_more() -> None:
    assert len(Table(Convention.MODIFIED, (GOOD,) * 32).rows) == 32
    with pytest.raises(TooManyRows, match="33 rows") as caught:
        Table(Convention.MODIFIED, (GOOD,) * 33)
    assert caught.value.where == ("rows",)
    assert caught.value.value == 33
    assert caught.value.code == "too-large"


def test_units_and_offsets_of_rows() -> None:
    assert (GOOD.is_revolute, GOOD.offset, GOOD.unit) == (True, 0.3, "rad")
    slide = prismatic(d=0.2, theta=0.3)
    assert (slide.is_revolute, slide.offset, slide.unit) == (False, 0.2, "m")
    assert JointKind("prismatic") is slide.joint


ROWS = (
    revolute(a=0.1, alpha=QUARTER, d=0.2, theta=0.3),
    prismatic(a=-0.4, alpha=-0.5, d=0.6, theta=0.7),
)


def test_constants_of_a_standard_table() -> None:
    chain = Table(Convention.STANDARD, ROWS).chain
    assert (chain.first == np.eye(4)).all()
    assert (chain.link == [link_of(0.1, QUARTER), link_of(-0.4, -0.5)]).all()
    assert (chain.offset == [turn_about_z(0.3, 0.2), turn_about_z(0.7, 0.6)]).all()
    assert chain.revolute.tolist() == [True, False]


def test_constants_of_a_modified_table_are_one_link_earlier() -> None:
    chain = Table(Convention.MODIFIED, ROWS).chain
    assert (chain.first == link_of(0.1, QUARTER)).all()
    assert (chain.link == [link_of(-0.4, -0.5), np.eye(4)]).all()
    assert (chain.offset == [turn_about_z(0.3, 0.2), turn_about_z(0.7, 0.6)]).all()


@pytest.mark.parametrize("convention", Convention)
def test_constants_of_an_empty_table(convention: Convention) -> None:
    chain = Table(convention, ()).chain
    assert (chain.first == np.eye(4)).all()
    assert chain.link.shape == chain.offset.shape == (0, 4, 4)
    assert chain.revolute.shape == (0,)


def test_elementary_motions_by_hand() -> None:
    """A quarter about z takes x to y and lifts; a quarter about x takes y to z, a along x."""
    lifted = turn_about_z(QUARTER, 0.2) @ [1, 0, 0, 1]
    np.testing.assert_allclose(lifted, [0, 1, 0.2, 1], rtol=0.0, atol=1e-16)
    linked = link_of(0.5, QUARTER) @ [0, 1, 0, 1]
    np.testing.assert_allclose(linked, [0.5, 0, 1, 1], rtol=0.0, atol=1e-16)


def test_tables_with_the_same_rows_are_equal() -> None:
    assert Table(Convention.STANDARD, ROWS) == Table(Convention.STANDARD, ROWS)
    assert Table(Convention.STANDARD, ROWS) != Table(Convention.MODIFIED, ROWS)
    assert Table(Convention.STANDARD, ROWS) != Table(Convention.STANDARD, ROWS[:1])


def test_check_travel_says_whose() -> None:
    with pytest.raises(InvalidArm, match="travel of the lift is reversed") as caught:
        check_travel(Travel(2.0, 1.0), ("lift",), "travel of the lift")
    assert caught.value.where == ("lift",)
