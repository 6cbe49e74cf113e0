"""Targets of a body: plain ones as arrays, odd ones one by one, and who is told what is wrong."""

from typing import Any

import numpy as np
import pytest

from kinematics.reach.targets import CONE, NONE, ORIENTATION, SPIN
from service.convert import UNITS
from service.errors import (
    ServiceError,
    TooLarge,
    UnknownField,
    UnusableValue,
)
from service.wire.reach_gathered import ReadTargets
from service.wire.reach_targets import read_targets

MM = UNITS["mm-deg"]
TURNED = {"form": "xyz-fixed", "values": [0, 0, 90]}
POSE: dict[str, Any] = {"position": [100, 200, 300], "orientation": TURNED}
MATRIX = [[0, -1, 0, 100], [1, 0, 0, 200], [0, 0, 1, 300], [0, 0, 0, 1]]
EXPECTED = np.array([[0, -1, 0, 0.1], [1, 0, 0, 0.2], [0, 0, 1, 0.3], [0, 0, 0, 1.0]])


def read(*targets: Any) -> ReadTargets:
    return read_targets(list(targets), MM)


def test_poses_and_positions_in_any_form() -> None:
    wxyz = {"form": "quaternion-wxyz", "values": [0.5**0.5, 0, 0, 0.5**0.5]}
    found = read(
        {"name": "a", "pose": POSE},
        {"pose": {"matrix": MATRIX}},
        {"position": [100, 200, 300]},
        {"name": "b", "pose": {**POSE, "orientation": wxyz}, "freedom": "spin"},
    )
    assert found.names == ["a", None, None, "b"]
    assert found.places.tolist() == [0, 1, 2, 3]
    for place in (0, 1, 3):
        np.testing.assert_allclose(found.tool_in_frame[place], EXPECTED, atol=1e-15)
    np.testing.assert_array_equal(found.tool_in_frame[2, :3, 3], [0.1, 0.2, 0.3])
    assert found.freedom.tolist() == [NONE, NONE, ORIENTATION, SPIN]
    usual = "quaternion-wxyz"
    assert list(found.forms) == ["xyz-fixed", usual, usual, "quaternion-wxyz"]


def test_plain_and_odd_ways_agree() -> None:
    """The same targets, read as arrays and one by one: a note of the name makes them odd."""
    plain: list[dict[str, Any]] = [
        {"pose": POSE, "tolerance": {"position": 0.5}},
        {"pose": POSE, "tolerance": {"angle": 0.25}, "freedom": "orientation"},
        {"position": [1, 2, 3], "tolerance": {"position": 0.5, "angle": 1}},
        {"pose": {"matrix": MATRIX}, "freedom": "none"},
    ]
    one = read(*plain)
    other = read(*({**target, "approach": None} for target in plain))
    for name in ("tool_in_frame", "freedom", "cone", "position_tolerance", "angle_tolerance"):
        np.testing.assert_allclose(getattr(one, name), getattr(other, name), atol=1e-15)
    assert one.position_tolerance.tolist() == [0.0005, 1e-5, 0.0005, 1e-5]
    np.testing.assert_allclose(np.rad2deg(one.angle_tolerance), [0.01, 0.25, 1, 0.01])
    assert list(one.forms) == list(other.forms)


def test_a_cone_is_an_angle_in_the_units_asked_with() -> None:
    found = read({"pose": POSE, "freedom": {"cone": 180}}, {"pose": POSE, "freedom": {"cone": 30}})
    assert found.freedom.tolist() == [CONE, CONE]
    np.testing.assert_allclose(found.cone, [np.pi, np.pi / 6])


def test_what_is_mended_is_told_and_used() -> None:
    doubled = {
        "position": [0, 0, 0],
        "orientation": {"form": "quaternion-wxyz", "values": [2, 0, 0, 0]},
    }
    found = read({"pose": POSE}, {"pose": doubled})
    assert not found.refused
    ((index, (finding,)),) = found.repaired.items()
    assert (index, finding.code) == (1, 6)
    np.testing.assert_array_equal(found.tool_in_frame[1], np.eye(4))


