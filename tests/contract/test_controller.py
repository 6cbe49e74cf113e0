"""What a controller gets for one GET: nested, or flat in fixed order, within its budgets.

Left out: each bad query by itself (test_bad_queries) and whether poses are right (published).
"""

import json
import time
from typing import Any

import httpx
import pytest

pytestmark = pytest.mark.anyio

HEAD = ["ok", "code", "flags", "seq", "tag", "t_ms"]
POSE = ["x", "y", "z", "r1", "r2", "r3", "form"]
TAIL = ["units", "tool_no", "frame_no", "state", "condition", "margin", "revision", "digest"]
GONE = -999999.9999
STRAIGHT = {"form": "xyz-fixed", "values": [0, 0, 0]}
ROW = {"joint": "revolute", "a": 400, "alpha": 0, "d": 0, "theta": 0, "travel": [-170, 170]}
ARM: dict[str, Any] = {
    "name": "two-turns",
    "convention": "standard",
    "units": "mm-deg",
    "rows": [ROW, {**ROW, "working_travel": [-100, 100]}],
    "tools": {"gripper": {"position": [0, 0, 120], "orientation": STRAIGHT, "number": 3}},
    "default_tool": "flange",
    "frames": {
        "tray": {"position": [100, 0, 0], "orientation": STRAIGHT, "in": "base", "number": 5}
    },
}
URL = "/v1/arms/two-turns"


@pytest.fixture
async def stocked(client: httpx.AsyncClient) -> httpx.AsyncClient:
    """A client of a service that holds the arm."""
    assert (await client.post("/v1/arms", json=ARM)).status_code == 201
    return client


def flat_keys(joints: int | None) -> list[str]:
    """Return the keys of a flat pose (None) or of a flat Jacobian, in order."""
    entries = [f"j{row}{joint}" for row in range(1, 7) for joint in range(1, (joints or 0) + 1)]
    return [*HEAD, *(POSE if joints is None else entries), *TAIL]


def flat(answer: httpx.Response, keys: list[str]) -> dict[str, Any]:
    """Return a flat answer after holding what makes it one."""
    told: dict[str, Any] = answer.json()
    assert answer.headers["content-type"] == "application/json"
    assert answer.headers["content-length"] == str(len(answer.content))
    assert list(told) == keys
    assert not set(answer.content) & set(b" \n\r\t[]")
    assert answer.content.count(b"{") == 1
    assert answer.content.isascii()
    assert all(isinstance(value, str | int | float) for value in told.values())
    return told


async def test_a_flat_pose(stocked: httpx.AsyncClient) -> None:
    answer = await stocked.get(f"{URL}/pose?q=0,90&format=flat&tag=42&tool=gripper&frame=tray")
    told = flat(answer, flat_keys(None))
    record = (await stocked.get(URL)).json()
    assert [told["ok"], told["code"], told["flags"], told["tag"]] == [1, 0, 0, 42]
    assert [told[key] for key in POSE[:6]] == pytest.approx([300, 400, 120, 0, 0, 90], abs=1e-9)
    assert (told["form"], told["units"], told["state"]) == ("xyz-fixed", "mm-deg", "regular")
    assert (told["tool_no"], told["frame_no"]) == (3, 5)
    assert told["margin"] == pytest.approx(80 / 340)
    assert told["condition"] == pytest.approx(2.618033988749895)
    assert (told["revision"], told["digest"]) == (1, record["digest"])
    assert answer.headers["cache-control"] == "no-store"


async def test_a_flat_jacobian(stocked: httpx.AsyncClient) -> None:
    query = "q=0,1.5707963267948966&format=flat&units=m-rad"
    answer = await stocked.get(f"{URL}/jacobian?{query}")
    told = flat(answer, flat_keys(2))
    entries = [told[key] for key in flat_keys(2)[6:18]]
    expected = [-0.4, -0.4, 0.4, 0, 0, 0, 0, 0, 0, 0, 1, 1]
    assert entries == pytest.approx(expected, abs=1e-9)
    assert (told["units"], told["tool_no"], told["frame_no"]) == ("m-rad", 0, 0)


