"""Every way a question about frames cannot be used: code, place, words said, the way out."""

import math
import random
from typing import Any

import httpx
import pytest

from service.operations import frame_estimates
from tests.contract.refusals import only_entry, refusal, sent
from tests.contract.test_frames import ARM, CELL, TURNTABLE, Body, pair, relation

pytestmark = pytest.mark.anyio

NAN, INFINITY = math.nan, math.inf
RESIDUAL = ("position", "angle", "normalised", "redundancy")
GOOD = {
    "relations": [relation("lamp", "table", 0, 0, 1), relation("sink", "wall", 0, 0, 1)],
    "find": [pair("lamp", "table")],
    "units": "mm-deg",
}
SHEARED = [[1, 0.1, 0, 0], [0, 1, 0, 0], [0, 0, 1, 0], [0, 0, 0, 1]]
MIRRORED = [[-1, 0, 0, 0], [0, 1, 0, 0], [0, 0, 1, 0], [0, 0, 0, 1]]
TRANSPOSED = [[1, 0, 0, 0], [0, 1, 0, 0], [0, 0, 1, 0], [5, 0, 0, 1]]
A_PICKER = [{"arm": "picker", "joints": [0, 0]}]


def given(**pose: Any) -> Body:
    return {"relations": [relation("lamp", "table", 0, 0, 1), {**pair("a", "b"), "pose": pose}]}


def oriented(form: str, values: Any) -> Body:
    return given(position=[0, 0, 0], orientation={"form": form, "values": values})


def stated(**sd: Any) -> Body:
    return {"relations": [relation("lamp", "table", 0, 0, 1, **sd)]}


