"""Joint values in, live poses out: formats, refusals, waiting, the past; in process.

Left out: streams and sockets (test_live_streams.py, test_joints_socket.py).
"""

import asyncio
import time
from datetime import UTC, datetime
from typing import Any

import httpx
import pytest
from fastapi import FastAPI

from service.problems import KINDS, MEDIA_TYPE
from tests.service.live.made import ARM

pytestmark = pytest.mark.anyio

JOINTS, LIVE = "/v1/arms/two/joints", "/v1/arms/two/live"
KEYS = [
    *("ok", "code", "flags", "seq", "tag", "t_ms", "x", "y", "z", "r1", "r2", "r3", "form"),
    *("units", "tool_no", "frame_no", "state", "condition", "margin", "age_ms", "quality"),
    *("revision", "digest"),
]
LONG_MS = 600_000
"""A period that keeps an input from being stale while a test runs."""


@pytest.fixture
async def two(client: httpx.AsyncClient) -> httpx.AsyncClient:
    """A client of a service with one arm."""
    assert (await client.post("/v1/arms", json=ARM)).status_code == 201
    return client


def assert_refusal(answer: httpx.Response, code: str) -> dict[str, Any]:
    """Hold a refusal to its code, status and media type."""
    told: dict[str, Any] = answer.json()
    assert told["code"] == code, told
    assert answer.headers["content-type"] == MEDIA_TYPE
    assert answer.status_code in KINDS[code].statuses
    return told


async def put(client: httpx.AsyncClient, *joints: float | None, **more: Any) -> dict[str, Any]:
    body = {"joints": joints, "period_ms": LONG_MS, **more}
    answer = await client.put(JOINTS, json=body)
    assert answer.status_code == 200, answer.text
    told: dict[str, Any] = answer.json()
    return told


# --- in ------------------------------------------------------------------------------------


async def test_a_sample_is_taken_and_told(two: httpx.AsyncClient) -> None:
    told = await put(two, 30, 60, sequence=5, tag=9, source="line-7")
    assert (told["ok"], told["code"], told["accepted"], told["tag"]) == (True, 0, True, 9)
    assert (told["quality"], told["good"], told["doubted"], told["dropped"]) == ("good", 1, 0, 0)
    live = (await two.get(LIVE)).json()
    assert live["joints"] == [30, 60]
    assert live["input"]["source"] == "line-7"
    assert (live["input"]["tag"], live["input"]["sequence"]) == (9, 5)
    assert live["change"] == told["change"]
    pose = (await two.get("/v1/arms/two/pose", params={"q": "30,60"})).json()["poses"][0]
    assert live["poses"][0] == pose
    assert live["quality"] == "good"
    assert 0 <= live["age_ms"] < 5000


@pytest.mark.parametrize(
    ("joints", "reason", "code"),
    [
        ([171, 0], "outside-travel", 4),
        ([100, 0], "jump", 0),
        ([None, 0], "not-finite", 0),
    ],
)
async def test_what_cannot_be_is_answered_and_does_not_stand(
    two: httpx.AsyncClient, joints: list[float | None], reason: str, code: int
) -> None:
    await put(two, 0, 0)
    told = await put(two, *joints)
    assert (told["accepted"], told["quality"], told["reason"]) == (False, "uncertain", reason)
    assert told["code"] == code
    assert told["say"]
    live = (await two.get(LIVE)).json()
    assert (live["ok"], live["quality"], live["reason"]) == (True, "uncertain", reason)
    assert live["say"] == told["say"]
    assert live["joints"] == [0, 0]


@pytest.mark.parametrize("not_finite", ["NaN", "Infinity", "-Infinity", "1e999"])
async def test_numbers_that_json_does_not_have(two: httpx.AsyncClient, not_finite: str) -> None:
    answer = await two.put(
        JOINTS,
        content=f'{{"joints": [{not_finite}, 0]}}',
        headers={"content-type": "application/json"},
    )
    assert answer.json()["reason"] == "not-finite"


async def test_repeated_and_older_ones(two: httpx.AsyncClient) -> None:
    told = [(await put(two, 0, 0, sequence=one))["reason"] for one in (3, 3, 2, 4)]
    assert told == ["", "repeated", "out-of-order", ""]
    live = (await two.get(LIVE)).json()
    assert live["input"]["counts"] == {"good": 2, "repeated": 1, "out-of-order": 1}
    assert live["quality"] == "good"


