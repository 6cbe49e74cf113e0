"""The cases of reach that can be answered, over HTTP: in a body, as a table, and by query string.

Left out: the same cases through the Python API, and areas and volumes (test_envelope).
"""

import csv
import io
from typing import Any

import httpx
import numpy as np
import pytest

from tests.published.test_over_http import document_of
from tests.published.test_reach import ASKED, CASES

pytestmark = pytest.mark.anyio
CHECKS = "/v1/reach/checks"
TARGETED = [name for name in ASKED if "target" in CASES[name]["input"]]
"""All but one about how far an arm reaches at most, which test_reach holds."""

PLACED = [name for name in TARGETED if "pose" not in CASES[name]["input"]["target"]]


def arm_of(name: str) -> dict[str, Any]:
    """Return the arm as the wire takes it; cases of reach are all in metres and radians."""
    units = {"length": "m", "angle": "rad"}
    case = CASES[name]
    return document_of({**case, "input": {**case["input"], "units": units}})


def position_of(name: str) -> list[float]:
    """Return a mere position; planar arms stay in the plane z = 0."""
    given = CASES[name]["input"]["target"]
    place: list[float] = given["position"] if "position" in given else [*given["position_xy"], 0.0]
    return place


def target_of(name: str) -> dict[str, Any]:
    given = CASES[name]["input"]["target"]
    if "pose" in given:
        return {"name": name, "pose": {"matrix": given["pose"]}}
    return {"name": name, "position": position_of(name)}


def assert_as_published(name: str, verdict: str, joints: list[list[float]]) -> None:
    expected, tolerance = CASES[name]["expected"], CASES[name]["tolerance"]
    if expected.get("reachable") is False:
        assert verdict in ("unreachable", "outside-travel")
        assert (verdict == "outside-travel") == ("rejected" in expected)
    else:
        assert verdict == "reachable"
    for solution in expected.get("solutions", ()):
        off = [np.abs(np.angle(np.exp(1j * np.subtract(each, solution)))).max() for each in joints]
        assert min(off) <= tolerance["abs_joint"]


@pytest.mark.parametrize("name", TARGETED)
async def test_a_case_in_a_body(client: httpx.AsyncClient, name: str) -> None:
    body = {"arm": arm_of(name), "targets": [target_of(name)], "solutions": "all"}
    answer = await client.post(CHECKS, json=body)
    assert answer.status_code == 200, answer.text
    (result,) = answer.json()["results"]
    assert result["ok"] is (result["verdict"] == "reachable")
    assert (result["reason"] is None) is result["ok"]
    joints = [solution["joints"] for solution in result["solutions"]]
    assert_as_published(name, result["verdict"], joints)


@pytest.mark.parametrize("name", PLACED)
async def test_a_case_of_a_stored_arm(client: httpx.AsyncClient, name: str) -> None:
    arm = arm_of(name)
    assert (await client.post("/v1/arms", json=arm)).status_code == 201
    x, y, z = position_of(name)
    table = f"name,x,y,z\r\n{name},{x!r},{y!r},{z!r}\r\n"
    address = f"{CHECKS}?arm={arm['name']}&solutions=all"
    answer = await client.post(address, content=table, headers={"content-type": "text/csv"})
    lines = list(csv.DictReader(io.StringIO(answer.text, newline="")))
    keys = [key for key in lines[0] if key[0] == "q" and key[1:].isdigit()]
    joints = [[float(line[key]) for key in keys] for line in lines]
    assert_as_published(name, lines[0]["verdict"], joints)
    query = f"x={x!r}&y={y!r}&z={z!r}&format=flat"
    flat = (await client.get(f"/v1/arms/{arm['name']}/reach?{query}")).json()
    assert flat["verdict"] == lines[0]["verdict"]
    assert flat["solutions"] == int(lines[0]["solutions"])
    np.testing.assert_allclose([flat[key] for key in keys], joints[0], atol=1e-9)


def test_none_is_missing() -> None:
    assert len(ASKED) == 19
    assert len(TARGETED) == 18
    assert len(PLACED) >= 8
