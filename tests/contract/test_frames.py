"""What POST /v1/frames answers: paths, loops, arms and cells, the estimate, whatever the units.

Left out: each bad body by itself (test_bad_frames) and whether poses are right (published, core).
"""

import threading
from typing import Any

import httpx
import numpy as np
import pytest

from service.routes import frames as frames_route
from service.wire.frames_request import FramesRequest
from tests.made_relations import LONG, anywhere, body_of

pytestmark = pytest.mark.anyio

Body = dict[str, Any]
STRAIGHT = {"form": "xyz-fixed", "values": [0, 0, 0]}
ROW = {"joint": "revolute", "a": 400, "alpha": 0, "d": 0, "theta": 0, "travel": [-170, 170]}


def at(*position: float, turned: float = 0) -> Body:
    return {
        "position": list(position),
        "orientation": {"form": "xyz-fixed", "values": [0, 0, turned]},
    }


ARM: Body = {
    "name": "picker",
    "convention": "standard",
    "units": "mm-deg",
    "rows": [ROW, ROW],
    "base": at(1000, 0, 0),
    "tools": {"claw": at(0, 0, 120)},
    "frames": {"tray": {**at(0, 500, 0), "in": "base"}},
}
TURNTABLE: Body = {"name": "turntable", "convention": "standard", "units": "m-rad", "rows": [
    {"joint": "revolute", "a": 0, "alpha": 0, "d": 0.5, "theta": 0}
]}  # fmt: skip
CELL: Body = {
    "name": "hall",
    "units": "mm-deg",
    "arms": {
        "picker": {"in": "world", "pose": at(1000, 0, 0)},
        "turntable": {"in": "bench", "pose": at(0, 0, 50)},
    },
    "frames": {
        "bench": at(0, 2000, 0, turned=90),
        "eye": {**at(50, 0, 0), "in": "picker.flange"},
        "part": {**at(300, 0, 0), "in": "turntable.flange"},
    },
}


@pytest.fixture
async def stocked(client: httpx.AsyncClient) -> httpx.AsyncClient:
    """A client of a service that holds the cell, the two arms, and one that stands in it."""
    assert (await client.post("/v1/cells", json=CELL)).status_code == 201
    without = {key: part for key, part in ARM.items() if key != "base"}
    for arm in (ARM, TURNTABLE, {**without, "name": "porter", "cell": "hall"}):
        answer = await client.post("/v1/arms", json=arm)
        assert answer.status_code == 201, answer.text
    return client


async def ask(client: httpx.AsyncClient, body: Body) -> Body:
    answer = await client.post("/v1/frames", json=body)
    assert answer.status_code == 200, answer.text
    assert answer.headers["content-length"] == str(len(answer.content))
    found: Body = answer.json()
    return found


def pair(of: str, within: str) -> Body:
    return {"of": of, "in": within}


def relation(of: str, within: str, *position: float, **more: Any) -> Body:
    turned = more.pop("turned", 0)
    return {**pair(of, within), "pose": at(*position, turned=turned), **more}


async def test_the_shape_of_an_answer(client: httpx.AsyncClient) -> None:
    body = {
        "relations": [relation("lamp", "table", 0, 0, 500), relation("table", "door", 100, 0, 0)],
        "find": [pair("door", "lamp"), pair("lamp", "lamp")],
        "units": "mm-deg",
        "form": "xyz-fixed",
    }
    assert await ask(client, body) == {
        "units": "mm-deg",
        "answers": [
            {
                **pair("door", "lamp"),
                "pose": {"position": [-100, 0, -500], "orientation": STRAIGHT},
                "path": ["lamp", "table", "door"],
                "say": "door in lamp = (lamp in table)^-1 (table in door)^-1",
                "findings": [],
            },
            {
                **pair("lamp", "lamp"),
                "pose": {"position": [0, 0, 0], "orientation": STRAIGHT},
                "path": ["lamp"],
                "say": "lamp in lamp is the identity",
                "findings": [],
            },
        ],
        "loops": [],
        "findings": [],
    }
    default = await ask(client, {key: part for key, part in body.items() if key != "form"})
    assert default["answers"][0]["pose"]["orientation"]["form"] == "quaternion-wxyz"


