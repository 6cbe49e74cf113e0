"""The named frame nearest to the tool, asked for beside a pose and a live one."""

import json
import math

import httpx
import pytest

from tests.contract.refusals import only_entry

pytestmark = pytest.mark.anyio

AT = {"form": "xyz-fixed", "values": [0, 0, 0]}
# One slide along z of the world: its joint value is the height of the flange.
MAST = {
    "name": "mast",
    "convention": "standard",
    "units": "mm-deg",
    "rows": [
        {"joint": "prismatic", "a": 0, "alpha": 0, "d": 0, "theta": 0, "travel": [-500, 2000]}
    ],
    "frames": {
        "low": {"in": "world", "position": [30, 0, 0], "orientation": AT},
        "high": {
            "in": "world",
            "position": [0, 0, 1000],
            "orientation": {"form": "xyz-fixed", "values": [90, 0, 0]},
        },
    },
}
POSE, LIVE = "/v1/arms/mast/pose", "/v1/arms/mast/live"


@pytest.fixture
async def mast(client: httpx.AsyncClient) -> httpx.AsyncClient:
    assert (await client.post("/v1/arms", json=MAST)).status_code == 201
    return client


@pytest.mark.parametrize(
    ("height", "frame", "distance", "say"),
    [
        (1042.0, "high", 42.0, "42 mm above high"),
        (958.0, "high", 42.0, "42 mm below high"),
        (1003.5, "high", 3.5, "3.5 mm above high"),
        (1000.0, "high", 0.0, "at high"),
        (40.0, "low", 50.0, "50 mm from low"),
        (200.0, "low", math.hypot(30.0, 200.0), "202 mm above low"),
    ],
)
async def test_what_is_near(
    mast: httpx.AsyncClient, height: float, frame: str, distance: float, say: str
) -> None:
    answer = await mast.get(POSE, params={"q": str(height), "nearest": "1"})
    near = answer.json()["poses"][0]["nearest"]
    assert near["frame"] == frame
    assert near["distance"] == pytest.approx(distance, abs=1e-9)
    assert near["say"] == say
    place = [-30.0, 0.0, height] if frame == "low" else [0.0, height - 1000.0, 0.0]
    assert near["position"] == pytest.approx(place, abs=1e-9)


async def test_it_is_the_same_frame_wherever_the_pose_is_told(mast: httpx.AsyncClient) -> None:
    """Also the one the pose is told in: the nearest is the nearest."""
    for frame in ("base", "world", "low", "high"):
        asked = {"q": "1042", "nearest": "1", "frame": frame}
        near = (await mast.get(POSE, params=asked)).json()["poses"][0]["nearest"]
        assert near["frame"] == "high"
        assert near["distance"] == pytest.approx(42.0, abs=1e-9)


@pytest.mark.parametrize(
    ("units", "distance", "say"),
    [("m-rad", 0.042, "0.042 m above high"), ("in-deg", 42 / 25.4, "1.7 in above high")],
)
async def test_units(mast: httpx.AsyncClient, units: str, distance: float, say: str) -> None:
    height = {"m-rad": 1.042, "in-deg": 1042 / 25.4}[units]
    asked = {"q": repr(height), "nearest": "1", "units": units}
    near = (await mast.get(POSE, params=asked)).json()["poses"][0]["nearest"]
    assert near["distance"] == pytest.approx(distance, abs=1e-9)
    assert near["say"] == say


async def test_only_who_asks_is_told(mast: httpx.AsyncClient) -> None:
    for asked in ({}, {"nearest": "0"}, {"nearest": "false"}):
        item = (await mast.get(POSE, params={"q": "1", **asked})).json()["poses"][0]
        assert "nearest" not in item


async def test_an_arm_without_frames_has_none(client: httpx.AsyncClient) -> None:
    await client.post("/v1/arms", json={**MAST, "frames": {}})
    item = (await client.get(POSE, params={"q": "1", "nearest": "1"})).json()["poses"][0]
    assert item["nearest"] is None


@pytest.mark.parametrize(
    "asked", [{"nearest": "2"}, {"nearest": ""}, {"nearest": "1", "format": "txt"}]
)
async def test_refusals(mast: httpx.AsyncClient, asked: dict[str, str]) -> None:
    answer = await mast.get(POSE, params={"q": "1", **asked})
    assert answer.status_code == 422
    if "format" not in asked:
        assert only_entry(answer, "unusable-value")["pointer"] == "/nearest"


async def test_beside_live_poses(mast: httpx.AsyncClient) -> None:
    await mast.put("/v1/arms/mast/joints", json={"joints": [1042], "period_ms": 3_600_000})
    for path in (LIVE, "/v1/live"):
        told = (await mast.get(path, params={"nearest": "1"})).json()
        live = told["arms"][0] if "arms" in told else told
        assert live["poses"][0]["nearest"]["say"] == "42 mm above high"
    plain = (await mast.get(LIVE)).json()
    assert "nearest" not in plain["poses"][0]


async def test_arms_without_values_are_counted(mast: httpx.AsyncClient) -> None:
    await mast.post("/v1/arms", json={**MAST, "name": "still"})
    assert (await mast.get("/v1/live")).json()["arms_without_values"] == 2
    await mast.put("/v1/arms/mast/joints", json={"joints": [1], "period_ms": 3_600_000})
    told = (await mast.get("/v1/live")).json()
    assert (len(told["arms"]), told["arms_without_values"]) == (1, 1)
    assert (await mast.delete("/v1/arms/still", headers={"if-match": "*"})).status_code < 300
    assert (await mast.get("/v1/live")).json()["arms_without_values"] == 0


def test_streams_tell_it_too(launch: object) -> None:
    server = launch()  # type: ignore[operator]
    with httpx.Client(base_url=server.url, timeout=20) as client:
        client.post("/v1/arms", json=MAST).raise_for_status()
        sent = {"joints": [1042], "period_ms": 3_600_000}
        client.put("/v1/arms/mast/joints", json=sent).raise_for_status()
        for path in (f"{LIVE}/stream", "/v1/live/stream"):
            with client.stream("GET", path, params={"nearest": "1", "rate": "10"}) as stream:
                lines = (line for line in stream.iter_lines() if line.startswith("data: "))
                told = json.loads(next(lines).removeprefix("data: "))
            assert told["poses"][0]["nearest"]["say"] == "42 mm above high"
