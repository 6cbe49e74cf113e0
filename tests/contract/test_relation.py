"""What a controller gets for one GET about two frames: nested or flat, by names or numbers.

Left out: what it shares with the question for a pose and is held there (test_controller).
"""

from typing import Any

import httpx
import numpy as np
import pytest

from tests.contract.refusals import only_entry
from tests.contract.test_controller import (
    ADDRESS,
    BENT,
    GONE,
    LONGEST,
    flat,
    flat_keys,
    largest_arm,
)
from tests.contract.test_frames import ARM, CELL, TURNTABLE, at, pair

pytestmark = pytest.mark.anyio

NUMBERED: dict[str, Any] = {
    **ARM,
    "tools": {"claw": {**at(0, 0, 120), "number": 1}, "pen": at(0, 0, 50)},
    "default_tool": "pen",
    "frames": {
        "tray": {**at(0, 500, 0), "in": "base", "number": 1},
        "shelf": {**at(0, 0, 700), "number": 4},
    },
}
URL = "/v1/arms/picker/relation"
PORTER = "/v1/arms/porter/relation"


@pytest.fixture
async def stocked(client: httpx.AsyncClient) -> httpx.AsyncClient:
    """A client of a service that holds an arm of its own, and one that stands in a cell."""
    eye = {**CELL["frames"]["part"], "in": "porter.flange", "number": 9}
    cell = {**CELL, "frames": {**CELL["frames"], "wrist-eye": eye}}
    cell["arms"] = {**CELL["arms"], "porter": {"in": "world", "pose": at(0, -1000, 0)}}
    assert (await client.post("/v1/cells", json=cell)).status_code == 201
    porter = {key: part for key, part in ARM.items() if key != "base"}
    for arm in (NUMBERED, TURNTABLE, {**porter, "name": "porter", "cell": "hall"}):
        answer = await client.post("/v1/arms", json=arm)
        assert answer.status_code == 201, answer.text
    return client


async def position(client: httpx.AsyncClient, query: str, url: str = URL) -> list[float]:
    answer = await client.get(f"{url}?{query}")
    assert answer.status_code == 200, answer.text
    (found,) = answer.json()["answers"]
    values: list[float] = found["pose"]["position"]
    return values


async def test_the_nested_answer(stocked: httpx.AsyncClient) -> None:
    answer = (await stocked.get(f"{URL}?of=claw&in=tray&q=0,90&tag=7&form=xyz-fixed")).json()
    stored = (await stocked.get("/v1/arms/picker")).json()
    head = ["ok", "code", "seq", "tag", "t_ms", "arm", "units", "answers"]
    assert list(answer) == head
    assert (answer["ok"], answer["code"], answer["tag"]) == (True, 0, 7)
    assert answer["arm"]["digest"] == stored["digest"]
    (found,) = answer["answers"]
    assert list(found) == ["of", "in", "pose", "path", "say", "findings"]
    assert (found["of"], found["in"], found["findings"]) == ("claw", "tray", [])
    assert found["path"] == ["picker.tray", "picker.base", "picker.flange", "picker.claw"]
    np.testing.assert_allclose(found["pose"]["position"], [400, -100, 120], rtol=0, atol=1e-9)
    body = {
        "arms": [{"arm": "picker", "joints": [0, 90]}],
        "find": [pair("picker.claw", "picker.tray")],
        "form": "xyz-fixed",
    }
    same = (await stocked.post("/v1/frames", json=body)).json()["answers"][0]
    assert {**found, "of": "picker.claw", "in": "picker.tray"} == same


async def test_flat_has_the_keys_of_a_pose(stocked: httpx.AsyncClient) -> None:
    query = "of=claw&in=base&q=0,90&tag=3"
    told = flat(await stocked.get(f"{URL}?{query}&format=flat"), flat_keys(None))
    pose = await stocked.get("/v1/arms/picker/pose?tool=claw&q=0,90&tag=3&format=flat")
    same = flat(pose, flat_keys(None))
    judged = {"seq", "t_ms", "state", "condition", "code", "flags"}
    for key in same.keys() - judged:
        assert told[key] == pytest.approx(same[key], abs=1e-9), key
    assert (told["ok"], told["state"], told["condition"]) == (1, "none", 0)
    assert (told["tool_no"], told["frame_no"]) == (1, 0)
    line = (await stocked.get(f"{URL}?{query}&format=txt")).text
    longest = (await stocked.get("/v1/arms/picker/pose?q=0,90&format=txt")).text
    assert len(line) == len(longest) <= 254
    assert line.startswith("1;0  ;")
    head, row, end = (await stocked.get(f"{URL}?{query}&format=csv")).text.split("\r\n")
    assert (head.split(","), end) == (flat_keys(None), "")
    assert len(row.split(",")) == len(flat_keys(None))


