"""Every way a question about postures cannot be used: code, place, value as given, way out.

Left out: arms that cannot be used (test_bad_arms) and questions by query (test_bad_queries).
"""

import io
import math
from typing import Any

import httpx
import numpy as np
import pytest

from service.problems import KINDS
from tests.contract.refusals import (
    ARM,
    AT_ORIGIN,
    ROW,
    Body,
    arm,
    matrix,
    only_entry,
    row,
    sent,
    turned,
)

pytestmark = pytest.mark.anyio

NAN, INFINITY = math.nan, math.inf
TWO = "2 values, one for each driven row: row 1 revolute (deg), row 2 revolute (deg)"

# name: (further fields of a question, code, pointer, value, words said, words of the way out)
# fmt: off
QUESTIONS: dict[str, tuple[Body, str, str, Any, str, str]] = {
    "too few joints": ({"joints": [[1]]}, "wrong-joint-count", "/joints/0", 1,
        "1 joint values for an arm of 2 joints", f"give {TWO}"),
    "too many joints": ({"joints": [[1, 2, 3]]}, "wrong-joint-count", "/joints/0", 3,
        "3 joint values for an arm of 2 joints", f"give {TWO}"),
    "no list": ({"joints": [5]}, "unusable-value", "/joints", [5], "list", "[[...]]"),
    "text for a vector": ({"joints": ["a"]}, "unusable-value", "/joints/0", "a", "list", "2 val"),
    "text": ({"joints": [["1", 2]]}, "unusable-value", "/joints/0/0", "1", "number", "quotes"),
    "a truth": ({"joints": [[0, True]]}, "unusable-value", "/joints/0/1", True, "number", "number"),
    "nan": ({"joints": [[0, NAN]]}, "not-finite", "/joints/0/1", "NaN", "finite", "number"),
    "infinity": ({"joints": [[INFINITY, 0]]}, "not-finite", "/joints/0/0", "Infinity", "", "num"),
    "1e308": ({"joints": [[0, 1e308]]}, "out-of-range", "/joints/0/1", 1e308, "beyond", "units"),
    "joints in a text": ({"joints": "0,0"}, "unusable-value", "/joints", "0,0", "list", "a list"),
    "unknown tool": ({"tool": "saw"}, "unknown-tool", "/tool", "saw", "no tool 'saw'",
        "one of: gripper (3), pen, flange"),
    "unknown frame": ({"frame": "table"}, "unknown-frame", "/frame", "table", "no frame 'table'",
        "one of: base, world, tray (5)"),
    "unknown units": ({"units": "cm"}, "unusable-value", "/units", "cm", "mm-deg", "'m-rad'"),
    "unknown form": ({"form": "xyz"}, "unusable-value", "/form", "xyz", "'xyz'", "xyz-fixed"),
    "unknown task": ({"task": "drill"}, "unusable-value", "/task", "drill", "pose", "'position'"),
    "unknown row": ({"task": ["vx", "q"]}, "unusable-value", "/task/1", "q", "vx", "'wz'"),
    "a row twice": ({"task": ["vx", "vx"], "singularity": False}, "unusable-value", "/task",
        ["vx", "vx"], "once", "vx vy"),
    "no rows": ({"task": []}, "unusable-value", "/task", [], "1", "at least 1"),
    "a sheared tool": ({"tool": matrix((0, 1, 0.1))}, "not-rigid", "/tool/matrix",
        [[1, 0.1, 0], [0, 1, 0], [0, 0, 1]], "0.1", "another form"),
    "a mirrored tool": ({"tool": matrix((2, 2, -1.0))}, "not-rigid", "/tool/matrix",
        [[1, 0, 0], [0, 1, 0], [0, 0, -1]], "mirrored", "right-handed"),
    "a tool without direction": ({"tool": turned("quaternion-xyzw", 0, 0, 0, 0)}, "unusable-value",
        "/tool/orientation/values", [0, 0, 0, 0], "norm 0", "norm 1"),
    "a tool at 1e308": ({"tool": {**AT_ORIGIN, "position": [0, 0, 1e308]}}, "out-of-range",
        "/tool/position/2", 1e308, "beyond", "units"),
    "a tool of nan": ({"tool": turned("xyz-fixed", 0, NAN, 0)}, "not-finite",
        "/tool/orientation/values/1", "NaN", "nan", "finite"),
    "an unknown field": ({"jonits": 1}, "unknown-field", "/jonits", 1, "jonits", '"joints"'),
    "an unknown field of the tool": ({"tool": {**AT_ORIGIN, "positon": 1}}, "unknown-field",
        "/tool/positon", 1, "positon", '"position"'),
}
# fmt: on


