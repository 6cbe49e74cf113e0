"""Approaches of targets, over HTTP: a posture counts that the tool can come straight to.

The referee is the forward chain, and the same way asked for as a travel. Left out: bad input
(test_bad_reach), verdicts that can be told by hand (kinematics/travel/test_approaches).
"""

import csv
import io
from typing import Any

import httpx
import numpy as np
import pytest

from service.settings import Settings
from tests.contract.test_reach_single import FAR, REACH, TARGET, long_arm

pytestmark = pytest.mark.anyio
CHECKS = "/v1/reach/checks"
ARM = "housing-loader"
Body = dict[str, Any]
POSE: Body = {
    "position": [914.57, 340.65, 753.03],
    "orientation": {"form": "xyz-fixed", "values": [-74.763, -46.542, -95.258]},
}
NEAR: Body = {"distance": 60, "along": "tool-z", "speed": 50}
ABOVE: Body = {"distance": 900, "along": [0, 0, -1]}


@pytest.fixture
def settings() -> Settings:
    """The demonstration cell."""
    return Settings(database=":memory:", demo=True)


async def checked(client: httpx.AsyncClient, *targets: Body, **more: Any) -> list[Body]:
    answer = await client.post(CHECKS, json={"arm": ARM, "targets": targets} | more, timeout=120)
    assert answer.status_code == 200, answer.text
    results: list[Body] = answer.json()["results"]
    return results


async def pose_at(client: httpx.AsyncClient, joints: list[float]) -> Any:
    body = {"arm": ARM, "joints": [joints], "form": "matrix"}
    item = (await client.post("/v1/poses", json=body)).json()["poses"][0]
    return np.array(item["position"]), np.array(item["orientation"]["values"])


async def test_the_tool_comes_straight_to_the_posture(client: httpx.AsyncClient) -> None:
    for said in (NEAR, {"distance": 40, "along": [0.3, -0.2, 0.9]}):
        (result,) = await checked(client, {"pose": POSE, "approach": said})
        assert (result["ok"], result["verdict"], result["reason"]) == (True, "reachable", None)
        (solution,) = result["solutions"]
        approach = solution["approach"]
        assert (approach["ok"], approach["breaks"]) == (True, None)
        there, turned = await pose_at(client, solution["joints"])
        start, same = await pose_at(client, approach["start"]["joints"])
        along = turned[:, 2] if said["along"] == "tool-z" else np.array(said["along"])
        wanted = there - said["distance"] * along / np.linalg.norm(along)
        np.testing.assert_allclose(start, wanted, atol=1e-4)
        np.testing.assert_allclose(same, turned, atol=1e-7)
        assert approach["start"]["branch"] == solution["branch"]
        assert approach["length"] == approach["gone"] == pytest.approx(said["distance"])


async def test_the_same_way_as_a_travel(client: httpx.AsyncClient) -> None:
    """Followed from the other end, from each posture there: as many ways, alike in numbers."""
    (result,) = await checked(client, {"pose": POSE, "approach": NEAR}, solutions="all")
    body = {"arm": ARM, "solutions": "all", "travels": [
        {"target": {"pose": POSE}, "approach": NEAR},
    ]}  # fmt: skip
    told = (await client.post("/v1/reach/travels", json=body, timeout=60)).json()["travels"][0]
    assert len(result["solutions"]) == len(told["ways"]) == 4
    for solution in result["solutions"]:
        ours = solution["approach"]
        theirs = min(
            (way["legs"][0] for way in told["ways"]),
            key=lambda leg: np.abs(np.subtract(leg["end"]["joints"], solution["joints"])).max(),
        )
        np.testing.assert_allclose(ours["start"]["joints"], theirs["start"]["joints"], atol=1e-5)
        np.testing.assert_allclose(ours["peak_speeds"], theirs["peak_speeds"], rtol=1e-4)
        assert ours["duration_s"] == pytest.approx(1.2)
        assert ours["top_speed"] == pytest.approx(theirs["top_speed"], rel=1e-4)
        for name in ("margin", "smallest_singular_value"):
            assert ours[name]["value"] == pytest.approx(theirs[name]["value"], rel=1e-4)
        # One counts from the target back, the other towards it.
        at = ours["margin"]["at"] + theirs["margin"]["at"]
        assert at == pytest.approx(60, abs=1e-3)


