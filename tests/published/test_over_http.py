"""All cases of fk, equivalence, jacobian and singularity over HTTP, each in three ways of asking.

Left out: rotations (test_rotations_over_http), and the same cases through the Python API.

The files give poses in the frame in which ``base`` stands, so everything is asked in ``world``;
their singular values are unscaled, so arms come with a characteristic length of one metre.
"""

from typing import Any

import httpx
import numpy as np
import pytest

from kinematics.tolerances import NEAR_SINGULAR
from tests.published.cases import Case, cases_of

pytestmark = pytest.mark.anyio

Item = dict[str, Any]

ROW_NAMES = ("vx", "vy", "vz", "wx", "wy", "wz")
WAYS = ("alone", "in-a-batch", "by-query")
BOUNDARIES = {"outer boundary", "inner boundary"}


FK, EQUIVALENCE, JACOBIAN, SINGULARITY = (
    list(cases_of(family).values()) for family in ("fk", "equivalence", "jacobian", "singularity")
)
in_three_ways = pytest.mark.parametrize("way", WAYS)


def each(cases: list[Case]) -> Any:
    return pytest.mark.parametrize("case", cases, ids=[case["id"] for case in cases])


def test_no_case_is_missing() -> None:
    counts = [len(cases) for cases in (FK, EQUIVALENCE, JACOBIAN, SINGULARITY)]
    assert counts == [25, 8, 16, 29]
    assert sum(counts) == 78
    cases = [*FK, *EQUIVALENCE, *JACOBIAN, *SINGULARITY]
    assert len({case["id"] for case in cases}) == 78


def document_of(case: Case, given: Case | None = None) -> dict[str, Any]:
    """Return the arm of a case as the wire takes it."""
    arm = case["input"]["arm"] if given is None else given
    units = case["input"]["units"]
    rows = []
    for row in arm["table"]:
        renamed = {"sign": "direction", "limits": "travel"}
        rows.append({renamed.get(key, key): value for key, value in row.items()})
    document: dict[str, Any] = {
        "name": case["id"],
        "convention": arm["convention"],
        "units": f"{units['length']}-{units['angle']}",
        "rows": rows,
        "characteristic_length": 1.0 if units["length"] == "m" else 1000.0,
    }
    if arm["base"] is not None:
        document["base"] = {"matrix": arm["base"]}
    if arm["tool"] is not None:
        document["tools"] = {"probe": {"matrix": arm["tool"], "number": 7}}
        document["default_tool"] = "probe"
    return document


def other_posture(q: list[float]) -> list[float]:
    return [0.5 * value + 0.125 for value in q]


async def answer_to(
    client: httpx.AsyncClient, way: str, what: str, arm: Case, q: list[float], **asked: Any
) -> Item:
    """Return the item for one posture; ``what`` is poses or jacobians."""
    if way == "by-query":
        stored = await client.post("/v1/arms", json=arm)
        assert stored.status_code == 201, stored.text
        query = {"q": ",".join(map(repr, q)), **asked}
        if "task" in query:
            query["task"] = ",".join(query["task"])
        answer = await client.get(f"/v1/arms/{arm['name']}/{what[:-1]}", params=query)
        assert answer.status_code == 200, answer.text
        (item,) = answer.json()[what]
        return item
    joints = [q] if way == "alone" else [other_posture(q), q, other_posture(q), q]
    answer = await client.post(f"/v1/{what}", json={"arm": arm, "joints": joints, **asked})
    assert answer.status_code == 200, answer.text
    items = answer.json()[what]
    assert len(items) == len(joints)
    if way == "in-a-batch":
        assert items[1] == items[3]
        return items[1]
    return items[0]


def matrix_of(pose: Item) -> np.ndarray:
    assert pose["orientation"]["form"] == "matrix"
    matrix = np.eye(4)
    matrix[:3, :3] = pose["orientation"]["values"]
    matrix[:3, 3] = pose["position"]
    return matrix


def assert_within(case: Case, actual: Any, expected: Any, name: str = "abs") -> None:
    actual, expected = np.asarray(actual, dtype=float), np.asarray(expected, dtype=float)
    assert actual.shape == expected.shape
    np.testing.assert_allclose(actual, expected, rtol=0.0, atol=case["tolerance"][name])


@in_three_ways
@each(FK)
async def test_forward(client: httpx.AsyncClient, case: Case, way: str) -> None:
    arm, expected = document_of(case), case["expected"]
    asked: dict[str, Any] = {"frame": "world", "form": "matrix", "units": "m-rad"}
    q = case["input"]["q"]
    if arm["units"] != "m-rad":
        q, asked["units"] = in_si(arm, q, way, asked)
    if way != "by-query":
        asked["links"] = True
    item = await answer_to(client, way, "poses", arm, q, **asked)
    assert item["ok"] is True
    tool_in_world = matrix_of(item)
    if asked["units"] == "mm-deg":
        tool_in_world[:3, 3] /= 1000.0
    assert_within(case, tool_in_world, expected["T"])
    if "frames" in expected and "links" in asked:
        *links, tool = expected["frames"]
        assert len(links) == len(arm["rows"]) + 1
        assert_within(case, [matrix_of(link) for link in item["links"]], links)
        assert_within(case, tool_in_world, tool)