@pytest.mark.parametrize("path", ["/v1/poses", "/v1/jacobians"])
@pytest.mark.parametrize("case", QUESTIONS)
async def test_a_question_that_cannot_be_used(
    client: httpx.AsyncClient, case: str, path: str
) -> None:
    given, code, pointer, value, say, way_out = QUESTIONS[case]
    body = {"arm": ARM, "joints": [[0, 0]], **given}
    entry = only_entry(await sent(client, path, body), code)
    assert (entry["pointer"], entry["in"]) == (pointer, "body")
    assert entry["value"] == value
    assert say in entry["say"]
    assert way_out in entry["way_out"]


@pytest.mark.parametrize(
    ("units", "lift", "turn"),
    [("mm-deg", "mm", "deg"), ("m-rad", "m", "rad"), ("in-deg", "in", "deg")],
)
async def test_the_way_out_of_a_wrong_count_says_what_the_joints_are(
    client: httpx.AsyncClient, units: str, lift: str, turn: str
) -> None:
    """A passive row takes no value and is passed over; its number is not."""
    slide = {**ROW, "joint": "prismatic", "d": 0, "travel": [0, 100]}
    rows = [ROW, {**ROW, "passive": True, "couplings": [{"axis": 1, "ratio": -1}]}, slide]
    expected = (
        f"2 values, one for each driven row: row 1 revolute ({turn}), row 3 prismatic ({lift})"
    )
    for joints in ([1], [1, 2, 3], []):
        body = {"arm": arm(rows=rows), "joints": [joints], "units": units}
        entry = only_entry(await client.post("/v1/poses", json=body), "wrong-joint-count")
        assert entry["way_out"] == f"give {expected}"


@pytest.mark.parametrize("path", ["/v1/poses", "/v1/jacobians"])
async def test_so_it_does_for_tables_of_joint_vectors(client: httpx.AsyncClient, path: str) -> None:
    assert (await client.post("/v1/arms", json=ARM)).status_code == 201
    numbers = io.BytesIO()
    np.save(numbers, np.zeros((1, 3)))
    for kind, content in (
        ("application/x-npy", numbers.getvalue()),
        ("text/csv", b"q1,q2,q3\r\n0,0,0\r\n"),
        ("text/csv", b"q1,q2\r\n0,0\r\n0\r\n"),
    ):
        answer = await client.post(
            path, params={"arm": ARM["name"]}, content=content, headers={"content-type": kind}
        )
        assert TWO in only_entry(answer, "wrong-joint-count")["way_out"]


@pytest.mark.parametrize(
    ("count", "listed", "end"),
    [
        (0, 0, "for each driven row: there is none"),
        (12, 12, "row 12 revolute (deg)"),
        (13, 12, "row 12 revolute (deg), and 1 more"),
        (32, 12, "row 12 revolute (deg), and 20 more"),
    ],
)
async def test_a_long_list_of_joints_is_cut(
    client: httpx.AsyncClient, count: int, listed: int, end: str
) -> None:
    body = {"arm": arm(rows=[ROW] * count), "joints": [[0] * (count + 1)]}
    entry = only_entry(await client.post("/v1/poses", json=body), "wrong-joint-count")
    assert entry["way_out"].startswith(f"give {count} values, ")
    assert entry["way_out"].endswith(end)
    assert entry["way_out"].count("revolute") == listed


