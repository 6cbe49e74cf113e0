"""Every example of the documentation, asked of the demonstration cell, answers what it says.

Run as a program it writes the answers anew, for a change that is meant; read the diff then.
"""

import asyncio
import json
import math
import re
from collections.abc import AsyncIterator, Iterator, Mapping
from contextlib import asynccontextmanager
from datetime import UTC, datetime
from typing import Any

import httpx
import pytest
from fastapi import FastAPI
from fastapi.routing import APIRoute

from service.app import create_app
from service.settings import Settings
from service.storage.ports import SUCCEEDED, Survey
from service.surveys.kinds import Gathers
from service.surveys.registry import SURVEY_KINDS
from service.web.document import KEY
from service.web.examples import Example, examples_of, folder

pytestmark = pytest.mark.anyio

COUNTS = {
    "frames": 5,
    "relation": 5,
    "reach": 11,
    "reach-checks": 10,
    "reach-travels": 6,
    "reach-samples": 3,
    "reach-envelope": 2,
    "jacobian": 4,
    "jacobians": 4,
    "pose": 12,
    "poses": 8,
    "rotations-guesses": 5,
    "rotation": 6,
    "rotations": 5,
    "rotations-conversions": 3,
    "tables-conversions": 3,
    **dict.fromkeys(("arms", "arms-create", "arm", "arm-replace"), 1),
    **dict.fromkeys(("arm-revisions", "arm-revision", "ping", "livez", "readyz"), 1),
    **dict.fromkeys(("cells", "cells-create", "cell", "cell-replace"), 1),
    **dict.fromkeys(("cell-revisions", "cell-revision"), 1),
    "surveys": 1,
    "surveys-create": 3,
    "survey-result": 1,
    "records": 1,
    "arm-records": 1,
    "records-create": 2,
    "events": 1,
    "joints": 2,
    "live": 3,
    "live-of-all": 1,
    "live-history": 1,
}
_SURVEY = "/v1/surveys/{survey}"
WITHOUT = {
    *(("DELETE", "/v1/arms/{arm}"), ("DELETE", "/v1/cells/{cell}"), ("GET", "/metrics")),
    *(("GET", _SURVEY), ("DELETE", _SURVEY), ("POST", f"{_SURVEY}/cancel")),
    *(("GET", f"{_SURVEY}/{part}") for part in ("progress", "report")),
    *(("GET", f"/v1/{part}/stream") for part in ("live", "arms/{arm}/live", "events")),
    *(("GET", "/v1/records/{record}"), ("GET", "/v1/arms/{arm}/records/{record}")),
}
"""Neither a body asked nor a settled answer: nothing to show."""

CLOSE = 1e-9
"""Relative and absolute: far above rounding, far below any digit a user reads."""

OF_THE_MOMENT = {
    "seq": 1,
    "t_ms": 1,
    **dict.fromkeys(
        ("created_at", "sampled_at", "received_at", "computed_at", "happened_at"),
        "2026-12-01T06:00:00.000Z",
    ),
    "age_ms": 12,
    "change": 1796198400123,
    "counts": {"good": 1},
    "id": "01a23542df1518952a22",
    "software": "0.1.0",
    "links": {
        part: f"/v1/surveys/01a23542df1518952a22/{part}"
        for part in ("progress", "result", "report", "cancel")
    },
}
"""What no two answers share, and what an example shows in its place."""
NUMBER = re.compile(r"[-+]?\d+(?:\.\d+)?(?:e[-+]?\d+)?")
CASES = [(name, case) for name in sorted(COUNTS) for case in examples_of(name)]


def routes_of(app: FastAPI) -> dict[str, APIRoute]:
    """Return the route of each folder of examples."""
    found: dict[str, APIRoute] = {}
    for route in app.router.routes:
        if isinstance(route, APIRoute) and route.include_in_schema:
            name = (route.openapi_extra or {})[KEY].examples
            if name:
                assert found.setdefault(name, route).path == route.path
    return found


