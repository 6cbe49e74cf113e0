"""What an arm refuses and where, and what its tools and frames are found by."""

import math
from typing import Any

import numpy as np
import pytest

from kinematics.arm import Arm, CombinedTravel, NamedFrame, SingularityThresholds, Tool
from kinematics.errors import (
    InvalidArm,
    InvalidCoupling,
    KinematicsError,
    NotFinite,
    OutOfRange,
    SingularDriveMap,
    ToolNotSaid,
    UnknownFrame,
    UnknownTool,
)
from kinematics.rotations import rotation_about
from kinematics.table import Coupling, Travel
from kinematics.transforms import inverse, pose
from tests.kinematics.example_arms import PLANAR, arm_of, prismatic, random_pose, revolute

GRIPPER, PROBE = pose(np.eye(3), [0, 0, 0.1]), pose(np.eye(3), [0, 0, 0.2])
TOOLS = {"gripper": Tool(GRIPPER, number=1), "probe": Tool(PROBE)}
BASE = pose(rotation_about([0, 0, 1], np.pi / 2), [1.0, 2.0, 0.5])
FRAMES = {
    "table": NamedFrame(pose(np.eye(3), [3.0, 0.0, 0.0]), number=4),
    "fixture": NamedFrame(pose(np.eye(3), [0.0, 0.5, 0.0]), parent="table"),
    "stand": NamedFrame(pose(np.eye(3), [0.2, 0.0, 0.0]), parent="base"),
    "part": NamedFrame(pose(np.eye(3), [0.0, 0.0, 0.1]), parent="fixture"),
}


def refusal_of(*rows: Any, **more: Any) -> KinematicsError:
    with pytest.raises(KinematicsError) as caught:
        arm_of(*(rows or PLANAR), **more)
    assert caught.value.way_out
    return caught.value


# --- tools ---------------------------------------------------------------------------------


def test_tools_by_name_by_number_and_by_default() -> None:
    arm = arm_of(*PLANAR, tools=TOOLS, default_tool="probe")
    assert arm.tool_name("gripper") == arm.tool_name(1) == "gripper"
    assert arm.tool_name(None) == "probe"
    assert arm.tool_name("flange") == "flange"
    assert arm.tool_in_flange(1) is GRIPPER
    assert arm.tool_in_flange(None) is PROBE
    assert (arm.tool_in_flange("flange") == np.eye(4)).all()


def test_an_arm_without_tools_takes_the_flange() -> None:
    assert arm_of(*PLANAR).tool_name(None) == "flange"
    assert (arm_of(*PLANAR).tool_in_flange(None) == np.eye(4)).all()


def test_an_arm_with_tools_and_no_default_does_not_guess() -> None:
    arm = arm_of(*PLANAR, tools=TOOLS)
    with pytest.raises(ToolNotSaid) as caught:
        arm.tool_name(None, ("jobs", 3, "tool"))
    assert caught.value.where == ("jobs", 3, "tool")
    assert caught.value.code == "tool-not-said"
    assert "gripper, probe, flange" in caught.value.way_out
    assert arm_of(*PLANAR, tools=TOOLS, default_tool="flange").tool_name(None) == "flange"


@pytest.mark.parametrize("tool", ["griper", 2, "1", "base", ""])
def test_unknown_tools_are_refused_with_those_there_are(tool: object) -> None:
    with pytest.raises(UnknownTool) as caught:
        arm_of(*PLANAR, tools=TOOLS).tool_in_flange(tool)  # type: ignore[arg-type]
    assert caught.value.where == ("tool",)
    assert caught.value.value == tool
    assert caught.value.way_out == "one of: gripper (1), probe, flange"


def test_a_default_tool_that_is_missing() -> None:
    error = refusal_of(tools=TOOLS, default_tool="welder")
    assert type(error) is UnknownTool
    assert error.where == ("default_tool",)


# --- frames --------------------------------------------------------------------------------


