"""Units at the edge: exact where the trade expects it, and back to the digits that were typed."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from kinematics.arm import Arm
from kinematics.findings import Finding
from kinematics.table import Convention, JointKind, Row, Table
from kinematics.transforms import pose
from service.convert import (
    UNITS,
    finding_out,
    jacobians_out,
    joint_values_in,
    joint_values_out,
    orientation_in,
    orientation_values_out,
    pose_orientations_out,
    twists_in,
    twists_out,
)

MM, M, INCH = UNITS["mm-deg"], UNITS["m-rad"], UNITS["in-deg"]
ROW = Row(JointKind.REVOLUTE, 0.0, 0.0, 0.0, 0.0)
MIXED = Arm("mixed", Table(Convention.STANDARD, (ROW, Row(JointKind.PRISMATIC, 0, 0, 0, 0))))
each_units = pytest.mark.parametrize("units", UNITS.values(), ids=list(UNITS))


def test_the_unit_systems() -> None:
    assert list(UNITS) == ["mm-deg", "m-rad", "in-deg"]
    assert all(f"{units.length}-{units.angle}" == name for name, units in UNITS.items())


@given(millimetres=st.integers(-(10**9), 10**9))
def test_whole_millimetres_are_the_nearest_double_of_metres(millimetres: int) -> None:
    assert MM.length_in(float(millimetres)) == float(f"{millimetres}e-3")


def test_an_inch_is_25_4_mm() -> None:
    assert INCH.length_in(1.0) == 0.0254
    assert INCH.length_out(0.0254) == 1.0
    assert INCH.length_in(100.0) == pytest.approx(2.54, rel=1e-15)


def test_right_angles_are_the_doubles_of_pi() -> None:
    assert MM.angle_in(90.0) == math.pi / 2
    assert MM.angle_in(180.0) == math.pi
    assert MM.angle_out(math.pi / 2) == 90.0
    assert M.angle_in(90.0) == 90.0


@each_units
@given(typed=st.decimals(-9999, 9999, places=4))
def test_what_was_typed_comes_back(units: object, typed: object) -> None:
    value = float(typed)  # type: ignore[arg-type]
    for unit in ("m", "rad"):
        assert units.shortest_out(units.value_in(value, unit), unit) == value  # type: ignore[attr-defined]


@each_units
@given(si=st.floats(-1e9, 1e9))
def test_the_shortest_digits_lead_back(units: object, si: float) -> None:
    for unit in ("m", "rad", ""):
        shown = units.shortest_out(si, unit)  # type: ignore[attr-defined]
        back = units.value_in(shown, unit) if unit else shown  # type: ignore[attr-defined]
        assert back == pytest.approx(si, rel=4e-16, abs=0)


def test_joint_values_by_the_kind_of_their_joint() -> None:
    values = np.array([[90.0, 250.0], [-180.0, 0.0]])
    si = joint_values_in(MIXED, MM, values)
    np.testing.assert_array_equal(si, [[math.pi / 2, 0.25], [-math.pi, 0.0]])
    np.testing.assert_array_equal(joint_values_out(MIXED, MM, si), values)
    np.testing.assert_array_equal(joint_values_in(MIXED, M, values), values)
    empty = Arm("empty", Table(Convention.STANDARD, ()))
    assert joint_values_in(empty, MM, np.empty((2, 0))).shape == (2, 0)


def test_twists() -> None:
    twist = np.array([1000.0, 0.0, -500.0, 90.0, 0.0, 180.0])
    si = twists_in(MM, twist)
    np.testing.assert_allclose(si, [1, 0, -0.5, math.pi / 2, 0, math.pi], rtol=1e-15)
    np.testing.assert_allclose(twists_out(MM, si), twist, rtol=1e-15)


def test_a_jacobian_is_tool_units_per_joint_unit() -> None:
    ones = np.ones((1, 6, 2))
    per_degree = math.pi / 180
    (matrix,) = jacobians_out(MIXED, MM, ones)
    linear, angular = [1000 * per_degree, 1.0], [1.0, 1 / per_degree / 1000]
    np.testing.assert_allclose(matrix, [linear] * 3 + [angular] * 3, rtol=1e-15)
    np.testing.assert_array_equal(jacobians_out(MIXED, M, ones), ones)


@each_units
def test_a_jacobian_takes_joint_speeds_to_twists(units: object) -> None:
    si = np.arange(12.0).reshape(1, 6, 2) - 5.0
    speeds = np.array([0.7, -0.3])
    shown = jacobians_out(MIXED, units, si)[0] @ joint_values_out(MIXED, units, speeds)  # type: ignore[arg-type]
    np.testing.assert_allclose(shown, twists_out(units, si[0] @ speeds), rtol=1e-14)  # type: ignore[arg-type]


def test_only_angles_of_an_orientation_have_a_unit() -> None:
    turned = np.array([[0.0, -1.0, 0.0], [1.0, 0.0, 0.0], [0.0, 0.0, 1.0]])
    half = math.sqrt(0.5)
    cases: list[tuple[str, list[float] | np.ndarray, float]] = [
        ("zyx-current", [90, 0, 0], math.pi / 2),
        ("zyz-fixed", [90, 0, 0], 0.0),
        ("rotation-vector", [0, 0, 90], math.inf),
        ("matrix", turned, math.inf),
        ("quaternion-wxyz", [half, 0, 0, half], math.inf),
    ]
    for form, values, distance in cases:
        (found,), (from_lock,) = pose_orientations_out(
            MM, form, pose(turned, [1.0, 2.0, 3.0])[None]
        )
        np.testing.assert_allclose(found, values, atol=1e-13)
        assert from_lock == pytest.approx(distance)
        # One orientation as plain numbers says the same.
        (radians,), _ = pose_orientations_out(UNITS["m-rad"], form, pose(turned, [0.0] * 3)[None])
        assert orientation_values_out(MM, form, radians.tolist()) == found.tolist()
    for form, given_values, si in [
        ("xyz-fixed", [180.0, 0.0, 90.0], [math.pi, 0.0, math.pi / 2]),
        ("rotation-vector", [0.0, 180.0, 0.0], [0.0, math.pi, 0.0]),
        ("quaternion-xyzw", [0.0, 0.0, 0.0, 1.0], [0.0, 0.0, 0.0, 1.0]),
    ]:
        np.testing.assert_array_equal(orientation_in(MM, form, np.array(given_values)), si)


def test_a_finding_in_the_users_units() -> None:
    finding = Finding(
        4, "outside-travel", "joint {joint} at {measure}, limit {threshold}", math.pi, math.pi / 2,
        "rad", joint=2, row=3,
    )  # fmt: skip
    assert finding_out(INCH, finding) == {
        "code": 4,
        "name": "outside-travel",
        "say": "joint 2 at 180 deg, limit 90 deg",
        "measure": 180.0,
        "threshold": 90.0,
        "unit": "deg",
        "joint": 2,
        "row": 3,
    }
    bare = finding_out(MM, Finding(6, "input-repaired", "off by {measure}", 0.25, 1e-6))
    assert bare["say"] == "off by 0.25"
    assert (bare["unit"], "joint" in bare, "row" in bare) == ("", False, False)
    assert finding_out(MM, Finding(3, "x", "{measure}", 0.4, 0.0, "m"))["say"] == "400 mm"