def succeeded(app: FastAPI, name: str, asked: Mapping[str, Any]) -> None:
    """Store a survey that has succeeded, its pieces made here and now."""
    arms, store = app.state.arms, app.state.surveys.store
    kind, at = SURVEY_KINDS[asked["kind"]], datetime(2026, 12, 1, 6, tzinfo=UTC)
    accepted = kind.accept(arms, asked["request"])
    about = json.loads(json.dumps({**accepted.about, "software": "0.1.0"}))
    survey = Survey(name, kind.name, "", accepted.request, about, accepted.total, at)
    *pieces, last = accepted.pieces
    store.add(survey, [*pieces, last], key=None, digest="")
    store.begin(name, at)
    prepared = kind.prepare(kind.setup(arms, survey))
    made = [kind.make(prepared, piece) for piece in pieces]
    assert isinstance(kind, Gathers)
    whole = kind.gather(prepared, last, [piece.made for piece in made])
    store.keep(name, [*made, whole])
    store.end(name, SUCCEEDED, at)


async def answer_to(
    app: FastAPI, client: httpx.AsyncClient, route: APIRoute, example: Example
) -> Any:
    """Ask what an example asks and return the answer's body; it must not be refused."""
    request, path = example.request, example.path
    if example.survey is not None:
        succeeded(app, request["path"]["survey"], example.survey)
    if example.sent is not None:
        arm = {**request["path"], **path}["arm"]
        assert (await client.put(f"/v1/arms/{arm}/joints", json=example.sent)).is_success
    if "GET" in (route.methods or ()):
        address = route.path.format(**request["path"])
        response = await client.get(address, params=request["query"])
    elif "PUT" in (route.methods or ()) and not path:
        address = route.path.format(arm=request["name"], cell=request["name"])
        response = await client.put(address, json=request, headers={"If-None-Match": "*"})
    else:
        method = min(route.methods or {"POST"})
        response = await client.request(method, route.path.format(**path), json=request)
    assert response.status_code in (200, 201, 202), response.text
    if response.headers["content-type"].startswith("application/json"):
        return response.json()
    return response.text if example.survey else without_the_moment(response.text)


def without_the_moment(text: str) -> str:
    """Return a text answer with ``seq`` and ``t_ms``, its fourth and sixth field, made 1.

    A heartbeat is of the moment but for its first field.
    """
    if "\r\n" not in text:
        return f"{text.partition(';')[0]};1;0"
    separator = ";" if ";" in text else ","
    *head, line = text.removesuffix("\r\n").split("\r\n")
    fields = line.split(separator)
    for place in (3, 5):
        fields[place] = "1".ljust(len(fields[place])) if separator == ";" else "1"
    return "".join(f"{shown}\r\n" for shown in (*head, separator.join(fields)))


def is_of_the_moment(key: str, value: object) -> bool:
    """Return whether no two answers share what a key says; the links of an arm they do."""
    return key in OF_THE_MOMENT and not (key == "links" and isinstance(value, list))


def differences(said: Any, got: Any, where: str = "") -> Iterator[str]:
    """Yield where two answers differ; numbers may by CLOSE, within texts too."""
    told = f"{where}: {said!r} became {got!r}"
    if isinstance(said, dict) and isinstance(got, dict):
        # Their order counts too: a flat answer is read by place.
        if list(said) != list(got):
            yield told
            return
        for key in said:
            if not is_of_the_moment(key, said[key]):
                yield from differences(said[key], got[key], f"{where}/{key}")
    elif isinstance(said, list) and isinstance(got, list) and len(said) == len(got):
        for index, (one, other) in enumerate(zip(said, got, strict=True)):
            yield from differences(one, other, f"{where}/{index}")
    elif isinstance(said, str) and isinstance(got, str) and not where.endswith("digest"):
        if NUMBER.sub("#", said) != NUMBER.sub("#", got):
            yield told
            return
        ours, theirs = (list(map(float, NUMBER.findall(text))) for text in (said, got))
        yield from differences(ours, theirs, where)
    elif _is_number(said) and _is_number(got):
        if not math.isclose(said, got, rel_tol=CLOSE, abs_tol=CLOSE):
            yield told
    elif said != got or type(said) is not type(got):
        yield told


def _is_number(value: object) -> bool:
    return isinstance(value, int | float) and not isinstance(value, bool)


@pytest.fixture
def settings() -> Settings:
    """The demonstration cell."""
    return Settings(database=":memory:", demo=True)


@pytest.mark.parametrize(("name", "case"), CASES)
async def test_the_example_answers_what_it_says(
    app: FastAPI, client: httpx.AsyncClient, name: str, case: str
) -> None:
    example = examples_of(name)[case]
    got = await answer_to(app, client, routes_of(app)[name], example)
    assert list(differences(example.answer, got)) == []


