"""One shape of refusal on every route, whatever is wrong with the request.

Left out: which values an address refuses; the tests of each address hold that.
"""

import logging
import re
from collections.abc import Iterator
from typing import Any

import httpx
import pytest
from fastapi import FastAPI
from fastapi.routing import APIRoute

from service.app import ROUTERS
from service.errors import StorageUnavailable
from service.problems import KINDS
from service.web.document import KEY

pytestmark = pytest.mark.anyio

ROUTES = [route for router in ROUTERS for route in router.routes if isinstance(route, APIRoute)]
ARM = {
    "name": "shelf-arm",
    "title": "One turning joint, made up",
    "convention": "standard",
    "units": "mm-deg",
    "rows": [{"joint": "revolute", "a": 100, "alpha": 0, "d": 0, "theta": 0}],
}
CELL = {"name": "press-cell", "units": "mm-deg"}
TRACE = "4bf92f3577b34da6a3ce929d0e0e4736"
TRACEPARENT = f"00-{TRACE}-00f067aa0ba902b7-01"


def calls() -> Iterator[tuple[str, str]]:
    for route in ROUTES:
        for method in sorted((route.methods or set()) - {"HEAD"}):
            yield method, route.path


def calls_with_body() -> Iterator[tuple[str, str]]:
    for route in ROUTES:
        said = (route.openapi_extra or {}).get(KEY)
        if said is not None and said.request is not None:
            for method in sorted(route.methods or ()):
                yield method, route.path


def calls_without_a_body() -> Iterator[tuple[str, str]]:
    for route in ROUTES:
        said = (route.openapi_extra or {}).get(KEY)
        if said is not None and said.request is not None and not said.request_required:
            for method in sorted(route.methods or ()):
                yield method, route.path


CALLS = sorted(set(calls()))
CALLS_WITH_BODY = sorted(set(calls_with_body()))
MAY_HAVE_NO_BODY = set(calls_without_a_body())
PATHS = sorted({path for _, path in CALLS})
# For people: what a viewer chose stands in their query, and a wrong name is told on a page.
SCREENS = {"/", *(f"/arms/{{arm}}{end}" for end in ("", "/", "/reach", "/reach/"))}


def filled(path: str, arm: str = ARM["name"]) -> str:  # type: ignore[assignment]
    names = {"arm": arm, "cell": CELL["name"], "n": "1", "name": "pages.css", "survey": "0" * 20}
    names["record"] = "0" * 20
    return path.format(**names)


def checked(answer: httpx.Response) -> dict[str, Any]:
    """Return the problem document of an answer after holding its shape."""
    assert answer.headers["content-type"] == "application/problem+json"
    assert answer.headers["content-length"] == str(len(answer.content))
    document: dict[str, Any] = answer.json()
    names = ["type", "title", "status", "detail", "code", "number", "errors", "request_id"]
    assert list(document) == names
    kind = KINDS[document["code"]]
    assert document["type"] == f"/docs/problems#{document['code']}"
    assert (document["title"], document["number"]) == (kind.title, kind.number)
    assert document["status"] == answer.status_code
    assert document["detail"]
    assert document["request_id"] == answer.headers["x-request-id"]
    assert len(document["request_id"]) == 32
    for entry in document["errors"]:
        assert list(entry) == ["pointer", "in", "say", "value", "way_out"]
        assert entry["in"] in {"body", "query", "path", "header"}
        assert entry["pointer"] == "" or entry["pointer"].startswith("/")
        assert entry["say"]
    return document


@pytest.fixture
async def stocked(client: httpx.AsyncClient) -> httpx.AsyncClient:
    """A client of a service that holds one arm and one cell."""
    for path, document in (("/v1/arms", ARM), ("/v1/cells", CELL)):
        answer = await client.post(path, json=document)
        assert answer.status_code == 201
    return client


def test_all_routes_are_here() -> None:
    assert len(CALLS) >= 15
    assert len(CALLS_WITH_BODY) >= 2


@pytest.mark.parametrize("path", PATHS)
async def test_another_method_is_refused_with_those_allowed(
    stocked: httpx.AsyncClient, path: str
) -> None:
    answer = await stocked.request("PATCH", filled(path))
    assert checked(answer)["code"] == "method-not-allowed"
    methods = {method for route in ROUTES if route.path == path for method in route.methods or ()}
    assert answer.headers["allow"] == ", ".join(sorted(methods))