async def test_whole_numbers(stocked: httpx.AsyncClient) -> None:
    query = "of=claw&in=base&q=0,90000&scale=1000"
    told = (await stocked.get(f"{URL}?{query}&format=flat")).json()
    assert (told["x"], told["y"], told["z"], told["r3"]) == (400_000, 400_000, 120_000, 90_000)
    nested = (await stocked.get(f"{URL}?{query}")).json()
    assert nested["answers"][0]["pose"]["position"] == [400_000, 400_000, 120_000]


@pytest.mark.parametrize(
    ("of", "within", "expected", "tool_no", "frame_no"),
    [
        ("1", "1", [400, -100, 120], 1, 1),
        ("claw", "tray", [400, -100, 120], 1, 1),
        ("0", "0", [400, 400, 0], 0, 0),
        ("0" * 5000 + "1", "01", [400, -100, 120], 1, 1),
        ("flange", "base", [400, 400, 0], 0, 0),
        ("tool", "world", [1400, 400, 50], 0, 0),
        ("4", "world", [0, 0, 700], 0, 0),
        ("world", "4", [0, 0, -700], 0, 4),
        ("link-1", "link-0", [400, 0, 0], 0, 0),
        ("picker.claw", "picker.pen", [0, 0, 70], 0, 0),
        ("tray", "claw", [100, 400, -120], 0, 0),
    ],
)
async def test_names_and_numbers(
    stocked: httpx.AsyncClient,
    of: str,
    within: str,
    expected: list[float],
    tool_no: int,
    frame_no: int,
) -> None:
    query = f"of={of}&in={within}&q=0,90"
    np.testing.assert_allclose(await position(stocked, query), expected, rtol=0, atol=1e-9)
    told = (await stocked.get(f"{URL}?{query}&format=flat")).json()
    assert (told["tool_no"], told["frame_no"]) == (tool_no, frame_no)


async def test_what_is_in_the_cell(stocked: httpx.AsyncClient) -> None:
    """Frames that stand still, one that moves with this very arm, another arm's base."""
    assert await position(stocked, "of=bench&in=base", PORTER) == pytest.approx([0, 3000, 0])
    moving = await position(stocked, "of=wrist-eye&in=world&q=0,90", PORTER)
    np.testing.assert_allclose(moving, [400, -300, 0], rtol=0, atol=1e-9)
    assert await position(stocked, "of=9&in=flange", PORTER) == pytest.approx([300, 0, 0])
    other = await position(stocked, "of=turntable.base&in=bench", PORTER)
    assert other == pytest.approx([0, 0, 50])
    nested = (await stocked.get(f"{PORTER}?of=9&in=flange")).json()
    assert nested["cell"]["name"] == "hall"
    told = (await stocked.get(f"{PORTER}?of=flange&in=9&format=flat")).json()
    assert (told["frame_no"], told["margin"]) == (9, 9.9999)


async def test_beyond_travel_and_gimbal_lock(stocked: httpx.AsyncClient) -> None:
    told = (await stocked.get(f"{URL}?of=claw&in=base&q=0,175&format=flat")).json()
    assert (told["ok"], told["code"], told["flags"]) == (1, 4, 8)
    nested = (await stocked.get(f"{URL}?of=claw&in=base&q=0,175&form=zyz-current")).json()
    assert [finding["code"] for finding in nested["answers"][0]["findings"]] == [4, 5]
    assert nested["code"] == 5


