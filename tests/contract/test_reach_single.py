"""One target by query string: every format, a controller's budgets, the same answer as a body's.

Left out: bad queries (test_bad_reach).
"""

import json
from typing import Any

import httpx
import numpy as np
import pytest

from service.settings import Settings
from service.wire.fixed_text import places
from service.wire.reach_flat import BEGIN, END, WIDTHS
from service.wire.reach_lines import joint_keys

pytestmark = pytest.mark.anyio
REACH = "/v1/arms/housing-loader/reach"
TARGET = "x=914.57&y=340.65&z=753.03&r1=-74.763&r2=-46.542&r3=-95.258"
POSE = {
    "position": [914.57, 340.65, 753.03],
    "orientation": {"form": "xyz-fixed", "values": [-74.763, -46.542, -95.258]},
}
FAR = "x=2500&y=0&z=700&r1=180&r2=0&r3=0"
KEYS = (*BEGIN, *joint_keys(6), *END)


@pytest.fixture
def settings() -> Settings:
    """The demonstration cell."""
    return Settings(database=":memory:", demo=True)


def joints_of(told: dict[str, Any]) -> list[float]:
    return [told[key] for key in joint_keys(6)]


async def test_every_format_says_the_same(client: httpx.AsyncClient) -> None:
    nested = (await client.get(f"{REACH}?{TARGET}")).json()
    flat = (await client.get(f"{REACH}?{TARGET}&format=flat&tag=12")).json()
    (result,) = nested["results"]
    (solution,) = result["solutions"]
    assert tuple(flat) == KEYS
    assert joints_of(flat) == solution["joints"]
    assert (flat["ok"], flat["code"], flat["tag"]) == (1, 0, 12)
    assert (flat["verdict"], flat["solutions"]) == (result["verdict"], result["found"])
    assert (flat["margin"], flat["state"]) == (
        solution["margin"],
        solution["singularity"]["state"],
    )
    head, line = (await client.get(f"{REACH}?{TARGET}&format=csv")).text.split("\r\n")[:2]
    row = dict(zip(head.split(","), line.split(","), strict=True))
    assert [float(row[key]) for key in joint_keys(6)] == solution["joints"]
    text = (await client.get(f"{REACH}?{TARGET}&format=txt")).text
    for key, (first, width) in places(KEYS, WIDTHS).items():
        told = text[first - 1 : first - 1 + width].rstrip()
        if key in ("seq", "t_ms", "tag"):
            continue
        if key.startswith("q") or key == "margin":
            assert float(told) == pytest.approx(flat[key], abs=6e-5)
        else:
            assert told == str(flat[key])


async def test_the_answer_is_that_of_a_body(client: httpx.AsyncClient) -> None:
    body = {"arm": "housing-loader", "targets": [{"pose": POSE}], "tool": "gripper"}
    told = (await client.post("/v1/reach/checks", json=body)).json()
    asked = (await client.get(f"{REACH}?{TARGET}&tool=1")).json()
    one, other = told["results"][0], asked["results"][0]
    assert one.keys() == other.keys()
    assert (one["verdict"], one["found"]) == (other["verdict"], other["found"])
    ours, theirs = one["solutions"][0], other["solutions"][0]
    np.testing.assert_allclose(theirs["joints"], ours["joints"], atol=1e-9)
    assert theirs["branch"] == ours["branch"]
    assert theirs["singularity"]["smallest_singular_value"] == pytest.approx(
        ours["singularity"]["smallest_singular_value"]
    )
    assert {key: told[key] for key in ("arm", "units", "frame", "tool", "method")} == {
        key: asked[key] for key in ("arm", "units", "frame", "tool", "method")
    }


async def test_joint_values_lead_there(client: httpx.AsyncClient) -> None:
    more = "&frame=fixture-a&tool=2&form=zyx-current"
    pose = f"/v1/arms/housing-loader/pose?q=88,-65,105,12,48,-30{more}&format=flat"
    there = (await client.get(pose)).json()
    target = "&".join(f"{key}={there[key]!r}" for key in ("x", "y", "z", "r1", "r2", "r3"))
    found = (await client.get(f"{REACH}?{target}{more}&format=flat")).json()
    q = ",".join(map(repr, joints_of(found)))
    again = await client.get(f"/v1/arms/housing-loader/pose?q={q}{more}&format=flat")
    for key in ("x", "y", "z", "r1", "r2", "r3"):
        assert again.json()[key] == pytest.approx(there[key], abs=1e-6)


async def test_scale_near_tool_in_the_query(client: httpx.AsyncClient) -> None:
    flat = (await client.get(f"{REACH}?{TARGET}&format=flat")).json()
    scaled = TARGET.replace("914.57", "914570").replace("340.65", "340650")
    scaled = scaled.replace("753.03", "753030").replace("-74.763", "-74763")
    scaled = scaled.replace("-46.542", "-46542").replace("-95.258", "-95258")
    whole = (await client.get(f"{REACH}?{scaled}&scale=1000&format=flat")).json()
    assert joints_of(whole) == [round(1000 * value) for value in joints_of(flat)]
    told = (await client.get(f"{REACH}?{TARGET}&near=25,-70,95,-150,40,-165&format=flat")).json()
    assert joints_of(told) != joints_of(flat)
    assert np.abs(np.subtract(joints_of(told), [25, -70, 95, -150, 40, -165])).max() < 1
    # The gripper stands 148 mm along z of the flange.
    inline = (await client.get(f"{REACH}?{TARGET}&tz=148&format=flat")).json()
    np.testing.assert_allclose(joints_of(inline), joints_of(flat), atol=1e-9)