async def test_nothing_asked_for_but_loops(client: httpx.AsyncClient) -> None:
    twice = [relation("a", "b", 3, 4, 0), relation("b", "a", 0, 0, 0, turned=30)]
    answer = await ask(client, {"relations": twice, "units": "mm-deg"})
    assert answer["answers"] == []
    (loop,) = answer["loops"]
    assert loop["frames"] == ["b", "a", "b"]
    assert loop["closure"] == {
        "position": pytest.approx(5.0),
        "angle": pytest.approx(30.0),
        "at": "b",
    }
    assert loop["closes"] is False
    (finding,) = answer["findings"]
    assert (finding["code"], finding["name"], finding["unit"]) == (0, "loops-open", "deg")
    assert finding["measure"] == pytest.approx(30.0)
    assert "1 of 1 loops" in finding["say"]


async def test_units_do_not_matter(client: httpx.AsyncClient) -> None:
    """The same relations in each unit system, with the same standard deviations."""
    answers = []
    degrees = 180 / np.pi
    systems = [("mm-deg", 1000, degrees), ("m-rad", 1, 1), ("in-deg", 1 / 0.0254, degrees)]
    for units, length, angle in systems:
        relations = [
            relation("a", "b", 0.3 * length, 0, 0, turned=0.5 * angle, position_sd=0.002 * length),
            relation("b", "a", -0.2 * length, 0, 0, turned=-0.4 * angle, angle_sd=0.01 * angle),
        ]
        answer = await ask(
            client,
            {"relations": relations, "find": [pair("a", "b")], "units": units, "estimate": True},
        )
        (loop,), estimate = answer["loops"], answer["estimate"]
        answers.append(
            [
                *(value / length for value in answer["answers"][0]["pose"]["position"]),
                *answer["answers"][0]["pose"]["orientation"]["values"],
                loop["closure"]["position"] / length,
                loop["closure"]["angle"] / angle,
                estimate["misfit"],
                *(value / length for value in estimate["answers"][0]["pose"]["position"]),
                *estimate["answers"][0]["pose"]["orientation"]["values"],
                *(residual["position"] / length for residual in estimate["residuals"]),
                *(residual["angle"] / angle for residual in estimate["residuals"]),
                *(residual["normalised"] for residual in estimate["residuals"]),
            ]
        )
    np.testing.assert_allclose(answers[0], answers[1], rtol=0, atol=1e-9)
    np.testing.assert_allclose(answers[0], answers[2], rtol=0, atol=1e-9)


async def test_an_arm_at_joint_values(stocked: httpx.AsyncClient) -> None:
    body = {
        "arms": [{"arm": "picker", "joints": [0, 90]}],
        "find": [
            pair("picker.claw", "world"),
            pair("picker.flange", "picker.tray"),
            pair("picker.link-1", "picker.base"),
            pair("world", "picker.base"),
        ],
        "form": "xyz-fixed",
    }
    answer = await ask(stocked, body)
    assert answer["units"] == "mm-deg"
    stored = (await stocked.get("/v1/arms/picker")).json()
    (identity,) = answer["arms"]
    assert (identity["name"], identity["revision"]) == ("picker", stored["revision"])
    assert identity["digest"] == stored["digest"]
    poses = [found["pose"]["position"] for found in answer["answers"]]
    expected = [[1400, 400, 120], [400, -100, 0], [400, 0, 0], [-1000, 0, 0]]
    np.testing.assert_allclose(poses, expected, rtol=0, atol=1e-9)
    posture = {"arm": "picker", "joints": [[0, 90]], "frame": "world", "tool": "claw"}
    same = await stocked.post("/v1/poses", json={**posture, "form": "xyz-fixed"})
    assert answer["answers"][0]["pose"]["orientation"] == same.json()["poses"][0]["orientation"]
    for joints in ([[0, 90]], [0, 90.0]):
        again = {**body, "arms": [{"arm": "picker", "joints": joints}]}
        assert await ask(stocked, again) == answer
    given = await ask(stocked, {**body, "arms": [{"arm": ARM, "joints": [0, 90]}]})
    assert given["answers"] == answer["answers"]
    assert given["arms"][0]["revision"] is None


