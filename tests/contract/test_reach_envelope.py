"""Envelopes over HTTP: as numbers and as a drawing, and what is refused."""

import asyncio
import json
import xml.etree.ElementTree as ET
from typing import Any

import httpx
import numpy as np
import pytest
from fastapi import FastAPI
from starlette.requests import ClientDisconnect, Request

from service.bulk.envelopes import answer_envelope
from service.operations import envelopes
from service.settings import Settings
from tests.contract.refusals import AT_ORIGIN, ROW, only_entry, sent

pytestmark = pytest.mark.anyio
ENVELOPE = "/v1/reach/envelope"
PLANAR: dict[str, Any] = {
    "name": "two-links",
    "convention": "standard",
    "units": "mm-deg",
    "rows": [
        {"joint": "revolute", "a": 0, "alpha": 90, "d": 500, "theta": 0},
        {"joint": "revolute", "a": 400, "alpha": 0, "d": 0, "theta": 0},
        {"joint": "revolute", "a": 300, "alpha": 0, "d": 0, "theta": 0},
    ],
}
"""Two links on a column, without limits: a hollow ball about the shoulder."""
SLIDE = {"joint": "prismatic", "a": 0, "alpha": 0, "d": 0, "theta": 0}


@pytest.fixture
def settings() -> Settings:
    """The demonstration cell."""
    return Settings(database=":memory:", demo=True)


async def told(client: httpx.AsyncClient, body: dict[str, Any]) -> dict[str, Any]:
    answer = await sent(client, ENVELOPE, body)
    assert answer.status_code == 200, answer.text
    found: dict[str, Any] = answer.json()
    return found


def enclosed(view: dict[str, Any]) -> float:
    """Return the area between the curves of a view, by the shoelace formula."""
    total = 0.0
    for curve in view["curves"]:
        x, y = np.array(curve["points"]).T
        signed = 0.5 * float(x @ np.roll(y, -1) - y @ np.roll(x, -1))
        assert (signed > 0.0) == curve["outer"]
        total += signed
    return total


@pytest.mark.parametrize(("units", "mm"), [("mm-deg", 1.0), ("m-rad", 1000.0), ("in-deg", 25.4)])
async def test_two_links_reach_a_hollow_ball(
    client: httpx.AsyncClient, units: str, mm: float
) -> None:
    answer = await told(client, {"arm": PLANAR, "units": units})
    reach = answer["travel"]
    section, volume = reach["section"], reach["volume"]
    assert reach["exact"] is section["exact"] is reach["plan"]["exact"] is True
    assert section["resolution"] is None
    assert (section["kind"], section["coordinates"]) == ("section", ["radius", "height"])
    ball = 4.0 / 3.0 * np.pi * (700.0**3 - 100.0**3)
    assert abs(volume["value"] * mm**3 - ball) <= volume["error_bound"] * mm**3 <= 1e-9 * ball
    half_ring = 0.5 * np.pi * (700.0**2 - 100.0**2)
    assert (
        abs(section["area"]["value"] * mm**2 - half_ring) <= section["area"]["error_bound"] * mm**2
    )
    assert volume["unit"] == f"{units.split('-')[0]}^3"
    assert enclosed(section) == pytest.approx(section["area"]["value"], rel=1e-3)
    assert enclosed(reach["plan"]) * mm**2 == pytest.approx(np.pi * 700.0**2, rel=1e-3)
    values = {(each["measure"], each["greatest"]): each["value"] * mm for each in reach["extremes"]}
    assert values == {
        ("radius", False): pytest.approx(0.0, abs=1e-6),
        ("radius", True): pytest.approx(700.0),
        ("height", False): pytest.approx(-200.0),
        ("height", True): pytest.approx(1200.0),
    }
    assert answer["axis"] == {"point": [0.0, 0.0, 0.0], "direction": [0.0, 0.0, 1.0]}
    assert (answer["frame"], answer["units"], answer["tool"]) == ("base", units, "flange")
    assert reach["turn"]["dead_sector"] is None
    assert answer["working_travel"] is None


async def test_an_extreme_is_where_poses_says(client: httpx.AsyncClient) -> None:
    answer = await told(client, {"arm": "seal-setter", "units": "in-deg"})
    for reach in (answer["travel"], answer["working_travel"]):
        joints = [each["joints"] for each in reach["extremes"]]
        asked = {"arm": "seal-setter", "joints": joints, "units": "in-deg"}
        poses = (await sent(client, "/v1/poses", asked)).json()["poses"]
        positions = [each["position"] for each in reach["extremes"]]
        np.testing.assert_allclose(positions, [each["position"] for each in poses], atol=1e-9)


async def test_working_travel_stands_beside_travel(client: httpx.AsyncClient) -> None:
    body = {"arm": "housing-loader", "point": "wrist"}
    both = await told(client, body)
    assert both["travel"]["turn"]["dead_sector"] == pytest.approx([168.0, 192.0])
    assert both["working_travel"]["turn"]["dead_sector"] == pytest.approx([150.0, 210.0])
    assert both["working_travel"]["volume"]["value"] < both["travel"]["volume"]["value"]
    assert both["point_in_flange"] == pytest.approx([0.0, 0.0, -94.0])
    assert "ISO 10218" in both["caution"]


