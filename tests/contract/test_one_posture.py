"""One posture by query says what the same posture says among others in a body.

Every arm of the demonstration cell, in every frame, form and unit system, with every tool; at
postures that are plain, singular, beyond travel and at gimbal lock. Left out: whether it is right.
"""

from itertools import product
from typing import Any

import httpx
import pytest

from kinematics.orientation_forms import FORMS
from service import demo
from service.settings import Settings

pytestmark = pytest.mark.anyio
Body = dict[str, Any]
CELL: dict[str, Body] = {document["name"]: document for document in demo.documents()}
EACH_ARM = pytest.mark.parametrize("name", CELL)
FIXED = ("base", "world")
UNITS = ("mm-deg", "m-rad", "in-deg")
CLOSE = 1e-12
"""Relative and absolute: another batch may round another way."""


@pytest.fixture
def settings() -> Settings:
    """Settings of a service with the demonstration cell."""
    return Settings(database=":memory:", demo=True)


def driven(name: str) -> list[Body]:
    return [row for row in CELL[name]["rows"] if not row.get("passive")]


def postures(name: str) -> list[list[float]]:
    """Return postures in the arm's own units: at 0, plain, at every limit, and beyond."""
    bounds = [row["travel"] for row in driven(name)]
    shares = (0.37, 0.81, 0.55, 0.23, 0.68, 0.44, 0.9)
    plain = [
        round(lower + share * (upper - lower), 3)
        for share, (lower, upper) in zip(shares, bounds, strict=False)
    ]
    # Wrists are straight at 0, elbows at a limit or a quarter turn.
    beyond = [upper + 5.5 for _, upper in bounds]
    return [plain, [0.0] * len(bounds), beyond, [90.0 * (n % 3 - 1) for n in range(len(bounds))]]


def frames_of(name: str) -> list[str]:
    return [*FIXED, *CELL[name].get("frames", {})]


def tools_of(name: str) -> list[str]:
    return ["flange", *CELL[name].get("tools", {})]


async def check(
    client: httpx.AsyncClient, what: str, name: str, *, settled: bool = True, **asked: Any
) -> list[Body]:
    """Ask about each posture in a query and in a body of its own, then about all in one body.

    ``settled`` says that no two singular values are the same: if they are, the weakest direction
    is any of many, and which one is told depends on the postures it is worked out with.
    """
    joints = postures(name)
    body = {"arm": name, **asked}
    query = {key: ",".join(v) if isinstance(v, list) else str(v) for key, v in asked.items()}
    posted = await client.post(f"/v1/{what}", json={**body, "joints": joints})
    assert posted.status_code == 200, posted.text
    together = posted.json()
    for vector, item in zip(joints, together[what], strict=True):
        q = ",".join(map(repr, vector))
        answer = await client.get(f"/v1/arms/{name}/{what[:-1]}", params={"q": q, **query})
        assert answer.status_code == 200, answer.text
        told = answer.json()
        posted = await client.post(f"/v1/{what}", json={**body, "joints": [vector]})
        assert posted.json().items() <= told.items()
        assert (told["ok"], told["code"]) == (True, item["code"])
        (alone,) = told[what]
        if settled:
            assert alone == close(item)
        assert {key: told[key] for key in together} == {**together, what: [alone]}
    found: list[Body] = together[what]
    return found


def close(item: Any) -> Any:
    """Return what compares equal to the same item but for rounding."""
    if isinstance(item, dict):
        return {key: close(value) for key, value in item.items()}
    if isinstance(item, list):
        return [close(value) for value in item]
    if isinstance(item, float):
        return pytest.approx(item, rel=CLOSE, abs=CLOSE)
    return item


@EACH_ARM
async def test_frames_and_forms(client: httpx.AsyncClient, name: str) -> None:
    codes = set()
    for frame, form in product(frames_of(name), FORMS):
        items = await check(client, "poses", name, frame=frame, form=form, tool=tools_of(name)[-1])
        codes |= {finding["code"] for item in items for finding in item["findings"]}
    # Beyond travel, and one of the 24 triples at its lock; but for two arms, singular too.
    assert {4, 5} <= codes
    assert (2 in codes) == (name not in ("line-runner", "wash-gantry"))


@EACH_ARM
async def test_tools_units_and_tasks(client: httpx.AsyncClient, name: str) -> None:
    for tool, units in product(tools_of(name), UNITS):
        await check(client, "poses", name, tool=tool, units=units, frame="world")
        await check(client, "jacobians", name, tool=tool, units=units)
    for task in ("pose", "position", "orientation", ["vx", "wz"]):
        await check(client, "poses", name, settled=False, task=task, tool="flange")


@EACH_ARM
async def test_jacobians_in_any_axes(client: httpx.AsyncClient, name: str) -> None:
    for frame in (*frames_of(name), "flange", "tool"):
        await check(client, "jacobians", name, frame=frame, tool=tools_of(name)[-1])


@EACH_ARM
async def test_a_question_asked_again_is_answered_again(
    client: httpx.AsyncClient, name: str
) -> None:
    """Between other questions and others' arms: what is kept of a question is only its own."""
    plain, zero, *_ = (",".join(map(repr, vector)) for vector in postures(name))
    path = f"/v1/arms/{name}/pose"
    asked = [
        {"q": plain, "tool": "flange"},
        {"q": zero, "tool": "flange"},
        {"q": plain, "tool": "0", "frame": "world", "form": "zyx-current"},
        {"q": plain, "tool": "flange", "units": "m-rad"},
        {"q": plain, "tool": "flange", "revision": "1"},
        {"q": plain, "tx": "10", "tr3": "45"},
        {"q": plain, "tx": "10", "tr3": "-45"},
    ]
    first: list[Body] = []
    for turn in range(2):
        for index, query in enumerate(asked):
            told = (await client.get(path, params=query)).json()
            assert told.pop("ok"), told
            stamp = [told.pop(key) for key in ("seq", "tag", "t_ms")]
            assert stamp[1] == 0
            if turn == 0:
                first.append(told)
            else:
                assert told == first[index]
    assert first[0] == first[4]
    assert len({repr(told) for told in first}) == len(asked) - 1


async def test_what_was_asked_before_is_asked_of_the_arm_as_it_is_now(
    client: httpx.AsyncClient,
) -> None:
    document = CELL["wash-arm"]
    plain = ",".join(map(repr, postures("wash-arm")[0]))
    query = {"q": plain, "tool": "flange"}
    before = (await client.get("/v1/arms/wash-arm/pose", params=query)).json()
    rows = [dict(row) for row in document["rows"]]
    rows[0]["d"] += 25
    changed = {**document, "rows": rows}
    put = await client.put("/v1/arms/wash-arm", json=changed, headers={"If-Match": "*"})
    assert put.status_code == 200, put.text
    after = (await client.get("/v1/arms/wash-arm/pose", params=query)).json()
    assert after["arm"]["revision"] == before["arm"]["revision"] + 1
    assert after["poses"][0]["position"] != before["poses"][0]["position"]
    pinned = {**query, "revision": str(before["arm"]["revision"])}
    again = (await client.get("/v1/arms/wash-arm/pose", params=pinned)).json()
    assert (again["arm"], again["poses"]) == (before["arm"], before["poses"])
    assert (await client.delete("/v1/arms/wash-arm", headers={"If-Match": "*"})).status_code == 204
    gone = await client.get("/v1/arms/wash-arm/pose", params=query)
    assert (gone.status_code, gone.json()["code"]) == (404, "unknown-arm")
