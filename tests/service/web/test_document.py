"""The OpenAPI document says what the router does, no more and no less."""

from typing import Any

import httpx
import pytest
from fastapi import APIRouter, FastAPI
from fastapi.routing import APIRoute
from pydantic import BaseModel
from starlette.requests import Request
from starlette.responses import Response

from service.web import examples
from service.web.document import documented, openapi_document, parameter

pytestmark = pytest.mark.anyio


class Asked(BaseModel):
    number: float


class Told(BaseModel):
    half: float


async def halve(request: Request) -> Response:
    return Response()


def document_of(path: str, method: str, extra: dict[str, Any] | None) -> dict[str, Any]:
    router = APIRouter()
    router.add_api_route(path, halve, methods=[method], openapi_extra=extra)
    routes = [route for route in router.routes if isinstance(route, APIRoute)]
    return openapi_document(routes, version="1")


def references(node: object) -> set[str]:
    if isinstance(node, dict):
        own = {node["$ref"]} if isinstance(node.get("$ref"), str) else set()
        return own.union(*(references(item) for item in node.values()))
    if isinstance(node, list):
        return set().union(*(references(item) for item in node))
    return set()


async def test_document_and_router_agree(app: FastAPI, client: httpx.AsyncClient) -> None:
    document = (await client.get("/openapi.json")).json()
    said = {(path, method.upper()) for path, item in document["paths"].items() for method in item}
    routed = {
        (route.path, method)
        for route in app.router.routes
        if isinstance(route, APIRoute) and route.include_in_schema
        for method in route.methods or ()
    }
    assert said == routed
    assert len(said) >= 12
    ids = [op["operationId"] for item in document["paths"].values() for op in item.values()]
    assert len(ids) == len(set(ids))


async def test_every_reference_leads_somewhere(client: httpx.AsyncClient) -> None:
    document = (await client.get("/openapi.json")).json()
    found = references(document)
    assert "#/components/schemas/Problem" in found
    for reference in found:
        name = reference.removeprefix("#/components/schemas/")
        assert name in document["components"]["schemas"]


async def test_every_refusal_is_a_problem(client: httpx.AsyncClient) -> None:
    document = (await client.get("/openapi.json")).json()
    refusals = [
        (response, operation["operationId"], status)
        for item in document["paths"].values()
        for operation in item.values()
        for status, response in operation["responses"].items()
        if status >= "400"
    ]
    assert len(refusals) >= 20
    asked_flat = ("pose", "jacobian", "relation", "reach", "rotation", "live")
    flat = {f"{method}-{what}" for method in ("get", "head") for what in asked_flat}
    flat |= {"put-joints", "post-joints"}
    for response, operation, status in refusals:
        media = ["application/problem+json"]
        if operation in flat and status != "500":
            media += ["application/json", "text/plain", "text/csv"]
        assert list(response["content"]) == media


def test_a_body_brings_its_statuses_and_schemas() -> None:
    extra = documented("Halve", "Halves.", request=Asked, answer=Told, statuses=(404,))
    document = document_of("/halves", "POST", extra)
    operation = document["paths"]["/halves"]["post"]
    assert sorted(operation["responses"]) == [
        "200", "400", "404", "408", "413", "415", "422", "500", "503",
    ]  # fmt: skip
    body = operation["requestBody"]["content"]["application/json"]["schema"]
    assert body == {"$ref": "#/components/schemas/Asked"}
    assert {"Asked", "Told", "Problem"} <= set(document["components"]["schemas"])


def test_path_parameters_are_there_unasked() -> None:
    extra = documented("Halve", "Halves.", answer=Told, parameters=[parameter("by", "By what.")])
    operation = document_of("/halves/{arm}", "GET", extra)["paths"]["/halves/{arm}"]["get"]
    assert [(p["name"], p["in"], p["required"]) for p in operation["parameters"]] == [
        ("arm", "path", True),
        ("by", "query", False),
    ]


def test_text_answers_are_text() -> None:
    media = ["application/json", "text/csv"]
    extra = documented("Halve", "Halves.", answer=Told, answer_media=media, controller=True)
    operation = document_of("/halves", "GET", extra)["paths"]["/halves"]["get"]
    content = operation["responses"]["200"]["content"]
    assert content["text/csv"]["schema"] == {"type": "string"}
    assert content["application/json"]["schema"] == {"$ref": "#/components/schemas/Told"}
    assert operation["x-for-controllers"] is True


def test_a_route_that_says_nothing_is_an_error() -> None:
    with pytest.raises(LookupError, match="/halves"):
        document_of("/halves", "GET", None)


def test_examples_are_files(tmp_path: Any, monkeypatch: pytest.MonkeyPatch) -> None:
    (tmp_path / "halves").mkdir()
    text = '{"title": "Four", "request": {"query": {"of": 4}}, "answer": {"half": 2}}'
    (tmp_path / "halves" / "four.json").write_text(text, encoding="utf-8")
    monkeypatch.setattr(examples, "folder", lambda: tmp_path)
    of = parameter("of", "Of what.", {"type": "number"}, example=8)
    extra = documented("Halve", "Halves.", answer=Told, parameters=[of], examples="halves")
    operation = document_of("/halves", "GET", extra)["paths"]["/halves"]["get"]
    case = {"summary": "Four", "value": 4}
    assert operation["parameters"][0]["examples"] == {"four": case}
    content = operation["responses"]["200"]["content"]["application/json"]
    assert content["examples"]["four"]["value"] == {"half": 2}


def test_examples_that_are_not_there_are_an_error(
    tmp_path: Any, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(examples, "folder", lambda: tmp_path)
    extra = documented("Halve", "Halves.", answer=Told, examples="nowhere")
    with pytest.raises(LookupError, match="nowhere"):
        document_of("/halves", "GET", extra)
