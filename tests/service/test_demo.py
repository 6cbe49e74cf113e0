"""The demonstration cell: seven unlike arms, each posed where a hand calculation puts it.

Left out: that the service stores and answers them (tests/contract/test_examples.py).
"""

import re
import runpy
from functools import cache
from importlib.resources import files
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from kinematics.arm import Arm
from kinematics.chain import tool_in_base, walk
from kinematics.jacobian import motion_of
from kinematics.singularity import judge
from kinematics.table import Convention, FloatArray
from kinematics.task_space import task_space
from kinematics.tolerances import NEAR_SINGULAR
from kinematics.travel_limits import travel_findings, travel_margin
from service import demo
from service.wire.arms import read_arm
from service.wire.cells import CellAt, read_cell

ROOT = Path(__file__).resolve().parents[2]
JOINTS = {
    "housing-loader": 6,
    "lathe-tender": 6,
    "line-runner": 7,
    "pallet-stacker": 4,
    "seal-setter": 4,
    "wash-arm": 6,
    "wash-gantry": 5,
}
NEAR_ENOUGH = 1e-12
"""Metres: sums of seven lengths below 10 m leave some 1e-15."""

SPREAD = 0.25
"""Metres between 40 000 random tool positions, where seven joints spread them thinnest."""


@cache
def documents() -> dict[str, dict[str, Any]]:
    return {document["name"]: document for document in demo.documents()}


@cache
def cell_of(name: str) -> CellAt:
    given = {document["name"]: document for document in demo.documents("cell")}
    read = read_cell(given[name])
    assert read.findings == ()
    return CellAt(read, 1)


@cache
def arm_of(name: str) -> Arm:
    read = read_arm(documents()[name], cell_of)
    assert read.findings == ()
    return read.arm


def postures(arm: Arm, count: int = 500) -> FloatArray:
    """Return random postures (count, joints) within the joints' own travel."""
    travel = [arm.table.rows[index].travel for index in arm.drive_map.driven]
    lower, upper = np.array(travel, dtype=float).T
    random = np.random.default_rng(20_252)
    drawn: FloatArray = lower + random.random((count, arm.joint_count)) * (upper - lower)
    return drawn


def flange(name: str, *degrees: float) -> FloatArray:
    """Return the flange in the base, (4, 4), of an arm whose joints all turn."""
    return tool_in_base(arm_of(name), np.radians(degrees), np.eye(4))


def tool_in_world(name: str, joint_values: FloatArray) -> FloatArray:
    arm = arm_of(name)
    tool = arm.tool_in_flange(arm.default_tool)
    return arm.base_in_world @ tool_in_base(arm, joint_values, tool)


def distance(direction: FloatArray, point: FloatArray, i: int, j: int) -> FloatArray:
    """Return the distance between the axes of rows i and j, not parallel, (...,)."""
    across = np.cross(direction[..., i, :], direction[..., j, :])
    between = point[..., j, :] - point[..., i, :]
    along: FloatArray = np.abs((between * across).sum(-1)) / np.linalg.norm(across, axis=-1)
    return along


def test_each_file_holds_the_arm_of_its_name() -> None:
    entries = sorted(entry.name for entry in files("service.demo").joinpath("arms").iterdir())
    assert entries == [f"{name}.json" for name in sorted(JOINTS)]
    assert sorted(documents()) == sorted(JOINTS)
    assert {name: arm_of(name).joint_count for name in JOINTS} == JOINTS


@pytest.mark.parametrize("name", JOINTS)
def test_every_arm_is_complete(name: str) -> None:
    document = documents()[name]
    assert document["units"] == "mm-deg"
    assert document["status"] in ("draft", "measured", "approved")
    assert len(document["title"]) > 10
    assert len(document["notes"]) > 10
    for kind in ("tools", "frames"):
        numbers = [thing["number"] for thing in document[kind].values()]
        assert numbers == list(range(1, len(numbers) + 1))
        assert len(numbers) >= 2
    assert document["default_tool"] in document["tools"]
    driven = [row for row in document["rows"] if not row.get("passive")]
    assert all("travel" in row and "top_speed" in row for row in driven)
    limited = [row for row in driven if "working_travel" in row]
    assert 1 <= len(limited) < len(driven)
    assert all(row["working_reason"] for row in limited)


