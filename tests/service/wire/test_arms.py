"""Arms between the wire and the core: units in, the same document out, places of complaints."""

import copy
import math
from typing import Any

import numpy as np
import pytest
from pydantic import ValidationError

from kinematics.arm import SingularityThresholds
from kinematics.errors import KinematicsError
from kinematics.table import Convention, Coupling, JointKind, Travel
from kinematics.tolerances import SINGULAR
from service.convert import UNITS
from service.errors import TooLarge, UnknownArm, UnusableValue
from service.wire.arms import RESERVED, arm_document, read_arm

MATRIX = [[0, -1, 0, 100], [1, 0, 0, 200], [0, 0, 1, 300], [0, 0, 0, 1]]
ARM: dict[str, Any] = {
    "name": "turn-and-slide",
    "title": "Made up",
    "convention": "modified",
    "units": "mm-deg",
    "rows": [
        {
            "joint": "revolute",
            "a": 25.4,
            "alpha": -90,
            "d": 400,
            "theta": 37.3,
            "direction": -1,
            "travel": [-170, 170],
            "working_travel": [-150, 150],
            "working_reason": "dress pack",
            "top_speed": 180,
        },
        {
            "joint": "prismatic",
            "a": 0,
            "alpha": 90,
            "d": 12.7,
            "theta": 10,
            "travel": [0, 500],
            "top_speed": 1000,
            "couplings": [{"axis": 1, "ratio": 0.5}],
        },
        {
            "joint": "revolute",
            "a": 1,
            "alpha": 0,
            "d": 0,
            "theta": 0,
            "couplings": [{"axis": 1, "ratio": -1}, {"axis": 2, "ratio": 0.36}],
            "passive": True,
        },
    ],
    "combined_travel": [{"ratios": {"2": 1}, "travel": [-60, 75]}],
    "base": {"matrix": MATRIX},
    "tools": {
        "pen": {
            "position": [0, 0, 120],
            "orientation": {"form": "xyz-fixed", "values": [0, 0, 90]},
            "number": 4,
        }
    },
    "default_tool": "pen",
    "frames": {
        "table": {"matrix": copy.deepcopy(MATRIX), "in": "base", "number": 4},
        "tray": {"position": [1, 2, 3], "orientation": {"form": "matrix", "values": None}},
    },
    "joint_uncertainty": [0.01, 0.05],
    "characteristic_length": 900,
    "singularity_thresholds": {"near": 0.05},
    "status": "measured",
    "notes": "in bay 4",
}
ARM["frames"]["tray"]["orientation"]["values"] = [[1, 0, 0], [0, 1, 0], [0, 0, 1]]
DEGREE = math.pi / 180


def arm(**changes: Any) -> dict[str, Any]:
    return {**copy.deepcopy(ARM), **changes}


def test_everything_is_read_in_si() -> None:
    read = read_arm(ARM)
    found = read.arm
    assert (found.name, found.table.convention) == ("turn-and-slide", Convention.MODIFIED)
    first, second, third = found.table.rows
    assert (first.joint, first.direction, first.working_reason) == (
        JointKind.REVOLUTE,
        -1,
        "dress pack",
    )
    numbers = [first.a, first.alpha, first.d, first.theta, first.top_speed]
    assert numbers == pytest.approx([0.0254, -math.pi / 2, 0.4, 37.3 * DEGREE, math.pi])
    assert first.travel == pytest.approx(Travel(-170 * DEGREE, 170 * DEGREE))
    assert first.working_travel == pytest.approx(Travel(-150 * DEGREE, 150 * DEGREE))
    assert (second.travel, second.top_speed) == (Travel(0.0, 0.5), 1.0)
    # 0.5 mm per degree is 0.5e-3 m per pi/180 rad; like kinds stay as they are.
    assert second.couplings == (Coupling(1, pytest.approx(0.5e-3 / DEGREE)),)
    assert third.couplings[0] == Coupling(1, -1.0)
    assert third.couplings[1] == Coupling(2, pytest.approx(0.36 * DEGREE / 1e-3))
    assert third.passive
    (combined,) = found.combined_travel
    assert (combined.ratios, combined.travel) == ({2: 1}, pytest.approx(Travel(-0.06, 0.075)))
    np.testing.assert_allclose(found.base_in_world[:3, 3], [0.1, 0.2, 0.3], rtol=1e-15)
    np.testing.assert_allclose(
        found.tools["pen"].tool_in_flange[:2, :2], [[0, -1], [1, 0]], atol=1e-15
    )
    assert (found.tools["pen"].number, found.default_tool) == (4, "pen")
    assert (found.frames["table"].parent, found.frames["tray"].parent) == ("base", "world")
    assert found.joint_uncertainty == pytest.approx((0.01 * DEGREE, 5e-5))
    assert found.characteristic_length == pytest.approx(0.9)
    assert found.thresholds == SingularityThresholds(0.05, SINGULAR)
    assert read.units is UNITS["mm-deg"]
    assert read.findings == ()