async def test_one_of_the_two_is_the_same_alone(client: httpx.AsyncClient) -> None:
    body = {"arm": "wash-gantry", "point": "wrist"}
    both = await told(client, body)
    for within, key, other in (
        ("working-travel", "working_travel", "travel"),
        ("travel", "travel", "working_travel"),
    ):
        one = await told(client, {**body, "within": within})
        assert one[key] == both[key]
        assert other not in one


async def test_sampled_views_say_so(client: httpx.AsyncClient) -> None:
    body = {"arm": "wash-arm", "within": "travel", "resolution": 200}
    section = (await told(client, body))["travel"]["section"]
    assert (section["exact"], section["resolution"]) == (False, pytest.approx(200.0))
    assert abs(enclosed(section) - section["area"]["value"]) <= section["area"]["error_bound"]


async def test_a_region_of_no_size_is_a_line_or_a_point(client: httpx.AsyncClient) -> None:
    one_turn = {**PLANAR, "rows": [{**PLANAR["rows"][0], "a": 250}]}
    reach = (await told(client, {"arm": one_turn}))["travel"]
    assert reach["volume"]["value"] == reach["section"]["area"]["value"] == 0.0
    assert len(reach["notes"]) >= 2
    still = (await told(client, {"arm": {**PLANAR, "rows": PLANAR["rows"][:1]}}))["travel"]
    for view in (still["section"], still["plan"]):
        points = np.array([point for curve in view["curves"] for point in curve["points"]])
        np.testing.assert_allclose(points, np.broadcast_to(points[0], points.shape), atol=1e-6)
    for arm in (one_turn, {**PLANAR, "rows": PLANAR["rows"][:1]}):
        drawing = await client.post(f"{ENVELOPE}?format=svg", json={"arm": arm})
        assert drawing.status_code == 200


@pytest.mark.parametrize(
    ("query", "accept"),
    [("?format=svg", "*/*"), ("", "image/svg+xml"), ("?format=svg", "application/json")],
)
async def test_the_drawing(client: httpx.AsyncClient, query: str, accept: str) -> None:
    body = {"arm": "wash-gantry", "point": "wrist"}
    answer = await client.post(ENVELOPE + query, json=body, headers={"Accept": accept})
    assert answer.headers["content-type"] == "image/svg+xml"
    root = ET.fromstring(answer.text)
    assert (root.get("width"), root.get("height")) == ("297mm", "210mm")
    told_of = (await told(client, body))["arm"]
    words = " ".join(root.itertext())
    for part in ("wash-gantry", told_of["digest"]):
        assert part in words
    again = await client.post(f"{ENVELOPE}?format=svg", json=body)
    assert again.content == answer.content


async def test_a_drawing_has_no_script_and_fetches_nothing(client: httpx.AsyncClient) -> None:
    hostile = {**PLANAR, "title": "<script>alert(1)</script>&\"'", "notes": "]]><a href='x'>"}
    answer = await client.post(f"{ENVELOPE}?format=svg", json={"arm": hostile})
    root = ET.fromstring(answer.text)
    for element in root.iter():
        assert element.tag.split("}")[1] not in ("script", "foreignObject", "image", "a", "use")
        for name, value in element.attrib.items():
            assert not name.startswith("on")
            assert "href" not in name
            assert "://" not in value
    assert answer.headers["x-content-type-options"] == "nosniff"


async def test_others_are_answered_meanwhile(client: httpx.AsyncClient) -> None:
    body = {"arm": "wash-arm", "within": "travel", "resolution": 60}
    asked = asyncio.create_task(sent(client, ENVELOPE, body))
    answered = 0
    while not asked.done():
        assert (await client.get("/v1/ping")).status_code == 200
        answered += 1
        await asyncio.sleep(0.01)
    assert (await asked).status_code == 200
    assert answered >= 5


GOOD: dict[str, Any] = {"arm": PLANAR}
BROKEN = {**PLANAR, "rows": [{**ROW, "a": float("nan")}]}
ODD = {**PLANAR, "rows": [SLIDE, *PLANAR["rows"]]}
NO_WAY = {
    **PLANAR,
    "rows": [ROW, ROW],
    "combined_travel": [{"ratios": {"1": 1, "2": 1}, "travel": [400, 500]}],
}
SAMPLED = {"arm": "wash-arm", "within": "travel"}