def in_si(arm: Case, q: list[float], way: str, asked: Case) -> tuple[list[float], str]:
    """Ask a case in millimetres and degrees in its own units alone, and else in SI."""
    if way == "alone":
        return q, "mm-deg"
    is_turn = [row["joint"] == "revolute" for row in arm["rows"]]
    values = [
        float(np.deg2rad(value)) if turns else value / 1000.0
        for value, turns in zip(q, is_turn, strict=True)
    ]
    return values, asked["units"]


def test_cases_that_tell_of_their_frames_and_units() -> None:
    assert sum("frames" in case["expected"] for case in FK) == 13
    assert sum(document_of(case)["units"] == "mm-deg" for case in FK) == 2


@in_three_ways
@each(EQUIVALENCE)
async def test_conversion(client: httpx.AsyncClient, case: Case, way: str) -> None:
    arm, given = document_of(case), case["expected"]["arm_in_other_convention"]
    named: Any = arm
    if way == "by-query":
        assert (await client.post("/v1/arms", json=arm)).status_code == 201
        named = arm["name"]
    asked = {"arm": named, "to": given["convention"]}
    answer = (await client.post("/v1/tables/conversions", json=asked)).json()
    converted = answer["arm"]
    assert (answer["units"], converted["convention"]) == (arm["units"], given["convention"])
    assert_regrouped(case, converted, document_of(case, given))
    converted["name"] += "-converted"
    question = {"frame": "world", "form": "matrix"}
    for q, expected in zip(case["input"]["q"], case["expected"]["T"], strict=True):
        if way == "by-query":
            await client.delete(f"/v1/arms/{converted['name']}", headers={"If-Match": "*"})
        item = await answer_to(client, way, "poses", converted, q, **question)
        assert_within(case, matrix_of(item), expected)
    back = await client.post(
        "/v1/tables/conversions", json={"arm": converted, "to": arm["convention"]}
    )
    for q, expected in zip(case["input"]["q"], case["expected"]["T"], strict=True):
        item = await answer_to(client, "alone", "poses", back.json()["arm"], q, **question)
        assert_within(case, matrix_of(item), expected)


def assert_regrouped(case: Case, converted: Case, expected: Case) -> None:
    """Hold the rows one by one; base and tool as far as the file's regrouping is ours."""
    assert len(converted["rows"]) == len(expected["rows"])
    for row, wanted in zip(converted["rows"], expected["rows"], strict=True):
        assert row["joint"] == wanted["joint"]
        assert row.get("direction", 1) == wanted["direction"]
        names = ("a", "alpha", "d", "theta")
        assert_within(case, [row[name] for name in names], [wanted[name] for name in names])
    for pose_of in (base_of, tool_of):
        assert_within(case, pose_of(converted), pose_of(expected))


def base_of(arm: Case) -> Any:
    return pose_matrix(arm.get("base"))


def tool_of(arm: Case) -> Any:
    return pose_matrix(arm.get("tools", {}).get(arm.get("default_tool")))


def pose_matrix(pose: Case | None) -> Any:
    if pose is None:
        return np.eye(4)
    return pose["matrix"] if "matrix" in pose else matrix_of(pose)


@in_three_ways
@each(JACOBIAN)
async def test_jacobians(client: httpx.AsyncClient, case: Case, way: str) -> None:
    arm, expected = document_of(case), case["expected"]
    rows = expected["task_rows"]
    asked = {"task": [ROW_NAMES[row] for row in rows], "units": "m-rad"}
    assert expected["row_order"] == list(ROW_NAMES)
    if way == "by-query":
        q = ",".join(map(repr, case["input"]["q"]))
        question = {"frame": "world", "form": "matrix", "q": q}
        assert (await client.post("/v1/arms", json=arm)).status_code == 201
        posed = (await client.get(f"/v1/arms/{arm['name']}/pose", params=question)).json()
        assert_within(case, matrix_of(posed["poses"][0]), expected["T"])
        await client.delete(f"/v1/arms/{arm['name']}", headers={"If-Match": "*"})
    items = {}
    for frame in ("world", "tool"):
        q = case["input"]["q"]
        items[frame] = await answer_to(client, way, "jacobians", arm, q, frame=frame, **asked)
        if way == "by-query":
            await client.delete(f"/v1/arms/{arm['name']}", headers={"If-Match": "*"})
    assert_within(case, items["world"]["matrix"], expected["J_base"])
    assert_within(case, items["tool"]["matrix"], expected["J_tool"])
    jacobian = np.array(items["world"]["matrix"])
    relative = case["tolerance"]["rel_singular_values"]
    values = np.linalg.svd(jacobian[rows], compute_uv=False)
    np.testing.assert_allclose(values, expected["singular_values_task_rows"], rtol=relative)
    if "det_task_rows" in expected:
        assert_within(case, np.linalg.det(jacobian[rows]), expected["det_task_rows"])
    told = items["world"]["singularity"]
    assert told["characteristic_length"] == 1.0
    for ours, theirs in [
        ("manipulability", "yoshikawa_task_rows"),
        ("condition_number", "condition_number_task_rows"),
    ]:
        np.testing.assert_allclose(told[ours], expected[theirs], rtol=relative, atol=1e-12)
    # All six rows, unscaled: the same in every axes.
    whole = np.linalg.svd(jacobian, compute_uv=False)
    for item in items.values():
        np.testing.assert_allclose(item["singular_values"], whole, atol=1e-11)