def test_frames_by_name_by_number_and_by_default() -> None:
    arm = arm_of(*PLANAR, frames=FRAMES)
    assert arm.frame_name(None) == arm.frame_name("base") == "base"
    assert arm.frame_name("world") == "world"
    assert arm.frame_name(4) == arm.frame_name("table") == "table"
    with pytest.raises(UnknownFrame) as caught:
        arm.frame_name("tabel")
    assert caught.value.where == ("frame",)
    assert caught.value.way_out == "one of: base, world, table (4), fixture, stand, part"


def test_frames_in_the_world_by_hand() -> None:
    """The base stands at (1, 2, 0.5), turned by a quarter: its x is the world's y."""
    arm = arm_of(*PLANAR, frames=FRAMES, base_in_world=BASE)
    places = {name: arm.frame_in_world(name)[:3, 3].round(12).tolist() for name in FRAMES}
    assert places == {
        "table": [3.0, 0.0, 0.0],
        "fixture": [3.0, 0.5, 0.0],
        "stand": [1.0, 2.2, 0.5],
        "part": [3.0, 0.5, 0.1],
    }
    assert (arm.frame_in_world("world") == np.eye(4)).all()
    assert (arm.frame_in_world("base") == BASE).all()


def test_the_base_in_frames() -> None:
    random = np.random.default_rng(0)
    frames = {
        "one": NamedFrame(random_pose(random)),
        "two": NamedFrame(random_pose(random), parent="one"),
        "three": NamedFrame(random_pose(random), parent="base"),
    }
    arm = arm_of(*PLANAR, frames=frames, base_in_world=random_pose(random))
    assert (arm.base_in_frame("base") == np.eye(4)).all()
    np.testing.assert_allclose(arm.base_in_frame("world"), arm.base_in_world, rtol=0, atol=1e-16)
    two_in_world = frames["one"].frame_in_parent @ frames["two"].frame_in_parent
    expected = np.linalg.solve(two_in_world, arm.base_in_world)
    np.testing.assert_allclose(arm.base_in_frame("two"), expected, rtol=0.0, atol=1e-15)
    # What stands in the base does not move against it, wherever the base is put.
    expected = inverse(frames["three"].frame_in_parent)
    np.testing.assert_allclose(arm.base_in_frame("three"), expected, rtol=0.0, atol=1e-15)


def test_frames_in_a_circle_or_in_nothing() -> None:
    error = refusal_of(
        frames={
            "one": NamedFrame(np.eye(4), parent="two"),
            "two": NamedFrame(np.eye(4), parent="one"),
        }
    )
    assert type(error) is InvalidArm
    assert error.where == ("frames", "one", "in")
    assert error.value == "two"
    assert "one in two in one" in str(error)
    assert refusal_of(frames={"own": NamedFrame(np.eye(4), parent="own")}).value == "own"
    error = refusal_of(frames={"one": NamedFrame(np.eye(4), parent="nowhere")})
    assert type(error) is UnknownFrame
    assert error.where == ("frames", "one", "in")
    assert error.value == "nowhere"


# --- names and numbers ---------------------------------------------------------------------


def test_tools_and_frames_share_one_namespace() -> None:
    error = refusal_of(tools=TOOLS, frames={"probe": NamedFrame(np.eye(4))}, default_tool="probe")
    assert type(error) is InvalidArm
    assert error.where == ("frames", "probe")


@pytest.mark.parametrize(
    ("what", "things"),
    [
        ("tools", {"one": Tool(GRIPPER, 3), "two": Tool(PROBE, 3)}),
        ("frames", {"one": NamedFrame(GRIPPER, number=3), "two": NamedFrame(PROBE, number=3)}),
    ],
)
def test_a_number_stands_for_one_thing(what: str, things: dict[str, Any]) -> None:
    error = refusal_of(**{what: things})
    assert type(error) is InvalidArm
    assert error.where == (what, "two", "number")
    assert error.value == 3


def test_a_tool_and_a_frame_may_have_the_same_number() -> None:
    arm = arm_of(*PLANAR, tools=TOOLS, frames={"table": NamedFrame(BASE, number=1)})
    assert (arm.tool_name(1), arm.frame_name(1)) == ("gripper", "table")


# --- drive map and travel ------------------------------------------------------------------