async def test_a_cell_and_two_arms(stocked: httpx.AsyncClient) -> None:
    """The part on the turntable as the claw sees it: through both arms, where the cell has them."""
    body = {
        "cell": "hall",
        "arms": [
            {"arm": "picker", "joints": [0, 90]},
            {"arm": "turntable", "joints": [90]},
        ],
        "find": [pair("part", "world"), pair("part", "picker.claw"), pair("eye", "world")],
        "form": "xyz-fixed",
    }
    answer = await ask(stocked, body)
    assert answer["units"] == "mm-deg"
    assert answer["cell"]["name"] == "hall"
    assert answer["cell"]["revision"] == 1
    poses = [found["pose"]["position"] for found in answer["answers"]]
    # The bench is turned by 90 deg, the table once more; the claw's x points along world y.
    expected = [[-300, 2000, 550], [1600, 1700, 430], [1400, 450, 0]]
    np.testing.assert_allclose(poses, expected, rtol=0, atol=1e-9)
    assert answer["answers"][0]["path"] == [
        *("world", "bench", "turntable.base", "turntable.flange", "part")
    ]


async def test_an_arm_brings_its_cell_along(stocked: httpx.AsyncClient) -> None:
    body = {
        "arms": [{"arm": "porter", "joints": [0, 0]}],
        "find": [pair("bench", "porter.claw"), pair("porter.bench", "bench")],
    }
    answer = await ask(stocked, body)
    assert answer["cell"]["name"] == "hall"
    np.testing.assert_allclose(
        [found["pose"]["position"] for found in answer["answers"]],
        [[-800, 2000, -120], [0, 0, 0]],
        rtol=0,
        atol=1e-9,
    )
    moved = {**CELL, "frames": {**CELL["frames"], "bench": at(0, 2500, 0)}}
    await stocked.put("/v1/cells/hall", json=moved, headers={"If-Match": "*"})
    answer = await ask(stocked, body)
    assert answer["cell"]["revision"] == 2
    assert answer["answers"][0]["pose"]["position"][1] == pytest.approx(2500)


async def test_revisions_of_a_cell_are_not_mixed(stocked: httpx.AsyncClient) -> None:
    moved = {**CELL, "frames": {**CELL["frames"], "bench": at(0, 2500, 0)}}
    await stocked.put("/v1/cells/hall", json=moved, headers={"If-Match": "*"})
    then = {"arm": {"name": "porter", "revision": 1}}
    whole = {k: v for k, v in ARM.items() if k != "base"}
    now = {"arm": {**whole, "name": "carrier", "cell": "hall"}}
    find = [pair("bench", "world")]
    for arms in ([then, now], [now, then]):
        answer = await stocked.post("/v1/frames", json={"arms": arms, "find": find})
        assert answer.status_code == 422, answer.text
        assert answer.json()["errors"][0]["pointer"] == "/arms"
    answer = await stocked.post("/v1/frames", json={"arms": [then], "cell": "hall", "find": find})
    assert answer.status_code == 422
    told = await ask(stocked, {"arms": [then], "find": find})
    assert told["cell"]["revision"] == 1