async def test_where_it_breaks_is_said(client: httpx.AsyncClient) -> None:
    (result,) = await checked(client, {"pose": POSE, "approach": ABOVE})
    assert (result["ok"], result["code"], result["verdict"]) == (False, 200, "unreachable")
    assert (result["solutions"], result["proof"]) == ([], "bound")
    reason = result["reason"]
    assert (reason["code"], reason["stage"]) == ("approach-branch-ends", "approach")
    gone = 900 - reason["shortfall"]
    assert f"from {gone:.6g} mm before it, not from 900 mm" in reason["say"]
    # The arm at full stretch above the place, and no further.
    nearest = reason["nearest"]["position"]
    np.testing.assert_allclose(nearest, np.add(POSE["position"], [0, 0, gone]), atol=0.01)
    for height, verdict in ((gone - 1, "reachable"), (gone + 1, "unreachable")):
        there = {**POSE, "position": np.add(POSE["position"], [0, 0, height]).tolist()}
        (beside,) = await checked(client, {"pose": there})
        assert beside["verdict"] in (verdict, "outside-travel")
        assert (beside["verdict"] == "unreachable") == (verdict == "unreachable")


async def test_targets_with_and_without_one(client: httpx.AsyncClient) -> None:
    results = await checked(
        client,
        {"name": "plain", "pose": POSE},
        {"name": "near", "pose": POSE, "approach": NEAR},
        {"name": "bad", "pose": POSE, "approach": {"distance": 0}},
        {"name": "above", "pose": POSE, "approach": ABOVE},
    )
    assert [result["name"] for result in results] == ["plain", "near", "bad", "above"]
    assert [result["ok"] for result in results] == [True, True, False, False]
    assert "approach" not in results[0]["solutions"][0]
    assert results[2]["problem"]["pointer"] == "/targets/2/approach/distance"


@pytest.mark.parametrize("freedom", ["spin", {"cone": 20}, "orientation"])
async def test_what_is_left_open_stays_as_the_posture_has_it(
    client: httpx.AsyncClient, freedom: Any
) -> None:
    (result,) = await checked(client, {"pose": POSE, "freedom": freedom, "approach": NEAR})
    assert result["ok"], result["reason"]
    (solution,) = result["solutions"]
    there, turned = await pose_at(client, solution["joints"])
    start, same = await pose_at(client, solution["approach"]["start"]["joints"])
    np.testing.assert_allclose(start, there - 60 * turned[:, 2], atol=1e-4)
    np.testing.assert_allclose(same, turned, atol=1e-7)


async def test_by_nearness_to_singular_too(client: httpx.AsyncClient) -> None:
    """In whatever order, what has a whole approach stands before what has none."""
    said = {"distance": 400, "along": [0, 0, -1]}
    for order in ("margin", "singularity"):
        (result,) = await checked(
            client, {"pose": POSE, "approach": said}, solutions="all", order=order
        )
        whole = [solution["approach"]["ok"] for solution in result["solutions"]]
        assert whole == sorted(whole, reverse=True)
        assert result["ok"] == whole[0]


@pytest.mark.parametrize(
    ("arm", "joints"),
    [
        ("lathe-tender", [30, 20, -80, 40, 50, 60]),
        ("wash-arm", [30, 20, -80, 40, 50, 60]),
        ("line-runner", [3000, 20, 30, 40, 10, 50, 0]),
        ("seal-setter", [20, 40, 60, 10]),
        ("pallet-stacker", [10, 20, 40, 0]),
        ("wash-gantry", [2600, 900, 500, 20, 30]),
    ],
)
async def test_other_arms_come_straight_too(
    client: httpx.AsyncClient, arm: str, joints: list[float]
) -> None:
    body = {"arm": arm, "joints": [joints]}
    item = (await client.post("/v1/poses", json=body)).json()["poses"][0]
    pose = {"position": item["position"], "orientation": item["orientation"]}
    asked = {"pose": pose, "approach": {"distance": 30}}
    (result,) = await checked(client, asked, arm=arm, near=joints)
    assert result["ok"], result["reason"]
    (solution,) = result["solutions"]
    ends = [solution["joints"], solution["approach"]["start"]["joints"]]
    body = {"arm": arm, "joints": ends, "form": "matrix"}
    landed, start = (await client.post("/v1/poses", json=body)).json()["poses"]
    turned = np.array(landed["orientation"]["values"])
    # Arms with few joints are off by no more than their tolerance.
    np.testing.assert_allclose(landed["position"], item["position"], atol=0.011)
    wanted = np.array(landed["position"]) - 30 * turned[:, 2]
    np.testing.assert_allclose(start["position"], wanted, atol=0.011)
    np.testing.assert_allclose(start["orientation"]["values"], turned, atol=2e-4)


