"""POST /v1/jacobians as the contract has it: axes, units, speeds, twists, loads, words.

Left out: bad input (test_bad_questions) and long check lists (published).
"""

import math
from typing import Any

import httpx
import numpy as np
import pytest

pytestmark = pytest.mark.anyio

STRAIGHT = {"form": "xyz-fixed", "values": [0, 0, 0]}
ROW = {"joint": "revolute", "a": 400, "alpha": 0, "d": 0, "theta": 0}
PLANAR: dict[str, Any] = {
    "name": "two-turns",
    "convention": "standard",
    "units": "mm-deg",
    "rows": [ROW, {**ROW, "a": 300}],
    "base": {
        "position": [1000, 0, 500],
        "orientation": {"form": "xyz-fixed", "values": [0, 0, 90]},
    },
}
# Three turns, a slide, two turns: no two columns alike, no parallel axes by chance.
SKEW: dict[str, Any] = {
    "name": "skew-arm",
    "convention": "modified",
    "units": "mm-deg",
    "rows": [
        {"joint": "revolute", "a": 30, "alpha": 15, "d": 340, "theta": 10, "top_speed": 120},
        {"joint": "revolute", "a": 80, "alpha": -85, "d": 20, "theta": -80, "top_speed": 100},
        {
            "joint": "revolute",
            "a": 390,
            "alpha": 5,
            "d": -15,
            "theta": 0,
            "top_speed": 150,
            "direction": -1,
            "couplings": [{"axis": 2, "ratio": -1}],
        },
        {"joint": "prismatic", "a": 60, "alpha": -80, "d": 250, "theta": 20, "top_speed": 900},
        {"joint": "revolute", "a": 0, "alpha": 95, "d": 0, "theta": 0, "top_speed": 200},
        {"joint": "revolute", "a": 5, "alpha": -70, "d": 60, "theta": 0, "top_speed": 300},
    ],
    "base": {"position": [10, 20, 30], "orientation": {"form": "zyx-current", "values": [9, 8, 7]}},
    "tools": {
        "saw": {
            "position": [12, -7, 140],
            "orientation": {"form": "zyx-current", "values": [25, -35, 60]},
        }
    },
    "default_tool": "saw",
}
POSTURE = [20.0, -35.0, 50.0, 80.0, 65.0, -30.0]


async def answer_of(client: httpx.AsyncClient, arm: Any, **asked: Any) -> dict[str, Any]:
    answer = await client.post("/v1/jacobians", json={"arm": arm, **asked})
    assert answer.status_code == 200, answer.text
    told: dict[str, Any] = answer.json()
    return told


async def item_of(client: httpx.AsyncClient, arm: Any, **asked: Any) -> dict[str, Any]:
    (item,) = (await answer_of(client, arm, **asked))["jacobians"]
    found: dict[str, Any] = item
    return found


async def test_what_stands_in_an_answer(client: httpx.AsyncClient) -> None:
    vectors = {"speeds": [[1] * 6], "twists": [[0] * 6], "loads": [[0] * 6]}
    told = await answer_of(client, SKEW, joints=[POSTURE], **vectors)
    assert list(told) == ["arm", "units", "frame", "tool", "jacobians"]
    (item,) = told["jacobians"]
    head = ["ok", "code", "matrix", "singular_values", "singularity"]
    assert list(item) == [*head, "twists", "speeds", "efforts", "findings"]
    assert np.shape(item["matrix"]) == (6, 6)
    bare = await item_of(client, SKEW, joints=[POSTURE], singularity=False)
    assert list(bare) == ["ok", "code", "matrix", "singular_values", "findings"]
    assert bare["matrix"] == item["matrix"]


@pytest.mark.parametrize(
    ("units", "linear", "angular"),
    [
        ("mm-deg", 1000 * math.pi / 180, 1.0),
        ("m-rad", 1.0, 1.0),
        ("in-deg", math.pi / 180 / 0.0254, 1.0),
    ],
)
async def test_entries_are_tool_units_per_joint_unit(
    client: httpx.AsyncClient, units: str, linear: float, angular: float
) -> None:
    quarter = 90 if "deg" in units else math.pi / 2
    item = await item_of(client, PLANAR, joints=[[0, quarter]], units=units)
    by_hand = [[-0.3, -0.3], [0.4, 0], [0, 0], [0, 0], [0, 0], [1, 1]]
    scale = np.array([linear] * 3 + [angular] * 3)[:, None]
    np.testing.assert_allclose(item["matrix"], by_hand * scale, atol=1e-9)
    # Beside the matrix stand those of the matrix in metres and radians.
    values = np.linalg.svd(np.array(by_hand), compute_uv=False)
    np.testing.assert_allclose(item["singular_values"], values, atol=1e-12)


