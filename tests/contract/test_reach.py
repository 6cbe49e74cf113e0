"""Whether arms get to targets, over HTTP: every yes lands, every no says why, tables as bodies.

The referee is the forward chain, asked for the poses of what is answered. Left out: bad input
(test_bad_reach) and the single question (test_reach_single).
"""

import asyncio
import csv
import io
from random import Random
from typing import Any

import httpx
import numpy as np
import pytest

from service.settings import Settings

pytestmark = pytest.mark.anyio
CHECKS = "/v1/reach/checks"
CSV = {"content-type": "text/csv"}
SEED = Random().randrange(10**6)
Body = dict[str, Any]

ARMS = {
    "housing-loader": 6,
    "lathe-tender": 6,
    "wash-arm": 6,
    "seal-setter": 4,
    "pallet-stacker": 4,
}
"""Arms with a closed form, and their joints."""

FORWARD: Body = {"position": [914.57, 340.65, 753.03]}
POSE: Body = {
    **FORWARD,
    "orientation": {"form": "xyz-fixed", "values": [-74.763, -46.542, -95.258]},
}
FAR: Body = {
    "position": [2500, 0, 700],
    "orientation": {"form": "xyz-fixed", "values": [180, 0, 0]},
}


@pytest.fixture
def settings() -> Settings:
    """The demonstration cell."""
    return Settings(database=":memory:", demo=True)


async def checked(client: httpx.AsyncClient, **asked: Any) -> Body:
    answer = await client.post(CHECKS, json=asked, timeout=120)
    assert answer.status_code == 200, answer.text
    found: Body = answer.json()
    return found


async def poses_of(
    client: httpx.AsyncClient, arm: str, joints: list[list[float]], **more: Any
) -> list[Body]:
    body = {"arm": arm, "joints": joints, **more}
    answer = await client.post("/v1/poses", json=body)
    assert answer.status_code == 200, answer.text
    items: list[Body] = answer.json()["poses"]
    return items


async def postures(client: httpx.AsyncClient, arm: str, count: int) -> list[list[float]]:
    """Return random joint values within travel, limits of linkages too."""
    rows = (await client.get(f"/v1/arms/{arm}")).json()["arm"]["rows"]
    random = Random(SEED)
    spans = [row["travel"] for row in rows if not row.get("passive")]
    drawn = [[random.uniform(*span) for span in spans] for _ in range(20 * count)]
    items = await poses_of(client, arm, drawn, singularity=False)
    kept = [row for row, item in zip(drawn, items, strict=True) if item["code"] != 4]
    assert len(kept) >= count
    return kept[:count]


def told_pose(item: Body) -> Body:
    return {"position": item["position"], "orientation": item["orientation"]}


def assert_lands(item: Body, pose: Body, *, position: float, matrix: float) -> None:
    np.testing.assert_allclose(item["position"], pose["position"], atol=position, rtol=0)
    wanted, found = (each["orientation"]["values"] for each in (pose, item))
    np.testing.assert_allclose(found, wanted, atol=matrix, rtol=0)


@pytest.mark.parametrize("arm", ARMS)
async def test_every_posture_is_found_again(client: httpx.AsyncClient, arm: str) -> None:
    print("seed", SEED)
    joints = await postures(client, arm, 12)
    items = await poses_of(client, arm, joints, form="matrix", singularity=False)
    targets = [{"name": f"p-{i}", "pose": told_pose(item)} for i, item in enumerate(items)]
    told = await checked(client, arm=arm, targets=targets, solutions="all")
    assert told["method"]["proof"] == "closed-form"
    assert told["summary"]["reachable"] == len(targets)
    for place, (result, row, item) in enumerate(zip(told["results"], joints, items, strict=True)):
        assert (result["name"], result["ok"], result["verdict"]) == (
            f"p-{place}",
            True,
            "reachable",
        )
        assert (result["proof"], result["reason"]) == ("witness", None)
        solutions = result["solutions"]
        assert result["found"] >= len(solutions) >= 1
        again = await poses_of(client, arm, [each["joints"] for each in solutions], form="matrix")
        for solution, landed in zip(solutions, again, strict=True):
            assert_lands(landed, item, position=1e-6, matrix=1e-9)
            assert solution["margin"] >= 0
            assert len(solution["joints"]) == ARMS[arm]
            assert (solution["position_error"], solution["angle_error"]) < (1e-6, 1e-6)
            same = {key: landed["singularity"][key] for key in ("state", "kinds", "joints", "task")}
            assert {key: solution["singularity"][key] for key in same} == same
        margins = [each["margin"] for each in solutions]
        # Alike but for rounding, they may stand in either order.
        assert (np.diff(margins) < 1e-9).all()
        if not result["families"] and result["found"] == len(solutions):
            off = [np.abs(np.subtract(each["joints"], row)).max() for each in solutions]
            # Near a fold the joint values are known to the root of what the pose is.
            assert min(off) < 1e-3