@pytest.mark.parametrize("word", ["estimate", r"\u0065stimate"])
async def test_an_estimate_is_nothing_for_the_event_loop(
    client: httpx.AsyncClient, monkeypatch: pytest.MonkeyPatch, word: str
) -> None:
    threads: list[object] = []
    answer = frames_route.frames_answer

    def noted(*given: Any) -> dict[str, object]:
        threads.append(threading.current_thread())
        return answer(*given)

    monkeypatch.setattr(frames_route, "frames_answer", noted)
    body = f'{{"relations": [], "find": [], "units": "m-rad", "{word}": true}}'
    kind = {"content-type": "application/json"}
    await client.post("/v1/frames", content=body, headers=kind)
    assert threads
    assert threading.current_thread() not in threads


async def test_joint_values_are_needed_only_on_the_way(stocked: httpx.AsyncClient) -> None:
    body = {
        "cell": "hall",
        "arms": [{"arm": "picker"}],
        "find": [pair("picker.tray", "bench"), pair("picker.claw", "eye")],
        "form": "xyz-fixed",
    }
    answer = await ask(stocked, body)
    positions = [found["pose"]["position"] for found in answer["answers"]]
    np.testing.assert_allclose(positions, [[-1500, -1000, 0], [-50, 0, 120]], rtol=0, atol=1e-9)


async def test_beyond_travel_is_said_not_refused(stocked: httpx.AsyncClient) -> None:
    body = {"arms": [{"arm": "picker", "joints": [0, 175]}], "find": [pair("picker.claw", "world")]}
    (finding,) = (await ask(stocked, body))["findings"]
    assert (finding["name"], finding["joint"], finding["arm"]) == ("outside-travel", 2, "picker")


async def test_repaired_relations_are_told(client: httpx.AsyncClient) -> None:
    form, values = "quaternion-wxyz", [0.71, 0.71, 0, 0]
    rounded = {"position": [0, 0, 0], "orientation": {"form": form, "values": values}}
    relations = [relation("a", "b", 0, 0, 0), {**pair("c", "a"), "pose": rounded}]
    answer = await ask(client, {"relations": relations, "find": [pair("c", "b")], "units": "m-rad"})
    (finding,) = answer["findings"]
    assert (finding["code"], finding["name"], finding["relation"]) == (6, "input-repaired", 1)
    many = [{**pair(f"c{k}", "a"), "pose": rounded} for k in range(30)]
    findings = (await ask(client, {"relations": many, "units": "m-rad"}))["findings"]
    assert len(findings) == 21
    assert "10 more relations" in findings[-1]["say"]


async def test_gimbal_lock_is_told_beside_the_pose(client: httpx.AsyncClient) -> None:
    tilted = {"position": [0, 0, 0], "orientation": {"form": "xyz-fixed", "values": [0, 90, 0]}}
    given = [{**pair("c", "a"), "pose": tilted}]
    body = {"relations": given, "find": [pair("c", "a")], "units": "mm-deg"}
    (locked,) = (await ask(client, {**body, "form": "xyz-fixed"}))["answers"]
    assert [finding["code"] for finding in locked["findings"]] == [5]
    (free,) = (await ask(client, {**body, "form": "matrix"}))["answers"]
    assert free["findings"] == []


