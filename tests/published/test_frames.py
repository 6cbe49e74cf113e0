"""All twelve cases of frames.json, against the core and over HTTP.

An edge ``from`` A ``to`` B holds the pose of B in A, so it is a relation ``of`` B ``in`` A.
"""

from typing import Any

import httpx
import numpy as np
import pytest

from kinematics.errors import NotConnected, NotRigid
from kinematics.frames import FrameGraph, Ways
from kinematics.tolerances import LOOP_CLOSED
from kinematics.transforms import checked_pose
from tests.contract.refusals import only_entry
from tests.published.cases import Case, assert_within, cases_of

CASES = cases_of("frames")
REFUSED = {"frm-10": "not-connected", "frm-12": "not-rigid"}


def each(entry: str) -> Any:
    """Parametrise with the cases that expect ``entry``."""
    chosen = {name: case for name, case in CASES.items() if entry in case["expected"]}
    return pytest.mark.parametrize("case", chosen.values(), ids=list(chosen))


def test_no_case_is_missing() -> None:
    told = {entry for case in CASES.values() for entry in case["expected"]}
    assert len(CASES) == 12
    assert told == {"T", "loop", "must_report_inconsistency", "answer", "reason"}
    assert sum("T" in case["expected"] for case in CASES.values()) == 8
    assert sum("loop" in case["expected"] for case in CASES.values()) == 3
    assert {name for name, case in CASES.items() if "answer" in case["expected"]} == set(REFUSED)


def graph_of(case: Case) -> FrameGraph:
    edges = case["input"]["edges"]
    poses = [checked_pose(edge["T"])[0] for edge in edges]
    return FrameGraph([e["to"] for e in edges], [e["from"] for e in edges], np.array(poses))


def pair_of(case: Case) -> tuple[list[str], list[str]]:
    query = case["input"]["query"]
    return [query["to"]], [query["from"]]


# --- the core ------------------------------------------------------------------------------


@each("T")
def test_pose(case: Case) -> None:
    ways = graph_of(case).ways(*pair_of(case))
    assert_within(case["tolerance"]["abs"], ways.poses[0], case["expected"]["T"])


def only_loop(case: Case) -> tuple[FrameGraph, Ways]:
    graph = graph_of(case)
    assert len(graph.loops) == 1
    return graph, graph.loops


@each("loop")
def test_loop(case: Case) -> None:
    graph, loops = only_loop(case)
    expected = case["expected"]["loop"]
    assert loops.walks.frames == [expected["cycle"]]
    position, angle = (float(off[0]) for off in graph.closures)
    at_world = expected.get("translation_error", expected.get("translation_error_started_at_world"))
    assert position == pytest.approx(at_world, abs=expected["compare_abs"])
    assert angle == pytest.approx(expected["rotation_error"], abs=expected["compare_abs"])
    assert (max(position, angle) <= LOOP_CLOSED) is expected["consistent"]


def test_the_distance_depends_on_where_a_turned_loop_starts() -> None:
    case = CASES["frm-09"]
    edges = case["input"]["edges"]
    # Frames are numbered as they are first named: with the part's name before all, it starts there.
    renamed = {"part": "world", "world": "hall"}
    graph = FrameGraph(
        [renamed.get(edge["to"], edge["to"]) for edge in edges],
        [renamed.get(edge["from"], edge["from"]) for edge in edges],
        np.array([edge["T"] for edge in edges]),
    )
    expected = case["expected"]["loop"]
    position, angle = (float(off[0]) for off in graph.closures)
    assert graph.loops.walks.frames[0][0] == "world"
    started_at_part = expected["translation_error_started_at_part"]
    assert position == pytest.approx(started_at_part, abs=expected["compare_abs"])
    assert angle == pytest.approx(expected["rotation_error"], abs=expected["compare_abs"])


def test_no_path() -> None:
    case = CASES["frm-10"]
    with pytest.raises(NotConnected, match=r"part is connected with fixture; base .* with world"):
        graph_of(case).ways(*pair_of(case))


def test_an_edge_that_is_no_rigid_motion() -> None:
    with pytest.raises(NotRigid) as caught:
        graph_of(CASES["frm-12"])
    assert caught.value.defect == pytest.approx(1.01**2 - 1.0)


# --- over HTTP -----------------------------------------------------------------------------


def body_of(case: Case, **more: Any) -> dict[str, Any]:
    relations = [
        {"of": edge["to"], "in": edge["from"], "pose": {"matrix": edge["T"]}}
        for edge in case["input"]["edges"]
    ]
    body = {"relations": relations, "units": "m-rad", "form": "matrix", **more}
    if "query" in case["input"]:
        query = case["input"]["query"]
        body["find"] = [{"of": query["to"], "in": query["from"]}]
    return body


def matrix_of(pose: dict[str, Any]) -> np.ndarray:
    assert pose["orientation"]["form"] == "matrix"
    matrix = np.eye(4)
    matrix[:3, :3], matrix[:3, 3] = pose["orientation"]["values"], pose["position"]
    return matrix


async def answer_to(client: httpx.AsyncClient, body: dict[str, Any]) -> dict[str, Any]:
    answer = await client.post("/v1/frames", json=body)
    assert answer.status_code == 200, answer.text
    found: dict[str, Any] = answer.json()
    return found


@pytest.mark.anyio
@pytest.mark.parametrize("estimate", [False, True])
@each("T")
async def test_pose_over_http(client: httpx.AsyncClient, case: Case, estimate: bool) -> None:
    answer = await answer_to(client, body_of(case, estimate=estimate))
    (found,) = answer["answers"]
    query = case["input"]["query"]
    assert (found["in"], found["of"]) == (query["from"], query["to"])
    assert (found["path"][0], found["path"][-1]) == (query["from"], query["to"])
    assert_within(case["tolerance"]["abs"], matrix_of(found["pose"]), case["expected"]["T"])
    if estimate:
        # All relations of these agree, so that the most likely poses are the very same.
        (likely,) = answer["estimate"]["answers"]
        assert_within(case["tolerance"]["abs"], matrix_of(likely["pose"]), case["expected"]["T"])


@pytest.mark.anyio
@each("loop")
async def test_loop_over_http(client: httpx.AsyncClient, case: Case) -> None:
    answer = await answer_to(client, body_of(case))
    expected = case["expected"]["loop"]
    (loop,) = answer["loops"]
    assert loop["frames"] == expected["cycle"]
    assert loop["closure"]["at"] == "world"
    at_world = expected.get("translation_error", expected.get("translation_error_started_at_world"))
    off = loop["closure"]
    assert off["position"] == pytest.approx(at_world, abs=expected["compare_abs"])
    assert off["angle"] == pytest.approx(expected["rotation_error"], abs=expected["compare_abs"])
    assert loop["closes"] is expected["consistent"]
    named = [finding["name"] for finding in answer["findings"]]
    assert named == ([] if expected["consistent"] else ["loops-open"])


@pytest.mark.anyio
@pytest.mark.parametrize("name", REFUSED)
async def test_refused_over_http(client: httpx.AsyncClient, name: str) -> None:
    answer = await client.post("/v1/frames", json=body_of(CASES[name]))
    entry = only_entry(answer, REFUSED[name], 422)
    where = {"frm-10": "/find/0", "frm-12": "/relations/1/pose/matrix"}
    assert entry["pointer"] == where[name]