@pytest.mark.parametrize(
    ("change", "query", "code", "pointer"),
    [
        ({"arm": "no-such-arm"}, "", "unknown-arm", "/arm"),
        ({"arm": {**PLANAR, "rows": []}}, "", "unusable-value", "/arm/rows"),
        ({"arm": ODD}, "", "unusable-value", "/arm/rows/0/travel"),
        ({"arm": NO_WAY}, "", "unusable-value", "/arm"),
        (
            {"arm": {**PLANAR, "rows": [{**ROW, "a": float("nan")}]}},
            "",
            "not-finite",
            "/arm/rows/0/a",
        ),
        ({"tool": "no-such-tool"}, "", "unknown-tool", "/tool"),
        ({"arm": "lathe-tender", "tool": "gripper"}, "", "unknown-tool", "/tool"),
        ({"tool": {**AT_ORIGIN, "position": [0, 0, 1e13]}}, "", "out-of-range", "/tool/position/2"),
        ({"resolution": 0}, "", "unusable-value", "/resolution"),
        ({"resolution": -5}, "", "unusable-value", "/resolution"),
        ({"resolution": float("nan")}, "", "not-finite", "/resolution"),
        ({"resolution": float("inf")}, "", "not-finite", "/resolution"),
        ({"resolution": "fine"}, "", "unusable-value", "/resolution"),
        ({**SAMPLED, "resolution": 1e-30}, "", "too-large", "/resolution"),
        ({**SAMPLED, "resolution": 1}, "", "too-large", "/resolution"),
        ({**SAMPLED, "resolution": 900}, "", "unusable-value", "/resolution"),
        ({"arm": "wash-arm", "point": "wrist"}, "", "unusable-value", "/point"),
        ({"point": "elbow"}, "", "unusable-value", "/point"),
        ({"within": "limits"}, "", "unusable-value", "/within"),
        ({"units": "mm"}, "", "unusable-value", "/units"),
        ({"frame": "world"}, "", "unknown-field", "/frame"),
        ({}, "?format=npy", "unusable-value", "/format"),
        ({}, "?colour=red", "unknown-field", "/colour"),
    ],
)
async def test_what_cannot_be_asked(
    client: httpx.AsyncClient, change: dict[str, Any], query: str, code: str, pointer: str
) -> None:
    answer = await sent(client, ENVELOPE + query, {**GOOD, **change})
    entry = only_entry(answer, code, 422)
    assert entry["pointer"] == pointer


@pytest.mark.parametrize(("resolution", "is_for_a_survey"), [(5, True), (1, False)])
async def test_the_way_out_of_too_fine_a_resolution_is_one(
    client: httpx.AsyncClient, resolution: float, is_for_a_survey: bool
) -> None:
    body = {"arm": "wash-gantry", "within": "travel", "resolution": resolution, "units": "mm-deg"}
    entry = only_entry(await sent(client, ENVELOPE, body), "too-large", 422)
    assert ("survey" in entry["way_out"]) == is_for_a_survey
    _, _, rest = entry["way_out"].partition("ask for ")
    length, unit, *_ = rest.split()
    assert unit == "mm"
    if is_for_a_survey:
        assert (await told(client, {**body, "resolution": float(length)}))["travel"]


async def test_the_same_is_worked_out_once(
    client: httpx.AsyncClient, monkeypatch: pytest.MonkeyPatch
) -> None:
    worked_out = []
    known = envelopes.envelope_of

    def counted(*given: Any, **how: Any) -> Any:
        worked_out.append(how)
        return known(*given, **how)

    monkeypatch.setattr(envelopes, "envelope_of", counted)
    first = await told(client, {"arm": PLANAR})
    assert await told(client, {"arm": PLANAR}) == first
    inches = await told(client, {"arm": PLANAR, "units": "in-deg"})
    assert inches["travel"]["volume"]["value"] < first["travel"]["volume"]["value"]
    assert len(worked_out) == 1
    flange = np.eye(4)
    flange[0, 3] = 50.0
    longer = await told(client, {"arm": PLANAR, "tool": {"matrix": flange.tolist()}})
    assert longer["travel"]["volume"] != first["travel"]["volume"]
    assert len(worked_out) == 2


async def test_who_leaves_lets_the_next_one_in(
    app: FastAPI, monkeypatch: pytest.MonkeyPatch
) -> None:
    loop, left = asyncio.get_running_loop(), asyncio.Event()
    made: list[int] = []

    class Endless:
        pieces = 10**9

        def piece(self, number: int) -> None:
            made.append(number)
            loop.call_soon_threadsafe(left.set)

    def endless(*_: Any, finds: Any, **__: Any) -> Any:
        return finds("volume", Endless())

    body = iter([{"type": "http.request", "body": json.dumps(GOOD).encode()}])

    async def receive() -> dict[str, Any]:
        for part in body:
            return part
        await left.wait()
        return {"type": "http.disconnect"}

    monkeypatch.setattr(envelopes, "envelope_of", endless)
    kind = (b"content-type", b"application/json")
    scope = {"type": "http", "app": app, "headers": [kind], "query_string": b"", "path": ENVELOPE}
    with pytest.raises(ClientDisconnect):
        await answer_envelope(Request(scope, receive))
    # There is one thread for all envelopes.
    await asyncio.wait_for(app.state.bulk.estimates.run(lambda: None), 20)
    assert made
