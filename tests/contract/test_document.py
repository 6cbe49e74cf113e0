"""The OpenAPI document as a reader's tools take it: valid, whole, with examples that fit.

Left out: how it is built (tests/service/web) and whether examples still answer (test_examples).
"""

import copy
import re
from collections.abc import Iterator
from typing import Any

import httpx
import jsonschema_rs
import pytest
import schemathesis
from fastapi import FastAPI
from starlette.routing import Route

from service.problems import ANSWERS, KINDS

pytestmark = pytest.mark.anyio

Document = dict[str, Any]
DIALECT = "https://json-schema.org/draft/2020-12/schema"
ASKING = {"get", "post", "put", "delete", "head"}
# For people, and the document itself: their addresses are not part of the interface.
PAGES = {
    *("/docs", "/docs/controllers", "/docs/problems", "/docs/files/{name}", "/openapi.json"),
    *("/", "/arms/{arm}", "/arms/{arm}/", "/arms/{arm}/reach", "/arms/{arm}/reach/"),
    "/pages/{name}",
}


@pytest.fixture
async def document(client: httpx.AsyncClient) -> Document:
    answer = await client.get("/openapi.json")
    assert answer.status_code == 200
    assert answer.headers["content-type"] == "application/json"
    found: Document = answer.json()
    return found


def operations_of(document: Document) -> Iterator[tuple[str, str, Document]]:
    for path, item in document["paths"].items():
        for method, operation in item.items():
            yield path, method, operation


def contents_of(operation: Document) -> Iterator[Document]:
    """Yield each body of an operation: its schema and its examples."""
    yield from operation.get("requestBody", {}).get("content", {}).values()
    for response in operation["responses"].values():
        yield from response.get("content", {}).values()


async def test_it_is_openapi(document: Document) -> None:
    assert document["openapi"].startswith("3.1.")
    schemathesis.openapi.from_dict(document).validate()


async def test_a_document_that_is_not_openapi_is_seen(document: Document) -> None:
    broken = copy.deepcopy(document)
    del broken["info"]["title"]
    with pytest.raises(jsonschema_rs.ValidationError, match="title"):
        schemathesis.openapi.from_dict(broken).validate()


async def test_every_schema_is_one(document: Document) -> None:
    schemas = document["components"]["schemas"]
    assert len(schemas) >= 25
    for schema in schemas.values():
        jsonschema_rs.meta.validate({"$schema": DIALECT, **schema})
    with pytest.raises(jsonschema_rs.ValidationError, match="objekt"):
        jsonschema_rs.meta.validate({"$schema": DIALECT, "type": "objekt"})


async def test_document_and_addresses_agree(app: FastAPI, document: Document) -> None:
    routed = {
        (route.path, method.lower())
        for route in app.router.routes
        if isinstance(route, Route)
        for method in route.methods or ()
    }
    # A socket has no method; what is sent over it is told at the address below.
    others = [route for route in app.router.routes if not isinstance(route, Route)]
    paths = [getattr(route, "path", "") for route in others]
    assert paths == ["/v1/arms/{arm}/joints/socket", "/{path:path}"]
    said = {(path, method) for path, method, _ in operations_of(document)}
    assert {path for path, _ in routed - said} == PAGES
    assert said <= routed
    assert {method for _, method in said} <= ASKING
    assert len(said) >= 20


async def test_no_address_is_registered_twice(app: FastAPI) -> None:
    calls = [
        (route.path, method)
        for route in app.router.routes
        if isinstance(route, Route)
        for method in route.methods or ()
    ]
    assert len(calls) == len(set(calls))


async def test_every_parameter_said_is_known(
    app: FastAPI, document: Document, client: httpx.AsyncClient
) -> None:
    """A parameter that the document tells of is never refused as unknown, nor is one untold."""
    app.state.streams.stop()  # each ends at once
    count = 0
    for path, method, operation in operations_of(document):
        if method != "get":
            continue
        said = [each["name"] for each in operation.get("parameters", ()) if each["in"] == "query"]
        url = path.replace("{arm}", "no-such-arm").replace("{n}", "1")
        for name in said:
            answer = await client.get(url, params={name: "x"})
            count += 1
            told = answer.json() if answer.headers["content-type"].endswith("json") else {}
            assert told.get("code") != "unknown-field", (path, name)
    assert count >= 50


