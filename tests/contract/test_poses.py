"""POST /v1/poses as the contract has it, held by hand on an arm that can be drawn on paper.

Left out: bad input (test_bad_questions, test_bad_arms) and long check lists (published).
"""

import math
from typing import Any

import httpx
import numpy as np
import pytest

from kinematics.orientation_forms import FORMS, TRIPLES, rotation_from
from service.wire.arms import read_arm

pytestmark = pytest.mark.anyio

TURN = {"form": "xyz-fixed", "values": [0, 0, 90]}
STRAIGHT = {"form": "xyz-fixed", "values": [0, 0, 0]}
ROW = {"joint": "revolute", "a": 400, "alpha": 0, "d": 0, "theta": 0}
ARM: dict[str, Any] = {
    "name": "two-turns",
    "convention": "standard",
    "units": "mm-deg",
    "rows": [ROW, {**ROW, "a": 300}],
    "base": {"position": [1000, 0, 500], "orientation": TURN},
    "tools": {"pen": {"position": [0, 0, 120], "orientation": STRAIGHT}},
    "default_tool": "flange",
    "frames": {
        "table": {"position": [1000, 1000, 0], "orientation": TURN},
        "tray": {"position": [0, 100, 50], "orientation": STRAIGHT, "in": "table"},
        "rail": {"position": [0, -50, 0], "orientation": STRAIGHT, "in": "base"},
    },
}
IDENTITY = ["name", "revision", "digest", "table_digest", "setup_digest"]
SINGULARITY = [
    "state",
    "kinds",
    "joints",
    "task",
    "smallest_singular_value",
    "condition_number",
    "manipulability",
    "characteristic_length",
    "lost_motion",
    "travel_to",
    "tool_speed",
]


async def answer_of(client: httpx.AsyncClient, **asked: Any) -> dict[str, Any]:
    body = {"arm": ARM, "joints": [[0, 90]], **asked}
    answer = await client.post("/v1/poses", json=body)
    assert answer.status_code == 200, answer.text
    told: dict[str, Any] = answer.json()
    return told


async def item_of(client: httpx.AsyncClient, **asked: Any) -> dict[str, Any]:
    (item,) = (await answer_of(client, **asked))["poses"]
    found: dict[str, Any] = item
    return found


async def test_what_stands_in_an_answer(client: httpx.AsyncClient) -> None:
    told = await answer_of(client, joints=[[0, 90], [0, 0]])
    assert list(told) == ["arm", "units", "frame", "tool", "poses"]
    assert list(told["arm"]) == IDENTITY
    assert (told["units"], told["frame"], told["tool"]) == ("mm-deg", "base", "flange")
    for item in told["poses"]:
        assert list(item) == ["ok", "code", "position", "orientation", "singularity", "findings"]
        assert list(item["singularity"]) == SINGULARITY
        assert item["code"] == max((found["code"] for found in item["findings"]), default=0)
        assert item["orientation"]["form"] == "quaternion-wxyz"


async def test_which_numbers_it_came_from(client: httpx.AsyncClient) -> None:
    digests = read_arm(ARM).digests
    told = await answer_of(client)
    assert [told["arm"][key] for key in IDENTITY] == [
        "two-turns",
        None,
        digests.digest,
        digests.table_digest,
        digests.setup_digest,
    ]
    await client.post("/v1/arms", json=ARM)
    await client.put(
        "/v1/arms/two-turns", json={**ARM, "rows": [ROW, ROW]}, headers={"If-Match": "*"}
    )
    by_name = await answer_of(client, arm="two-turns")
    pinned = await answer_of(client, arm={"name": "two-turns", "revision": 1})
    assert (by_name["arm"]["revision"], pinned["arm"]["revision"]) == (2, 1)
    assert by_name["arm"]["digest"] != pinned["arm"]["digest"] == digests.digest
    assert pinned["poses"] == told["poses"]