@pytest.mark.parametrize("name", ["speeds", "twists", "loads"])
async def test_what_is_carried_through_a_jacobian(client: httpx.AsyncClient, name: str) -> None:
    width = 2 if name == "speeds" else 6
    zeros: list[Any] = [0] * width
    for given, code, pointer, value in [
        ([zeros, zeros], "unusable-value", "", 2),
        ([zeros[1:]], "unusable-value", "/0", zeros[1:]),
        ([5], "unusable-value", "/0", 5),
        ([[*zeros[1:], "1"]], "unusable-value", f"/0/{width - 1}", "1"),
        ([[NAN, *zeros[1:]]], "not-finite", "/0/0", "NaN"),
        ([[1e308, *zeros[1:]]], "out-of-range", "/0/0", 1e308),
        ([[*zeros[1:], -1e15]], "out-of-range", f"/0/{width - 1}", -1e15),
    ]:
        body = {"arm": ARM, "joints": [[0, 90]], name: given}
        entry = only_entry(await sent(client, "/v1/jacobians", body), code)
        assert entry["pointer"] == f"/{name}{pointer}"
        assert entry["value"] == value


@pytest.mark.parametrize("frame", ["flange", "tool"])
async def test_a_pose_in_a_frame_that_moves_with_it(client: httpx.AsyncClient, frame: str) -> None:
    body = {"arm": ARM, "joints": [[0, 0]], "frame": frame}
    entry = only_entry(await client.post("/v1/poses", json=body), "unknown-frame")
    assert entry["way_out"] == "one of: base, world, tray"
    assert (await client.post("/v1/jacobians", json=body)).status_code == 200


async def test_an_arm_that_is_not_stored(client: httpx.AsyncClient) -> None:
    await client.post("/v1/arms", json=ARM)
    for named, code, pointer, value in [
        ("three-turns", "unknown-arm", "/arm", "three-turns"),
        ({"name": "three-turns", "revision": 1}, "unknown-arm", "/arm/name", "three-turns"),
        ({"name": "two-turns", "revision": 2}, "unknown-revision", "/arm/revision", 2),
        ({"name": "two-turns", "revision": 0}, "unusable-value", "/arm/revision", 0),
        ({"name": "two-turns", "revision": 1, "revison": 1}, "unknown-field", "/arm/revison", 1),
        (5, "unusable-value", "/arm", 5),
        (None, "unusable-value", "/arm", None),
    ]:
        for path in ("/v1/poses", "/v1/jacobians"):
            answer = await client.post(path, json={"arm": named, "joints": [[0, 0]]})
            entry = only_entry(answer, code, 422)
            assert (entry["pointer"], entry["in"], entry["value"]) == (pointer, "body", value)
        answer = await client.post("/v1/tables/conversions", json={"arm": named, "to": "modified"})
        assert only_entry(answer, code, 422)["pointer"] == pointer


async def test_one_bad_vector_does_not_fail_the_others(client: httpx.AsyncClient) -> None:
    joints = [[0, 90], [1], [0, NAN], [0, 1e12], ["a", 1], None, [10, 80]]
    for path, key, empty in [
        ("/v1/poses", "poses", ("position", "orientation")),
        ("/v1/jacobians", "jacobians", ("matrix", "singular_values")),
    ]:
        answer = await sent(client, path, {"arm": ARM, "joints": joints})
        assert answer.status_code == 200
        items = answer.json()[key]
        told = [
            (item["code"], item["problem"]["pointer"], item["problem"]["value"])
            for item in items[1:6]
        ]
        assert told == [
            (101, "/joints/1", 1),
            (102, "/joints/2/1", "NaN"),
            (105, "/joints/3/1", 1e12),
            (105, "/joints/4/0", "a"),
            (105, "/joints/5", None),
        ]
        assert [item["ok"] for item in items] == [True, *[False] * 5, True]
        for item in items[1:6]:
            assert all(item[name] is None for name in empty)
            assert item["problem"]["say"]
            assert item["problem"]["way_out"]
            assert KINDS[item["problem"]["code"]].number == item["code"]
        good = await client.post(path, json={"arm": ARM, "joints": [joints[0], joints[6]]})
        assert [items[0], items[6]] == good.json()[key]