async def test_a_slide_moves_the_tool_by_as_much(client: httpx.AsyncClient) -> None:
    slide = {"joint": "prismatic", "a": 0, "alpha": 0, "d": 100, "theta": 0}
    for units in ("mm-deg", "m-rad", "in-deg"):
        item = await item_of(client, {**PLANAR, "rows": [slide]}, joints=[[1]], units=units)
        np.testing.assert_allclose(item["matrix"], [[0], [0], [1], [0], [0], [0]], atol=1e-12)


async def test_frames_turn_the_axes_and_leave_the_point(client: httpx.AsyncClient) -> None:
    frames = {
        "jig": {"position": [5, 6, 7], "orientation": {"form": "xyx-fixed", "values": [1, 2, 3]}}
    }
    arm = {**SKEW, "frames": frames}
    asked = {"arm": arm, "joints": [POSTURE], "form": "matrix"}
    rotations = {"base": np.eye(3)}
    for frame in ("world", "jig"):
        # Zero rows, no tool: what is answered is the base in the frame.
        bare = {**arm, "rows": []}
        body = {"arm": bare, "joints": [[]], "form": "matrix", "frame": frame, "tool": "flange"}
        (item,) = (await client.post("/v1/poses", json=body)).json()["poses"]
        rotations[frame] = np.array(item["orientation"]["values"])
    for frame in ("tool", "flange"):
        named = "saw" if frame == "tool" else "flange"
        (item,) = (await client.post("/v1/poses", json={**asked, "tool": named})).json()["poses"]
        rotations[frame] = np.array(item["orientation"]["values"]).T
    in_base = np.array((await item_of(client, arm, joints=[POSTURE]))["matrix"])
    for frame, rotation in rotations.items():
        told = await answer_of(client, arm, joints=[POSTURE], frame=frame)
        assert told["frame"] == frame
        (item,) = told["jacobians"]
        turned = np.vstack([rotation @ in_base[:3], rotation @ in_base[3:]])
        np.testing.assert_allclose(item["matrix"], turned, atol=1e-9)
    assert len(rotations) == 5


@pytest.mark.parametrize("units", ["mm-deg", "m-rad", "in-deg"])
async def test_differences_of_poses(client: httpx.AsyncClient, units: str) -> None:
    """Columns are what poses change by: sixth-order central differences, in the user's units."""
    degree = 1 if "deg" in units else math.pi / 180
    length = {"mm": 1.0, "m": 0.001, "in": 1 / 25.4}[units.split("-")[0]]
    scale = np.array([degree, degree, degree, length, degree, degree])
    posture, step = np.array(POSTURE) * scale, 0.5 * scale
    offsets, weights = (-3, -2, -1, 1, 2, 3), np.array([-1, 9, -45, 45, -9, 1]) / 60
    joints = [
        (posture + offset * step * np.eye(6)[joint]).tolist()
        for joint in range(6)
        for offset in offsets
    ]
    asked = {"arm": SKEW, "units": units, "form": "matrix", "singularity": False}
    poses = (await client.post("/v1/poses", json={**asked, "joints": joints})).json()["poses"]
    item = await item_of(client, SKEW, joints=[posture.tolist()], units=units)
    matrix = np.array(item["matrix"])
    here = (await client.post("/v1/poses", json={**asked, "joints": [posture.tolist()]})).json()
    rotation = np.array(here["poses"][0]["orientation"]["values"])
    positions = np.array([pose["position"] for pose in poses]).reshape(6, 6, 3)
    turns = np.array([pose["orientation"]["values"] for pose in poses]).reshape(6, 6, 3, 3)
    for joint in range(6):
        linear = weights @ positions[joint] / step[joint]
        np.testing.assert_allclose(matrix[:3, joint], linear, rtol=1e-8, atol=1e-8)
        rate = np.tensordot(weights, turns[joint], 1) / step[joint] @ rotation.T
        angular = np.array([rate[2, 1], rate[0, 2], rate[1, 0]])
        angular = np.rad2deg(angular) if "deg" in units else angular
        np.testing.assert_allclose(matrix[3:, joint], angular, rtol=1e-8, atol=1e-8)