@pytest.mark.parametrize(
    ("frame", "position", "turned"),
    [
        (None, [400, 300, 0], 90),
        ("base", [400, 300, 0], 90),
        # The base stands at (1000, 0, 500), turned by 90 deg.
        ("world", [700, 400, 500], 180),
        ("rail", [400, 350, 0], 90),
        # The table stands at (1000, 1000, 0), turned by 90 deg; the tray on it.
        ("table", [-600, 300, 500], 90),
        ("tray", [-600, 200, 450], 90),
    ],
)
async def test_frames(
    client: httpx.AsyncClient, frame: str | None, position: list[float], turned: float
) -> None:
    asked = {} if frame is None else {"frame": frame}
    told = await answer_of(client, form="zyx-current", **asked)
    assert told["frame"] == (frame or "base")
    (item,) = told["poses"]
    assert item["position"] == pytest.approx(position, abs=1e-9)
    assert item["orientation"]["values"] == pytest.approx([turned, 0, 0], abs=1e-9)


async def test_tools(client: httpx.AsyncClient) -> None:
    bare = {key: value for key, value in ARM.items() if key not in ("tools", "default_tool")}
    pose = {"position": [10, 0, 20], "orientation": TURN}
    for asked, shown, position in [
        ({}, "flange", [400, 300, 0]),
        ({"arm": bare}, "flange", [400, 300, 0]),
        ({"arm": {**ARM, "default_tool": "pen"}}, "pen", [400, 300, 120]),
        ({"tool": "flange", "arm": {**ARM, "default_tool": "pen"}}, "flange", [400, 300, 0]),
        ({"tool": "pen"}, "pen", [400, 300, 120]),
        ({"tool": pose}, pose, [400, 310, 20]),
    ]:
        told = await answer_of(client, **asked)
        assert told["tool"] == shown
        assert told["poses"][0]["position"] == pytest.approx(position, abs=1e-9)


@pytest.mark.parametrize("form", FORMS)
async def test_every_form(client: httpx.AsyncClient, form: str) -> None:
    tool = {"position": [1, 2, 3], "orientation": {"form": "zyx-current", "values": [10, 20, -130]}}
    expected = (await item_of(client, tool=tool, form="matrix"))["orientation"]["values"]
    told = (await item_of(client, tool=tool, form=form))["orientation"]
    assert told["form"] == form
    values = np.array(told["values"])
    if form in TRIPLES:
        assert (np.abs(values) <= 180).all()
        three_axes = len(set(form[:3])) == 3
        assert -90 <= values[1] <= 90 if three_axes else values[1] >= 0
    angular = form in TRIPLES or form == "rotation-vector"
    rotation = rotation_from(form, np.deg2rad(values) if angular else values)
    np.testing.assert_allclose(rotation, expected, atol=1e-12)
    # What comes out goes in again.
    back = await item_of(
        client, tool={"position": [1, 2, 3], "orientation": told}, joints=[[0, 0]], form="matrix"
    )
    np.testing.assert_allclose(back["orientation"]["values"], rotation, atol=1e-12)


def test_all_forms_are_here() -> None:
    assert (len(FORMS), len(TRIPLES)) == (28, 24)


async def test_quaternions_come_out_with_w_not_negative(client: httpx.AsyncClient) -> None:
    joints = [[angle, angle] for angle in range(-180, 181, 15)]
    for form, at in (("quaternion-wxyz", 0), ("quaternion-xyzw", 3)):
        items = (await answer_of(client, joints=joints, form=form))["poses"]
        assert all(item["orientation"]["values"][at] >= 0 for item in items)


async def test_angles_that_are_not_unique(client: httpx.AsyncClient) -> None:
    tool = {"position": [0, 0, 0], "orientation": {"form": "zyx-current", "values": [20, 90, 0]}}
    item = await item_of(client, tool=tool, form="zyx-current", joints=[[5, 90]])
    (found,) = [each for each in item["findings"] if each["code"] == 5]
    assert found["name"] == "angles-not-unique"
    first, middle, last = item["orientation"]["values"]
    assert (middle, last) == (pytest.approx(90), 0)
    assert first == pytest.approx(115)
    assert "first" in found["say"] or "minus" in found["say"] or "-" in found["say"]
    assert item["code"] == 5
    quaternion = await item_of(client, tool=tool, joints=[[5, 90]])
    assert [each["code"] for each in quaternion["findings"]] == []