@pytest.mark.parametrize(("method", "path"), [call for call in CALLS if call[1] not in SCREENS])
async def test_an_unknown_parameter_is_refused(
    stocked: httpx.AsyncClient, method: str, path: str
) -> None:
    headers = {"traceparent": TRACEPARENT, "if-match": "*"}
    body = {"json": {}} if (method, path) in CALLS_WITH_BODY else {}
    url = f"{filled(path)}?no_such=1"
    document = checked(await stocked.request(method, url, headers=headers, **body))
    assert (document["code"], document["status"]) == ("unknown-field", 422)
    assert document["request_id"] == TRACE
    entry = document["errors"][0]
    assert (entry["pointer"], entry["in"], entry["value"]) == ("/no_such", "query", "1")


@pytest.mark.parametrize(("method", "path"), CALLS_WITH_BODY)
@pytest.mark.parametrize(
    ("content", "content_type", "code", "status"),
    [
        (b"{}", "text/plain", "wrong-media-type", 415),
        (b"{}", None, "wrong-media-type", 415),
        (b"", "application/json", "unparseable", 400),
        (b"{", "application/json", "unparseable", 400),
        (b"\xff{}", "application/json", "unparseable", 400),
        (b"[" * 100_000, "application/json", "unparseable", 400),
        (b'{"a": 1, "a": 1}', "application/json", "duplicate-key", 400),
        (b"[]", "application/json", "unusable-value", 422),
        (b"null", "application/json", "unusable-value", 422),
        (b'{"no_such": 1}', "application/json", "unknown-field", 422),
    ],
    ids=["text", "untyped", "empty", "open", "no-utf8", "deep", "twice", "list", "null", "unknown"],
)
async def test_a_body_that_is_wrong_is_refused(
    stocked: httpx.AsyncClient,
    method: str,
    path: str,
    content: bytes,
    content_type: str | None,
    code: str,
    status: int,
) -> None:
    headers = {"if-match": "*"} | ({} if content_type is None else {"content-type": content_type})
    answer = await stocked.request(method, filled(path), content=content, headers=headers)
    document = checked(answer)
    if not content and (method, path) in MAY_HAVE_NO_BODY:
        # Nothing is wrong with that, but all else is missing.
        assert document["status"] in (409, 422)
        return
    assert (document["code"], document["status"]) == (code, status)
    if code == "unknown-field":
        assert document["errors"][0]["pointer"] == "/no_such"
    # No words of the program that answers.
    assert "instance of" not in document["detail"]


@pytest.mark.parametrize(
    ("method", "path"),
    [
        (method, path)
        for method, path in CALLS
        if ("{arm}" in path or "{cell}" in path) and method in ("GET", "DELETE")
        if path not in SCREENS
    ],
)
async def test_an_unknown_arm_or_cell_in_the_path_is_not_found(
    stocked: httpx.AsyncClient, method: str, path: str
) -> None:
    url = filled(path.replace("{cell}", "{arm}"), "no-such-name")
    asked = {"pose": "?q=0", "jacobian": "?q=0", "relation": "?q=0&of=flange&in=base"}
    url += asked.get(path.rpartition("/")[2], "")
    answer = await stocked.request(method, url, headers={"if-match": "*"})
    document = checked(answer)
    assert (document["code"], document["status"]) == ("unknown-arm", 404)


@pytest.mark.parametrize("path", ["/nowhere", "/v1", "/v1/arms/", "/v1/ping/", "/docs/", "//"])
async def test_no_such_address_and_no_redirect(client: httpx.AsyncClient, path: str) -> None:
    answer = await client.get(f"http://armspan.test{path}")
    assert checked(answer)["code"] == "unknown-path"


async def test_the_nearest_address_is_the_way_out(client: httpx.AsyncClient) -> None:
    document = checked(await client.get("/v1/pin"))
    assert document["errors"][0]["way_out"] == 'did you mean "/v1/ping"?'


async def test_addresses_are_offered_once_each(client: httpx.AsyncClient) -> None:
    (entry,) = checked(await client.get("/nowhere/at/all"))["errors"]
    offered = entry["way_out"].removeprefix("known here: ").split(", ")
    assert {"/v1/arms", "/v1/poses", "/v1/jacobians", "/docs"} <= set(offered)
    assert len(offered) == len(set(offered))


async def test_numbered_names_are_offered_as_a_range(stocked: httpx.AsyncClient) -> None:
    (path,) = [filled(path) for path in PATHS if path.endswith("/pose")]
    (entry,) = checked(await stocked.get(path, params={"zzzzzz": "1"}))["errors"]
    assert "q1 ... q32" in entry["way_out"].split(", ")
    assert "q2," not in entry["way_out"]
    assert len(entry["way_out"]) <= 200