def test_what_is_left_out_takes_its_default() -> None:
    bare = {key: ARM[key] for key in ("name", "convention", "units", "rows")}
    found = read_arm(bare).arm
    np.testing.assert_array_equal(found.base_in_world, np.eye(4))
    assert found.thresholds == SingularityThresholds(None, SINGULAR)
    assert (found.tools, found.frames, found.default_tool) == ({}, {}, None)
    assert (found.characteristic_length, found.joint_uncertainty) == (None, ())


def test_the_document_is_kept_as_it_was_typed() -> None:
    assert read_arm(ARM).document == ARM


def numbers_of(node: Any) -> Any:
    """Return a document with whole numbers and their doubles alike, ready to be compared."""
    if isinstance(node, dict):
        return {key: numbers_of(value) for key, value in node.items()}
    if isinstance(node, list):
        return [numbers_of(value) for value in node]
    return float(node) if isinstance(node, int) and not isinstance(node, bool) else node


@pytest.mark.parametrize("units", UNITS)
def test_a_document_written_and_read_is_the_same_arm(units: str) -> None:
    read = read_arm(ARM)
    texts = {key: ARM[key] for key in ("title", "status", "notes")}
    document = arm_document(read.arm, UNITS[units], texts)
    again = read_arm(document)
    assert again.arm.table.rows[0].travel == pytest.approx(read.arm.table.rows[0].travel, rel=1e-15)
    np.testing.assert_allclose(again.arm.base_in_world, read.arm.base_in_world, rtol=1e-15)
    np.testing.assert_allclose(
        again.arm.drive_map.matrix, read.arm.drive_map.matrix, rtol=1e-15, atol=0
    )
    assert (document["title"], document["status"], document["notes"]) == tuple(texts.values())
    if units == "mm-deg":
        assert numbers_of(document["rows"][0]) == numbers_of(ARM["rows"][0])
        assert numbers_of(document["combined_travel"]) == numbers_of(ARM["combined_travel"])
        assert document["joint_uncertainty"] == ARM["joint_uncertainty"]
        assert again.digests.table_digest == read.digests.table_digest


@pytest.mark.parametrize("units", ["mm-deg", "m-rad", "in-deg"])
def test_digests_tell_the_table_from_the_setup(units: str) -> None:
    given = arm(units=units)
    digests = read_arm(given).digests
    moved = read_arm(arm(units=units, default_tool="flange")).digests
    assert (moved.table_digest, moved.setup_digest) != (digests.table_digest, digests.setup_digest)
    assert moved.table_digest == digests.table_digest
    longer = copy.deepcopy(given)
    longer["rows"][0]["d"] += 0.001
    changed = read_arm(longer).digests
    assert changed.table_digest != digests.table_digest
    assert changed.setup_digest == digests.setup_digest
    titled = read_arm({**given, "title": "Another", "notes": "", "status": "draft"}).digests
    assert titled == digests
    assert len(digests.digest) == 8