@pytest.mark.parametrize(
    ("units", "length", "angle"),
    [("mm-deg", 1000.0, 1), ("m-rad", 1, 0), ("in-deg", 1 / 0.0254, 1)],
)
async def test_units_of_question_and_answer(
    client: httpx.AsyncClient, units: str, length: float, angle: int
) -> None:
    quarter = 90 if angle else math.pi / 2
    told = await answer_of(client, units=units, joints=[[0, quarter]], form="zyx-current")
    assert told["units"] == units
    (item,) = told["poses"]
    assert item["position"] == pytest.approx([0.4 * length, 0.3 * length, 0])
    assert item["orientation"]["values"] == pytest.approx([quarter, 0, 0])
    assert item["singularity"]["characteristic_length"] == pytest.approx(0.7 * length)
    tool = {"position": [0, 0, 0.12 * length], "orientation": STRAIGHT}
    item = await item_of(client, units=units, joints=[[0, 0]], tool=tool)
    assert item["position"] == pytest.approx([0.7 * length, 0, 0.12 * length])


async def test_links(client: httpx.AsyncClient) -> None:
    for frame, start in (("base", [0, 0, 0]), ("world", [1000, 0, 500])):
        item = await item_of(client, frame=frame, links=True, form="zyx-current", tool="pen")
        assert len(item["links"]) == 3
        assert item["links"][0]["position"] == pytest.approx(start)
        for link in item["links"]:
            assert link["orientation"]["form"] == "zyx-current"
    item = await item_of(client, links=True)
    positions = [[0, 0, 0], [400, 0, 0], [400, 300, 0]]
    told = [link["position"] for link in item["links"]]
    np.testing.assert_allclose(told, positions, atol=1e-9)
    modified = {**ARM, "convention": "modified"}
    item = await item_of(client, arm=modified, links=True)
    # Read as modified, a stands before the joint: frame 2 sits in the second joint.
    told = [link["position"] for link in item["links"]]
    np.testing.assert_allclose(told, [[0, 0, 0], [400, 0, 0], [700, 0, 0]], atol=1e-9)
    assert "links" not in await item_of(client)


async def test_no_singularity_where_none_is_asked(client: httpx.AsyncClient) -> None:
    item = await item_of(client, joints=[[0, 0]], singularity=False)
    assert "singularity" not in item
    assert (item["code"], item["findings"]) == (0, [])
    item = await item_of(client, joints=[[0, 0]])
    assert item["singularity"]["state"] == "singular"
    assert item["code"] == 2


async def test_singularity_is_told_in_words_of_the_frame(client: httpx.AsyncClient) -> None:
    for frame, axis, word in [
        ("base", 0, "base x"),
        ("world", 1, "world y"),
        ("rail", 0, "rail x"),
    ]:
        item = await item_of(client, joints=[[0, 0]], frame=frame)
        told = item["singularity"]
        assert (told["kinds"][0], told["joints"]) == ("elbow", [1, 2])
        (lost,) = told["lost_motion"]
        linear = [0.0, 0.0, 0.0]
        linear[axis] = 1.0
        assert np.abs(lost["linear"]) == pytest.approx(linear, abs=1e-9)
        assert lost["angular"] == pytest.approx([0, 0, 0], abs=1e-9)
        assert word in lost["say"]
        assert told["condition_number"] is None


async def test_the_task_asked_for_is_the_one_judged(client: httpx.AsyncClient) -> None:
    for task, state in [
        (["vx", "vy"], "singular"),
        (["vy"], "regular"),
        ("orientation", "regular"),
        ("position", "singular"),
    ]:
        told = (await item_of(client, joints=[[0, 0]], task=task))["singularity"]
        assert (told["task"], told["state"]) == (task, state)
    assert (await item_of(client))["singularity"]["task"] == "position"