async def test_speeds_become_twists_and_back(client: httpx.AsyncClient) -> None:
    speeds = [[10, -20, 30, 40, -50, 60], [0, 0, 0, 100, 0, 0]]
    joints = [POSTURE, [0, -40, 40, 0, 50, 0]]
    for frame in ("base", "world", "tool"):
        told = await answer_of(client, SKEW, joints=joints, speeds=speeds, frame=frame)
        twists = [item["twists"] for item in told["jacobians"]]
        for item, speed in zip(told["jacobians"], speeds, strict=True):
            np.testing.assert_allclose(item["twists"], np.array(item["matrix"]) @ speed, atol=1e-9)
        back = await answer_of(client, SKEW, joints=joints, twists=twists, frame=frame)
        for item, speed in zip(back["jacobians"], speeds, strict=True):
            np.testing.assert_allclose(item["speeds"], speed, atol=1e-6)


async def test_a_load_that_points_up_holds_a_weight(client: httpx.AsyncClient) -> None:
    """100 N up at 0.7 m: 70 Nm about axis 1 and 30 Nm about axis 2, in every unit system."""
    upright = {**PLANAR, "rows": [{**ROW, "alpha": 0}, {**ROW, "a": 300}]}
    upright["base"] = {
        "position": [0, 0, 0],
        "orientation": {"form": "xyz-fixed", "values": [90, 0, 0]},
    }
    for units in ("mm-deg", "m-rad", "in-deg"):
        asked = {"joints": [[0, 0]], "units": units, "frame": "world"}
        item = await item_of(client, upright, loads=[[0, 0, 100, 0, 0, 0]], **asked)
        assert item["efforts"] == pytest.approx([70, 30])
        item = await item_of(client, upright, loads=[[0, 0, 0, 0, -5, 0]], **asked)
        assert item["efforts"] == pytest.approx([5, 5])


async def test_power_is_the_same_at_joints_and_tool(client: httpx.AsyncClient) -> None:
    speeds, load = [0.3, -0.2, 0.5, 0.1, -0.4, 0.6], [10, -20, 30, 4, 5, -6]
    asked = {"joints": [[0.3, -0.6, 0.9, 0.08, 1.1, -0.5]], "units": "m-rad"}
    item = await item_of(client, SKEW, speeds=[speeds], loads=[load], **asked)
    assert np.dot(item["efforts"], speeds) == pytest.approx(np.dot(item["twists"], load))


async def test_a_twist_that_cannot_be_met_is_damped_and_said(client: httpx.AsyncClient) -> None:
    """Stretched, the arm cannot move outwards: finite speeds, and a finding."""
    for joints, twist in [([0, 0], [100, 0, 0, 0, 0, 0]), ([0, 0.001], [100, 0, 0, 0, 0, 0])]:
        item = await item_of(client, PLANAR, joints=[joints], twists=[twist])
        assert np.abs(item["speeds"]).max() < 1e5
        assert len([found for found in item["findings"] if found["code"] in (1, 2)]) >= 1
        assert len(item["findings"]) >= 2
    met = await item_of(
        client, PLANAR, joints=[[0, 90]], twists=[[-30, 40, 0, 0, 0, 0]], task="position"
    )
    assert met["matrix"] is not None


async def test_vectors_stay_with_their_joints_when_one_is_bad(client: httpx.AsyncClient) -> None:
    joints: list[Any] = [[0, 30], ["x", 0], [10, 60]]
    carried = {
        "speeds": [[1, 2], [100, 100], [3, 4]],
        "twists": [[1, 0, 0, 0, 0, 0], [9] * 6, [0, 1, 0, 0, 0, 0]],
        "loads": [[5, 0, 0, 0, 0, 0], [9] * 6, [0, 5, 0, 0, 0, 0]],
    }
    items = (await answer_of(client, PLANAR, joints=joints, **carried))["jacobians"]
    assert [item["ok"] for item in items] == [True, False, True]
    for index in (0, 2):
        alone = {name: [rows[index]] for name, rows in carried.items()}
        assert items[index] == await item_of(client, PLANAR, joints=[joints[index]], **alone)