# name: (fields in place of the good ones, code, pointer, words said, words of the way out)
# fmt: off
BODIES: dict[str, tuple[Body, str, str, str, str]] = {
    "no path": ({"find": [pair("lamp", "sink")]}, "not-connected", "/find/0",
        "no relations lead from sink to lamp: lamp is connected with table; sink is connected with "
        "wall", "give a relation between"),
    "the second without a path": ({"find": [pair("lamp", "table"), pair("wall", "table")]},
        "not-connected", "/find/1", "wall is connected with sink", "give a relation"),
    "an unknown frame": ({"find": [pair("lmap", "table")]}, "unknown-frame", "/find/0/of",
        "'lmap'", 'did you mean "lamp"?'),
    "an unknown frame to be in": ({"find": [pair("lamp", "Table")]}, "unknown-frame",
        "/find/0/in", "'Table'", 'did you mean "table"?'),
    "the world, of which nothing is known": ({"find": [pair("lamp", "world")]}, "unknown-frame",
        "/find/0/in", "'world'", "known here: lamp, sink, table, wall"),
    "of an arm that is not here": ({"find": [pair("picker.claw", "lamp")]}, "unknown-frame",
        "/find/0/of", "'picker.claw'", 'is "picker" missing in "arms"?'),
    "a frame in itself": ({"relations": [relation("lamp", "lamp", 0, 0, 0)]}, "unusable-value",
        "/relations/0", "lamp is given in itself", "name the other frame"),
    "nothing to go by": ({"relations": [], "find": []}, "unusable-value", "/relations",
        "nothing that frames could be known from", "relations, arms and cell"),
    "nothing at all": ({"relations": [], "find": [], "arms": []}, "unusable-value", "/relations",
        "nothing", "at least one"),
    "no list of relations": ({"relations": {}}, "unusable-value", "/relations", "list", "a list"),
    "no list to find": ({"find": "lamp"}, "unusable-value", "/find", "list", "a list"),
    "unknown units": ({"units": "cm"}, "unusable-value", "/units", "mm-deg", "'m-rad'"),
    "an unknown form": ({"form": "xzy-fix"}, "unusable-value", "/form", "'xzy-fix'",
        'did you mean "xzy-fixed"?'),
    "an unknown field": ({"relation": []}, "unknown-field", "/relation", "relation", "relations"),
    "an unknown field of a relation": (stated(sd=1), "unknown-field", "/relations/0/sd", "sd",
        "known here: angle_sd"),
    "an unknown field of a pair": ({"find": [{**pair("lamp", "table"), "at": 1}]},
        "unknown-field", "/find/0/at", "at", "known here: in, of"),
    "a pair without in": ({"find": [{"of": "lamp"}]}, "missing-field", "/find/0/in", "in", "add"),
    "a relation without of": ({"relations": [{"in": "a", "pose": {}}]}, "missing-field",
        "/relations/0/of", "of", "add"),
    "a relation without a pose": ({"relations": [pair("a", "b")]}, "missing-field",
        "/relations/0/pose", "pose", "add"),
    "an empty pose": (given(), "missing-field", "/relations/1/pose/position", "position", "matrix"),
    "a name that is none": ({"relations": [relation("Lamp!", "table", 0, 0, 0)]},
        "unusable-value", "/relations/0/of", "'Lamp!' is no name", "a-z"),
    "a number for a name": ({"relations": [relation("a", "b", 0, 0, 0) | {"of": 5}]},
        "unusable-value", "/relations/0/of", "string", "a text"),
    "a sheared matrix": (given(matrix=SHEARED), "not-rigid", "/relations/1/pose/matrix",
        "no rotation", "another form"),
    "a mirrored matrix": (given(matrix=MIRRORED), "not-rigid", "/relations/1/pose/matrix",
        "mirrored", "right-handed"),
    "a transposed matrix": (given(matrix=TRANSPOSED), "not-rigid", "/relations/1/pose/matrix/3",
        "last row", "transposed"),
    "a matrix of three rows": (given(matrix=SHEARED[:3]), "unusable-value",
        "/relations/1/pose/matrix", "4", "at least 4"),
    "a matrix and a position": (given(matrix=TRANSPOSED, position=[0, 0, 0]), "unusable-value",
        "/relations/1/pose/matrix", "either", "leave one"),
    "two coordinates": (given(position=[0, 0], orientation={"form": "matrix", "values": []}),
        "unusable-value", "/relations/1/pose/position", "3", "at least 3"),
    "text for a coordinate": (given(position=[0, 0, "1"], orientation={"form": "matrix",
        "values": []}), "unusable-value", "/relations/1/pose/position/2", "number", "quotes"),
    "a truth for an angle": (oriented("xyz-fixed", [0, True, 0]), "unusable-value",
        "/relations/1/pose/orientation/values/1", "no number", "plain numbers"),
    "too few angles": (oriented("xyz-fixed", [0, 0]), "unusable-value",
        "/relations/1/pose/orientation/values", "3 numbers", "give 3"),
    "no quaternion": (oriented("quaternion-wxyz", [0, 0, 0, 0]), "unusable-value",
        "/relations/1/pose/orientation/values", "norm 0", "norm 1"),
    "an unknown orientation": (oriented("euler", [0, 0, 0]), "unusable-value",
        "/relations/1/pose/orientation/form", "'euler'", "xyz-fixed"),
    "nan": (given(position=[0, NAN, 0], orientation={"form": "xyz-fixed", "values": [0, 0, 0]}),
        "not-finite", "/relations/1/pose/position/1", "finite", "finite"),
    "infinity": (oriented("xyz-fixed", [0, 0, INFINITY]), "not-finite",
        "/relations/1/pose/orientation/values/2", "inf", "finite"),
    "beyond a million kilometres": (given(position=[0, 0, 1e13], orientation={"form": "xyz-fixed",
        "values": [0, 0, 0]}), "out-of-range", "/relations/1/pose/position/2", "beyond", "units"),
    "a turn beyond 1e9": (oriented("zyx-current", [0, 1e12, 0]), "out-of-range",
        "/relations/1/pose/orientation/values/1", "beyond", "units"),
    "a deviation of 0": (stated(position_sd=0), "unusable-value", "/relations/0/position_sd",
        "0 mm", "1e-06 to 1e+06 mm"),
    "a negative deviation": (stated(angle_sd=-1), "unusable-value", "/relations/0/angle_sd",
        "-1 deg", "leave it out"),
    "a deviation without end": (stated(angle_sd=INFINITY), "not-finite", "/relations/0/angle_sd",
        "finite", "finite"),
    "a deviation in text": (stated(position_sd="1"), "unusable-value",
        "/relations/0/position_sd", "number", "quotes"),
    "deviations of positions too far apart": (
        {"relations": [relation("a", "b", 0, 0, 0), *stated(position_sd=1e-6)["relations"]],
         "estimate": True}, "out-of-range", "/relations/1/position_sd",
        "differ by a factor of 1e+06", "within a factor of 100000"),
    "deviations of angles too far apart": (
        {"relations": [relation("lamp", "table", 0, 0, 0, angle_sd=180),
         relation("lamp", "table", 0, 0, 0, angle_sd=1e-4)], "estimate": True}, "out-of-range",
        "/relations/0/angle_sd", "differ by a factor of 1.8e+06", "within a factor of 100000"),
    "estimate in text": ({"estimate": "yes"}, "unusable-value", "/estimate", "bool", "true"),
    "an unknown cell": ({"cell": "hull"}, "unknown-arm", "/cell", "no cell 'hull'", "/v1/cells"),
    "an unknown arm": ({"arms": [{"arm": "pickr", "joints": []}]}, "unknown-arm", "/arms/0/arm",
        "no arm 'pickr'", "/v1/arms"),
    "an unknown revision": ({"arms": [{"arm": {"name": "picker", "revision": 7}}]},
        "unknown-revision", "/arms/0/arm/revision", "no revision 7", "revisions"),
    "an arm given badly": ({"arms": [{"arm": {**ARM, "default_tool": "saw"}}]}, "unknown-tool",
        "/arms/0/arm/default_tool", "saw", "claw"),
    "an arm twice": ({"arms": A_PICKER * 2}, "unusable-value", "/arms/1/arm", "twice", "ask once"),
    "too few joints": ({"arms": [{"arm": "picker", "joints": [1]}]}, "wrong-joint-count",
        "/arms/0/joints", "1 joint values for an arm of 2", "give 2 values"),
    "text for a joint": ({"arms": [{"arm": "picker", "joints": [1, "2"]}]}, "unusable-value",
        "/arms/0/joints/1", "number", "quotes"),
    "nan for a joint": ({"arms": [{"arm": "picker", "joints": [NAN, 0]}]}, "not-finite",
        "/arms/0/joints/0", "finite", "number"),
    "two postures": ({"arms": [{"arm": "picker", "joints": [[0, 0], [1, 1]]}]}, "unusable-value",
        "/arms/0/joints/0", "number", "number"),
    "joint values missing on the way": ({"arms": [{"arm": "picker"}], "find": [pair("picker.claw",
        "world")]}, "missing-field", "/arms/0/joints",
        "joint values of picker are needed on the way from world to picker.claw", '"joints"'),
    "joint values missing of a link": ({"arms": [{"arm": "picker"}], "find": [pair("picker.link-1",
        "world")]}, "missing-field", "/arms/0/joints", "to tell where its link-1 is", "[...]"),
    "joint values of an arm of the cell": ({"cell": "hall", "find": [pair("part", "world")]},
        "missing-field", "/arms", "turntable are needed on the way from world to part",
        '{"arm": "turntable", "joints": [...]}'),
    "what an arm does not have": ({"arms": A_PICKER, "find": [pair("picker.claws", "lamp")]},
        "unknown-frame", "/find/0/of", "picker has no frame 'claws'", 'did you mean "claw"?'),
    "a relation of what it does not have": ({"arms": A_PICKER, "relations": [relation("lamp",
        "picker.try", 0, 0, 0)]}, "unknown-frame", "/relations/0/in", "'try'", '"tray"'),
    "a link too many": ({"arms": A_PICKER, "find": [pair("picker.link-3", "lamp")]},
        "unknown-frame", "/find/0/of", "'link-3'", 'did you mean "link-'),
    "nobody's base": ({"arms": A_PICKER, "find": [pair("base", "lamp")]}, "unknown-frame",
        "/find/0/of", "whose base", "picker.base"),
    "nobody's link": ({"arms": A_PICKER, "relations": [relation("link-1", "lamp", 0, 0, 0)]},
        "unknown-frame", "/relations/0/of", "whose link-1", "picker.link-1"),
}
# fmt: on