async def test_an_arm_without_rows(client: httpx.AsyncClient) -> None:
    arm = {**ARM, "rows": []}
    told = await answer_of(client, arm=arm, joints=[[], []], tool="pen", frame="world", links=True)
    assert len(told["poses"]) == 2
    for item in told["poses"]:
        assert item["position"] == pytest.approx([1000, 0, 620])
        assert item["singularity"] is None
        assert len(item["links"]) == 1
    assert (await answer_of(client, arm=arm, joints=[]))["poses"] == []


async def test_no_joint_vectors_no_poses(client: httpx.AsyncClient) -> None:
    assert (await answer_of(client, joints=[]))["poses"] == []


async def test_passive_and_coupled_rows(client: httpx.AsyncClient) -> None:
    """A linkage holds the last row level: it takes back what both joints turn."""
    level = [{"axis": 1, "ratio": -1}, {"axis": 2, "ratio": 1}]
    hand = {**ROW, "a": 100, "passive": True, "couplings": level, "travel": [-60, 60]}
    arm = {**ARM, "rows": [ROW, {**ROW, "direction": -1}, hand]}
    told = await answer_of(client, arm=arm, joints=[[30, -20]], form="zyx-current")
    (item,) = told["poses"]
    assert item["orientation"]["values"] == pytest.approx([0, 0, 0], abs=1e-9)
    assert item["findings"] == []
    x = 400 * math.cos(math.radians(30)) + 400 * math.cos(math.radians(50)) + 100
    assert item["position"][0] == pytest.approx(x)
    (item,) = (await answer_of(client, arm=arm, joints=[[40, -30]]))["poses"]
    (found,) = [each for each in item["findings"] if each["code"] == 4]
    assert (found["row"], found["measure"], found["threshold"]) == (3, pytest.approx(-70), -60)
    assert "joint" not in found


async def test_combined_travel(client: httpx.AsyncClient) -> None:
    arm = {**ARM, "combined_travel": [{"ratios": {"1": 1, "2": 1}, "travel": [-60, 75]}]}
    item = await item_of(client, arm=arm, joints=[[50, 40]])
    (found,) = [each for each in item["findings"] if each["code"] == 4]
    assert (found["measure"], found["threshold"], found["unit"]) == (pytest.approx(90), 75, "deg")
    assert (await item_of(client, arm=arm, joints=[[50, 20]]))["code"] == 0


async def test_repaired_input_is_said(client: httpx.AsyncClient) -> None:
    matrix = [[1.001, 0, 0, 5], [0, 1.001, 0, 0], [0, 0, 1.001, 0], [0, 0, 0, 1]]
    scaled = {
        "position": [5, 0, 0],
        "orientation": {"form": "quaternion-wxyz", "values": [2] + [0] * 3},
    }
    for tool in ({"matrix": matrix}, scaled):
        told = await answer_of(client, tool=tool, joints=[[0, 90], [0, 45]])
        for item in told["poses"]:
            (found,) = [each for each in item["findings"] if each["code"] == 6]
            assert found["name"] == "input-repaired"
            assert (item["code"], found["unit"]) == (6, "")
        assert told["poses"][0]["position"] == pytest.approx([400, 305, 0])
    item = await item_of(client, arm={**ARM, "base": {"matrix": matrix}})
    assert item["code"] == 6


async def test_a_finding_has_all_its_fields(client: httpx.AsyncClient) -> None:
    arm = {**ARM, "rows": [{**ROW, "travel": [-10, 10]}, ROW]}
    item = await item_of(client, arm=arm, joints=[[20, 0]])
    assert len(item["findings"]) == 2
    for found in item["findings"]:
        assert list(found)[:6] == ["code", "name", "say", "measure", "threshold", "unit"]
    assert item["findings"][0]["joint"] == 1