async def test_many_together(two: httpx.AsyncClient) -> None:
    samples = [{"joints": [n / 100, 0], "sequence": n} for n in range(1000)]
    answer = await two.put(JOINTS, json={"samples": samples})
    assert answer.json()["good"] == 1000
    assert (await two.get(LIVE)).json()["joints"] == [9.99, 0]


@pytest.mark.parametrize("ahead_s", [3600, -3600])
async def test_a_time_that_cannot_be(two: httpx.AsyncClient, ahead_s: int) -> None:
    now = time.time()
    await put(two, 0, 0, sampled_ms=now * 1000)
    at = datetime.fromtimestamp(now + ahead_s, UTC).isoformat()
    told = await put(two, 1, 0, sampled_at=at)
    assert told["reason"] == ("time-in-future" if ahead_s > 0 else "time-too-old")
    assert abs(told["clock_offset_ms"]) < 5000


async def test_of_two_sources_the_last_wins(two: httpx.AsyncClient) -> None:
    await put(two, 0, 0, source="a", sequence=9)
    await put(two, 1, 0, source="b", sequence=1)
    assert (await two.get(LIVE)).json()["input"]["source"] == "b"


async def test_units_of_what_comes(two: httpx.AsyncClient) -> None:
    await put(two, 0.5, 0, units="m-rad")
    live = (await two.get(LIVE, params={"units": "m-rad"})).json()
    assert live["joints"] == [0.5, 0]


async def test_as_a_form_and_by_query(two: httpx.AsyncClient) -> None:
    form = {"q": "10,20", "tag": "7", "format": "txt", "sequence": "1"}
    answer = await two.post(JOINTS, data=form)
    assert answer.headers["content-type"].startswith("text/plain")
    ok, code, flags, _, tag, _, accepted, quality, reason, revision, _ = answer.text.split(";")
    assert (ok, code, flags, tag) == ("1", "0  ", "0    ", "7         ")
    assert (accepted, quality, reason, revision) == ("1", "good     ", " " * 14, "1     ")
    assert answer.text.endswith("\r\n")
    refused = await two.post(JOINTS, params={**form, "q": "10"})
    assert refused.status_code == 422
    assert len(refused.text) == len(answer.text)
    assert refused.text.startswith("0;101;")
    flat = await two.put(JOINTS, params={"q1": "11", "q2": "20", "format": "flat", "sequence": "2"})
    assert list(flat.json()) == [
        *("ok", "code", "flags", "seq", "tag", "t_ms", "accepted", "quality", "reason"),
        *("revision", "digest"),
    ]
    assert flat.json()["accepted"] == 1
    failed = await two.post(JOINTS, params={"q": "nan,20", "format": "csv"})
    head, line = failed.text.split("\r\n")[:2]
    assert dict(zip(head.split(","), line.split(","), strict=True))["reason"] == "not-finite"
    scaled = await two.post(JOINTS, params={"q": "1200,2000", "scale": "100"})
    assert scaled.json()["accepted"]
    assert (await two.get(LIVE)).json()["joints"] == [12, 20]


async def test_a_retry_does_no_harm(two: httpx.AsyncClient) -> None:
    first = await put(two, 1, 2, sequence=1)
    again = await put(two, 1, 2, sequence=1)
    assert (again["ok"], again["dropped"], again["change"]) == (True, 1, first["change"])