@pytest.mark.parametrize(("what", "key"), [("pose", "poses"), ("jacobian", "jacobians")])
async def test_the_nested_answer_is_that_of_a_body(
    stocked: httpx.AsyncClient, what: str, key: str
) -> None:
    answer = await stocked.get(f"{URL}/{what}?q=20,30&tag=7&tool=gripper&task=vx,vy")
    told = answer.json()
    head = ["ok", "code", "seq", "tag", "t_ms", "arm", "units", "frame", "tool", key]
    assert list(told) == head
    assert told["ok"] is True
    assert told["tag"] == 7
    assert list(told["arm"]) == ["name", "revision", "digest", "table_digest", "setup_digest"]
    body = {"arm": "two-turns", "joints": [[20, 30]], "tool": "gripper", "task": ["vx", "vy"]}
    same = (await stocked.post(f"/v1/{key}", json=body)).json()
    assert {name: told[name] for name in same} == same
    assert told["code"] == told[key][0]["code"]


async def test_a_late_answer_is_told_from_the_current(stocked: httpx.AsyncClient) -> None:
    before = time.time_ns() // 1_000_000
    answers = []
    for tag in (5, -6, 999_999_999_999_999_999):
        for form in ("json", "flat"):
            url = f"{URL}/pose?q=0,0&tag={tag}&format={form}"
            answers.append((tag, (await stocked.get(url)).json()))
    assert [told["tag"] for _, told in answers] == [tag for tag, _ in answers]
    numbers = [told["seq"] for _, told in answers]
    assert numbers == list(range(numbers[0], numbers[0] + 6))
    times = [told["t_ms"] for _, told in answers]
    assert before <= times[0] <= times[-1] <= time.time_ns() // 1_000_000
    assert (await stocked.get(f"{URL}/pose?q=0,0")).json()["tag"] == 0


REFUSALS = [
    ("q=a,0", 100, 400),
    ("q=0", 101, 422),
    ("q=nan,0", 102, 422),
    ("q=0,0&tool=saw", 104, 422),
    ("q=0,0&frame=9", 104, 422),
    ("q=0,0&units=cm", 105, 422),
    ("q=0,1e308", 105, 422),
    ("q=0,0&revision=2", 107, 404),
    ("q=0,0&expect=00000000", 107, 409),
    ("q=0,0&farme=base", 110, 422),
    ("q=0,0&form=matrix", 112, 422),
]


@pytest.mark.parametrize(("query", "code", "status"), REFUSALS)
@pytest.mark.parametrize("what", ["pose", "jacobian"])
async def test_a_refusal_in_flat_is_a_flat_line(
    stocked: httpx.AsyncClient, what: str, query: str, code: int, status: int
) -> None:
    for inline in ("", "&errors=inline"):
        answer = await stocked.get(f"{URL}/{what}?{query}&format=flat&tag=8{inline}")
        assert answer.status_code == (200 if inline else status)
        told = answer.json()
        assert flat(answer, flat_keys(None if what == "pose" else 2)) == told
        assert answer.headers["cache-control"] == "no-store"
        assert (told["ok"], told["code"], told["flags"]) == (0, code, 0)
        assert told["tag"] == 8
        numbers = [*(POSE[:6] if what == "pose" else ()), "condition", "margin"]
        assert {told[key] for key in numbers} == {GONE}
        assert {told[key] for key in told if key[0] == "j"} <= {-999999.9}
        for empty in ({"form"} if what == "pose" else set()) | {"units", "state", "digest"}:
            assert told[empty] == ""
        assert (told["tool_no"], told["frame_no"], told["revision"]) == (0, 0, 0)