async def test_singularity_is_told_as_for_a_posture(client: httpx.AsyncClient) -> None:
    told = await checked(client, arm="housing-loader", targets=[{"pose": POSE}], solutions="all")
    solutions = told["results"][0]["solutions"]
    landed = await poses_of(client, "housing-loader", [each["joints"] for each in solutions])
    for solution, item in zip(solutions, landed, strict=True):
        one, other = solution["singularity"], item["singularity"]
        assert one.keys() == other.keys()
        for key in ("smallest_singular_value", "condition_number", "manipulability"):
            assert one[key] == pytest.approx(other[key], rel=1e-9)


async def test_the_best_is_the_first_of_all(client: httpx.AsyncClient) -> None:
    asked = {"arm": "housing-loader", "targets": [{"pose": POSE}]}
    (everything,) = (await checked(client, **asked, solutions="all"))["results"]
    (best,) = (await checked(client, **asked))["results"]
    assert len(best["solutions"]) == 1
    assert best["found"] == everything["found"] >= 2
    one, other = best["solutions"][0], everything["solutions"][0]
    np.testing.assert_allclose(one["joints"], other["joints"], atol=1e-9)


async def test_solutions_are_ranked_as_asked(client: httpx.AsyncClient) -> None:
    asked = {"arm": "housing-loader", "targets": [{"pose": POSE}], "solutions": "all"}
    (result,) = (await checked(client, **asked))["results"]
    last = result["solutions"][-1]["joints"]
    for more in ({"near": last}, {"near": last, "order": "nearness"}):
        (near,) = (await checked(client, **asked, **more))["results"]
        np.testing.assert_allclose(near["solutions"][0]["joints"], last, atol=1e-6)
    (by_margin,) = (await checked(client, **asked, near=last, order="margin"))["results"]
    assert by_margin["solutions"] == result["solutions"]
    (far,) = (await checked(client, **asked, order="singularity"))["results"]
    values = [each["singularity"]["smallest_singular_value"] for each in far["solutions"]]
    assert values == sorted(values, reverse=True)
    assert len(values) == len(result["solutions"])
    best = {**asked, "solutions": "best"}
    (farthest,) = (await checked(client, **best, order="singularity"))["results"]
    assert farthest["solutions"] == far["solutions"][:1]


async def test_the_same_place_in_another_frame_tool_and_unit(client: httpx.AsyncClient) -> None:
    arm, joints = "housing-loader", [[25, -70, 95, 30, -40, 15]]
    answers = []
    for frame, units, form in (
        ("base", "mm-deg", "matrix"),
        ("fixture-a", "in-deg", "zyz-current"),
        ("world", "m-rad", "rotation-vector"),
    ):
        more = {"tool": "probe", "frame": frame, "units": units}
        asked = joints if units != "m-rad" else [np.deg2rad(joints[0]).tolist()]
        (item,) = await poses_of(client, arm, asked, form=form, **more)
        told = await checked(client, arm=arm, targets=[{"pose": told_pose(item)}], **more)
        assert (told["frame"], told["units"], told["tool"]) == (frame, units, "probe")
        found = told["results"][0]["solutions"][0]["joints"]
        answers.append(found if units != "m-rad" else np.rad2deg(found).tolist())
    np.testing.assert_allclose(answers[1:], [answers[0]] * 2, atol=1e-6)


async def test_a_no_says_why_and_how_near_one_gets(client: httpx.AsyncClient) -> None:
    told = await checked(client, arm="housing-loader", targets=[{"pose": FAR}])
    (result,) = told["results"]
    assert (result["ok"], result["code"], result["verdict"]) == (False, 200, "unreachable")
    assert (result["solutions"], result["found"]) == ([], 0)
    assert result["proof"] in ("bound", "closed-form")
    reason = result["reason"]
    assert reason["unit"] == "mm"
    assert reason["stage"]
    assert 0 < reason["shortfall"] < 2500
    assert "mm" in reason["say"]
    assert "{" not in reason["say"]
    nearest = reason["nearest"]
    if nearest is not None:
        assert nearest["orientation"]["form"] == "xyz-fixed"
        told = await checked(client, arm="housing-loader", targets=[{"pose": nearest}])
        assert told["results"][0]["verdict"] in ("reachable", "outside-travel")