@pytest.mark.parametrize("path", ["/v1/poses", "/v1/jacobians"])
async def test_beside_a_json_body_only_its_own_parameters_are_offered(
    client: httpx.AsyncClient, path: str
) -> None:
    for wrong, way_out in (
        ("x", "known here: format, tag"),
        ("formt", 'did you mean "format"?'),
        ("unit", "known here: format, tag"),
        ("units", 'say "units" in the body'),
    ):
        answer = await client.post(path, params={wrong: "1"}, json={"arm": "a", "joints": []})
        (entry,) = checked(answer)["errors"]
        assert (entry["pointer"], entry["in"]) == (f"/{wrong}", "query")
        assert entry["way_out"] == way_out


@pytest.mark.parametrize(
    "given",
    [
        "",
        "x",
        f"ff-{TRACE}-00f067aa0ba902b7-01",
        f"00-{'0' * 32}-00f067aa0ba902b7-01",
        f"00-{TRACE}-{'0' * 16}-01",
        f"00-{TRACE.upper()}-00f067aa0ba902b7-01",
        f"00-{TRACE}-00f067aa0ba902b7-01-more",
    ],
)
async def test_an_invalid_trace_is_not_taken(client: httpx.AsyncClient, given: str) -> None:
    answers = [await client.get("/livez", headers={"traceparent": given}) for _ in range(2)]
    ids = {answer.headers["x-request-id"] for answer in answers}
    assert len(ids) == 2
    assert not ids & {TRACE, TRACE.upper(), "0" * 32}


async def test_a_later_trace_version_may_append(client: httpx.AsyncClient) -> None:
    answer = await client.get("/livez", headers={"traceparent": f"01{TRACEPARENT[2:]}-more"})
    assert answer.headers["x-request-id"] == TRACE


@pytest.mark.parametrize("path", PATHS)
async def test_every_answer_is_dressed(app: FastAPI, stocked: httpx.AsyncClient, path: str) -> None:
    # A stream would go on for ever; those of a service that stops end at once.
    app.state.streams.stop()
    for url in (filled(path), "/nowhere"):
        headers = (await stocked.get(url)).headers
        assert headers["x-content-type-options"] == "nosniff"
        assert headers["referrer-policy"] == "no-referrer"
        assert re.match("default-src '(self|none)'; ", headers["content-security-policy"])
        assert "unsafe" not in headers["content-security-policy"]
        assert len(headers["x-request-id"]) == 32


async def test_a_failure_tells_nothing_but_its_id(
    app: FastAPI, client: httpx.AsyncClient, caplog: pytest.LogCaptureFixture
) -> None:
    app.state.arms = "no store"
    with caplog.at_level(logging.ERROR):
        document = checked(await client.get("/v1/arms", headers={"traceparent": TRACEPARENT}))
    assert (document["code"], document["status"], document["errors"]) == ("internal", 500, [])
    assert "str" not in document["detail"]
    assert TRACE in caplog.text
    assert "AttributeError" in caplog.text


async def test_a_database_that_fails_says_when_to_ask_again(
    app: FastAPI, stocked: httpx.AsyncClient
) -> None:
    with app.state.storage._engine.connect() as connection:
        connection.exec_driver_sql("DROP TABLE document_heads")
        connection.commit()
    asked = {"arm": "other-arm", "joints": [[0]]}
    for method, path, body in (
        ("GET", "/v1/arms", None),
        ("GET", "/v1/arms/other-arm", None),
        ("GET", "/v1/arms/other-arm/pose?q1=0", None),
        ("POST", "/v1/arms", {**ARM, "name": "other-arm"}),
        ("POST", "/v1/poses", asked),
        ("POST", "/v1/jacobians", asked),
    ):
        answer = await stocked.request(method, path, json=body)
        document = checked(answer)
        assert (document["code"], document["status"]) == ("not-available", 503)
        assert answer.headers["retry-after"] == "5"


async def test_a_silent_database_is_not_available(app: FastAPI, client: httpx.AsyncClient) -> None:
    class Silent:
        def ping(self) -> None:
            raise StorageUnavailable("the database does not answer", headers={"Retry-After": "2"})

    assert (await client.get("/readyz")).json() == {"state": "ready"}
    app.state.storage = Silent()
    answer = await client.get("/readyz")
    assert checked(answer)["code"] == "not-available"
    assert (answer.status_code, answer.headers["retry-after"]) == (503, "2")
    assert (await client.get("/livez")).status_code == 200
    assert (await client.get("/v1/ping")).status_code == 200
