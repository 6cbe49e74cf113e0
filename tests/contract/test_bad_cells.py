"""Every way a cell cannot be used: code, place, value as given and way out, created or replaced.

Left out: what depends on the arms in it (test_stored_cells).
"""

import copy
import math
from typing import Any

import httpx
import pytest

from tests.contract.refusals import AT_ORIGIN, STRAIGHT, Body, matrix, only_entry, refusal, sent

pytestmark = pytest.mark.anyio

CELL: Body = {
    "name": "press-cell",
    "units": "mm-deg",
    "arms": {"loader": {"in": "world", "pose": AT_ORIGIN}, "tilter": {"pose": AT_ORIGIN}},
    "frames": {
        "plate": {**AT_ORIGIN, "in": "world", "number": 1},
        "fixture": {**AT_ORIGIN, "in": "tilter.flange", "number": 2},
    },
}
LONG = {f"f{number}": {**AT_ORIGIN, "in": f"f{number + 1}"} for number in range(40)}


def cell(**changes: Any) -> Body:
    changed = {**copy.deepcopy(CELL), **changes}
    return {key: value for key, value in changed.items() if value is not None}


def frame(**changes: Any) -> Body:
    """Return the cell with a frame ``pin`` more; None takes a field out."""
    pin = {"in": "plate", **AT_ORIGIN, **changes}
    pin = {key: value for key, value in pin.items() if value is not None}
    return cell(frames={**CELL["frames"], "pin": pin})


def placement(**changes: Any) -> Body:
    press = {"in": "plate", "pose": AT_ORIGIN, **changes}
    press = {key: value for key, value in press.items() if value is not None}
    return cell(arms={**CELL["arms"], "press": press})


def standing(**parents: str) -> Body:
    """Return a cell with these frames alone; a name with _ stands for an arm, as in a_base."""
    arms, frames = {}, {}
    for name, parent in parents.items():
        thing = {**AT_ORIGIN, "in": parent}
        (arms if name.endswith("_base") else frames)[name.removesuffix("_base")] = thing
    return cell(arms=arms, frames=frames)


def only_moved(form: str, *values: float) -> Body:
    return {"position": None, "orientation": None, "pose": {
        "position": [0, 0, 0], "orientation": {"form": form, "values": list(values)}}}  # fmt: skip