def test_every_route_with_examples_has_them_all(app: FastAPI) -> None:
    assert sorted(routes_of(app)) == sorted(COUNTS)
    bare = {
        (method, route.path)
        for route in app.router.routes
        if isinstance(route, APIRoute) and route.include_in_schema
        for method in (route.methods or set()) - {"HEAD"}
        if not (route.openapi_extra or {})[KEY].examples
    }
    assert bare == WITHOUT
    assert {path.parent.name for path in folder().glob("*/*.json")} == set(COUNTS)
    assert {name: len(examples_of(name)) for name in COUNTS} == COUNTS
    assert len(CASES) == sum(COUNTS.values())


async def test_an_example_stands_at_the_media_type_of_its_answer(client: httpx.AsyncClient) -> None:
    document = (await client.get("/openapi.json")).json()
    for what, text, table in [("pose", {"txt"}, {"csv"}), ("jacobian", {"txt-row"}, set())]:
        operation = document["paths"][f"/v1/arms/{{arm}}/{what}"]["get"]
        content = operation["responses"]["200"]["content"]
        shown = {media: set(content[media].get("examples", {})) for media in content}
        assert shown["text/plain"] == text
        assert shown["text/csv"] == table
        assert shown["application/json"] == set(examples_of(what)) - text - table


def test_every_example_has_a_title_of_its_own() -> None:
    titles = [examples_of(name)[case].title for name, case in CASES]
    assert len(set(titles)) == len(titles)
    assert all(20 <= len(title) <= 100 for title in titles)


def test_every_arm_of_the_cell_is_in_some_example() -> None:
    text = json.dumps([examples_of(name)[case].request for name, case in CASES])
    arms = ["housing-loader", "lathe-tender", "line-runner", "pallet-stacker", "seal-setter"]
    for arm in [*arms, "wash-arm", "wash-gantry"]:
        assert f'"{arm}"' in text


@pytest.mark.parametrize(
    ("got", "where"),
    [
        ({"x": 1.0 + 2e-9, "say": "at 5 deg"}, "/x"),
        ({"x": 1.0, "say": "at 6 deg"}, "/say"),
        ({"x": 1.0, "say": "to 5 deg"}, "/say"),
        ({"x": True, "say": "at 5 deg"}, "/x"),
        ({"x": [1.0], "say": "at 5 deg"}, "/x"),
        ({"say": "at 5 deg", "x": 1.0}, ""),
    ],
)
def test_a_difference_is_seen(got: Any, where: str) -> None:
    (found,) = differences({"x": 1.0, "say": "at 5 deg"}, got)
    assert found.startswith((f"{where}:", f"{where}/"))


def test_rounding_and_the_moment_are_no_difference() -> None:
    said = {"seq": 1, "x": 1e-17, "say": "value 4.2e-17"}
    assert list(differences(said, {"seq": 9, "x": 0.0, "say": "value 1.3e-17"})) == []


@asynccontextmanager
async def demonstration() -> AsyncIterator[tuple[FastAPI, httpx.AsyncClient]]:
    """Run the demonstration cell outside of pytest."""
    app = create_app(Settings(database=":memory:", demo=True))
    transport = httpx.ASGITransport(app)
    async with (
        app.router.lifespan_context(app),
        httpx.AsyncClient(transport=transport, base_url="http://armspan.test") as client,
    ):
        yield app, client


def settled(answer: Any) -> Any:
    """Return an answer with what is of the moment made the same in every run."""
    if isinstance(answer, list):
        return [settled(part) for part in answer]
    if not isinstance(answer, dict):
        return answer
    return {
        key: settled_moment(key, part) if is_of_the_moment(key, part) else settled(part)
        for key, part in answer.items()
    }


def settled_moment(key: str, part: Any) -> Any:
    """Return what an example shows in place of what is of the moment: of a list, for each."""
    shown = OF_THE_MOMENT[key]
    return [shown] * len(part) if isinstance(part, list) else shown


async def write_answers() -> None:
    """Write the answer of every example as it is now, each asked of a service of its own."""
    for name in sorted(COUNTS):
        for path in sorted((folder() / name).glob("*.json")):
            async with demonstration() as (app, client):
                case = json.loads(path.read_text(encoding="utf-8"))
                asked = examples_of(name)[path.stem]
                answer = await answer_to(app, client, routes_of(app)[name], asked)
                case["answer"] = settled(answer)
                path.write_text(json.dumps(case, indent=1, ensure_ascii=False) + "\n", "utf-8")
                print(f"{name}/{path.name}")


if __name__ == "__main__":
    asyncio.run(write_answers())