BAD: list[tuple[Any, str, str]] = [
    ({"joints": [1]}, "wrong-joint-count", "/joints"),
    ({"joints": [1, 2, 3]}, "wrong-joint-count", "/joints"),
    ({}, "missing-field", "/joints"),
    ({"joints": ["1", 2]}, "unusable-value", "/joints/0"),
    ({"joints": [True, 2]}, "unusable-value", "/joints/0"),
    ({"joints": [1e13, 2]}, "out-of-range", "/joints/0"),
    ({"joints": [1, 2], "joint": [1, 2]}, "unknown-field", "/joint"),
    ({"joints": [1, 2], "sequence": -1}, "unusable-value", "/sequence"),
    ({"joints": [1, 2], "sequence": 10**16}, "unusable-value", "/sequence"),
    ({"joints": [1, 2], "sampled_ms": 1e300}, "unusable-value", "/sampled_ms"),
    ({"joints": [1, 2], "sampled_at": "yesterday"}, "unusable-value", "/sampled_at"),
    (
        {"joints": [1, 2], "sampled_at": "2026-01-01T00:00:00Z", "sampled_ms": 1.0},
        "unusable-value",
        "/sampled_ms",
    ),
    ({"joints": [1, 2], "samples": []}, "unusable-value", "/samples"),
    ({"samples": []}, "unusable-value", "/samples"),
    ({"samples": [{"joints": [1, 2]}, {"joints": [1]}]}, "wrong-joint-count", "/samples/1/joints"),
    ({"samples": [{"joints": [1, 2]}] * 1001}, "too-large", "/samples"),
    ({"joints": [1, 2], "source": "two words"}, "unusable-value", "/source"),
    ({"joints": [1, 2], "period_ms": 0}, "unusable-value", "/period_ms"),
    ({"joints": [1, 2], "units": "mm"}, "unusable-value", "/units"),
    ([1, 2], "unusable-value", ""),
]


@pytest.mark.parametrize(("body", "code", "pointer"), BAD)
async def test_bad_bodies_say_where(
    two: httpx.AsyncClient, body: Any, code: str, pointer: str
) -> None:
    answer = await two.put(JOINTS, json=body)
    told = assert_refusal(answer, code)
    assert told["errors"][0]["pointer"] == pointer
    assert told["errors"][0]["way_out"]
    assert (await two.get(LIVE)).status_code == 409


async def test_too_many_together_are_not_looked_at(two: httpx.AsyncClient) -> None:
    """A refusal of each would take a tenth of a second, and be longer than the message."""
    answer = await two.put(JOINTS, json={"samples": [{"joints": "rubbish"}] * 1001})
    told = assert_refusal(answer, "too-large")
    assert (answer.status_code, told["errors"][0]["pointer"]) == (422, "/samples")


async def test_other_refusals(two: httpx.AsyncClient) -> None:
    assert_refusal(await two.put("/v1/arms/none/joints", json={"joints": [1, 2]}), "unknown-arm")
    answer = await two.put(JOINTS, params={"expect": "00000000"}, json={"joints": [1, 2]})
    assert_refusal(answer, "digest-differs")
    answer = await two.put(JOINTS, content=b"x" * 600_000, headers={"content-type": "text/plain"})
    assert_refusal(answer, "wrong-media-type")
    answer = await two.put(
        JOINTS, content=b" " * 600_000, headers={"content-type": "application/json"}
    )
    assert_refusal(answer, "too-large")
    answer = await two.post(JOINTS, data={"q": "1,2"}, headers={"origin": "http://elsewhere.test"})
    assert_refusal(answer, "unusable-value")
    answer = await two.post(JOINTS, data={"q": "1,2"}, headers={"origin": "http://armspan.test"})
    assert answer.status_code == 200
    answer = await two.post(JOINTS, params={"q": "1,2"}, data={"q": "1,2"})
    assert_refusal(answer, "unusable-value")


# --- out -----------------------------------------------------------------------------------


async def test_before_anything_came(two: httpx.AsyncClient) -> None:
    assert_refusal(await two.get(LIVE), "no-live-pose")
    assert_refusal(await two.get("/v1/arms/none/live"), "unknown-arm")
    line = await two.get(LIVE, params={"format": "txt", "tag": "7"})
    inline = await two.get(LIVE, params={"format": "txt", "errors": "inline"})
    assert (line.status_code, inline.status_code) == (409, 200)
    assert line.text.startswith("0;109;0    ;")
    await put(two, 0, 0)
    good = await two.get(LIVE, params={"format": "txt", "tag": "7"})
    assert len(good.text) == len(line.text) == len(inline.text)


async def test_flat_live_has_age_and_quality_before_the_revision(two: httpx.AsyncClient) -> None:
    await put(two, 30, 60)
    flat = await two.get(LIVE, params={"format": "flat", "tag": "4"})
    assert list(flat.json()) == KEYS
    assert flat.json()["tag"] == 4
    assert len(flat.content) < 1024
    csv = await two.get(LIVE, params={"format": "csv"})
    assert csv.text.split("\r\n")[0].split(",") == KEYS
    txt = await two.get(LIVE, params={"format": "txt"})
    fields = txt.text.removesuffix("\r\n").split(";")
    assert [len(fields[KEYS.index(key)]) for key in ("age_ms", "quality", "revision")] == [7, 9, 6]
    assert len(txt.text) <= 254
    head = await two.head(LIVE)
    assert (head.status_code, head.content) == (200, b"")