def test_the_same_arm_in_other_units_has_the_same_digest() -> None:
    row = {"joint": "revolute", "a": 254, "alpha": 90, "d": 0, "theta": -180, "travel": [-90, 90]}
    in_inches = {**row, "a": 10}
    bare = {"name": "one-turn", "convention": "standard"}
    digests = {
        read_arm({**bare, "units": units, "rows": [given]}).digests.digest
        for units, given in (("mm-deg", row), ("in-deg", in_inches))
    }
    assert len(digests) == 1


def refusal(given: Any) -> Any:
    with pytest.raises((UnusableValue, UnknownArm, TooLarge, KinematicsError)) as caught:
        read_arm(given)
    return caught.value


@pytest.mark.parametrize("name", sorted(RESERVED))
def test_reserved_names(name: str) -> None:
    pose = ARM["tools"]["pen"]
    error = refusal(arm(tools={name: pose}, default_tool=None))
    assert (error.code, error.where, error.value) == ("unusable-value", ("tools", name), name)
    error = refusal(arm(frames={name: pose}))
    assert error.where == ("frames", name)


def test_which_names_are_reserved() -> None:
    links = {f"link-{number}" for number in range(33)}
    assert {"base", "world", "flange", "tool"} | links == RESERVED
    assert read_arm(arm(tools={"link-33": ARM["tools"]["pen"]}, default_tool=None)).arm.tools


def test_a_cell_where_there_are_none() -> None:
    error = refusal(arm(cell="north"))
    assert (error.code, error.where, error.value, error.status) == (
        "unknown-arm",
        ("cell",),
        "north",
        422,
    )


def test_32_rows_and_no_more() -> None:
    row = ARM["rows"][0]
    bare = {"name": "long", "convention": "standard", "units": "mm-deg"}
    assert read_arm({**bare, "rows": [row] * 32}).arm.joint_count == 32
    error = refusal({**bare, "rows": [row] * 33})
    assert (error.code, error.where, error.value) == ("too-large", ("rows",), 33)


@pytest.mark.parametrize(
    ("path", "value", "where"),
    [
        (("rows", 0, "a"), 1e13, ("rows", 0, "a")),
        (("rows", 0, "travel"), [10, -10], ("rows", 0, "travel")),
        (("rows", 2, "couplings", 1, "axis"), 3, ("rows", 2, "couplings", 1, "axis")),
        (("base", "matrix", 0, 0), 1.0, ("base", "matrix")),
        (("tools", "pen", "orientation", "form"), "x", ("tools", "pen", "orientation", "form")),
        (("frames", "table", "in"), "shelf", ("frames", "table", "in")),
        (("default_tool",), "saw", ("default_tool",)),
        (("combined_travel", 0, "ratios"), {"3": 1}, ("combined_travel", 0, "ratios", "3")),
        (("joint_uncertainty",), [1, 2, 3], ("joint_uncertainty",)),
        (("singularity_thresholds", "near"), 2, ("singularity_thresholds",)),
    ],
)
def test_where_a_complaint_points(
    path: tuple[str | int, ...], value: Any, where: tuple[str | int, ...]
) -> None:
    given = arm()
    node: Any = given
    for step in path[:-1]:
        node = node[step]
    node[path[-1]] = value
    assert refusal(given).where == where


def test_repaired_poses_are_told() -> None:
    matrix = [[1.001, 0, 0, 0], [0, 1, 0, 0], [0, 0, 1, 0], [0, 0, 0, 1]]
    read = read_arm(arm(base={"matrix": matrix}))
    assert [finding.name for finding in read.findings] == ["input-repaired"]


def test_shapes_and_types_are_pydantics() -> None:
    for given in (None, [], "arm", {}, arm(rows="none"), arm(unknown=1)):
        with pytest.raises(ValidationError):
            read_arm(given)
