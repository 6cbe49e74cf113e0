"""Stored cells over HTTP, and the arms in them: one fixture edited in one place for four arms.

Left out: bad input (test_bad_cells); what arms and cells have in common beyond one pass through
every route (test_stored_arms).
"""

import asyncio
import json
import os
from collections.abc import Callable
from pathlib import Path
from typing import Any

import httpx
import numpy as np
import pytest
import sqlalchemy as sa
from scipy.spatial.transform import Rotation

from service.app import create_app
from service.settings import Settings
from tests.conftest import POSTGRES, ServerProcess
from tests.contract.refusals import only_entry
from tests.service.storage.conftest import wipe

pytestmark = pytest.mark.anyio

URL = os.environ.get(POSTGRES, "")
CELLS, CELL = "/v1/cells", "/v1/cells/press-cell"
FOUR = ("one-arm", "two-arm", "three-arm", "four-arm")
TURN = [10, -20, 30]
CLOSE = 1e-9  # mm: metres to a few 1e-16, times a thousand


def pose(*position: float, turn: list[float] | None = None) -> dict[str, Any]:
    values = [0, 0, 0] if turn is None else turn
    return {"position": list(position), "orientation": {"form": "xyz-fixed", "values": values}}


def cell(height: float = 900, **changes: Any) -> dict[str, Any]:
    """A cell of four arms around a fixture; ``height`` is how high it stands, mm."""
    places = [(1000, 0), (0, 1000), (-1000, 0), (0, -1000)]
    return {
        "name": "press-cell",
        "title": "Four arms around one fixture",
        "units": "mm-deg",
        "arms": {
            name: {"in": "world", "pose": pose(x, y, 500, turn=[0, 0, 90 * n])}
            for n, (name, (x, y)) in enumerate(zip(FOUR, places, strict=True))
        },
        "frames": {
            "table": {"in": "world", **pose(100, 200, height, turn=TURN), "number": 8},
            "fixture": {"in": "table", "pose": pose(30, 40, 50), "number": 9},
            "eye": {"in": "one-arm.flange", **pose(0, 0, 80), "number": 10},
            "rack": {"in": "two-arm.base", **pose(0, -300, 0)},
        },
        **changes,
    }


def arm(name: str, **changes: Any) -> dict[str, Any]:
    rows = [
        {"joint": "revolute", "a": 0, "alpha": 90, "d": 300, "theta": 0, "travel": [-170, 170]},
        {"joint": "revolute", "a": 600, "alpha": 0, "d": 0, "theta": 0, "travel": [-90, 90]},
    ]
    document = {"name": name, "convention": "standard", "units": "mm-deg", "rows": rows}
    return {**document, "cell": "press-cell", **changes}


@pytest.fixture
def settings(tmp_path: Path) -> Settings:
    """Documents in a file, so that requests at once meet in the database."""
    return Settings(database=str(tmp_path / "arms.db"))


@pytest.fixture
async def stocked(client: httpx.AsyncClient) -> httpx.AsyncClient:
    """A service that holds the cell and its four arms."""
    assert (await client.post(CELLS, json=cell())).status_code == 201
    for name in FOUR:
        answer = await client.post("/v1/arms", json=arm(name))
        assert answer.status_code == 201, answer.text
    return client


async def tag_of(client: httpx.AsyncClient, path: str) -> str:
    return (await client.get(path)).headers["etag"]


# --- the routes ----------------------------------------------------------------------------