async def test_what_travel_forbids_is_listed_with_joint_and_excess(
    client: httpx.AsyncClient,
) -> None:
    # Straight behind the arm, where axis 1 would have to turn beyond its travel.
    (item,) = await poses_of(client, "housing-loader", [[175, -60, 80, 20, 40, 15]], form="matrix")
    told = await checked(
        client, arm="housing-loader", targets=[{"pose": told_pose(item)}], solutions="all"
    )
    (result,) = told["results"]
    if result["verdict"] == "reachable":
        pytest.skip("another branch gets there")
    assert (result["ok"], result["code"], result["verdict"]) == (False, 201, "outside-travel")
    assert result["solutions"]
    for solution in result["solutions"]:
        assert solution["margin"] < 0
        outside = [finding for finding in solution["findings"] if finding["code"] == 4]
        assert outside
        assert all(finding["excess"] > 0 for finding in outside)


async def test_good_ones_are_answered_among_bad_ones(client: httpx.AsyncClient) -> None:
    targets = [
        {"name": "good", "pose": POSE},
        {"name": "both", "pose": POSE, "position": [0, 0, 0]},
        {"name": "nan", "position": [0, 0, "x"]},
        {"name": "wide", "pose": POSE, "freedom": {"cone": 200}},
        {"name": "far", "pose": FAR},
        {"name": "good-too", "pose": POSE},
    ]
    told = await checked(client, arm="housing-loader", targets=targets)
    results = told["results"]
    assert [result["name"] for result in results] == [target["name"] for target in targets]
    assert [result["code"] for result in results] == [0, 105, 105, 105, 200, 0]
    assert [result["ok"] for result in results] == [True, False, False, False, False, True]
    for place in (1, 2, 3):
        assert results[place]["problem"]["pointer"].startswith(f"/targets/{place}/")
        assert results[place]["verdict"] is None
    assert told["summary"] == {
        "targets": 6,
        "reachable": 2,
        "outside_travel": 0,
        "unreachable": 1,
        "not_found": 0,
        "refused": 3,
    }


async def test_a_position_leaves_the_orientation_free(client: httpx.AsyncClient) -> None:
    arms = {
        "housing-loader": FORWARD["position"],
        "wash-gantry": [1000, 300, 400],
        "seal-setter": [527.08, 178.72, 190],
    }
    for arm, position in arms.items():
        told = await checked(client, arm=arm, targets=[{"position": position}])
        (result,) = told["results"]
        if result["verdict"] != "reachable":
            assert arm == "wash-gantry"
            continue
        (item,) = await poses_of(client, arm, [result["solutions"][0]["joints"]])
        np.testing.assert_allclose(item["position"], position, atol=0.01)


# --- tables --------------------------------------------------------------------------------


def lines_of(text: str) -> list[dict[str, str]]:
    return list(csv.DictReader(io.StringIO(text, newline="")))


def joints_of(line: dict[str, str]) -> list[float]:
    return [float(line[f"q{joint}"]) for joint in range(1, 7)]


TABLE = (
    "name,x,y,z,r1,r2,r3,freedom\r\n"
    "lug-1,914.57,340.65,753.03,-74.763,-46.542,-95.258,\r\n"
    "lug-2,914.57,abc,753.03,,,,\r\n"
    "far,2500,0,700,180,0,0,\r\n"
    "lug-3,914.57,340.65,753.03,,,,orientation\r\n"
)


async def test_a_table_is_answered_as_a_body_is(client: httpx.AsyncClient) -> None:
    answer = await client.post(f"{CHECKS}?arm=housing-loader", content=TABLE, headers=CSV)
    assert answer.status_code == 200, answer.text
    assert answer.headers["x-bad-rows"] == "1"
    lines = lines_of(answer.text)
    assert [line["name"] for line in lines] == ["lug-1", "lug-2", "far", "lug-3"]
    assert [line["code"] for line in lines] == ["0", "100", "200", lines[3]["code"]]
    assert [line["ok"] for line in lines] == ["1", "0", "0", "1"]
    told = await checked(client, arm="housing-loader", targets=[{"pose": POSE}, {"pose": FAR}])
    first, second = told["results"]
    np.testing.assert_allclose(joints_of(lines[0]), first["solutions"][0]["joints"], atol=1e-9)
    assert lines[0]["branch"] == first["solutions"][0]["branch"]
    assert int(lines[0]["solutions"]) == first["found"]
    assert lines[2]["reason"] == second["reason"]["say"]
    assert set(joints_of(lines[2])) == {-999999.9999}