async def test_every_code_is_documented(document: Document, client: httpx.AsyncClient) -> None:
    properties = document["components"]["schemas"]["Problem"]["properties"]
    assert set(properties["code"]["enum"]) == set(KINDS)
    assert set(properties["number"]["enum"]) == {kind.number for kind in KINDS.values()}
    page = (await client.get("/docs/problems")).text
    for code, kind in KINDS.items():
        assert re.search(rf'<tr id="{code}"><td>{code}</td><td>{kind.number}</td>', page)
    for number in ANSWERS:
        assert f'<tr id="code-{number}"' in page
    told = {
        (int(status), code)
        for _, _, operation in operations_of(document)
        for status, response in operation["responses"].items()
        if status >= "400"
        for code in re.findall(r"[a-z]+(?:-[a-z]+)*", response["description"].split(":", 1)[-1])
    }
    # Of an address or a method that is not there no address can tell.
    elsewhere = {"unknown-path", "method-not-allowed"}
    for code, kind in KINDS.items():
        assert (kind.status, code) in told or code in elsewhere, code


async def test_examples_are_there_and_fit_their_schemas(document: Document) -> None:
    count = 0
    for path, method, operation in operations_of(document):
        computes = path.endswith(("/pose", "/jacobian", "/relation", "/reach"))
        computes |= path.startswith("/v1/rotations")
        asked_by_body = ("/v1/poses", "/v1/jacobians", "/v1/tables/conversions", "/v1/frames")
        computes |= path in ("/v1/reach/checks", "/v1/reach/travels")
        computes |= method == "post" and path in asked_by_body
        if computes and method != "head":
            assert any(content.get("examples") for content in contents_of(operation)), path
        for content in contents_of(operation):
            for name, example in content.get("examples", {}).items():
                assert example["summary"]
                whole = {**content["schema"], "components": document["components"]}
                errors = list(jsonschema_rs.iter_errors(whole, example["value"]))
                assert errors == [], f"{method} {path} {name}: {errors[:1]}"
                count += 1
    assert count >= 30


async def test_an_example_that_does_not_fit_is_seen(document: Document) -> None:
    content = document["paths"]["/v1/poses"]["post"]["requestBody"]["content"]["application/json"]
    whole = {**content["schema"], "components": document["components"]}
    example = next(iter(content["examples"].values()))["value"]
    assert jsonschema_rs.is_valid(whole, example)
    assert not jsonschema_rs.is_valid(whole, {**example, "joints": "0,0"})
    assert not jsonschema_rs.is_valid(whole, {**example, "jonits": [[0]]})


async def test_who_may_call_is_said(document: Document) -> None:
    for path, method, operation in operations_of(document):
        small = path.endswith(("/pose", "/jacobian", "/relation", "/reach")) or path == "/v1/ping"
        small |= path.endswith(("/joints", "/{arm}/live"))
        small |= path == "/v1/rotations" and method in ("get", "head")
        assert operation["x-for-controllers"] is small, path


async def test_an_arm_may_be_created_by_put(document: Document) -> None:
    answers = document["paths"]["/v1/arms/{arm}"]["put"]["responses"]
    assert answers["200"] == answers["201"]


async def test_a_flat_refusal_is_documented(document: Document) -> None:
    for path, statuses in {
        "/v1/arms/{arm}/pose": ("400", "404", "409", "422", "503"),
        "/v1/arms/{arm}/jacobian": ("400", "404", "409", "422", "503"),
        "/v1/arms/{arm}/relation": ("400", "404", "409", "422", "503"),
        "/v1/arms/{arm}/reach": ("400", "404", "409", "422", "503"),
        "/v1/rotations": ("400", "422", "503"),
    }.items():
        answers = document["paths"][path]["get"]["responses"]
        for status in statuses:
            assert "application/json" in answers[status]["content"]