async def test_stale_and_simulated_in_codes_and_flags(two: httpx.AsyncClient) -> None:
    await put(two, 30, 60, simulated=True, period_ms=1)
    await asyncio.sleep(0.3)
    flat = (await two.get(LIVE, params={"format": "flat"})).json()
    assert (flat["ok"], flat["code"], flat["quality"]) == (1, 8, "bad")
    assert flat["flags"] & (64 + 128) == 64 + 128
    nested = (await two.get(LIVE)).json()
    assert (nested["reason"], nested["simulated"]) == ("stale", True)
    await put(two, 90, 60, period_ms=1)
    await asyncio.sleep(0.3)
    flat = (await two.get(LIVE, params={"format": "flat"})).json()
    assert (flat["code"], flat["flags"] & (64 + 128)) == (7, 64)


async def test_tool_frame_form_and_units_as_for_a_pose(two: httpx.AsyncClient) -> None:
    await put(two, 30, 60)
    said = {"tx": "0", "tz": "100", "form": "zyx-current", "units": "in-deg", "frame": "world"}
    live = (await two.get(LIVE, params=said)).json()
    pose = (await two.get("/v1/arms/two/pose", params={**said, "q": "30,60"})).json()
    assert live["poses"] == pose["poses"]
    assert_refusal(await two.get(LIVE, params={"tool": "pen"}), "unknown-tool")
    assert_refusal(await two.get(LIVE, params={"q": "1,2"}), "unknown-field")
    assert_refusal(await two.get(LIVE, params={"expect": "00000000"}), "digest-differs")


async def test_speeds_of_joints_and_tool(two: httpx.AsyncClient) -> None:
    """Joint 1 at 90 deg/s, 0.8 m out: 0.4 pi m/s."""
    at = time.time() * 1000
    samples = [{"joints": [n / 100 * 90, 0], "sampled_ms": at + n * 10} for n in range(11)]
    await two.put(JOINTS, json={"samples": samples, "period_ms": LONG_MS})
    speeds = (await two.get(LIVE, params={"units": "m-rad"})).json()["speeds"]
    assert speeds["tool_speed"] == pytest.approx(0.4 * 3.14159265, rel=1e-3)
    assert speeds["turning_speed"] == pytest.approx(3.14159265 / 2, rel=1e-3)
    assert speeds["joints"] == pytest.approx([3.14159265 / 2, 0.0], rel=1e-3)


async def test_etag_and_304(two: httpx.AsyncClient) -> None:
    await put(two, 0, 0)
    tag = (await two.get(LIVE)).headers["etag"]
    assert tag.startswith('W/"')
    known = await two.get(LIVE, headers={"if-none-match": tag})
    assert (known.status_code, known.content, known.headers["etag"]) == (304, b"", tag)
    assert (await two.get(LIVE, headers={"if-none-match": "*"})).status_code == 304
    change = tag[3:-1]
    assert (await two.get(LIVE, params={"after": change})).status_code == 304
    inline = await two.get(LIVE, params={"after": change, "errors": "inline", "format": "txt"})
    assert inline.status_code == 200
    await put(two, 1, 0)
    fresh = await two.get(LIVE, headers={"if-none-match": tag})
    assert fresh.status_code == 200
    assert fresh.headers["etag"] != tag


async def test_waiting_for_something_newer(two: httpx.AsyncClient) -> None:
    await put(two, 0, 0)
    tag = (await two.get(LIVE)).headers["etag"]
    waiting = asyncio.create_task(
        two.get(LIVE, params={"wait": "20"}, headers={"if-none-match": tag})
    )
    await asyncio.sleep(0.05)
    assert not waiting.done()
    await put(two, 1, 0)
    answer = await waiting
    assert answer.json()["joints"] == [1, 0]
    # Nothing new: 304 at the end of the time, and at once where there was something.
    tag = answer.headers["etag"]
    none = await two.get(LIVE, params={"wait": "0.05"}, headers={"if-none-match": tag})
    assert none.status_code == 304
    at_once = await two.get(LIVE, params={"wait": "20", "after": "0"})
    assert at_once.status_code == 200
    for bad in ("0", "-1", "31", "x"):
        assert (await two.get(LIVE, params={"wait": bad})).status_code in (400, 422)