def test_both_conventions_and_all_states_of_a_new_arm_are_shown() -> None:
    conventions = [document["convention"] for document in documents().values()]
    assert conventions.count("standard") == 5
    assert conventions.count("modified") == 2
    assert {document["status"] for document in documents().values()} == {
        "draft", "measured", "approved",
    }  # fmt: skip


@pytest.mark.parametrize("name", JOINTS)
def test_the_tool_gets_to_every_frame(name: str) -> None:
    arm = arm_of(name)
    drawn = postures(arm, 40_000)
    reached = tool_in_world(name, drawn[travel_margin(arm, drawn) >= 0])[:, :3, 3]
    for frame in arm.frames.keys() - (arm.cell.frames if arm.cell else set()):
        gap = np.linalg.norm(reached - arm.frame_in_world(frame)[:3, 3], axis=1).min()
        assert gap < SPREAD, frame


@pytest.mark.parametrize(
    ("name", "reach"),
    [
        ("housing-loader", 0.565 + 0.612 + 0.094 + 0.148),
        ("lathe-tender", 0.165 + 0.705 + np.hypot(0.118, 0.748) + np.hypot(0.085, 0.251)),
        ("seal-setter", 0.318 + 0.247),
        ("pallet-stacker", 0.245 + 1.080 + 1.165 + 0.228),
    ],
)
def test_reach_is_what_the_links_give(name: str, reach: float) -> None:
    arm = arm_of(name)
    tool = tool_in_base(arm, postures(arm, 40_000), arm.tool_in_flange(None))
    farthest = float(np.hypot(tool[:, 0, 3], tool[:, 1, 3]).max())
    assert 0.97 * reach < farthest < reach + NEAR_ENOUGH


def test_housing_loader_stands_upright_and_points_down() -> None:
    # Upper arm up, forearm level, tool down: x = forearm, z = base + upper arm - flange.
    posed = flange("housing-loader", 0, -90, 90, 0, 90, 0)
    np.testing.assert_allclose(posed[:3, 3], [0.612, 0, 0.437 + 0.565 - 0.094], atol=NEAR_ENOUGH)
    np.testing.assert_allclose(posed[:3, 2], [0, 0, -1], atol=NEAR_ENOUGH)


def test_housing_loader_shows_axes_2_and_3_positive_downwards() -> None:
    assert flange("housing-loader", 0, -80, 90, 0, 0, 0)[2, 3] < 0.437 + 0.565
    assert flange("housing-loader", 0, -90, 100, 0, 0, 0)[2, 3] < 0.437 + 0.565


@pytest.mark.parametrize("name", ["housing-loader", "lathe-tender", "line-runner"])
def test_the_last_three_axes_meet_in_one_point(name: str) -> None:
    arm = arm_of(name)
    walked = walk(arm, postures(arm))
    direction, point = walked.axis_direction[..., -3:, :], walked.axis_point[..., -3:, :]
    centre = point[..., 2, :]
    for axis in range(3):
        off = np.cross(direction[..., axis, :], centre - point[..., axis, :])
        assert np.abs(off).max() < NEAR_ENOUGH


def test_lathe_tender_has_offsets_at_shoulder_and_elbow() -> None:
    # Upper arm up, forearm level and above it by the elbow's offset.
    posed = flange("lathe-tender", 0, 0, 0, 0, 0, 0)
    expected = [0.165 + 0.748, 0, 0.518 + 0.705 + 0.118]
    np.testing.assert_allclose(posed[:3, 3], expected, atol=NEAR_ENOUGH)
    arm = arm_of("lathe-tender")
    assert arm.table.convention is Convention.MODIFIED
    walked = walk(arm, postures(arm))
    direction, point = walked.axis_direction, walked.axis_point
    np.testing.assert_allclose(distance(direction, point, 0, 1), 0.165, atol=NEAR_ENOUGH)
    np.testing.assert_allclose(distance(direction, point, 2, 3), 0.118, atol=NEAR_ENOUGH)