async def test_a_table_with_approaches(client: httpx.AsyncClient) -> None:
    line = "914.57,340.65,753.03,-74.763,-46.542,-95.258"
    table = (
        f"name,x,y,z,r1,r2,r3,approach\r\nplain,{line},\r\nnear,{line},60\r\n"
        f"far,{line},5000\r\nbad,{line},0\r\n"
    )
    url = f"{CHECKS}?arm={ARM}"
    answer = await client.post(url, content=table, headers={"content-type": "text/csv"})
    assert answer.status_code == 200, answer.text
    assert answer.headers["x-bad-rows"] == "1"
    rows = list(csv.DictReader(io.StringIO(answer.text)))
    assert [(row["name"], row["ok"], row["code"]) for row in rows] == [
        ("plain", "1", "0"),
        ("near", "1", "0"),
        ("far", "0", "200"),
        ("bad", "0", "105"),
    ]
    assert float(rows[0]["q1"]) == pytest.approx(float(rows[1]["q1"]), abs=1e-9)
    assert "before it, not from 5000 mm" in rows[2]["reason"]
    assert rows[2]["reason"].endswith("the start itself is out of reach")


# --- by query string -------------------------------------------------------------------------


async def test_a_query_says_the_same(client: httpx.AsyncClient) -> None:
    (body,) = await checked(client, {"pose": POSE, "approach": {"distance": 60}})
    nested = (await client.get(f"{REACH}?{TARGET}&approach=60")).json()
    (result,) = nested["results"]
    assert (nested["ok"], nested["code"]) == (True, 0)
    ours, theirs = (each["solutions"][0]["approach"] for each in (result, body))
    assert ours.keys() == theirs.keys()
    np.testing.assert_allclose(ours["start"]["joints"], theirs["start"]["joints"], atol=1e-6)
    flat = (await client.get(f"{REACH}?{TARGET}&approach=60&format=flat")).json()
    assert (flat["ok"], flat["code"], flat["verdict"]) == (1, 0, "reachable")
    assert [flat[f"q{n}"] for n in range(1, 7)] == result["solutions"][0]["joints"]
    assert list(flat) == list((await client.get(f"{REACH}?{TARGET}&format=flat")).json())


async def test_a_query_whose_approach_breaks(client: httpx.AsyncClient) -> None:
    asked = f"{REACH}?{TARGET}&approach=900&along=0,0,-1"
    nested = (await client.get(asked)).json()
    assert (nested["ok"], nested["code"]) == (False, 200)
    assert nested["results"][0]["reason"]["stage"] == "approach"
    flat = (await client.get(f"{asked}&format=flat")).json()
    assert (flat["ok"], flat["code"], flat["verdict"]) == (0, 200, "unreachable")
    assert {flat[f"q{n}"] for n in range(1, 7)} == {-999999.9999}
    scaled = TARGET.replace("914.57", "91457").replace("340.65", "34065").replace("753.03", "75303")
    scaled = "&".join(
        f"{name}={round(float(value) * 1000)}" if name.startswith("r") else f"{name}={value}0"
        for name, value in (each.split("=") for each in scaled.split("&"))
    )
    whole = await client.get(f"{REACH}?{scaled}&approach=60000&scale=1000&format=flat")
    assert (whole.json()["ok"], whole.status_code) == (1, 200)


async def test_what_cannot_be_reached_is_told_as_without(client: httpx.AsyncClient) -> None:
    plain, asked = [
        (await client.get(f"{REACH}?{FAR}{more}")).json()["results"][0]
        for more in ("", "&approach=50")
    ]
    assert asked == plain


async def test_a_controller_s_bounds_hold(client: httpx.AsyncClient) -> None:
    assert (await client.post("/v1/arms", json=long_arm())).status_code == 201
    named = f"&tool={'t' * 32}&frame={'f' * 32}&tag=1234567890&approach=12.5"
    target = "x=-123.4567&y=-234.5678&z=-345.6789&r1=-12.3456&r2=-23.4567&r3=-134.5678"
    for wanted, most in (("txt", 254), ("flat", 1024), ("json", 16_384)):
        url = f"/v1/arms/{'n' * 32}/reach?{target}{named}&format={wanted}"
        assert len(url) <= 255
        answer = await client.get(url, timeout=60)
        assert answer.status_code == 200, answer.text
        assert len(answer.content) <= most