async def test_a_tag_that_cannot_be_read_is_zero(stocked: httpx.AsyncClient) -> None:
    told = (await stocked.get(f"{URL}/pose?q=0,0&tag=x&format=flat")).json()
    assert (told["ok"], told["code"], told["tag"]) == (0, 100, 0)


async def test_an_unknown_arm_in_flat(stocked: httpx.AsyncClient) -> None:
    answer = await stocked.get("/v1/arms/no-such-arm/pose?q=0,0&format=flat")
    assert (answer.status_code, flat(answer, flat_keys(None))["code"]) == (404, 103)
    answer = await stocked.get("/v1/arms/no-such-arm/jacobian?q=0,0&format=flat")
    assert (answer.status_code, flat(answer, flat_keys(0))["code"]) == (404, 103)


async def test_a_tool_not_said_in_flat(client: httpx.AsyncClient) -> None:
    arm = {key: value for key, value in ARM.items() if key != "default_tool"}
    await client.post("/v1/arms", json=arm)
    answer = await client.get(f"{URL}/pose?q=0,0&format=flat")
    assert (answer.status_code, flat(answer, flat_keys(None))["code"]) == (422, 111)


@pytest.mark.parametrize("what", ["pose", "jacobian"])
async def test_a_refusal_in_json_with_status_200(stocked: httpx.AsyncClient, what: str) -> None:
    plain = await stocked.get(f"{URL}/{what}?q=0&tag=8")
    inline = await stocked.get(f"{URL}/{what}?q=0&tag=8&errors=inline")
    assert (plain.status_code, inline.status_code) == (422, 200)
    assert plain.headers["content-type"] == "application/problem+json"
    assert inline.headers["content-type"] == "application/json"
    problem, told = plain.json(), inline.json()
    # In an answer of status 200 the code is the integer that a controller compares.
    assert (told["ok"], told["code"], told["number"], told["tag"]) == (False, 101, 101, 8)
    for name in ("type", "title", "status", "detail", "number", "errors"):
        assert told[name] == problem[name]


async def test_flags_add_up(stocked: httpx.AsyncClient) -> None:
    for q, code, flags, state in [
        ("0,90", 0, 0, "regular"),
        ("0,0.1", 1, 1, "near"),
        ("0,0", 2, 2, "singular"),
        ("0,120", 3, 4, "regular"),
        ("171,90", 4, 8, "regular"),
        ("171,120", 4, 12, "regular"),
        ("171,0", 4, 10, "singular"),
    ]:
        told = flat(await stocked.get(f"{URL}/pose?q={q}&format=flat"), flat_keys(None))
        assert (told["code"], told["flags"], told["state"]) == (code, flags, state)
    locked = await stocked.get(f"{URL}/pose?q=0,90&format=flat&form=xyz-fixed&tr2=90")
    assert (locked.json()["code"], locked.json()["flags"]) == (5, 16)


async def test_limits_of_condition_and_margin(client: httpx.AsyncClient) -> None:
    free = {key: value for key, value in ROW.items() if key != "travel"}
    await client.post("/v1/arms", json={**ARM, "rows": [free, free]})
    told = (await client.get(f"{URL}/pose?q=0,0&format=flat")).json()
    assert (told["condition"], told["margin"]) == (999999.9, 9.9999)
    for q, margin in [("0,170", 0), ("0,0", 0.5), ("0,-187", -0.05)]:
        await client.put(URL, json=ARM, headers={"If-Match": "*"})
        told = (await client.get(f"{URL}/pose?q={q}&format=flat")).json()
        assert told["margin"] == pytest.approx(margin, abs=1e-12)