SHEARED, MIRRORED = matrix((0, 1, 0.02)), matrix((0, 0, -1.0))
# name: (cell, code, pointer, value as given, words of what is said, words of the way out)
# fmt: off
CELLS: dict[str, tuple[Body, str, str, Any, str, str]] = {
    "missing unit": (cell(units=None), "missing-field", "/units", None, "units", 'add "units"'),
    "unknown units": (cell(units="cm"), "unusable-value", "/units", "cm", "mm-deg", "'in-deg'"),
    "missing name": (cell(name=None), "missing-field", "/name", None, "name", 'add "name"'),
    "a name with spaces": (cell(name="my cell"), "unusable-value", "/name", "my cell", "match",
        "a-z"),
    "an unknown field": (cell(robots={}), "unknown-field", "/robots", {}, "robots", "arms"),
    "a misspelt field": (cell(frmaes={}), "unknown-field", "/frmaes", {}, "frmaes",
        'did you mean "frames"?'),
    "an arm's name with capitals": (cell(arms={"Loader": {"pose": AT_ORIGIN}}, frames={}),
        "unusable-value", "/arms/Loader", "Loader", "match", "a-z"),
    "a frame's name of 300": (cell(frames={"a" * 300: AT_ORIGIN}), "unusable-value",
        "/frames/" + "a" * 300, "a" * 197 + "...", "match", "0,47"),
    "a reserved name": (cell(frames={"flange": AT_ORIGIN}), "unusable-value", "/frames/flange",
        "flange", "reserved", "link-0 ... link-32"),
    "frames as a list": (cell(frames=[]), "unusable-value", "/frames", [], "an object", ""),
    "an unknown field of a frame": (frame(parent="world"), "unknown-field", "/frames/pin/parent",
        "world", "parent", "in"),
    "a number below 1": (frame(number=0), "unusable-value", "/frames/pin/number", 0, "greater",
        "1"),
    "a number of four digits": (frame(number=1000), "unusable-value", "/frames/pin/number", 1000,
        "less", "999"),
    "a number twice": (frame(number=1), "unusable-value", "/frames/pin/number", 1,
        "pin and plate have the same number", "its own"),
    "a number of an arm": (placement(number=1), "unknown-field", "/arms/press/number", 1, "number",
        "known here"),
    "no pose": (placement(pose=None), "missing-field", "/arms/press/position", None, "position",
        "orientation, or a matrix"),
    "half a pose": (frame(orientation=None), "missing-field", "/frames/pin/orientation", None,
        "orientation", "matrix"),
    "a pose twice": (frame(pose=AT_ORIGIN), "unusable-value", "/frames/pin/position", [0, 0, 0],
        'either in "pose" or beside', "leave one"),
    "a matrix and a position": (placement(pose={**matrix(), "position": [0, 0, 0]}),
        "unusable-value", "/arms/press/pose/matrix", None, "either", "leave one"),
    "a sheared matrix": (placement(pose=SHEARED), "not-rigid", "/arms/press/pose/matrix", None,
        "no rotation", ""),
    "a mirrored matrix": (frame(**{**dict.fromkeys(AT_ORIGIN), **MIRRORED}), "not-rigid",
        "/frames/pin/matrix", None, "mirror", ""),
    "a matrix with a wrong last row": (placement(pose=matrix((3, 0, 1.0))), "not-rigid",
        "/arms/press/pose/matrix/3", [1, 0, 0, 1], "last row", "last column"),
    "nan": (frame(position=[0, math.nan, 0]), "not-finite", "/frames/pin/position/1", "NaN",
        "finite", "finite"),
    "infinity": (frame(position=[0, 0, math.inf]), "not-finite", "/frames/pin/position/2",
        "Infinity", "finite", "finite"),
    "1e308": (frame(position=[1e308, 0, 0]), "out-of-range", "/frames/pin/position/0", 1e308,
        "beyond 1e9", ""),
    "text for a number": (frame(position=["0", 0, 0]), "unusable-value", "/frames/pin/position/0",
        "0", "number", "without quotes"),
    "an unknown form": (placement(pose={"position": [0, 0, 0], "orientation": {"form": "rpy",
        "values": [0, 0, 0]}}), "unusable-value", "/arms/press/pose/orientation/form", "rpy",
        "no orientation form", "xyz-fixed"),
    "a quaternion of nothing": (frame(**only_moved("quaternion-wxyz", 0, 0, 0, 0)),
        "unusable-value", "/frames/pin/pose/orientation/values", [0, 0, 0, 0], "", ""),
    "in nothing": (frame(**{"in": ""}), "unknown-frame", "/frames/pin/in", "", "no ''", "world"),
    "in a number": (frame(**{"in": 5}), "unusable-value", "/frames/pin/in", 5, "string", "quotes"),
    "in a missing frame": (frame(**{"in": "plaet"}), "unknown-frame", "/frames/pin/in", "plaet",
        "no 'plaet' for pin", 'did you mean "plate"?'),
    "in a missing arm": (frame(**{"in": "loadr.base"}), "unknown-frame", "/frames/pin/in",
        "loadr.base", "no 'loadr.base'", 'did you mean "loader.base"?'),
    "on a tool of an arm": (frame(**{"in": "loader.gripper"}), "unknown-frame", "/frames/pin/in",
        "loader.gripper", "no 'loader.gripper'", "loader."),
    "in nobody's base": (frame(**{"in": "base"}), "unknown-frame", "/frames/pin/in", "base",
        "no 'base'", "say whose base: loader.base, tilter.base"),
    "an arm in a missing frame": (placement(**{"in": "wrold"}), "unknown-frame", "/arms/press/in",
        "wrold", "press.base", 'did you mean "world"?'),
    "a frame in itself": (frame(**{"in": "pin"}), "unusable-value", "/frames/pin/in", "pin",
        "pin stands in itself", "something else"),
    "an arm in itself": (placement(**{"in": "press.base"}), "unusable-value", "/arms/press/in",
        "press.base", "press.base stands in itself", "something else"),
    "a cycle of frames": (standing(a="b", b="c", c="a"), "unusable-value", "/frames/a/in", "b",
        "a in b in c in a", "stand in world"),
    "a cycle by way of a flange": (standing(jig="press.flange", press_base="jig"),
        "unusable-value", "/frames/jig/in", "press.flange",
        "jig in press.flange in press.base in jig", "stand in world"),
    "an arm on its own flange": (standing(press_base="press.flange"), "unusable-value",
        "/arms/press/in", "press.flange", "press.base in press.flange in press.base", "world"),
    "a cycle of forty": (cell(frames={**LONG, "f40": {**AT_ORIGIN, "in": "f0"}}),
        "unusable-value", "/frames/f0/in", "f1", "f0 in f1 in f2", "world"),
    "2001 frames": (cell(frames={f"f{n}": AT_ORIGIN for n in range(2001)}), "too-large", "/frames",
        2001, "2001 frames", "at most 2000"),
    "many more, none of them a frame": (cell(frames={f"f{n}": 0 for n in range(50_000)}),
        "too-large", "/frames", 50_000, "50000 frames", "divide the cell"),
    "2001 arms": (cell(arms={f"a{n}": AT_ORIGIN for n in range(2001)}, frames={}), "too-large",
        "/arms", 2001, "2001 arms", "at most 2000"),
}
# fmt: on