def test_wash_arm_has_three_parallel_axes_and_an_offset_wrist() -> None:
    posed = flange("wash-arm", 0, 0, 0, 0, 0, 0)
    expected = [0.127, -(0.141 + 0.103), 0.196 + 0.474 + 0.431]
    np.testing.assert_allclose(posed[:3, 3], expected, atol=NEAR_ENOUGH)
    arm = arm_of("wash-arm")
    walked = walk(arm, postures(arm))
    direction, point = walked.axis_direction, walked.axis_point
    for axis in (2, 3):
        assert np.abs(np.cross(direction[:, 1], direction[:, axis])).max() < NEAR_ENOUGH
    turned_aside = np.linalg.norm(np.cross(direction[:, 3], direction[:, 5]), axis=-1) > 1e-3
    gaps = distance(direction[turned_aside], point[turned_aside], 3, 5)
    np.testing.assert_allclose(gaps, 0.127, atol=1e-9)


def test_seal_setter_lowers_an_upright_tool() -> None:
    arm = arm_of("seal-setter")
    tool = arm.tool_in_flange("seal-cup")
    posed = tool_in_base(arm, np.array([0, 0, 0.1, 0]), tool)
    expected = [0.318 + 0.247, 0, 0.372 - 0.058 - 0.1 - 0.074]
    np.testing.assert_allclose(posed[:3, 3], expected, atol=NEAR_ENOUGH)
    upright = tool_in_base(arm, postures(arm), tool)[:, :3, 2]
    np.testing.assert_allclose(upright, [[0, 0, -1]] * len(upright), atol=NEAR_ENOUGH)


def test_pallet_stacker_keeps_its_flange_level_whatever_the_joints_show() -> None:
    arm = arm_of("pallet-stacker")
    turns = np.random.default_rng(20_253).uniform(-2 * np.pi, 2 * np.pi, (500, 4))
    motion = motion_of(arm, turns, np.eye(4))
    down = motion.tool_in_base[:, :3, 2]
    np.testing.assert_allclose(down, [[0, 0, -1]] * len(down), atol=NEAR_ENOUGH)
    tilting = motion.of_joints[:, 3:5, :]
    assert np.abs(tilting).max() < NEAR_ENOUGH


@pytest.mark.parametrize(("lean", "dip"), [(0, 0), (30, 0), (30, 25), (-20, 40)])
def test_pallet_stacker_shows_lean_and_dip(lean: float, dip: float) -> None:
    sine = np.sin(np.radians([lean, dip]))
    cosine = np.cos(np.radians([lean, dip]))
    posed = flange("pallet-stacker", 0, lean, dip, 0)
    out = 0.245 + 1.080 * sine[0] + 1.165 * cosine[1] + 0.228
    up = 0.812 + 1.080 * cosine[0] - 1.165 * sine[1] - 0.187
    np.testing.assert_allclose(posed[:3, 3], [out, 0, up], atol=NEAR_ENOUGH)


def test_the_linkage_of_pallet_stacker_bounds_dip_less_lean() -> None:
    arm = arm_of("pallet-stacker")
    assert travel_findings(arm, np.radians([0, 0, 55, 0])) == ()
    (finding,) = travel_findings(arm, np.radians([0, 0, 57, 0]))
    assert finding.name == "outside-travel"
    assert finding.joint is None
    assert np.degrees([finding.measure, finding.threshold]) == pytest.approx([57, 56])


def test_wash_gantry_slides_along_world_axes_and_is_never_singular() -> None:
    home = tool_in_world("wash-gantry", np.zeros(5))
    # Across 240 mm, down 315 + 226 mm and the clamp's 342 mm, from where the base hangs.
    expected = [3.2, -1.4 + 0.240, 3.05 - 0.315 - 0.226 - 0.342]
    np.testing.assert_allclose(home[:3, 3], expected, atol=NEAR_ENOUGH)
    np.testing.assert_allclose(home[:3, 2], [0, 0, -1], atol=NEAR_ENOUGH)
    moved = tool_in_world("wash-gantry", np.array([1.0, 0.5, 0.25, 0, 0]))
    np.testing.assert_allclose(moved[:3, 3] - home[:3, 3], [1, 0.5, -0.25], atol=NEAR_ENOUGH)
    arm = arm_of("wash-gantry")
    tool = arm.tool_in_flange(None)
    space = task_space(arm, tool)
    assert space is not None
    assert space.generic_rank == 5
    assert judge(arm, space, motion_of(arm, postures(arm), tool)).smallest.min() > 0.8