async def test_an_arm_without_rows(client: httpx.AsyncClient) -> None:
    vectors = {"speeds": [[]], "twists": [[0] * 6], "loads": [[1] * 6]}
    item = await item_of(client, {**PLANAR, "rows": []}, joints=[[]], **vectors)
    assert item["matrix"] == [[]] * 6
    assert (item["singular_values"], item["singularity"]) == ([], None)
    assert (item["twists"], item["speeds"], item["efforts"]) == ([0] * 6, [], [])


async def test_a_passive_row_has_no_column(client: httpx.AsyncClient) -> None:
    held = {**ROW, "passive": True, "couplings": [{"axis": 1, "ratio": -1}]}
    item = await item_of(client, {**PLANAR, "rows": [ROW, held]}, joints=[[30]], units="mm-deg")
    # The second link keeps its direction: the tool moves as the end of the first one does.
    per_degree = 400 * math.pi / 180
    column = [[-per_degree / 2], [per_degree * math.sqrt(3) / 2], [0], [0], [0], [0]]
    np.testing.assert_allclose(item["matrix"], column, atol=1e-9)


@pytest.mark.parametrize("frame", ["base", "world", "tool", "flange"])
@pytest.mark.parametrize("units", ["mm-deg", "in-deg", "m-rad"])
async def test_no_motion_has_a_part_along_what_is_lost(
    client: httpx.AsyncClient, frame: str, units: str
) -> None:
    """lost_motion is a unit twist in metres and radians, in the axes asked for."""
    joint = 15 if "deg" in units else math.radians(15)
    item = await item_of(client, PLANAR, joints=[[joint, 0]], frame=frame, units=units)
    si = await item_of(client, PLANAR, joints=[[math.radians(15), 0]], frame=frame, units="m-rad")
    (lost,) = item["singularity"]["lost_motion"]
    along = np.array([*lost["linear"], *lost["angular"]])
    assert np.linalg.norm(along) == pytest.approx(1)
    np.testing.assert_allclose(along @ np.array(si["matrix"]), 0, atol=1e-12)
    assert frame in lost["say"] or "line" in lost["say"]
    assert item["singularity"]["lost_motion"] == si["singularity"]["lost_motion"]


async def test_how_far_to_the_singular_place(client: httpx.AsyncClient) -> None:
    for angle, units, unit in [(0.2, "mm-deg", "deg"), (-0.002, "m-rad", "rad")]:
        item = await item_of(client, PLANAR, joints=[[0, angle]], units=units)
        told = item["singularity"]["travel_to"]
        assert (told["joint"], told["unit"]) == (2, unit)
        # Signed: there, to first order, the arm is stretched.
        assert angle + told["value"] == pytest.approx(0, abs=abs(angle) * 1e-2)
    item = await item_of(client, PLANAR, joints=[[0, 0]])
    assert item["singularity"]["travel_to"] is None


async def test_tool_speed_needs_every_top_speed(client: httpx.AsyncClient) -> None:
    assert (await item_of(client, PLANAR, joints=[[0, 90]]))["singularity"]["tool_speed"] is None
    fast = {**PLANAR, "rows": [{**ROW, "top_speed": 90}, {**ROW, "a": 300, "top_speed": 180}]}
    speeds = {}
    for units, quarter in (("mm-deg", 90), ("m-rad", math.pi / 2)):
        item = await item_of(client, fast, joints=[[0, quarter]], units=units)
        speeds[units] = item["singularity"]["tool_speed"]
    assert speeds["mm-deg"]["linear"] == pytest.approx(1000 * speeds["m-rad"]["linear"])
    # Nothing the joints can do at full speed beats it along the weakest direction.
    jacobian = np.array((await item_of(client, fast, joints=[[0, 90]], units="mm-deg"))["matrix"])[
        :2
    ]
    left = np.linalg.svd(jacobian)[0][:, -1]
    corners = [[90 * i, 180 * j] for i in (-1, 1) for j in (-1, 1)]
    assert speeds["mm-deg"]["linear"] <= max(left @ jacobian @ corner for corner in corners) + 1e-9
    stopped = await item_of(client, fast, joints=[[0, 0]])
    assert stopped["singularity"]["tool_speed"]["linear"] == pytest.approx(0, abs=1e-6)