@in_three_ways
@each(SINGULARITY)
async def test_singularity(client: httpx.AsyncClient, case: Case, way: str) -> None:
    expected, rows = case["expected"], case["input"]["task_rows"]
    assert expected["row_names"] == [ROW_NAMES[row] for row in rows]
    asked = {"task": expected["row_names"], "frame": "world", "units": "m-rad"}
    q = case["input"]["q"]
    item = await answer_to(client, way, "jacobians", document_of(case), q, **asked)
    told, tolerance = item["singularity"], case["tolerance"]
    jacobian = np.array(item["matrix"])[rows]
    values = np.linalg.svd(jacobian, compute_uv=False)
    assert_within(case, values, expected["singular_values"], "abs_singular_values")
    assert told["state"] == state_of(expected)
    assert item["code"] >= {"regular": 0, "near": 1, "singular": 2}[told["state"]]
    assert told["task"] == asked["task"]
    assert set(told["kinds"]) == (set() if told["state"] == "regular" else kinds_of(expected))
    assert_joints(told, expected)
    assert_lost(case, told, rows)
    smallest = expected["sigma_min"]
    allowed = max(tolerance["rel_sigma_min"] * smallest, tolerance["abs_singular_values"])
    assert abs(told["smallest_singular_value"] - smallest) <= allowed
    if expected["singular"]:
        assert told["condition_number"] is None
    elif "condition_number" in expected:
        relative = tolerance["rel_sigma_min"]
        assert told["condition_number"] == pytest.approx(expected["condition_number"], rel=relative)
    for motion in expected.get("joint_motions_without_task_motion", ()):
        assert np.abs(jacobian @ motion).max() < tolerance["abs_direction"]


def state_of(expected: Case) -> str:
    if expected["singular"]:
        return "singular"
    # Where the file leaves it to a threshold, ours decides.
    warned = expected.get("must_warn", expected["sigma_min"] <= NEAR_SINGULAR)
    assert warned == (expected["sigma_min"] <= NEAR_SINGULAR)
    return "near" if warned else "regular"


def kinds_of(expected: Case) -> set[str]:
    kinds = {kind.removeprefix("near ") for kind in expected.get("kind") or ()}
    renamed = {"all links aligned": "alignment", **dict.fromkeys(BOUNDARIES, "boundary")}
    return {renamed.get(kind, kind) for kind in kinds}


def assert_joints(told: Case, expected: Case) -> None:
    if told["state"] == "regular":
        assert told["joints"] == []
    elif "joints_in_null_motion" in expected:
        assert told["joints"] == expected["joints_in_null_motion"]
    else:
        assert set(expected.get("primary_joints", ())) <= set(told["joints"])


def assert_lost(case: Case, told: Case, rows: list[int]) -> None:
    """Hold the space of lost motions; a unit twist in metres and radians each."""
    lost = [[*motion["linear"], *motion["angular"]] for motion in told["lost_motion"]]
    assert all(motion["say"] for motion in told["lost_motion"])
    assert bool(lost) == (told["state"] != "regular")
    wanted = case["expected"].get("lost_directions")
    if wanted is None:
        return
    ours, theirs = np.zeros((6, len(lost))), np.zeros((6, len(wanted)))
    ours[:, :] = np.array(lost).T
    theirs[rows, :] = np.array(wanted).T
    assert ours.shape == theirs.shape
    ours, theirs = np.linalg.qr(ours)[0], np.linalg.qr(theirs)[0]
    assert_within(case, ours @ ours.T, theirs @ theirs.T, "abs_direction")


def test_how_many_cases_tell_what() -> None:
    told = {
        key: sum(key in case["expected"] for case in SINGULARITY)
        for key in ("lost_directions", "joints_in_null_motion", "must_warn", "condition_number")
    }
    assert told == {
        "lost_directions": 22,
        "joints_in_null_motion": 16,
        "must_warn": 9,
        "condition_number": 10,
    }
    assert sum(case["expected"]["singular"] for case in SINGULARITY) == 19