def test_the_track_of_line_runner_shifts_everything_along_world_x() -> None:
    aside = np.radians([0, 20, -10, 35, 60, 40, 90])
    home = tool_in_world("line-runner", aside)
    there = tool_in_world("line-runner", aside + np.array([2.5, 0, 0, 0, 0, 0, 0]))
    shift = np.eye(4)
    shift[0, 3] = 2.5
    np.testing.assert_allclose(there, shift @ home, atol=NEAR_ENOUGH)


def test_line_runner_faces_away_from_the_machines() -> None:
    # Upper arm up, forearm level above it by the elbow's offset, tool straight out.
    posed = tool_in_world("line-runner", np.zeros(7))
    out = 0.212 + 0.816 + 0.133 + 0.217
    up = 0.290 + 0.643 + 0.762 + 0.131
    np.testing.assert_allclose(posed[:3, 3], [0.7, -3.1 - out, up], atol=NEAR_ENOUGH)


def test_the_shares_called_near_are_as_developers_md_says() -> None:
    measured = runpy.run_path(str(ROOT / "tests" / "benchmarks" / "singular_share.py"))
    text = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
    said = dict(re.findall(r"^\| ([a-z-]+) \|.*\*\*([\d.]+)(?: %)?\*\*", text, re.MULTILINE))
    assert float(said.pop("arm")) == NEAR_SINGULAR
    assert sorted(said) == sorted(JOINTS)
    for name, percent in said.items():
        random = np.random.default_rng(measured["SEED"])
        drawn = measured["random_postures"](arm_of(name), measured["POSTURES"], random)
        smallest, best = measured["smallest_values"](arm_of(name), drawn)
        share = (smallest <= NEAR_SINGULAR * best).mean()
        # One posture on the threshold's edge may fall either way with the rounding.
        assert 100 * share == pytest.approx(float(percent), abs=0.06)


# --- the cell ------------------------------------------------------------------------------


def test_the_cell_says_where_the_loader_stands_and_its_fixture_is() -> None:
    """The loader keeps base and fixture of its own: both must tell one truth."""
    cell = cell_of("housing-cell").read.cell
    loader = arm_of("housing-loader")
    base = cell.anchored("housing-loader.base").pose_in_anchor
    np.testing.assert_allclose(base, loader.base_in_world, atol=NEAR_ENOUGH)
    table = cell.anchored("machine-table").pose_in_anchor
    np.testing.assert_allclose(table, loader.frame_in_world("fixture-a"), atol=NEAR_ENOUGH)


def test_the_tender_stands_where_the_cell_says_and_sees_what_stands_still() -> None:
    tender = arm_of("lathe-tender")
    assert tender.cell is not None
    assert tender.base_in_world[:3, 3].tolist() == [2.35, -0.4, 0.35]
    assert tender.cell.frames >= {"mast-camera", "machine-table", "raw-chute", "out-pallet"}
    assert set(tender.cell.unseen) == {"hand-camera", 22}


def test_the_mast_camera_looks_at_the_machine_table() -> None:
    """Its z axis, followed down to the height of the table, ends within a hand's breadth."""
    cell = cell_of("housing-cell").read.cell
    camera, table = (
        cell.anchored(name).pose_in_anchor for name in ("mast-camera", "machine-table")
    )
    sight, eye = camera[:3, 2], camera[:3, 3]
    met = eye + (table[2, 3] - eye[2]) / sight[2] * sight
    assert np.linalg.norm(met - table[:3, 3]) < 0.1
    assert eye[2] > 2.5