BAD: list[tuple[Any, str, tuple[Any, ...]]] = [
    ({}, "missing-field", ("pose",)),
    ({"pose": POSE, "position": [0, 0, 0]}, "unusable-value", ("position",)),
    ({"position": [0, 0, "x"]}, "unusable-value", ("position", 2)),
    ({"position": [0, 0]}, "unusable-value", ("position",)),
    ({"position": [0, 0, float("nan")]}, "not-finite", ("position", 2)),
    ({"position": [0, 0, 1e13]}, "out-of-range", ("position", 2)),
    ({"position": [0, 0, True]}, "unusable-value", ("position", 2)),
    ({"position": [0, 0, 10**400]}, "unusable-value", ("position", 2)),
    ({"position": [0, 0, 0], "freedom": "spin"}, "unusable-value", ("freedom",)),
    ({"position": [0, 0, 0], "freedom": {"cone": 3}}, "unusable-value", ("freedom",)),
    ({"pose": POSE, "freedom": "free"}, "unusable-value", ("freedom",)),
    ({"pose": POSE, "freedom": {"cone": 200}}, "unusable-value", ("freedom", "cone")),
    ({"pose": POSE, "freedom": {"cone": 0}}, "unusable-value", ("freedom", "cone")),
    ({"pose": POSE, "tolerance": {"position": 0}}, "unusable-value", ("tolerance", "position")),
    ({"pose": POSE, "tolerance": {"angle": -1}}, "unusable-value", ("tolerance", "angle")),
    ({"pose": POSE, "tolerance": {"angle": 1e300}}, "unusable-value", ("tolerance",)),
    ({"pose": {"position": [0, 0, 0]}}, "missing-field", ("pose", "orientation")),
    ({"pose": {**POSE, "matrix": MATRIX}}, "unusable-value", ("pose", "matrix")),
    ({"pose": {"matrix": MATRIX[:3]}}, "unusable-value", ("pose", "matrix")),
    ({"pose": {"matrix": [[1, 0, 0, 0], [0, 1, 0, 0], [0, 0, -1, 0], [0, 0, 0, 1]]}},
     "not-rigid", ("pose", "matrix")),
    ({"pose": {**POSE, "orientation": {"form": "xyz", "values": [0, 0, 0]}}},
     "unusable-value", ("pose", "orientation", "form")),
    ({"name": 5, "pose": POSE}, "unusable-value", ("name",)),
    ({"name": "x" * 201, "pose": POSE}, "unusable-value", ("name",)),
    ("part-1", "unusable-value", ()),
    (None, "unusable-value", ()),
]  # fmt: skip


@pytest.mark.parametrize(("target", "code", "where"), BAD)
def test_one_that_cannot_be_used_spoils_no_other(
    target: Any, code: str, where: tuple[Any, ...]
) -> None:
    found = read({"pose": POSE}, target, {"position": [1, 2, 3]})
    assert found.places.tolist() == [0, 2]
    assert found.count == 3
    ((place, detail),) = found.refused.items()
    assert (place, detail.code) == (1, code)
    assert detail.where == ("targets", 1, *where)
    assert detail.way_out


def test_where_none_can_be_used_the_request_is_refused() -> None:
    with pytest.raises(ServiceError) as caught:
        read({}, {"position": [0, 0, float("inf")]})
    assert [detail.where for detail in caught.value.errors] == [
        ("targets", 0, "pose"),
        ("targets", 1, "position", 2),
    ]
    assert caught.value.status == 422


@pytest.mark.parametrize("unknown", ["poze", "Pose", "tool"])
def test_an_unknown_field_refuses_all(unknown: str) -> None:
    with pytest.raises(UnknownField) as caught:
        read({"pose": POSE}, {"pose": POSE, unknown: 1})
    assert caught.value.details()[0].where == ("targets", 1, unknown)
    with pytest.raises(UnknownField) as caught:
        read({"pose": {**POSE, unknown: 1}})
    assert caught.value.details()[0].where == ("targets", 0, "pose", unknown)


def test_what_refuses_all() -> None:
    with pytest.raises(UnusableValue, match="no targets"):
        read()
    with pytest.raises(UnusableValue, match="must be a list"):
        read_targets({"pose": POSE}, MM)
    with pytest.raises(TooLarge, match="more than 10000"):
        read(*[{"position": [0, 0, 0]}] * 10_001)
    with pytest.raises(UnusableValue, match="'a' stands twice") as caught:
        read({"name": "a", "pose": POSE}, {"pose": POSE}, {"name": "a"})
    assert caught.value.where == ("targets", 2, "name")
    assert read(*[{"position": [0, 0, 0]}] * 10_000).count == 10_000


def test_approaches_are_noted_for_the_targets_that_have_one() -> None:
    found = read(
        {"pose": POSE},
        {"pose": POSE, "approach": {"distance": 50, "along": "tool-z"}},
        {"pose": POSE, "approach": {"distance": 0}},
        {"position": [1, 2, 3], "approach": {"distance": 20, "along": [0, 3, 4], "speed": 250}},
    )
    assert found.places.tolist() == [0, 1, 3]
    assert sorted(found.approaches) == [1, 2]
    assert (found.approaches[1].distance, found.approaches[1].along) == (0.05, None)
    one = found.approaches[2]
    assert (one.distance, one.speed) == (0.02, 0.25)
    np.testing.assert_allclose(one.along, [0, 0.6, 0.8])
    refused = found.refused[2]
    assert (refused.code, refused.where, refused.value) == (
        "unusable-value",
        ("targets", 2, "approach", "distance"),
        0,
    )
    assert refused.way_out == "give more than 0.0"