async def test_a_cell_passes_through_every_route(client: httpx.AsyncClient) -> None:
    created = await client.post(CELLS, json=cell(), params={"author": "Ada", "reason": "new line"})
    assert (created.status_code, created.headers["location"]) == (201, CELL)
    stored = created.json()
    assert list(stored) == [
        "name", "revision", "digest", "cell_digest", "author", "reason", "created_at", "units",
        "findings", "cell",
    ]  # fmt: skip
    assert (stored["revision"], stored["author"], stored["reason"]) == (1, "Ada", "new line")
    assert stored["cell"] == cell()
    assert stored["cell_digest"].startswith(stored["digest"])
    tag = created.headers["etag"]
    assert tag == f'"1-{stored["digest"]}"'

    assert only_entry(await client.post(CELLS, json=cell()), "name-taken")["pointer"] == "/name"
    assert (await client.get(CELL)).json() == stored
    assert (await client.get(CELL, headers={"if-none-match": tag})).status_code == 304
    assert (await client.head(CELL)).headers["etag"] == tag

    moved = cell(950)
    assert only_entry(await client.put(CELL, json=moved), "precondition-required")
    wrong = await client.put(CELL, json=moved, headers={"if-match": '"1-00000000"'})
    assert only_entry(wrong, "revision-differs")["pointer"] == "/if-match"
    there = await client.put(CELL, json=moved, headers={"if-none-match": "*"})
    assert only_entry(there, "revision-differs")["pointer"] == "/if-none-match"
    replaced = await client.put(CELL, json=moved, headers={"if-match": tag})
    assert (replaced.status_code, replaced.json()["revision"]) == (200, 2)
    assert replaced.json()["cell_digest"] != stored["cell_digest"]

    pinned = await client.get(f"{CELL}/revisions/1")
    assert pinned.json() == stored
    assert "immutable" in pinned.headers["cache-control"]
    revisions = (await client.get(f"{CELL}/revisions", params={"page_size": 1})).json()
    assert revisions["name"] == "press-cell"
    assert [entry["revision"] for entry in revisions["revisions"]] == [1]
    token = revisions["next_page_token"]
    revisions = (await client.get(f"{CELL}/revisions", params={"page_token": token})).json()
    assert [entry["revision"] for entry in revisions["revisions"]] == [2]
    assert revisions["revisions"][0]["cell_digest"] == replaced.json()["cell_digest"]

    for name in ("a-cell", "z-cell"):
        path = f"{CELLS}/{name}"
        bare = {"name": name, "units": "m-rad"}
        answer = await client.put(path, json=bare, headers={"if-none-match": "*"})
        assert answer.status_code == 201
    listed = (await client.get(CELLS, params={"page_size": 2})).json()
    assert [entry["name"] for entry in listed["cells"]] == ["a-cell", "press-cell"]
    assert listed["cells"][1] == {
        "name": "press-cell",
        "title": "Four arms around one fixture",
        "revision": 2,
        "digest": replaced.json()["digest"],
        "arms": list(FOUR),
        "frames": 4,
        "units": "mm-deg",
    }
    listed = (await client.get(CELLS, params={"page_token": listed["next_page_token"]})).json()
    assert [entry["name"] for entry in listed["cells"]] == ["z-cell"]

    stale = await client.delete(CELL, headers={"if-match": tag})
    assert only_entry(stale, "revision-differs")
    assert (await client.delete(CELL, params={"author": "Bo"})).status_code == 204
    assert only_entry(await client.get(CELL), "unknown-arm", 404)["way_out"].startswith("GET /v1/c")
    assert only_entry(await client.delete(CELL), "unknown-arm", 404)
    hidden = (await client.get(f"{CELL}/revisions")).json()["revisions"][-1]["hidden"]
    assert hidden["author"] == "Bo"
    again = await client.post(CELLS, json=cell())
    assert again.json()["revision"] == 3


async def test_the_list_of_arms_says_which_cell_each_names(stocked: httpx.AsyncClient) -> None:
    await stocked.post("/v1/arms", json=arm("alone", cell=None))
    listed = (await stocked.get("/v1/arms")).json()["arms"]
    assert {entry["name"]: entry["cell"] for entry in listed} == {
        "alone": None,
        **dict.fromkeys(FOUR, "press-cell"),
    }


async def test_what_was_mended_is_told(client: httpx.AsyncClient) -> None:
    typed = [[0.866, -0.5, 0, 10], [0.5, 0.866, 0, 0], [0, 0, 1, 0], [0, 0, 0, 1]]
    answer = await client.post(CELLS, json=cell(frames={"typed": {"matrix": typed}}, arms={}))
    (finding,) = answer.json()["findings"]
    assert finding["code"] == 6


