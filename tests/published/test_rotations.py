"""All cases of data/rotations.json through the Python API, within the tolerance of each case."""

import json
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from kinematics.errors import InvalidOrientation, NotRigid
from kinematics.orientation_forms import lock_finding, rotation_from, values_of
from kinematics.orientation_input import checked_rotation
from kinematics.rigidity import defect, nearest_rotation
from kinematics.rotations import angle_of, rotation_about
from kinematics.tolerances import RIGID_SILENT

Case = dict[str, Any]

FILE = json.loads((Path(__file__).parent / "data" / "rotations.json").read_text())
CASES: dict[str, Case] = {case["id"]: case for case in FILE["cases"]}


def named(*numbers: int) -> list[str]:
    return [f"rot-{number:02d}" for number in numbers]


TRIPLES = named(*range(1, 15))
COMPOSITIONS = named(15, 16, 17)
CONVERSIONS = named(*range(18, 24))
GIMBAL_LOCKS = named(24, 25, 26, 27)
MATRICES_OFF = named(28, 29, 30, 31)
QUATERNIONS_OFF = named(32, 33)
PASSIVE = named(34)


def test_every_case_of_the_file_has_its_test() -> None:
    tested = [
        *(*TRIPLES, *COMPOSITIONS, *CONVERSIONS, *GIMBAL_LOCKS),
        *(*MATRICES_OFF, *QUATERNIONS_OFF, *PASSIVE),
    ]
    assert FILE["count"] == len(CASES) == len(tested) == 34
    assert set(tested) == set(CASES)


def assert_within(case: Case, actual: object, expected: object) -> None:
    np.testing.assert_allclose(actual, expected, rtol=0.0, atol=case["tolerance"]["abs"])


def assert_same_up_to_sign(case: Case, actual: np.ndarray, expected: object) -> None:
    expected = np.asarray(expected)
    assert_within(case, actual * np.sign(actual @ expected), expected)


def form_of(values: Case) -> str:
    return f"{values['seq']}-{values['axes']}"


@pytest.mark.parametrize("name", TRIPLES)
def test_triples_to_matrix_and_to_all_that_is_stated(name: str) -> None:
    case = CASES[name]
    given, expected = case["input"], case["expected"]
    rotation = rotation_from(form_of(given), given["angles"])
    assert_within(case, rotation, expected["matrix"])
    if "angle_to_rot_13" in expected:
        other = np.asarray(CASES["rot-13"]["expected"]["matrix"])
        assert_within(case, angle_of(other.T @ rotation), expected["angle_to_rot_13"])
    if "canonical_angles" in expected:
        assert_within(case, values_of(form_of(given), rotation), expected["canonical_angles"])
        twin = expected["fixed_axis_equivalent"]
        assert_within(case, rotation_from(form_of(twin), twin["angles"]), expected["matrix"])
        assert_within(case, values_of(form_of(twin), rotation), twin["angles"])
        second = rotation_from(form_of(given), expected["second_triple"])
        assert_within(case, second, expected["matrix"])
        quaternion = values_of("quaternion-wxyz", rotation)
        assert_same_up_to_sign(case, quaternion, expected["quaternion_wxyz"])
        assert_within(case, values_of("rotation-vector", rotation), expected["rotation_vector"])


def test_all_twelve_sequences_occur() -> None:
    assert len({CASES[name]["input"]["seq"] for name in TRIPLES}) == 12


@pytest.mark.parametrize(
    ("name", "given", "expected"),
    [(name, "operations", "matrix") for name in COMPOSITIONS]
    + [("rot-16", "operations_b", "matrix_b")],
)
def test_compositions_about_fixed_and_current_axes(name: str, given: str, expected: str) -> None:
    case = CASES[name]
    rotation = np.eye(3)
    for operation in case["input"][given]:
        axis = operation.get("axis") or np.eye(3)["xyz".index(operation["about"])]
        turn = rotation_about(axis, operation["angle"])
        rotation = turn @ rotation if operation["frame"] == "fixed" else rotation @ turn
    assert_within(case, rotation, case["expected"][expected])


