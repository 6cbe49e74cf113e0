"""The pages for people: the addresses, and the codes; all files come from this process.

Left out: the OpenAPI document itself (``document.py``).
"""

import hashlib
from functools import cache
from html import escape
from importlib import resources
from importlib.metadata import PackageNotFoundError, version

import orjson
from fastapi import APIRouter
from fastapi.routing import APIRoute
from starlette.requests import Request
from starlette.responses import Response

from service.cautions import CAUTIONS
from service.errors import UnknownPath
from service.problems import ANSWERS, KINDS
from service.web.controllers_page import CLIENTS, client_text, controllers_html
from service.web.document import openapi_document
from service.wire.preconditions import entity_tag, if_none_match
from service.wire.query import known_parameters

router = APIRouter(include_in_schema=False)
_READ = ["GET", "HEAD"]
_OURS = "service.web.static"
# Only static files are taken from this package; none of its code runs.
_SCRIPTS = "fastapi_swagger.resources"
_FILES = {
    "swagger-ui-bundle.js": (_SCRIPTS, "text/javascript"),
    "swagger-ui.css": (_SCRIPTS, "text/css"),
    "docs.js": (_OURS, "text/javascript"),
    "pages.css": (_OURS, "text/css"),
    "icon.svg": (_OURS, "image/svg+xml"),
}
# The style sheet carries its icons as data addresses; nothing else needs more than 'self'.
_DOCS_POLICY = {
    "Content-Security-Policy": "default-src 'self'; img-src 'self' data:; base-uri 'none'; "
    "form-action 'self'; frame-ancestors 'self'"
}


@router.api_route("/docs", methods=_READ)
async def docs_page(request: Request) -> Response:
    """Answer the page that lists all addresses."""
    known_parameters(request, ())
    return _answer(request, _docs_html(), "text/html", _DOCS_POLICY)


@router.api_route("/docs/problems", methods=_READ)
async def problems_page(request: Request) -> Response:
    """Answer the page of all codes."""
    known_parameters(request, ())
    return _answer(request, _problems_html(), "text/html")


@router.api_route("/docs/controllers", methods=_READ)
async def controllers_page(request: Request) -> Response:
    """Answer the page for who programs a controller."""
    known_parameters(request, ())
    return _answer(request, controllers_html(), "text/html")


@router.api_route("/docs/files/{name}", methods=_READ)
async def page_file(request: Request) -> Response:
    """Answer a script or a style sheet of the pages, or a client to take along."""
    known_parameters(request, ())
    name = request.path_params["name"]
    if name in CLIENTS:
        return _answer(request, client_text(name), "text/plain")
    if name not in _FILES:
        raise UnknownPath("no such file", location="path", value=name)
    package, media_type = _FILES[name]
    return _answer(request, _file(package, name), media_type)


@router.api_route("/openapi.json", methods=_READ)
async def openapi_json(request: Request) -> Response:
    """Answer the OpenAPI document, built once per app."""
    known_parameters(request, ())
    state = request.app.state
    if not hasattr(state, "openapi_json"):
        routes = [route for route in request.app.router.routes if isinstance(route, APIRoute)]
        state.openapi_json = orjson.dumps(openapi_document(routes, version=version_here()))
    return _answer(request, state.openapi_json, "application/json")


def version_here() -> str:
    """Return the version of the installed distribution, or ``0+source`` in a checkout."""
    try:
        return version("armspan")
    except PackageNotFoundError:
        return "0+source"


def _answer(
    request: Request, content: bytes, media_type: str, headers: dict[str, str] | None = None
) -> Response:
    version = _digest(content)
    kept = {"ETag": entity_tag(version), "Cache-Control": "no-cache", **(headers or {})}
    known = if_none_match(request)
    if known == "*" or version in (known or ()):
        return Response(status_code=304, headers=kept)
    return Response(content, media_type=media_type, headers=kept)


@cache
def _digest(content: bytes) -> str:
    return hashlib.sha256(content).hexdigest()[:16]


@cache
def _file(package: str, name: str) -> bytes:
    return resources.files(package).joinpath(name).read_bytes()


@cache
def _docs_html() -> bytes:
    page = _file(_OURS, "docs.html").decode("utf-8")
    return page.replace("{cautions}", _cautions()).encode("utf-8")


@cache
def _problems_html() -> bytes:
    refusals = "\n".join(
        f'<tr id="{code}"><td>{code}</td><td>{kind.number}</td><td>{_listed(kind.statuses)}</td>'
        f"<td>{escape(kind.title)}</td></tr>"
        for code, kind in sorted(KINDS.items(), key=lambda item: (item[1].number, item[0]))
    )
    answers = "\n".join(
        f'<tr id="code-{number}"><td>{number}</td><td>{escape(meaning)}</td></tr>'
        for number, meaning in ANSWERS.items()
    )
    return _PROBLEMS.format(refusals=refusals, answers=answers, cautions=_cautions()).encode()


def _listed(statuses: tuple[int, ...]) -> str:
    return ", ".join(map(str, statuses))


def _cautions() -> str:
    return "".join(f"<li>{escape(line)}</li>" for line in CAUTIONS)


_PROBLEMS = """<!doctype html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta name="viewport" content="width=device-width, initial-scale=1">
<link rel="icon" href="/docs/files/icon.svg">
<title>Armspan: codes and problems</title>
<link rel="stylesheet" href="/docs/files/pages.css">
</head>
<body>
<h1>Codes and problems</h1>
<p>Texts may change, codes never do. With several codes the highest wins.
<a href="/docs">Addresses</a> · <a href="/docs/controllers">For controllers</a></p>
<h2>Refusals</h2>
<table>
<tr><th>code</th><th>number</th><th>status</th><th>meaning</th></tr>
{refusals}
</table>
<h2>Codes of answers</h2>
<table>
<tr><th>number</th><th>meaning</th></tr>
{answers}
</table>
<footer><ul>{cautions}</ul></footer>
</body>
</html>
"""
