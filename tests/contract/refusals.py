"""What tests of bad input share: an arm to spoil, and how a refusal is held.

Left out: the bad inputs themselves.
"""

import copy
import json
from typing import Any

import httpx

from service.problems import KINDS

Body = dict[str, Any]
STRAIGHT = {"form": "xyz-fixed", "values": [0, 0, 0]}
AT_ORIGIN = {"position": [0, 0, 0], "orientation": STRAIGHT}
ROW = {"joint": "revolute", "a": 400, "alpha": 0, "d": 0, "theta": 0, "travel": [-170, 170]}
ARM: Body = {
    "name": "two-turns",
    "convention": "standard",
    "units": "mm-deg",
    "rows": [ROW, ROW],
    "tools": {"gripper": {**AT_ORIGIN, "number": 3}, "pen": AT_ORIGIN},
    "default_tool": "gripper",
    "frames": {"tray": {**AT_ORIGIN, "in": "world", "number": 5}},
}


def arm(**changes: Any) -> Body:
    """Return the arm with fields changed; None takes one out."""
    changed = {**copy.deepcopy(ARM), **changes}
    return {key: value for key, value in changed.items() if value is not None}


def row(**changes: Any) -> Body:
    return arm(rows=[ROW, {**ROW, **changes}])


def turned(form: str, *values: float) -> Body:
    return {"position": [0, 0, 0], "orientation": {"form": form, "values": list(values)}}


def matrix(*changes: tuple[int, int, float]) -> Body:
    rows = [[float(i == j) for j in range(4)] for i in range(4)]
    for i, j, value in changes:
        rows[i][j] = value
    return {"matrix": rows}


async def sent(client: httpx.AsyncClient, path: str, body: Any) -> httpx.Response:
    """Send a body that may hold NaN."""
    content = json.dumps(body).encode()
    return await client.post(path, content=content, headers={"content-type": "application/json"})


def refusal(answer: httpx.Response, code: str, status: int | None = None) -> Body:
    """Return the problem document after holding its code, number and status."""
    problem: Body = answer.json()
    assert answer.headers["content-type"] == "application/problem+json", problem
    assert (problem["code"], problem["number"]) == (code, KINDS[code].number)
    assert answer.status_code == problem["status"] == (status or KINDS[code].status)
    assert all(entry["say"] and entry["way_out"] for entry in problem["errors"])
    return problem


def only_entry(answer: httpx.Response, code: str, status: int | None = None) -> Body:
    (entry,) = refusal(answer, code, status)["errors"]
    found: Body = entry
    return found