@pytest.mark.parametrize("route", ["as given", "from the matrix"])
@pytest.mark.parametrize("name", CONVERSIONS)
def test_conversions_at_plain_and_at_extreme_angles(name: str, route: str) -> None:
    case = CASES[name]
    expected = case["expected"]
    ((key, values),) = case["input"].items()
    form = {"quaternion_wxyz": "quaternion-wxyz", "rotation_vector": "rotation-vector"}.get(
        key, "matrix"
    )
    if route == "from the matrix":
        form, values = "matrix", expected["matrix"]
    rotation, findings = checked_rotation(form, values)
    assert findings == ()
    assert_within(case, rotation, expected["matrix"])
    quaternion = values_of("quaternion-wxyz", rotation)
    assert_same_up_to_sign(case, quaternion, expected["quaternion_wxyz"])
    assert_within(case, angle_of(rotation), expected["angle"])
    vector = values_of("rotation-vector", rotation)
    assert_within(case, np.outer(vector, vector), np.outer(*[expected["rotation_vector"]] * 2))
    if name != "rot-22":  # there the sign of the axis is free
        assert_within(case, vector, expected["rotation_vector"])
    assert_within(case, values_of("zyx-current", rotation), expected["euler_zyx_current"])
    assert_within(case, values_of("zyz-current", rotation), expected["euler_zyz_current"])


@pytest.mark.parametrize("name", GIMBAL_LOCKS)
def test_gimbal_lock_gives_last_zero_and_the_determined_combination(name: str) -> None:
    case = CASES[name]
    given, expected = case["input"], case["expected"]
    assert expected["gimbal_lock"] is True
    form = form_of(given)
    rotation, findings = checked_rotation("matrix", given["matrix"])
    assert findings == ()
    first, middle, last = values_of(form, rotation)
    assert last == 0.0
    assert_within(case, middle, expected["middle"])
    assert_within(case, first, expected["combination_value"])  # with last = 0, sum and difference
    assert_within(case, rotation_from(form, [first, middle, last]), expected["matrix"])
    finding = lock_finding(form, rotation)
    assert finding is not None
    assert finding.code == 5
    combination = expected["combination"].replace("third", "last")
    assert f"{combination} = {expected['combination_value']:.9g} rad" in finding.say


@pytest.mark.parametrize("name", MATRICES_OFF)
def test_matrices_that_are_no_rotations(name: str) -> None:
    case = CASES[name]
    matrix, expected = case["input"]["matrix"], case["expected"]
    assert expected["accept"] is False
    size = expected["max_abs_of_RtR_minus_I"]
    assert_within(case, defect(matrix), size)
    if "nearest_rotation_frobenius" in expected:
        assert_within(case, nearest_rotation(matrix), expected["nearest_rotation_frobenius"])
    if name == "rot-28":  # 0.1 % of scale is what three decimals leave: repaired, and said so
        rotation, (finding,) = checked_rotation("matrix", matrix)
        assert_within(case, rotation, expected["nearest_rotation_frobenius"])
        assert (finding.code, finding.threshold) == (6, RIGID_SILENT)
        assert_within(case, finding.measure, size)
        assert "0.002001" in finding.text()
        return
    with pytest.raises(NotRigid, match="mirrored" if name == "rot-29" else "no rotation") as caught:
        checked_rotation("matrix", matrix)
    assert_within(case, caught.value.defect, size)


def test_zero_quaternion_is_refused() -> None:
    case = CASES["rot-32"]
    assert case["expected"]["accept"] is False
    with pytest.raises(InvalidOrientation, match="no direction"):
        checked_rotation("quaternion-wxyz", case["input"]["quaternion_wxyz"])


def test_quaternion_of_norm_1_1_is_normalised_with_a_finding() -> None:
    case = CASES["rot-33"]
    expected = case["expected"]
    rotation, (finding,) = checked_rotation("quaternion-wxyz", case["input"]["quaternion_wxyz"])
    assert_within(case, rotation, expected["matrix"])
    assert_within(case, values_of("quaternion-wxyz", rotation), expected["normalised_wxyz"])
    assert finding.code == 6
    assert_within(case, 1.0 + finding.measure, expected["norm"])


def test_active_matrices_are_the_transposes_of_passive_ones() -> None:
    case = CASES["rot-34"]
    rotation = rotation_from("xyz-fixed", case["input"]["roll_pitch_yaw"])
    assert_within(case, rotation, case["expected"]["active_body_to_world"])
    assert_within(case, rotation.T, case["expected"]["passive_world_to_body"])
    other = rotation_from("zyx-current", case["input"]["roll_pitch_yaw"][::-1])
    assert_within(case, other, case["expected"]["active_body_to_world"])