def test_the_drive_map_is_checked_with_the_arm() -> None:
    both = revolute(couplings=(Coupling(2, 1.0),)), revolute(couplings=(Coupling(1, 1.0),))
    assert type(refusal_of(*both)) is SingularDriveMap
    assert type(refusal_of(revolute(couplings=(Coupling(1, 1.0),)))) is InvalidCoupling


MIXED = (revolute(), prismatic(), revolute(passive=True), revolute())


@pytest.mark.parametrize("number", [0, 3, 5, -1])
def test_combined_travel_of_rows_without_a_joint_value(number: int) -> None:
    combined = CombinedTravel({1: 1.0, number: 1.0}, Travel(-1.0, 1.0))
    error = refusal_of(*MIXED, combined_travel=(combined,))
    assert type(error) is InvalidArm
    assert error.where == ("combined_travel", 0, "ratios", str(number))
    assert error.value == number
    assert error.way_out == "use numbers of driven rows: 1, 2, 4"


@pytest.mark.parametrize("ratios", [{}, {1: 1.0, 2: 1.0}])
def test_combined_travel_adds_values_of_one_kind(ratios: dict[int, float]) -> None:
    good = CombinedTravel({1: 1.0, 4: 1.0}, Travel(-1.0, 1.0))
    bad = CombinedTravel(ratios, Travel(-1.0, 1.0))
    error = refusal_of(*MIXED, combined_travel=(good, bad))
    assert error.where == ("combined_travel", 1, "ratios")


def test_combined_travel_with_numbers_that_cannot_be_used() -> None:
    error = refusal_of(combined_travel=(CombinedTravel({1: math.nan}, Travel(-1.0, 1.0)),))
    assert (type(error), error.where) == (NotFinite, ("combined_travel", 0, "ratios", "1"))
    error = refusal_of(combined_travel=(CombinedTravel({1: 1.0}, Travel(1.0, -1.0)),))
    assert (type(error), error.where) == (InvalidArm, ("combined_travel", 0, "travel"))


# --- scalars -------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("length", "kind"),
    [(0.0, InvalidArm), (-1.0, InvalidArm), (math.nan, NotFinite), (2e9, OutOfRange)],
)
def test_the_characteristic_length_is_a_length(length: float, kind: type) -> None:
    error = refusal_of(characteristic_length=length)
    assert (type(error), error.where) == (kind, ("characteristic_length",))


@pytest.mark.parametrize(
    ("given", "kind", "where"),
    [
        ((0.1,), InvalidArm, ("joint_uncertainty",)),
        ((0.1, 0.1, 0.1), InvalidArm, ("joint_uncertainty",)),
        ((0.1, -0.1), InvalidArm, ("joint_uncertainty", 1)),
        ((0.1, math.inf), NotFinite, ("joint_uncertainty", 1)),
    ],
)
def test_joint_uncertainty(given: tuple[float, ...], kind: type, where: tuple[object]) -> None:
    error = refusal_of(joint_uncertainty=given)
    assert (type(error), error.where) == (kind, where)
    assert arm_of(*PLANAR, joint_uncertainty=(0.0, 0.1)).joint_uncertainty == (0.0, 0.1)


@pytest.mark.parametrize(
    ("near", "singular"),
    [(0.02, 0.03), (1.0, 1e-9), (0.02, 0.0), (0.02, -1e-9), (math.nan, 1e-9), (0.02, math.nan)],
)
def test_thresholds_rise(near: float, singular: float) -> None:
    error = refusal_of(thresholds=SingularityThresholds(near, singular))
    assert (type(error), error.where) == (InvalidArm, ("singularity_thresholds",))


def test_joint_units_are_those_of_driven_rows() -> None:
    arm: Arm = arm_of(*MIXED)
    assert arm.joint_count == 3
    assert arm.joint_units == ("rad", "m", "rad")


def test_a_combined_travel_of_zero_ratios_bounds_nothing() -> None:
    nothing = CombinedTravel({1: 0.0, 2: 0.0}, Travel(0.1, 0.2))
    error = refusal_of(combined_travel=(nothing,))
    assert type(error) is InvalidArm
    assert error.where == ("combined_travel", 0, "ratios")