async def test_joint_values_beyond_travel_are_answered(client: httpx.AsyncClient) -> None:
    given = row(working_travel=[-90, 90], working_reason="dress pack")
    for units, q, measure, threshold in [
        ("mm-deg", [0, 171.5], 171.5, 170),
        ("m-rad", [0, -3], -3, math.radians(-170)),
    ]:
        body = {"arm": given, "joints": [q], "units": units}
        (item,) = (await client.post("/v1/poses", json=body)).json()["poses"]
        (finding,) = [each for each in item["findings"] if each["code"] == 4]
        assert (item["ok"], item["code"]) == (True, 4)
        assert finding["joint"] == 2
        assert finding["measure"] == pytest.approx(measure)
        assert finding["threshold"] == pytest.approx(threshold)
        assert finding["unit"] == units.split("-")[1]
        shown = f"{threshold:.6g} {finding['unit']}"
        assert finding["say"] == f"joint 2 is at {measure:g} {finding['unit']}, beyond its " + (
            f"travel limit {shown}"
        )
    (item,) = (await client.post("/v1/poses", json={"arm": given, "joints": [[0, 100]]})).json()[
        "poses"
    ]
    assert item["code"] == 3
    assert any("dress pack" in each["say"] for each in item["findings"])


async def test_more_vectors_than_one_answer_holds(client: httpx.AsyncClient) -> None:
    body = {"arm": ARM, "joints": [[0, 0]] * 20_001}
    entry = only_entry(await client.post("/v1/poses", json=body), "too-large", 422)
    assert (entry["pointer"], entry["value"]) == ("/joints", 20_001)
    assert '"singularity": false' in entry["way_out"]
    assert (await client.post("/v1/poses", json={**body, "singularity": False})).is_success


async def test_conversion_to_what_is_not_there(client: httpx.AsyncClient) -> None:
    answer = await client.post("/v1/tables/conversions", json={"arm": ARM, "to": "classic"})
    entry = only_entry(answer, "unusable-value")
    assert (entry["pointer"], entry["value"]) == ("/to", "classic")
    answer = await client.post("/v1/tables/conversions", json={"arm": ARM})
    assert only_entry(answer, "missing-field")["pointer"] == "/to"


def test_the_list_is_whole() -> None:
    assert len(QUESTIONS) == 25


async def test_one_vector_that_is_not_in_a_list(client: httpx.AsyncClient) -> None:
    body = {"arm": ARM, "joints": [1.0, 2.0]}
    answer = await client.post("/v1/poses", json=body)
    assert answer.status_code == 422
    (entry,) = answer.json()["errors"]
    assert entry["pointer"] == "/joints"
    assert "[[...]]" in entry["way_out"]


@pytest.mark.parametrize(
    ("field", "choice"),
    [("units", "mm-deg, m-rad, in-deg"), ("convention", "standard, modified")],
)
async def test_a_missing_choice_says_what_there_is(
    client: httpx.AsyncClient, field: str, choice: str
) -> None:
    arm = {name: value for name, value in ARM.items() if name != field}
    answer = await client.post("/v1/poses", json={"arm": arm, "joints": [[1.0, 2.0]]})
    (entry,) = answer.json()["errors"]
    assert (entry["pointer"], entry["way_out"]) == (f"/arm/{field}", f'add "{field}": {choice}')