async def test_all_solutions_are_a_line_each(client: httpx.AsyncClient) -> None:
    asked = f"{CHECKS}?arm=housing-loader&solutions=all"
    lines = lines_of((await client.post(asked, content=TABLE, headers=CSV)).text)
    first = [line for line in lines if line["name"] == "lug-1"]
    told = await checked(client, arm="housing-loader", targets=[{"pose": POSE}], solutions="all")
    solutions = told["results"][0]["solutions"]
    assert [line["solution"] for line in first] == [str(n + 1) for n in range(len(solutions))]
    for line, solution in zip(first, solutions, strict=True):
        np.testing.assert_allclose(joints_of(line), solution["joints"], atol=1e-9)
        assert float(line["margin"]) == pytest.approx(solution["margin"])
        assert line["state"] == solution["singularity"]["state"]


async def test_either_format_answers_either(client: httpx.AsyncClient) -> None:
    asked = f"{CHECKS}?arm=housing-loader&format=json&tool=1&units=mm-deg&near=0,0,0,0,0,0"
    told = (await client.post(asked, content=TABLE, headers=CSV)).json()
    assert [result["name"] for result in told["results"]] == ["lug-1", "lug-2", "far", "lug-3"]
    assert told["results"][1]["problem"]["pointer"] == "/3/y"
    body = {"arm": "housing-loader", "targets": [{"name": "lug-1", "pose": POSE}]}
    for headers, query in (({"accept": "text/csv"}, ""), ({}, "?format=csv&tag=5")):
        answer = await client.post(f"{CHECKS}{query}", json=body, headers=headers)
        assert answer.headers["content-type"].startswith("text/csv")
        (line,) = lines_of(answer.text)
        assert (line["name"], line["tag"]) == ("lug-1", "5" if query else "0")


async def test_angles_of_a_table_are_those_of_the_form(client: httpx.AsyncClient) -> None:
    arm, joints = "housing-loader", [[25, -70, 95, 30, -40, 15]]
    (item,) = await poses_of(client, arm, joints, form="zyx-current", frame="fixture-b")
    numbers = [*item["position"], *item["orientation"]["values"]]
    table = "x,y,z,r1,r2,r3\r\n" + ",".join(map(repr, numbers)) + "\r\n"
    query = "?arm=housing-loader&form=zyx-current&frame=fixture-b&near=25,-70,95,30,-40,15"
    (line,) = lines_of((await client.post(CHECKS + query, content=table, headers=CSV)).text)
    np.testing.assert_allclose(joints_of(line), joints[0], atol=1e-6)
    assert line["name"] == ""


# --- many ----------------------------------------------------------------------------------


async def test_many_come_in_pieces_and_in_order(client: httpx.AsyncClient) -> None:
    joints = await postures(client, "lathe-tender", 40)
    items = await poses_of(client, "lathe-tender", joints, form="matrix", singularity=False)
    targets = [
        {"name": f"p-{number}", "pose": told_pose(items[number % 40])} for number in range(1000)
    ]
    targets[500] = {"name": "p-500"}
    told = await checked(client, arm="lathe-tender", targets=targets)
    assert [result["name"] for result in told["results"]] == [f"p-{n}" for n in range(1000)]
    assert (told["summary"]["reachable"], told["summary"]["refused"]) == (999, 1)
    first = told["results"][:40]
    for place, result in enumerate(told["results"]):
        if place == 500:
            assert result["problem"]["pointer"] == "/targets/500/pose"
            continue
        one, other = result["solutions"][0], first[place % 40]["solutions"][0]
        assert one["joints"] == other["joints"]


async def test_others_are_answered_meanwhile(client: httpx.AsyncClient) -> None:
    targets = [{"pose": POSE}] * 3000
    body = {"arm": "housing-loader", "targets": targets, "solutions": "all"}
    long = asyncio.create_task(client.post(CHECKS, json=body, timeout=120))
    answered = 0
    while not long.done():
        assert (await client.get("/v1/ping")).status_code == 200
        answered += not long.done()
        await asyncio.sleep(0.005)
    assert (await long).json()["summary"]["reachable"] == 3000
    assert answered >= 5