async def test_digests_of_the_same_cell_in_other_units_and_another_order_are_the_same(
    client: httpx.AsyncClient,
) -> None:
    one = {"name": "a", "units": "mm-deg", "frames": {
        "p": pose(400, 0, 0), "q": {"in": "p", **pose(25.4, 0, 0), "number": 1}}}  # fmt: skip
    two = {"name": "b", "units": "m-rad", "title": "the same", "notes": "in metres", "frames": {
        "q": {"in": "p", "pose": pose(0.0254, 0, 0), "number": 1},
        "p": {"in": "world", "pose": pose(0.4, -0.0, 0)}}}  # fmt: skip
    stored = [(await client.post(CELLS, json=document)).json() for document in (one, two)]
    assert stored[0]["cell_digest"] == stored[1]["cell_digest"]
    assert (await client.put(f"{CELLS}/a", json={**one, "arms": {"x": pose(0, 0, 0)}},
                             headers={"if-match": "*"})).json()["cell_digest"] != stored[0][
        "cell_digest"]  # fmt: skip


# --- arms in the cell ----------------------------------------------------------------------


def matrix(position: list[float], turn: list[float]) -> np.ndarray:
    found = np.eye(4)
    found[:3, :3] = Rotation.from_euler("xyz", turn, degrees=True).as_matrix()
    found[:3, 3] = position
    return found


def tool_in_fixture(number: int, q1: float, q2: float, height: float) -> np.ndarray:
    """Return where the flange of an arm is in the fixture, by products of plain matrices, mm."""
    bases = [(1000, 0), (0, 1000), (-1000, 0), (0, -1000)]
    base = matrix([*bases[number], 500], [0, 0, 90 * number])
    one = matrix([0, 0, 300], [0, 0, q1]) @ matrix([0, 0, 0], [90, 0, 0])
    two = matrix([0, 0, 0], [0, 0, q2]) @ matrix([600, 0, 0], [0, 0, 0])
    fixture = matrix([100, 200, height], TURN) @ matrix([30, 40, 50], [0, 0, 0])
    return np.linalg.inv(fixture) @ base @ one @ two


@pytest.mark.parametrize("frame", ["fixture", "9"])
async def test_one_fixture_is_edited_in_one_place_for_four_arms(
    stocked: httpx.AsyncClient, frame: str
) -> None:
    for height in (900, 860.5):
        if height != 900:
            answer = await stocked.put(CELL, json=cell(height), headers={"if-match": "*"})
            assert answer.status_code == 200
        for number, name in enumerate(FOUR):
            query = {"q": "25,-40", "frame": frame, "form": "matrix"}
            told = (await stocked.get(f"/v1/arms/{name}/pose", params=query)).json()
            expected = tool_in_fixture(number, 25, -40, height)
            (item,) = told["poses"]
            np.testing.assert_allclose(item["position"], expected[:3, 3], atol=CLOSE)
            np.testing.assert_allclose(item["orientation"]["values"], expected[:3, :3], atol=1e-12)
            assert told["frame"] == "fixture"
            # POST knows frames by name.
            body = {"arm": name, "joints": [[25, -40]], "frame": "fixture"}
            posted = (await stocked.post("/v1/poses", json=body)).json()
            np.testing.assert_allclose(posted["poses"][0]["position"], expected[:3, 3], atol=CLOSE)
            assert posted["arm"] == told["arm"]


async def test_jacobians_in_axes_of_a_frame_of_the_cell(stocked: httpx.AsyncClient) -> None:
    asked = {"arm": "two-arm", "joints": [[25, -40]]}
    in_base = (await stocked.post("/v1/jacobians", json=asked)).json()
    in_frame = (await stocked.post("/v1/jacobians", json={**asked, "frame": "fixture"})).json()
    turned = Rotation.from_euler("xyz", TURN, degrees=True).inv() * Rotation.from_euler(
        "z", 90, degrees=True
    )
    blocks = np.kron(np.eye(2), turned.as_matrix())
    expected = blocks @ np.array(in_base["jacobians"][0]["matrix"])
    np.testing.assert_allclose(in_frame["jacobians"][0]["matrix"], expected, atol=1e-9)
    got = await stocked.get("/v1/arms/two-arm/jacobian", params={"q": "25,-40", "frame": "9"})
    assert got.json()["jacobians"] == in_frame["jacobians"]