async def test_the_estimate_tells_the_wrong_relation(client: httpx.AsyncClient) -> None:
    """Four frames in a row and every pair of them measured to 0.1 mm, one of them off by 5 mm."""
    heights = {"a": 0, "b": 100, "c": 250, "d": 400}
    relations = [
        relation(of, within, 0, 0, heights[of] - heights[within], position_sd=0.1, angle_sd=0.1)
        for of, within in ["ba", "cb", "dc", "ca", "db", "da"]
    ]
    relations[3]["pose"]["position"] = [0, 5, 250]
    body = {"relations": relations, "find": [pair("c", "a")], "units": "mm-deg", "estimate": True}
    answer = await ask(client, body)
    estimate = answer["estimate"]
    assert estimate["converged"] is True
    assert estimate["degrees_of_freedom"] == 18
    assert len(answer["loops"]) == 3
    suspect = estimate["suspect"]
    assert (suspect["of"], suspect["in"], suspect["relation"]) == ("c", "a", 3)
    assert suspect["beyond_chance"] is True
    assert suspect["alike"] == []
    assert suspect["say"] == "c in a most likely is wrong"
    # The pose by the way told is the wrong one itself; the likely one is pulled back by the rest.
    assert answer["answers"][0]["pose"]["position"] == [0, 5, 250]
    assert estimate["answers"][0]["pose"]["position"][1] == pytest.approx(2.9, abs=0.05)
    residuals = estimate["residuals"]
    assert [residual["relation"] for residual in residuals] == list(range(6))
    assert max(residuals, key=lambda residual: residual["normalised"]) is residuals[3]
    assert suspect["normalised"] == residuals[3]["normalised"] > suspect["threshold"]
    assert sum(6 * residual["redundancy"] for residual in residuals) == pytest.approx(18)
    assert estimate["redundancies_exact"] is True
    mended = [relation for k, relation in enumerate(relations) if k != 3]
    again = await ask(client, {**body, "relations": mended})
    assert again["estimate"]["suspect"] is None
    assert again["estimate"]["answers"][0]["pose"]["position"] == pytest.approx([0, 0, 250])


async def test_one_loop_alone_accuses_nobody_in_particular(client: httpx.AsyncClient) -> None:
    ring = [relation("b", "a", 1, 0, 0), relation("c", "b", 1, 0, 0), relation("a", "c", -2, 9, 0)]
    answer = await ask(client, {"relations": ring, "units": "mm-deg", "estimate": True})
    suspect = answer["estimate"]["suspect"]
    assert {suspect["relation"], *(other["relation"] for other in suspect["alike"])} == {0, 1, 2}
    assert suspect["say"].startswith("a mistake in any of 3 relations would explain this as well")


async def test_arms_and_cells_take_part_in_the_estimate(stocked: httpx.AsyncClient) -> None:
    body = {
        "cell": "hall",
        "arms": [{"arm": "turntable", "joints": [0]}],
        "relations": [relation("part", "world", 0, 2300, 553, position_sd=1)],
        "estimate": True,
    }
    estimate = (await ask(stocked, body))["estimate"]
    told = {(r["of"], r["in"]): r["relation"] for r in estimate["residuals"]}
    assert told["part", "world"] == 0
    assert told["turntable.flange", "turntable.base"] is None
    assert len(told) == 1 + 5 + 1
    assert estimate["degrees_of_freedom"] == 6


@pytest.mark.parametrize("more", [{}, {"estimate": True}])
async def test_no_loops_no_relations(stocked: httpx.AsyncClient, more: Body) -> None:
    empty = {"name": "empty-hall", "units": "mm-deg"}
    assert (await stocked.post("/v1/cells", json=empty)).status_code == 201
    answer = await ask(stocked, {"cell": "empty-hall", **more})
    assert answer["loops"] == answer["answers"] == []
    if more:
        assert answer["estimate"]["misfit"] is None
        assert answer["estimate"]["suspect"] is None


async def test_a_large_network(client: httpx.AsyncClient) -> None:
    raw, kind = body_of(LONG, anywhere, estimate=True), {"content-type": "application/json"}
    answer = await client.post("/v1/frames", content=raw, headers=kind)
    found = answer.json()
    assert len(found["loops"]) == LONG[1] - LONG[0] + 1
    assert max(len(loop["frames"]) for loop in found["loops"]) < 60
    estimate = found["estimate"]
    assert estimate["converged"] is True
    assert estimate["misfit"] == pytest.approx(1.0, abs=0.02)
    assert estimate["redundancies_exact"] is False


def test_the_document_knows_the_fields() -> None:
    schema = FramesRequest.model_json_schema()
    assert set(schema["properties"]) == {
        *("relations", "find", "arms", "cell", "estimate", "form", "units")
    }