@pytest.fixture
async def stocked(client: httpx.AsyncClient) -> httpx.AsyncClient:
    """A client of a service that holds a cell and two arms."""
    assert (await client.post("/v1/cells", json=CELL)).status_code == 201
    for arm in (ARM, TURNTABLE):
        assert (await client.post("/v1/arms", json=arm)).status_code == 201
    return client


@pytest.mark.parametrize("name", BODIES)
async def test_refused(stocked: httpx.AsyncClient, name: str) -> None:
    changed, code, pointer, say, way_out = BODIES[name]
    answer = await sent(stocked, "/v1/frames", {**GOOD, **changed})
    entry = only_entry(answer, code, 422)
    assert (entry["pointer"], entry["in"]) == (pointer, "body")
    assert say in entry["say"], entry
    assert way_out in entry["way_out"], entry
    for _ in range(2):  # from then on its words are known
        again = await sent(stocked, "/v1/frames", {**GOOD, **changed})
        assert only_entry(again, code, 422) == entry


async def test_the_good_one_is_good(stocked: httpx.AsyncClient) -> None:
    assert (await sent(stocked, "/v1/frames", GOOD)).status_code == 200
    assert len(BODIES) >= 55


async def test_units_are_never_guessed(stocked: httpx.AsyncClient) -> None:
    unsaid = {key: part for key, part in GOOD.items() if key != "units"}
    entry = only_entry(await sent(stocked, "/v1/frames", unsaid), "missing-field")
    assert (entry["pointer"], entry["say"]) == ("/units", "units are not said, and are not guessed")
    two = [*A_PICKER, {"arm": "turntable", "joints": [0]}]
    entry = only_entry(await sent(stocked, "/v1/frames", {**unsaid, "arms": two}), "missing-field")
    assert "m-rad, mm-deg" in entry["say"]
    for more in ({"cell": "hall"}, {"arms": A_PICKER}):
        assert (await sent(stocked, "/v1/frames", {**unsaid, **more})).status_code == 200