async def test_a_flat_answer_shows_the_frames_number_and_the_digest_that_follows(
    stocked: httpx.AsyncClient,
) -> None:
    query = {"q": "25,-40", "frame": "9", "format": "flat"}
    before = (await stocked.get("/v1/arms/one-arm/pose", params=query)).json()
    assert (before["frame_no"], before["revision"]) == (9, 1)
    await stocked.put(CELL, json=cell(901), headers={"if-match": "*"})
    kept = {**query, "expect": before["digest"]}
    refused = await stocked.get("/v1/arms/one-arm/pose", params=kept)
    assert (refused.status_code, refused.json()["code"]) == (409, 107)
    after = (await stocked.get("/v1/arms/one-arm/pose", params=query)).json()
    assert (after["frame_no"], after["revision"]) == (9, 2)
    assert after["digest"] != before["digest"]
    # A logged pose leads back to its numbers: its revision of the arm is in its own cell.
    logged = {**kept, "revision": 1}
    again = (await stocked.get("/v1/arms/one-arm/pose", params=logged)).json()
    moment = ("seq", "t_ms")
    assert {k: v for k, v in again.items() if k not in moment} == {
        k: v for k, v in before.items() if k not in moment
    }


async def test_etag_and_digests_of_an_arm_follow_its_cell(stocked: httpx.AsyncClient) -> None:
    path = "/v1/arms/three-arm"
    first = await stocked.get(path)
    assert first.json()["cell_revision"] == 1
    await stocked.put(
        CELL, json=cell(870), headers={"if-match": "*"}, params={"author": "Ada", "reason": "lift"}
    )
    second = await stocked.get(path, headers={"if-none-match": first.headers["etag"]})
    assert second.status_code == 200
    told, before = second.json(), first.json()
    assert told["table_digest"] == before["table_digest"]
    assert told["setup_digest"] != before["setup_digest"]
    assert told["digest"] != before["digest"]
    assert second.headers["etag"] == f'"{told["revision"]}-{told["digest"]}"'
    assert (told["author"], told["reason"], told["cell_revision"]) == (
        "Ada",
        "cell press-cell revision 2: lift",
        2,
    )
    stale = await stocked.put(
        path, json=arm("three-arm"), headers={"if-match": first.headers["etag"]}
    )
    assert only_entry(stale, "revision-differs")
    answer = await stocked.put(
        path, json=arm("three-arm", cell=None), headers={"if-match": second.headers["etag"]}
    )
    assert answer.status_code == 200
    assert "cell_revision" not in answer.json()


@pytest.mark.parametrize("frame", ["eye", "10"])
async def test_what_moves_on_a_flange_is_refused_and_the_way_out_told(
    stocked: httpx.AsyncClient, frame: str
) -> None:
    for name in ("one-arm", "two-arm"):
        for what in ("pose", "jacobian"):
            answer = await stocked.get(
                f"/v1/arms/{name}/{what}", params={"q": "0,0", "frame": frame}
            )
            entry = only_entry(answer, "unknown-frame")
            assert entry["say"] == "frame eye of cell press-cell moves with one-arm.flange"
            assert "POST /v1/frames" in entry["way_out"]
            assert f"GET /v1/arms/{name}/relation" in entry["way_out"]


async def test_a_two_axis_positioner_that_is_an_arm_itself(client: httpx.AsyncClient) -> None:
    """The fixture moves with it; the positioner's own base and what stands still are seen."""
    document = cell(
        arms={"tilter": pose(0, 0, 700), "one-arm": pose(1000, 0, 500)},
        frames={
            "fixture": {"in": "tilter.flange", **pose(0, 0, 60)},
            "clamp": {"in": "fixture", **pose(0, 10, 0)},
            "post": {"in": "tilter.base", **pose(0, 0, 100)},
        },
    )
    assert (await client.post(CELLS, json=document)).status_code == 201
    for name in ("tilter", "one-arm"):
        assert (await client.post("/v1/arms", json=arm(name))).status_code == 201
        path = f"/v1/arms/{name}/pose"
        for frame in ("fixture", "clamp"):
            answer = await client.get(path, params={"q": "0,0", "frame": frame})
            assert "moves with tilter.flange" in only_entry(answer, "unknown-frame")["say"]
        answer = await client.get(path, params={"q": "0,0", "frame": "post"})
        x, y, z = answer.json()["poses"][0]["position"]
        assert (x, y, z) == pytest.approx({"tilter": (600, 0, 200), "one-arm": (1600, 0, 0)}[name])