async def test_waiting_ends_with_the_service(two: httpx.AsyncClient, app: FastAPI) -> None:
    waiting = asyncio.create_task(two.get(LIVE, params={"wait": "20"}))
    await asyncio.sleep(0.05)
    app.state.streams.stop()
    assert (await waiting).status_code == 409


async def test_the_past_is_interpolated_and_says_so(two: httpx.AsyncClient) -> None:
    now = round(time.time() * 1000)
    samples = [{"joints": [n, 0], "sampled_ms": now - 1000 + 100 * n} for n in range(10)]
    await two.put(JOINTS, json={"samples": samples, "period_ms": 100})
    history = (await two.get(f"{LIVE}/history")).json()
    first, second = history["t_ms"][3:5]
    answer = (await two.get(LIVE, params={"at": str(first + 25)})).json()
    share = 25 / (second - first)
    assert answer["joints"][0] == pytest.approx(3 + share, abs=0.05)
    assert answer["at"]["interpolated"] is True
    assert len(answer["at"]["between"]) == 2
    assert answer["input"] is None
    assert answer["speeds"]["joints"][0] == pytest.approx(10.0, rel=1e-3)
    for at in (now + 60_000, now - 700_000, history["t_ms"][0] - 1000, history["t_ms"][-1] + 50):
        told = assert_refusal(await two.get(LIVE, params={"at": str(at)}), "no-live-pose")
        assert told["errors"][0]["pointer"] == "/at"
    both = await two.get(LIVE, params={"at": str(now), "wait": "1"})
    assert_refusal(both, "unusable-value")
    assert_refusal(await two.get(LIVE, params={"at": "noon"}), "unparseable")


async def test_too_far_apart_to_be_interpolated(two: httpx.AsyncClient) -> None:
    now = time.time() * 1000
    samples = [{"joints": [0, 0], "sampled_ms": now - at} for at in (8000, 7900, 100, 0)]
    await two.put(JOINTS, json={"samples": samples, "period_ms": 100})
    answer = await two.get(LIVE, params={"at": str(round(now - 4000))})
    assert "apart" in assert_refusal(answer, "no-live-pose")["detail"]


async def test_history_in_columns_and_lines(two: httpx.AsyncClient) -> None:
    now = time.time() * 1000
    samples = [
        {"joints": [n / 10, 0], "sequence": n, "sampled_ms": now - 5000 + 50 * n}
        for n in range(100)
    ]
    await two.put(JOINTS, json={"samples": samples, "period_ms": LONG_MS})
    told = (await two.get(f"{LIVE}/history", params={"limit": "7", "form": "xyz-fixed"})).json()
    assert told["sequence"] == [93, 94, 95, 96, 97, 98, 99]
    assert told["joints"][-1] == pytest.approx([9.9, 0])
    pose = (await two.get("/v1/arms/two/pose", params={"q": "9.9,0", "form": "xyz-fixed"})).json()
    assert told["positions"][-1] == pytest.approx(pose["poses"][0]["position"])
    assert told["orientations"][-1] == pytest.approx(pose["poses"][0]["orientation"]["values"])
    csv = await two.get(f"{LIVE}/history", params={"format": "csv", "limit": "7"})
    lines = csv.text.removesuffix("\r\n").split("\r\n")
    assert lines[0] == "t_ms,sequence,simulated,q1,q2,x,y,z,r1,r2,r3"
    assert [line.split(",")[1] for line in lines[1:]] == [str(n) for n in range(93, 100)]
    numbers = [float(one) for one in lines[-1].split(",")]
    assert numbers[5:8] == pytest.approx(told["positions"][-1])
    thinned = (await two.get(f"{LIVE}/history", params={"every_ms": "1000"})).json()
    assert thinned["sequence"][-1] == 99
    assert all(b - a >= 950 for a, b in zip(thinned["t_ms"], thinned["t_ms"][1:], strict=False))
    part = {"from": told["t_ms"][0], "to": told["t_ms"][2]}
    found = (await two.get(f"{LIVE}/history", params=part)).json()
    assert set(found["sequence"]) >= {94}
    empty = await two.get(f"{LIVE}/history", params={"to": "0", "format": "csv"})
    assert empty.text.count("\r\n") == 1
    finest = (await two.get(f"{LIVE}/history", params={"every_ms": "1e-320"})).json()
    assert finest["sequence"] == list(range(100))
    for bad in ({"limit": "0"}, {"every_ms": "-1"}, {"format": "txt"}, {"from": "x"}):
        assert (await two.get(f"{LIVE}/history", params=bad)).status_code in (400, 422)
    quaternion = {"format": "csv", "form": "quaternion-wxyz"}
    assert_refusal(await two.get(f"{LIVE}/history", params=quaternion), "form-not-flat")