async def test_a_no_is_an_answer_without_numbers(client: httpx.AsyncClient) -> None:
    for wanted in ("flat", "txt", "csv", "json"):
        answer = await client.get(f"{REACH}?{FAR}&format={wanted}")
        assert answer.status_code == 200
        if wanted == "json":
            told = answer.json()
            assert (told["ok"], told["code"]) == (False, 200)
            assert told["results"][0]["reason"]["say"]
        elif wanted == "flat":
            told = answer.json()
            assert (told["ok"], told["code"], told["verdict"]) == (0, 200, "unreachable")
            assert set(joints_of(told)) == {-999999.9999}
            assert (told["revision"], told["units"]) == (1, "mm-deg")
        else:
            assert "-999999.9999" in answer.text


async def test_the_orientation_is_free_without_angles(client: httpx.AsyncClient) -> None:
    place = "/v1/arms/seal-setter/reach?x=527.08&y=178.72&z=190"
    for more in ("", "&freedom=orientation"):
        told = (await client.get(f"{place}{more}&format=flat")).json()
        assert (told["ok"], told["verdict"]) == (1, "reachable")


async def test_heads_have_no_body_and_stay_fresh(client: httpx.AsyncClient) -> None:
    answer = await client.head(f"{REACH}?{TARGET}&format=txt")
    whole = await client.get(f"{REACH}?{TARGET}&format=txt")
    assert answer.status_code == whole.status_code == 200
    assert answer.headers["content-length"] == whole.headers["content-length"]
    assert whole.headers["cache-control"] == "no-store"


# --- budgets ---------------------------------------------------------------------------------

LONG = "n" * 32
PLACED = {"position": [0, 0, 50], "orientation": {"form": "xyz-fixed", "values": [0, 0, 0]}}


def long_arm() -> dict[str, Any]:
    """Return eight joints, some turning more than once, with names as long as budgets allow."""
    turn = {"joint": "revolute", "alpha": 0, "d": 0, "theta": 0, "travel": [-350, 350]}
    rows = [
        {**turn, "a": 0, "alpha": 90, "d": 400},
        {**turn, "a": 500},
        {**turn, "a": 40, "alpha": 90},
        {**turn, "a": 0, "alpha": -90, "d": 500},
        {**turn, "a": 0, "alpha": 90},
        {**turn, "a": 0, "alpha": -90, "d": 100},
        {**turn, "a": 0, "alpha": 90},
        {**turn, "a": 50, "d": 90},
    ]
    return {
        "name": LONG,
        "convention": "standard",
        "units": "mm-deg",
        "rows": rows,
        "tools": {"t" * 32: {**PLACED, "number": 999}},
        "default_tool": "t" * 32,
        "frames": {"f" * 32: {**PLACED, "number": 999}},
    }


async def test_eight_joints_and_long_names_stay_within_a_controller_s_bounds(
    client: httpx.AsyncClient,
) -> None:
    assert (await client.post("/v1/arms", json=long_arm())).status_code == 201
    named = f"&tool={'t' * 32}&frame={'f' * 32}&tag=1234567890"
    target = "x=-123.4567&y=-234.5678&z=-345.6789&r1=-12.3456&r2=-23.4567&r3=-134.5678"
    for wanted, most in (("txt", 254), ("flat", 1024), ("json", 16_384)):
        url = f"/v1/arms/{LONG}/reach?{target}{named}&format={wanted}"
        assert len(url) <= 255
        answer = await client.get(url, timeout=60)
        assert answer.status_code == 200, answer.text
        assert len(answer.content) <= most
        if wanted == "json":
            json.loads(answer.content)


async def test_postures_that_share_a_margin_are_told_apart_by_working_travel(
    client: httpx.AsyncClient,
) -> None:
    """Joint 3 bounds them all, and turns of tool z differ in joint 6: once, rounding chose."""
    values = [712.525435609931, -800.341534580998, 782.762797135667]
    angles = [-4.401419781777521, 14.497137674246577, -133.48716767328108]
    named = zip(("x", "y", "z", "r1", "r2", "r3"), [*values, *angles], strict=True)
    query = "&".join(f"{key}={value!r}" for key, value in named)
    single = (await client.get(f"{REACH}?{query}&cone=20")).json()["results"][0]
    orientation = {"form": "xyz-fixed", "values": angles}
    target = {"pose": {"position": values, "orientation": orientation}, "freedom": {"cone": 20}}
    body = {"arm": "housing-loader", "targets": [target, target]}
    many = (await client.post("/v1/reach/checks", json=body)).json()["results"]
    joints = [result["solutions"][0]["joints"] for result in (single, *many)]
    assert [result["code"] for result in (single, *many)] == [0, 0, 0]
    np.testing.assert_allclose(joints, [joints[0]] * 3, atol=1e-6)