async def test_an_arm_given_whole_names_a_cell_too(stocked: httpx.AsyncClient) -> None:
    asked = {"joints": [[25, -40]], "frame": "fixture"}
    whole = (await stocked.post("/v1/poses", json={**asked, "arm": arm("two-arm")})).json()
    named = (await stocked.post("/v1/poses", json={**asked, "arm": "two-arm"})).json()
    assert whole["poses"] == named["poses"]
    assert whole["arm"] == {**named["arm"], "revision": None}
    unknown = {**asked, "arm": arm("two-arm", cell="pres-cell")}
    entry = only_entry(await stocked.post("/v1/poses", json=unknown), "unknown-arm", 422)
    assert (entry["pointer"], entry["value"]) == ("/arm/cell", "pres-cell")
    assert entry["way_out"] == 'did you mean "press-cell"?'


async def test_a_body_large_enough_for_the_worker_is_answered_in_the_cell(
    stocked: httpx.AsyncClient,
) -> None:
    joints = [[number % 90, -(number % 45)] for number in range(1000)]
    asked = {"frame": "fixture", "joints": joints, "singularity": False}
    header = {"content-type": "application/json"}
    for given in ("two-arm", arm("two-arm"), arm("two-arm", cell="none")):
        body = {**asked, "arm": given}
        # Blanks make it as long as a body that the worker is given.
        content = json.dumps(body) + " " * 2_000_001
        large = await stocked.post("/v1/poses", content=content, headers=header)
        small = await stocked.post("/v1/poses", json=body)
        assert large.status_code == small.status_code
        if large.status_code == 200:
            assert large.json() == small.json()
        else:
            assert only_entry(large, "unknown-arm", 422) == only_entry(small, "unknown-arm", 422)


async def test_a_table_of_joint_vectors_in_a_frame_of_the_cell(stocked: httpx.AsyncClient) -> None:
    answer = await stocked.post(
        "/v1/poses?arm=two-arm&frame=9&form=xyz-fixed",
        content=b"q1,q2\r\n25,-40\r\n",
        headers={"content-type": "text/csv"},
    )
    assert answer.status_code == 200, answer.text
    names, values = (line.split(",") for line in answer.text.splitlines())
    told = dict(zip(names, values, strict=True))
    expected = tool_in_fixture(1, 25, -40, 900)
    assert [float(told[axis]) for axis in "xyz"] == pytest.approx(expected[:3, 3].tolist())


async def test_the_other_convention_leaves_the_cell_where_the_base_moves(
    client: httpx.AsyncClient,
) -> None:
    """A modified table whose first row has a length: in the standard one the base takes it in."""
    await client.post(CELLS, json=cell())
    row = {"joint": "revolute", "a": 120, "alpha": 0, "d": 0, "theta": 0}
    rows = [row, {**row, "a": 300}]
    moved = arm("one-arm", convention="modified", rows=rows)
    assert (await client.post("/v1/arms", json=moved)).status_code == 201
    told = (
        await client.post("/v1/tables/conversions", json={"arm": "one-arm", "to": "standard"})
    ).json()
    assert [finding["name"] for finding in told["findings"]] == ["base-moved", "cell-left"]
    assert "cell" not in told["arm"]
    asked = {"joints": [[20, -30]], "tool": "flange", "frame": "fixture"}
    poses = [
        (await client.post("/v1/poses", json={**asked, "arm": given})).json()["poses"][0]
        for given in ("one-arm", told["arm"])
    ]
    np.testing.assert_allclose(poses[0]["position"], poses[1]["position"], atol=CLOSE)
    # Where nothing moves the arm stays in its cell, and keeps its digest.
    stays = arm("two-arm", convention="modified", rows=[{**row, "a": 0}, row])
    created = (await client.post("/v1/arms", json=stays)).json()
    told = (
        await client.post("/v1/tables/conversions", json={"arm": "two-arm", "to": "modified"})
    ).json()
    assert told["findings"] == []
    assert (told["arm"]["cell"], "base" in told["arm"], "frames" in told["arm"]) == (
        "press-cell",
        False,
        False,
    )
    answer = await client.put("/v1/arms/two-arm", json=told["arm"], headers={"if-match": "*"})
    assert answer.json()["digest"] == created["digest"]