async def test_all_arms(two: httpx.AsyncClient) -> None:
    assert (await two.get("/v1/live")).json() == {"arms": [], "arms_without_values": 1}
    tools = {
        "pen": {"position": [0, 0, 10], "orientation": {"form": "xyz-fixed", "values": [0] * 3}}
    }
    await two.post("/v1/arms", json={**ARM, "name": "other", "tools": tools})
    await put(two, 30, 60)
    await two.put("/v1/arms/other/joints", json={"joints": [1, 2], "period_ms": LONG_MS})
    answer = await two.get("/v1/live")
    other, own = answer.json()["arms"]
    # Which tool is meant nobody said; that does not fail the others.
    assert (other["ok"], other["code"], other["arm"]["name"]) == (False, 111, "other")
    assert other["problem"]["code"] == "tool-not-said"
    assert own["joints"] == [30, 60]
    tag = answer.headers["etag"]
    assert (await two.get("/v1/live", headers={"if-none-match": tag})).status_code == 304
    flange = (await two.get("/v1/live", params={"tool": "flange"})).json()["arms"]
    assert [one["ok"] for one in flange] == [True, True]


async def test_a_new_revision_moves_the_pose(two: httpx.AsyncClient) -> None:
    await put(two, 0, 0)
    tag = (await two.get("/v1/arms/two")).headers["etag"]
    rows = [{**row, "a": 500} for row in ARM["rows"]]
    await two.put("/v1/arms/two", json={**ARM, "rows": rows}, headers={"if-match": tag})
    live = (await two.get(LIVE)).json()
    assert live["arm"]["revision"] == 2
    assert live["poses"][0]["position"] == pytest.approx([1000, 0, 0])


async def test_an_arm_that_is_removed(two: httpx.AsyncClient, app: FastAPI) -> None:
    await put(two, 0, 0)
    tag = (await two.get("/v1/arms/two")).headers["etag"]
    known = (await two.get("/v1/live")).headers["etag"]
    await two.delete("/v1/arms/two", headers={"if-match": tag})
    assert_refusal(await two.get(LIVE), "unknown-arm")
    await asyncio.sleep(0.7)
    assert app.state.live.names() == []
    none = await two.get("/v1/live", headers={"if-none-match": known})
    assert (none.status_code, none.json()) == (200, {"arms": [], "arms_without_values": 0})


async def test_an_arm_without_joints(client: httpx.AsyncClient) -> None:
    """Two values of nothing: the tool stands still."""
    await client.post("/v1/arms", json={**ARM, "rows": []})
    for _ in range(2):
        assert (await put(client))["accepted"]
    live = (await client.get(LIVE)).json()
    assert live["poses"][0]["position"] == [0, 0, 0]
    assert live["joints"] == []
    assert live["speeds"] is None or live["speeds"]["tool_speed"] == 0
    history = await client.get(f"{LIVE}/history", params={"format": "csv"})
    assert history.text.startswith("t_ms,sequence,simulated,x,y,z")
    assert history.status_code == 200


async def test_coupled_and_passive_rows_are_judged_as_axes_are_shown(
    client: httpx.AsyncClient,
) -> None:
    rows = [
        {**ARM["rows"][0], "travel": [-90, 90]},
        {**ARM["rows"][1], "couplings": [{"axis": 1, "ratio": -1}]},
        {"joint": "revolute", "a": 0, "alpha": 0, "d": 0, "theta": 0, "passive": True,
         "travel": [-60, 60], "couplings": [{"axis": 2, "ratio": 1}]},
    ]  # fmt: skip
    assert (await client.post("/v1/arms", json={**ARM, "rows": rows})).status_code == 201
    assert (await put(client, 10, 50))["accepted"]
    told = await put(client, 10, 70)
    assert told["reason"] == "outside-travel"
    assert "passive row 3 is at 70 deg" in told["say"]