async def test_arms_of_two_cells(stocked: httpx.AsyncClient) -> None:
    arms = []
    for name in ("east", "west"):
        await stocked.post("/v1/cells", json={**CELL, "name": f"{name}-hall"})
        arms.append({"arm": {**TURNTABLE, "name": f"{name}-table", "cell": f"{name}-hall"}})
    entry = only_entry(await sent(stocked, "/v1/frames", {**GOOD, "arms": arms}), "missing-field")
    assert (entry["pointer"], "east-hall, west-hall" in entry["say"]) == ("/cell", True)
    said = {**GOOD, "arms": arms, "cell": "west-hall"}
    assert (await sent(stocked, "/v1/frames", said)).status_code == 200


async def test_several_complaints_at_once(stocked: httpx.AsyncClient) -> None:
    bad = {**GOOD, "units": "cm", "find": [{"of": "lamp", "inn": "table"}]}
    problem = refusal(await sent(stocked, "/v1/frames", bad), "unknown-field")
    pointers = {entry["pointer"] for entry in problem["errors"]}
    assert pointers == {"/units", "/find/0/in", "/find/0/inn"}


async def test_queries_and_other_bodies(stocked: httpx.AsyncClient) -> None:
    answer = await stocked.post("/v1/frames?units=mm-deg", json=GOOD)
    assert only_entry(answer, "unknown-field")["in"] == "query"
    answer = await stocked.post(
        "/v1/frames", content=b"of,in", headers={"content-type": "text/csv"}
    )
    refusal(answer, "wrong-media-type")
    for body in ([], 5, None, "lamp"):
        refusal(await sent(stocked, "/v1/frames", body), "unusable-value")
    for text, code in [(b"{", "unparseable"), (b'{"find":[],"find":[]}', "duplicate-key")]:
        headers = {"content-type": "application/json"}
        answer = await stocked.post("/v1/frames", content=text, headers=headers)
        assert (answer.status_code, answer.json()["code"]) == (400, code)


async def test_too_many(stocked: httpx.AsyncClient) -> None:
    entry = only_entry(
        await sent(stocked, "/v1/frames", {**GOOD, "find": [0] * 10_001}), "too-large", 422
    )
    assert (entry["pointer"], entry["value"]) == ("/find", 10_001)
    deep: Any = 0
    for _ in range(60):
        deep = [deep]
    assert (await sent(stocked, "/v1/frames", {**GOOD, "relations": deep})).status_code == 422