async def test_an_arm_without_joints(client: httpx.AsyncClient) -> None:
    await client.post("/v1/arms", json={**ARM, "rows": []})
    told = flat(await client.get(f"{URL}/pose?q=&format=flat&tool=3"), flat_keys(None))
    assert (told["ok"], told["z"], told["state"], told["margin"]) == (1, 120, "none", 9.9999)
    told = flat(await client.get(f"{URL}/jacobian?q=&format=flat"), flat_keys(0))
    assert told["ok"] == 1
    nested = (await client.get(f"{URL}/jacobian")).json()
    assert nested["jacobians"][0]["matrix"] == [[]] * 6


async def test_tool_and_frame_by_number(stocked: httpx.AsyncClient) -> None:
    by_name = await stocked.get(f"{URL}/pose?q=10,20&tool=gripper&frame=tray")
    by_number = await stocked.get(f"{URL}/pose?q=10,20&tool=3&frame=5")
    assert by_number.json()["poses"] == by_name.json()["poses"]
    assert (by_number.json()["tool"], by_number.json()["frame"]) == ("gripper", "tray")
    plain = await stocked.get(f"{URL}/pose?q=10,20&frame=base&tool=flange")
    assert plain.json()["poses"] != by_name.json()["poses"]


async def test_joints_one_by_one_and_as_controllers_print_them(stocked: httpx.AsyncClient) -> None:
    expected = (await stocked.get(f"{URL}/pose?q=15,3")).json()["poses"]
    for query in ("q1=15&q2=3", "q2=3&q1=15", "q=1.5E+01,+3.0", "q1=015.0&q2=.3E1", "q=15., 3"):
        answer = await stocked.get(f"{URL}/pose?{query}")
        assert answer.json()["poses"] == expected, query


async def test_an_inline_tool(stocked: httpx.AsyncClient) -> None:
    query = "q=10,20&tx=1&ty=-2&tz=30.5&tr1=10&tr2=20&tr3=30&form=zyx-current"
    told = (await stocked.get(f"{URL}/pose?{query}")).json()
    tool = {
        "position": [1, -2, 30.5],
        "orientation": {"form": "zyx-current", "values": [10, 20, 30]},
    }
    assert told["tool"] == tool
    body = {"arm": ARM, "joints": [[10, 20]], "tool": tool, "form": "zyx-current"}
    assert told["poses"] == (await stocked.post("/v1/poses", json=body)).json()["poses"]
    # What is left out is 0; its form is that of the answer, where that is one of the triples.
    short = (await stocked.get(f"{URL}/pose?q=10,20&tz=5")).json()
    assert short["tool"] == {"position": [0, 0, 5], "orientation": STRAIGHT}
    assert (await stocked.get(f"{URL}/pose?q=10,20&tz=5&format=flat")).json()["tool_no"] == 0


async def test_a_revision_and_what_is_expected(stocked: httpx.AsyncClient) -> None:
    first = (await stocked.get(URL)).json()["digest"]
    longer = {**ARM, "rows": [{**ROW, "a": 500}, ROW]}
    await stocked.put(URL, json=longer, headers={"If-Match": "*"})
    second = (await stocked.get(URL)).json()["digest"]
    assert first != second
    for query, x, revision, digest in [
        ("", 900, 2, second),
        ("&revision=2", 900, 2, second),
        ("&revision=1", 800, 1, first),
        (f"&revision=1&expect={first}", 800, 1, first),
        (f"&expect={second}", 900, 2, second),
    ]:
        told = (await stocked.get(f"{URL}/pose?q=0,0&format=flat{query}")).json()
        assert (told["ok"], told["revision"], told["digest"]) == (1, revision, digest)
        assert told["x"] == pytest.approx(x)
    answer = await stocked.get(f"{URL}/pose?q=0,0&expect={first}")
    assert answer.status_code == 409
    assert second in answer.json()["detail"]