@pytest.mark.parametrize("case", CELLS)
async def test_a_cell_that_cannot_be_used(client: httpx.AsyncClient, case: str) -> None:
    body, code, where, value, words, way_out = CELLS[case]
    entry = only_entry(await sent(client, "/v1/cells", body), code, 422)
    assert (entry["pointer"], entry["in"]) == (where, "body")
    if value is not None:
        assert entry["value"] == value
    assert words in entry["say"]
    assert way_out in entry["way_out"]
    assert (await client.get("/v1/cells")).json()["cells"] == []


@pytest.mark.parametrize("case", ["a cycle of frames", "a sheared matrix", "in a missing frame"])
async def test_a_cell_is_not_replaced_by_one_that_cannot_be_used(
    client: httpx.AsyncClient, case: str
) -> None:
    body, code, where, *_ = CELLS[case]
    assert (await client.post("/v1/cells", json=CELL)).status_code == 201
    answer = await client.put("/v1/cells/press-cell", json=body, headers={"if-match": "*"})
    assert only_entry(answer, code, 422)["pointer"] == where
    assert (await client.get("/v1/cells/press-cell")).json()["revision"] == 1


async def test_the_cell_that_is_spoilt_here_can_be_used(client: httpx.AsyncClient) -> None:
    for document in (CELL, frame(), placement(), standing(a="world", press_base="a")):
        name = f"cell-{len(str(document))}"
        answer = await client.post("/v1/cells", json={**document, "name": name})
        assert answer.status_code == 201, answer.text


async def test_a_chain_as_long_as_may_be_is_answered_in_no_time(client: httpx.AsyncClient) -> None:
    """Two thousand frames, each in the next: no walk of it is made twice."""
    chain = {
        f"f{n}": {**AT_ORIGIN, "in": f"f{n + 1}" if n < 1999 else "world"} for n in range(2000)
    }
    answer = await client.post("/v1/cells", json=cell(frames=chain))
    assert answer.status_code == 201
    chain["f1999"]["in"] = "f0"
    answer = await client.post("/v1/cells", json=cell(name="other", frames=chain))
    say = only_entry(answer, "unusable-value")["say"]
    assert say.endswith("in ... in f0")


async def test_several_faults_are_told_at_once(client: httpx.AsyncClient) -> None:
    bad = cell(units="cm", frames={"a": {"position": [0, 0], "orientation": STRAIGHT}})
    problem = refusal(await sent(client, "/v1/cells", bad), "unusable-value")
    assert {entry["pointer"] for entry in problem["errors"]} == {"/units", "/frames/a/position"}


async def test_a_document_of_another_name_is_refused(client: httpx.AsyncClient) -> None:
    answer = await client.put("/v1/cells/other", json=CELL, headers={"if-none-match": "*"})
    entry = only_entry(answer, "unusable-value")
    assert (entry["pointer"], entry["value"]) == ("/name", "press-cell")
    assert "the cell is called 'press-cell'" in entry["say"]