# query, code, pointer, words said, words of the way out
REFUSED = [
    ("in=base&q=0,0", "missing-field", "/of", '"of" is missing', "of=gripper&in=fixture-a"),
    ("of=claw&in=&q=0,0", "missing-field", "/in", '"in" is missing', "say both"),
    ("of=clow&in=base&q=0,0", "unknown-frame", "/of", "no frame 'clow'", '"claw"'),
    ("of=claw&in=tary&q=0,0", "unknown-frame", "/in", "no frame 'tary'", '"tray"'),
    ("of=claw&in=7&q=0,0", "unknown-frame", "/in", "no frame '7'", "known here"),
    ("of=claw&in=1234567&q=0,0", "unknown-frame", "/in", "'1234567'", "known here"),
    ("of=link-3&in=base&q=0,0", "unknown-frame", "/of", "'link-3'", "link-"),
    ("of=claw&in=other.base&q=0,0", "unknown-frame", "/in", "'other.base'", '"picker.base"'),
    ("of=claw&in=base", "missing-field", "/q", "joint values of picker", "add q="),
    ("of=link-1&in=base", "missing-field", "/q", "where its link-1 is", "add q="),
    ("of=claw&in=base&q=0", "wrong-joint-count", "/q", "1 joint values", "give 2"),
    ("of=claw&in=base&q=", "wrong-joint-count", "/q", "0 joint values", "give 2"),
    ("of=claw&in=base&q1=0&q2=nan", "not-finite", "/q2", "finite", "finite"),
    ("of=claw&in=base&q1=0&q2=1e99", "out-of-range", "/q2", "beyond", "units"),
    ("of=claw&in=base&q=0,0&tool=pen", "unknown-field", "/tool", "tool", "known here"),
    ("of=claw&in=base&q=0,0&frame=tray", "unknown-field", "/frame", "frame", "form"),
    ("of=claw&of=pen&in=base&q=0,0", "unusable-value", "/of", "twice", "leave one"),
    ("of=claw&in=base&q=0,0&form=matrix&format=flat", "form-not-flat", "", "", ""),
    ("of=claw&in=base&q=0,0&units=cm", "unusable-value", "/units", "'cm'", "mm-deg"),
    ("of=claw&in=base&q=0,0&expect=00000000", "digest-differs", "/expect", "digest", "anew"),
    ("of=claw&in=base&q=0,0&revision=9", "unknown-revision", "/revision", "9", "revisions"),
]


@pytest.mark.parametrize(("query", "code", "pointer", "say", "way_out"), REFUSED)
async def test_refused(
    stocked: httpx.AsyncClient, query: str, code: str, pointer: str, say: str, way_out: str
) -> None:
    answer = await stocked.get(f"{URL}?{query}")
    if pointer:
        entry = only_entry(answer, code)
        assert (entry["pointer"], entry["in"]) == (pointer, "query")
        assert say in entry["say"]
        assert way_out in entry["way_out"]
    for inline in ("", "&errors=inline"):
        joined = query if "format=" in query else f"{query}&format=flat"
        refused = await stocked.get(f"{URL}?{joined}{inline}&tag=8")
        if inline:
            assert refused.status_code == 200
        told = flat(refused, flat_keys(None))
        assert (told["ok"], told["x"], told["tag"], told["form"]) == (0, GONE, 8, "")
    line = await stocked.get(f"{URL}?{query.replace('&format=flat', '')}&format=txt&errors=inline")
    assert len(line.text) == 197 or line.text.startswith("1;")


async def test_refused_in_json_with_status_200(stocked: httpx.AsyncClient) -> None:
    told = (await stocked.get(f"{URL}?of=claw&in=bse&q=0,0&errors=inline")).json()
    assert (told["ok"], told["code"], told["name"]) == (False, 104, "unknown-frame")
    answer = await stocked.get("/v1/arms/nobody/relation?of=a&in=b&format=flat")
    assert (answer.status_code, answer.json()["code"]) == (404, 103)


async def test_what_moves_with_another_arm(stocked: httpx.AsyncClient) -> None:
    answer = await stocked.get(f"{PORTER}?of=part&in=base&q=0,0")
    entry = only_entry(answer, "missing-field")
    assert "joint values of turntable" in entry["say"]
    assert "POST /v1/frames" in entry["way_out"]


async def test_head_is_get_without_a_body(stocked: httpx.AsyncClient) -> None:
    for query in ("of=claw&in=base&q=0,0", "of=claw&in=base&format=flat"):
        got, head = await stocked.get(f"{URL}?{query}"), await stocked.head(f"{URL}?{query}")
        assert (head.status_code, head.content) == (got.status_code, b"")
        assert head.headers["content-length"] == got.headers["content-length"]
        assert got.headers["cache-control"] == "no-store"


@pytest.mark.parametrize("units", ["mm-deg", "m-rad", "in-deg"])
async def test_budgets(client: httpx.AsyncClient, units: str) -> None:
    arm = largest_arm()
    assert (await client.post("/v1/arms", json=arm)).status_code == 201
    values = [float(text) / (57.3 if units == "m-rad" else 1.0) for text in BENT.split(",")]
    q = ",".join(f"{value:.7g}" for value in values)
    url = f"/v1/arms/{LONGEST[:-1]}1/relation?q={q}&tag=2147483647&of=998&in=999&units={units}"
    assert len(f"{ADDRESS}{url}&format=flat") <= 255
    for form, limit in [("flat", 1000), ("txt", 254), ("json", 16_000)]:
        answer = await client.get(f"{url}&format={form}")
        assert answer.status_code == 200, answer.text
        assert len(answer.content) <= limit