@pytest.mark.parametrize(
    "query", ["q=0,90", "q=0,90&format=flat", "q=0", "q=0&format=flat", "q=0&errors=inline"]
)
@pytest.mark.parametrize("what", ["pose", "jacobian"])
async def test_head_is_get_without_a_body(
    stocked: httpx.AsyncClient, what: str, query: str
) -> None:
    url = f"{URL}/{what}?{query}&tag=1"
    got, head = await stocked.get(url), await stocked.head(url)
    assert (head.status_code, head.content) == (got.status_code, b"")
    for name in ("content-type", "content-length"):
        assert head.headers[name] == got.headers[name]


# --- budgets -------------------------------------------------------------------------------

LONGEST = "a-name-of-32-characters-no-less-"
ADDRESS = "http://192.168.100.100:8017"


def largest_arm() -> dict[str, Any]:
    """Return eight turning joints, each 2.4 m from the next, with names of 32 characters."""
    rows = [
        {
            **ROW,
            "a": 2400.123,
            "alpha": 37.5 * (-1) ** index,
            "working_travel": [-1, 1],
            "working_reason": "the dress pack of this joint must not be wound up further",
            "top_speed": 180,
        }
        for index in range(8)
    ]
    turned = {"form": "zyx-fixed", "values": [12.3, 45.6, 78.9]}
    placed = {"position": [12.3, -45.6, 78.9], "orientation": turned}
    return {
        "name": f"{LONGEST[:-1]}1",
        "convention": "standard",
        "units": "mm-deg",
        "rows": rows,
        "tools": {f"{LONGEST[:-1]}2": {**placed, "number": 998}},
        "default_tool": f"{LONGEST[:-1]}2",
        "frames": {f"{LONGEST[:-1]}3": {**placed, "number": 999}},
    }


BENT = "-123.4567,-101.2345,109.8765,-98.76543,123.4567,-101.2345,109.8765,-98.76543"
BEYOND = "-171.0001,-171.0001,-180,171.0001,-180,180,171.0001,-171.0001"


@pytest.mark.parametrize("q", [BENT, BEYOND])
@pytest.mark.parametrize("units", ["mm-deg", "m-rad", "in-deg"])
async def test_budgets(client: httpx.AsyncClient, q: str, units: str) -> None:
    arm = largest_arm()
    assert {len(name) for name in (arm["name"], *arm["tools"], *arm["frames"])} == {32}
    assert (await client.post("/v1/arms", json=arm)).status_code == 201
    # An angle in radians takes no more digits than one in degrees.
    values = [float(text) / (57.3 if units == "m-rad" else 1.0) for text in q.split(",")]
    q = ",".join(f"{value:.7g}" for value in values)
    more = "&tag=2147483647&tool=998&frame=999"
    longest = f"{ADDRESS}/v1/arms/{arm['name']}/jacobian?q={q}{more}&units={units}&format=flat"
    assert len(longest) <= 255
    stamps = {"seq": 2**31, "tag": 2**31, "t_ms": 10**12}
    for what in ("pose", "jacobian"):
        url = f"/v1/arms/{arm['name']}/{what}?q={q}{more}&units={units}"
        for form, limit in [("flat", 1000), ("json", 16_000)]:
            answer = await client.get(f"{url}&format={form}")
            told = answer.json()
            assert told["ok"], told
            # As long as it would be after years.
            content = json.dumps({**told, **stamps}, separators=(",", ":"))
            assert len(content) <= limit, (what, form, len(content))
        refused = await client.get(f"{url}&format=flat&expect=00000000")
        assert refused.status_code == 409
        assert len(refused.content) <= 1000
        assert len((await client.get(f"{url}&expect=00000000")).content) <= 16_000
    told = (await client.get(f"{url}&format=json")).json()
    assert len(told["jacobians"][0]["findings"]) >= 8


async def test_a_body_may_be_answered_at_length(client: httpx.AsyncClient) -> None:
    answer = await client.post("/v1/poses", json={"arm": largest_arm(), "joints": [[0] * 8] * 20})
    assert len(answer.content) > 16_000
    assert answer.headers["content-length"] == str(len(answer.content))