# --- two servers ---------------------------------------------------------------------------


@pytest.mark.skipif(not URL, reason=f"{POSTGRES} names no PostgreSQL database to test on")
async def test_a_change_of_the_cell_is_seen_by_the_next_question_to_the_other_server(
    launch: Callable[..., ServerProcess],
) -> None:
    """One server is a process of its own, the other is this one."""
    engine = sa.create_engine(sa.make_url(URL).set(drivername="postgresql+psycopg"))
    with engine.begin() as connection:
        wipe(connection)
    engine.dispose()
    pose_of = "/v1/arms/two-arm/pose?q=25,-40&frame=9&format=flat"
    server, app = launch(database=URL), create_app(Settings(database=URL))
    async with (
        app.router.lifespan_context(app),
        httpx.AsyncClient(transport=httpx.ASGITransport(app), base_url="http://here") as here,
        httpx.AsyncClient(base_url=server.url, timeout=60) as there,
    ):
        assert (await here.post(CELLS, json=cell())).status_code == 201
        assert (await there.post("/v1/arms", json=arm("two-arm"))).status_code == 201
        for step in range(10):
            height = 900 + 7 * step
            writer, reader = (here, there) if step % 2 else (there, here)
            answer = await writer.put(CELL, json=cell(height), headers={"if-match": "*"})
            assert answer.status_code == 200
            told = (await reader.get(pose_of)).json()
            expected = tool_in_fixture(1, 25, -40, height)[:3, 3]
            assert [told[axis] for axis in "xyz"] == pytest.approx(expected.tolist())
            assert told["revision"] == step + 2
    server.terminate()


# --- what is refused because of others -----------------------------------------------------


async def test_a_cell_in_use_is_not_removed(stocked: httpx.AsyncClient) -> None:
    entry = only_entry(await stocked.delete(CELL), "in-use", 409)
    assert entry["say"] == f"arms stand in cell 'press-cell': {', '.join(sorted(FOUR))}"
    assert (await stocked.get(CELL)).status_code == 200


async def test_a_cell_that_an_arm_could_not_follow_is_refused(stocked: httpx.AsyncClient) -> None:
    hook = arm("five-arm", frames={"hook": {"in": "table", **pose(0, 0, 5)}})
    assert (await stocked.post("/v1/arms", json=hook)).status_code == 201
    without = cell(frames={})
    answer = await stocked.put(CELL, json=without, headers={"if-match": "*"})
    entry = only_entry(answer, "unusable-value")
    assert entry["pointer"] == "/frames"
    assert "arm five-arm stands in this cell" in entry["say"]
    assert "'table'" in entry["say"]
    assert (await stocked.get(CELL)).json()["revision"] == 1
    assert (await stocked.get("/v1/arms/one-arm")).json()["revision"] == 1


async def test_of_two_editors_of_the_cell_one_wins_and_all_four_arms_follow_it(
    stocked: httpx.AsyncClient,
) -> None:
    for step in range(5):
        tag = await tag_of(stocked, CELL)
        answers = await asyncio.gather(
            *(
                stocked.put(CELL, json=cell(1000 + 10 * step + n), headers={"if-match": tag})
                for n in range(3)
            )
        )
        assert sorted(answer.status_code for answer in answers) == [200, 412, 412]
        newest = (await stocked.get(CELL)).json()
        for name in FOUR:
            told = (await stocked.get(f"/v1/arms/{name}")).json()
            assert told["cell_revision"] == newest["revision"] == told["revision"] == step + 2
