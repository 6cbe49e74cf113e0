"""Turns what handlers and the router raise into problem documents.

An address of nothing is told to a person's browser as a page. Left out: failures nobody foresaw;
the envelope answers those.
"""

from http import HTTPStatus
from typing import Any

from fastapi import FastAPI
from pydantic import ValidationError
from starlette.exceptions import HTTPException
from starlette.requests import Request
from starlette.responses import Response
from starlette.routing import Match

from kinematics.errors import KinematicsError
from kinematics.known_names import way_out_of_unknown
from service.errors import MethodNotAllowed, ServiceError, TooLarge, UnknownPath, Unparseable
from service.problems import Problem, problem_of
from service.web.screens import is_for_people, no_such_page
from service.wire.answers import json_problem


def add_refusals(app: FastAPI) -> None:
    """Let ``app`` answer every refusal as RFC 9457 has it."""
    for kind in (ServiceError, KinematicsError, ValidationError):
        app.add_exception_handler(kind, _refuse)
    app.add_exception_handler(HTTPException, _refuse_routing)


def problem_at(request: Request, error: Exception) -> Problem:
    """Return the problem of ``error`` with pointers into this request.

    For a handler that answers refusals in another form than JSON.
    """
    location: Any = "query" if request.method in ("GET", "HEAD") else "body"
    body = getattr(request.state, "json_body", ...)
    return problem_of(error, location=location, body=body)


async def _refuse(request: Request, error: Exception) -> Response:
    return json_problem(problem_at(request, error), request.state.request_id)


async def _refuse_routing(request: Request, error: Exception) -> Response:
    assert isinstance(error, HTTPException)
    is_nowhere = error.status_code == HTTPStatus.NOT_FOUND
    if is_nowhere and is_for_people(request):
        answer = no_such_page(request)
    else:
        answer = json_problem(problem_of(_meant(request, error)), request.state.request_id)
    if is_nowhere:
        answer.headers.add_vary_header("Accept")
    return answer


def _meant(request: Request, error: HTTPException) -> Exception:
    path = request.url.path
    if error.status_code == HTTPStatus.NOT_FOUND:
        return UnknownPath(
            "no such address",
            location="path",
            value=path,
            way_out=way_out_of_unknown(path, _plain_paths(request)),
        )
    if error.status_code == HTTPStatus.METHOD_NOT_ALLOWED:
        allowed = ", ".join(_methods_at(request))
        return MethodNotAllowed(
            f"{request.method[:20]} is not for this address",
            location="path",
            value=path,
            way_out=f"use {allowed}",
            headers={"Allow": allowed},
        )
    if error.status_code == HTTPStatus.REQUEST_ENTITY_TOO_LARGE:
        return TooLarge(str(error.detail))
    if error.status_code < 500:
        return Unparseable(str(error.detail), status=error.status_code)
    return error


def _methods_at(request: Request) -> list[str]:
    """Return all methods of an address; the router knows only those of the first route there."""
    methods: set[str] = set()
    for route in request.app.router.routes:
        match, _ = route.matches(request.scope)
        if match is not Match.NONE:
            methods.update(getattr(route, "methods", None) or ())
    return sorted(methods)


def _plain_paths(request: Request) -> list[str]:
    # An address has a route for each of its methods.
    paths = {getattr(route, "path", "") for route in request.app.router.routes}
    return [path for path in paths if path and "{" not in path and not path.startswith("/docs/")]
