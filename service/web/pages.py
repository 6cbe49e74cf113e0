"""The documentation as pages: the addresses, and the codes; all files come from this process.

Left out: the OpenAPI document itself (document.py), the frames (page_frames.py), the pages on
screens (screens.py).
"""

from collections.abc import Callable
from functools import cache
from html import escape
from importlib import resources

import orjson
from fastapi import APIRouter
from fastapi.routing import APIRoute
from starlette.requests import Request
from starlette.responses import Response

from service.errors import UnknownPath
from service.problems import ANSWERS, KINDS
from service.web.controllers_page import CLIENTS, client_text, controllers_html
from service.web.document import openapi_document
from service.web.page_answers import page_answer, version_here
from service.web.page_frames import framed
from service.web.screens import page_policy
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
    "docs.css": (_OURS, "text/css"),
    "icon.svg": (_OURS, "image/svg+xml"),
}


@router.api_route("/docs", methods=_READ)
async def docs_page(request: Request) -> Response:
    """Answer the page that lists all addresses."""
    known_parameters(request, ())
    return _shown(request, _docs_html)


@router.api_route("/docs/problems", methods=_READ)
async def problems_page(request: Request) -> Response:
    """Answer the page of all codes."""
    known_parameters(request, ())
    return _shown(request, _problems_html)


@router.api_route("/docs/controllers", methods=_READ)
async def controllers_page(request: Request) -> Response:
    """Answer the page for who programs a controller."""
    known_parameters(request, ())
    return _shown(request, controllers_html)


@router.api_route("/docs/files/{name}", methods=_READ)
async def page_file(request: Request) -> Response:
    """Answer a script or a style sheet of the pages, or a client to take along."""
    known_parameters(request, ())
    name = request.path_params["name"]
    if name in CLIENTS:
        return page_answer(request, client_text(name), "text/plain")
    if name not in _FILES:
        raise UnknownPath("no such file", location="path", value=name)
    package, media_type = _FILES[name]
    return page_answer(request, _file(package, name), media_type)


@router.api_route("/openapi.json", methods=_READ)
async def openapi_json(request: Request) -> Response:
    """Answer the OpenAPI document, built once per app."""
    known_parameters(request, ())
    state = request.app.state
    if not hasattr(state, "openapi_json"):
        routes = [route for route in request.app.router.routes if isinstance(route, APIRoute)]
        state.openapi_json = orjson.dumps(openapi_document(routes, version=version_here()))
    return page_answer(request, state.openapi_json, "application/json")


def _shown(request: Request, page: Callable[[], bytes]) -> Response:
    policy = page_policy(request.app.state.settings.frame_ancestors)
    return page_answer(request, page(), "text/html", policy)


@cache
def _file(package: str, name: str) -> bytes:
    return resources.files(package).joinpath(name).read_bytes()


@cache
def _docs_html() -> bytes:
    return framed(_file(_OURS, "docs.html").decode("utf-8"), "/docs", {})


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
    tables = {"refusals": refusals, "answers": answers}
    return framed(_file(_OURS, "problems.html").decode("utf-8"), "/docs/problems", tables)


def _listed(statuses: tuple[int, ...]) -> str:
    return ", ".join(map(str, statuses))
