"""Poses between the wire and the core, with complaints that lead to the place."""

import math
from typing import Any

import numpy as np
import pytest

from kinematics.errors import InvalidOrientation, KinematicsError, NotRigid, OutOfRange
from kinematics.orientation_forms import FORMS
from service.convert import UNITS
from service.errors import MissingField, UnusableValue
from service.wire.models import Pose
from service.wire.poses import checked_form, lock_findings, pose_answer, read_pose

MM, INCH = UNITS["mm-deg"], UNITS["in-deg"]
AT = ("tools", "pen")


def read(body: dict[str, Any], units: Any = MM) -> tuple[np.ndarray, tuple[Any, ...]]:
    return read_pose(Pose.model_validate(body), units, AT)


def turned(form: str, *values: Any) -> dict[str, Any]:
    return {"position": [0, 0, 0], "orientation": {"form": form, "values": list(values)}}


def test_position_and_orientation() -> None:
    body = {"position": [1, 2, 3], "orientation": {"form": "zyx-current", "values": [90, 0, 0]}}
    x_in_y, findings = read(body)
    expected = [[0, -1, 0, 0.001], [1, 0, 0, 0.002], [0, 0, 1, 0.003], [0, 0, 0, 1]]
    np.testing.assert_allclose(x_in_y, expected, atol=1e-16)
    assert findings == ()


def test_a_matrix_whose_position_has_the_units() -> None:
    matrix = np.eye(4)
    matrix[:3, 3] = [100, 200, -300]
    for units, metres in ((MM, 0.001), (INCH, 0.0254)):
        x_in_y, _ = read({"matrix": matrix.tolist()}, units)
        np.testing.assert_allclose(x_in_y[:3, 3], np.array([100, 200, -300]) * metres, rtol=1e-15)
        np.testing.assert_array_equal(x_in_y[:3, :3], np.eye(3))


@pytest.mark.parametrize("form", FORMS)
def test_what_is_answered_is_read_again(form: str) -> None:
    body = {"position": [1, -2, 3], "orientation": {"form": "xyz-fixed", "values": [10, -20, 130]}}
    x_in_y, _ = read(body)
    again, findings = read(pose_answer(x_in_y, form, MM))
    np.testing.assert_allclose(again, x_in_y, atol=1e-15)
    assert findings == ()


@pytest.mark.parametrize(
    ("body", "kind", "where"),
    [
        ({}, MissingField, (*AT, "position")),
        ({"position": [0, 0, 0]}, MissingField, (*AT, "orientation")),
        (
            {"matrix": np.eye(4).tolist(), "position": [0, 0, 0]},
            UnusableValue,
            (*AT, "matrix"),
        ),
        (turned("zyx", 0, 0, 0), InvalidOrientation, (*AT, "orientation", "form")),
        (turned("zyx-fixed", 0, 0), InvalidOrientation, (*AT, "orientation", "values")),
        (turned("zyx-fixed", 0, "0", 0), InvalidOrientation, (*AT, "orientation", "values", 1)),
        (turned("zyx-fixed", 0, 0, 1e12), OutOfRange, (*AT, "orientation", "values", 2)),
        (turned("quaternion-wxyz", *[0] * 4), InvalidOrientation, (*AT, "orientation", "values")),
        (
            turned("matrix", [1, 0.1, 0], [0, 1, 0], [0, 0, 1]),
            NotRigid,
            (*AT, "orientation", "values"),
        ),
        (
            turned("matrix", [1, 0, 0], [0, 1, 0], [0, 0, "1"]),
            InvalidOrientation,
            (*AT, "orientation", "values", 2, 2),
        ),
        (
            {**turned("zyx-fixed", 0, 0, 0), "position": [0, 2e12, 0]},
            OutOfRange,
            (*AT, "position", 1),
        ),
        ({"matrix": np.diag([1.0, 1, -1, 1]).tolist()}, NotRigid, (*AT, "matrix")),
        ({"matrix": np.diag([1.0, 1, 1, 2]).tolist()}, NotRigid, (*AT, "matrix", 3)),
    ],
)
def test_what_cannot_be_used(
    body: dict[str, Any], kind: type[Exception], where: tuple[str | int, ...]
) -> None:
    with pytest.raises(kind) as caught:
        read(body)
    assert caught.value.where == where  # type: ignore[attr-defined]
    assert caught.value.way_out  # type: ignore[attr-defined]


def test_what_is_repaired_is_said() -> None:
    for body in (
        {"matrix": np.diag([1.001, 1.001, 1.001, 1]).tolist()},
        turned("matrix", [1.001, 0, 0], [0, 1, 0], [0, 0, 1]),
        turned("quaternion-wxyz", 2, 0, 0, 0),
    ):
        x_in_y, (finding,) = read(body)
        assert (finding.code, finding.name) == (6, "input-repaired")
        np.testing.assert_allclose(x_in_y[:3, :3], np.eye(3), atol=1e-15)


def test_answers_are_plain_lists_in_the_users_units() -> None:
    answer = pose_answer(np.eye(4), "matrix", INCH)
    assert answer == {
        "position": [0.0, 0.0, 0.0],
        "orientation": {"form": "matrix", "values": np.eye(3).tolist()},
    }
    moved = np.eye(4)
    moved[0, 3] = 0.0254
    assert pose_answer(moved, "xyz-fixed", INCH)["position"] == [1.0, 0.0, 0.0]


def test_lock_is_found_for_the_form_asked_for() -> None:
    half = math.sqrt(0.5)
    x_in_y, _ = read(turned("quaternion-wxyz", half, 0, half, 0))
    assert [found.code for found in lock_findings(x_in_y, "zyx-current")] == [5]
    assert lock_findings(x_in_y, "xyx-fixed") == ()
    assert lock_findings(x_in_y, "quaternion-wxyz") == ()


def test_a_form_is_one_of_the_28() -> None:
    assert all(checked_form(form) == form for form in FORMS)
    with pytest.raises(KinematicsError) as caught:
        checked_form("zyx", ("tool", "form"))
    assert caught.value.where == ("tool", "form")