async def test_contradictions_are_loops_not_refusals(stocked: httpx.AsyncClient) -> None:
    twice = [relation("lamp", "table", 0, 0, 1), relation("lamp", "table", 0, 0, 900, turned=180)]
    for estimate in (False, True):
        answer = await sent(
            stocked, "/v1/frames", {**GOOD, "relations": twice, "estimate": estimate}
        )
        assert answer.status_code == 200
        (loop,) = answer.json()["loops"]
        assert loop["closure"]["position"] == pytest.approx(899)
        assert loop["closure"]["angle"] == pytest.approx(180)


async def test_deviations_too_far_apart_are_told_as_they_were_given(
    stocked: httpx.AsyncClient,
) -> None:
    given = relation("lamp", "table", 0, 0, 1, angle_sd=1e-7)
    body: Body = {**GOOD, "relations": [given], "arms": A_PICKER}
    assert (await sent(stocked, "/v1/frames", body)).status_code == 200  # nothing is weighed
    answer = await sent(stocked, "/v1/frames", {**body, "estimate": True})
    entry = only_entry(answer, "out-of-range", 422)
    assert (entry["pointer"], entry["value"]) == ("/relations/0/angle_sd", 1e-7)


async def test_an_estimate_that_takes_too_long(
    stocked: httpx.AsyncClient, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(frame_estimates, "MOST_SECONDS", -1.0)
    answer = await sent(stocked, "/v1/frames", {**GOOD, "estimate": True})
    entry = only_entry(answer, "too-large", 422)
    assert (entry["pointer"], entry["in"]) == ("/estimate", "body")
    assert "fewer relations" in entry["way_out"]
    assert (await sent(stocked, "/v1/frames", GOOD)).status_code == 200


@pytest.mark.parametrize("sd", [1e-5, 1e5])
async def test_deviations_at_the_edges(stocked: httpx.AsyncClient, sd: float) -> None:
    """What is as good as exact wins, what is as good as unknown loses; nothing breaks."""
    given = [
        relation("lamp", "table", 0, 0, 100, position_sd=sd),
        relation("table", "lamp", 0, 0, -200),
    ]
    body = {**GOOD, "relations": given, "estimate": True}
    estimate = (await sent(stocked, "/v1/frames", body)).json()["estimate"]
    (likely,) = estimate["answers"]
    assert likely["pose"]["position"][2] == pytest.approx(100 if sd < 1 else 200, abs=1e-3)


def drawn(draw: random.Random) -> Body:
    """Return relations of any size and certainty between few frames."""
    names = [f"f{number}" for number in range(draw.randint(2, 5))]
    angles = [0, 1e-12, math.pi, 1e9 / 2]
    least = draw.uniform(-8, -3)  # with the usual 1e-3, all within what can be weighed
    relations = []
    for _ in range(draw.randint(1, 9)):
        of, within = draw.sample(names, 2)
        size = 10 ** draw.uniform(-9, 9)
        values = [draw.choice([*angles, draw.uniform(-4, 4)]) for _ in range(3)]
        pose = {
            "position": [draw.uniform(-size, size) for _ in range(3)],
            "orientation": {"form": "rotation-vector", "values": values},
        }
        sds = {name: 10 ** draw.uniform(least, least + 5) for name in ("position_sd", "angle_sd")}
        relations.append({**pair(of, within), "pose": pose, **(sds if draw.random() < 0.7 else {})})
    first = relations[0]
    find = [pair(first["of"], first["in"])]
    return {"relations": relations, "find": find, "units": "m-rad", "estimate": True}


async def test_any_size_and_certainty_is_answered_in_numbers(client: httpx.AsyncClient) -> None:
    draw = random.Random(20_261_204)
    settled = 0
    for _ in range(80):
        body = drawn(draw)
        answer = await client.post("/v1/frames", json=body)
        assert answer.status_code == 200, (body, answer.text)
        estimate = answer.json()["estimate"]
        settled += estimate["converged"]
        told = [*estimate["answers"][0]["pose"]["position"], estimate["suspect"]]
        told += [residual[name] for residual in estimate["residuals"] for name in RESIDUAL]
        assert None not in told[:3] + told[4:]  # what is no number is printed as null
    assert settled > 40
