"""What is around every answer: its request id, security headers, metrics, the last resort.

Left out: refusals that handlers raise on purpose (``refusals.py``); nothing here reads a body.
"""

import asyncio
import logging
import re
import secrets
from collections.abc import Callable, Iterable
from time import perf_counter

from starlette.requests import ClientDisconnect
from starlette.types import ASGIApp, Message, Receive, Scope, Send

from service.errors import NotAvailable
from service.metrics import Metrics
from service.problems import problem_of
from service.wire.answers import json_problem

_LOG = logging.getLogger(__name__)

# W3C Trace Context, level 1: version, trace id, parent id, flags. A later version may append.
_TRACEPARENT = re.compile(r"([0-9a-f]{2})-([0-9a-f]{32})-([0-9a-f]{16})-[0-9a-f]{2}(-.*)?")
_ABSOLUTE = re.compile(r"https?://[^/]*", re.IGNORECASE)
_SECURITY_HEADERS = (
    (b"x-content-type-options", b"nosniff"),
    (b"referrer-policy", b"no-referrer"),
    (
        b"content-security-policy",
        b"default-src 'self'; base-uri 'none'; form-action 'self'; frame-ancestors 'self'",
    ),
)


class Envelope:
    """ASGI middleware, outermost of the app.

    Parameters
    ----------
    app : what is inside.
    metrics : where answers are counted.
    crowded : asked before each request whether there are too many connections to take it.
    """

    def __init__(self, app: ASGIApp, *, metrics: Metrics, crowded: Callable[[], bool]) -> None:
        self._app = app
        self._metrics = metrics
        self._crowded = crowded

    async def __call__(self, scope: Scope, receive: Receive, send: Send) -> None:
        """Answer one request; other kinds of connection pass through."""
        if scope["type"] != "http":
            await self._app(scope, receive, send)
            return
        _in_origin_form(scope)
        request_id = _request_id(scope["headers"])
        scope.setdefault("state", {})["request_id"] = request_id
        started = perf_counter()
        status = 0

        async def send_dressed(message: Message) -> None:
            nonlocal status
            if message["type"] == "http.response.start":
                status = message["status"]
                message["headers"] = _dressed(message.get("headers", ()), request_id)
            await send(message)

        with self._metrics.open_requests.track_inprogress():
            try:
                await self._answer(scope, receive, send_dressed)
            except ClientDisconnect:
                _LOG.info("%s: the client left before it was answered", request_id)
            except asyncio.CancelledError:
                # Only a server that stops cancels a request, and it does not ask what became of it.
                if status:
                    return
                stopping = NotAvailable("the service is stopping", headers=_AGAIN_ELSEWHERE)
                answer = json_problem(problem_of(stopping), request_id)
                await answer(scope, receive, send_dressed)
            except Exception as error:
                _LOG.exception("request %s failed", request_id)
                if status:
                    raise
                await json_problem(problem_of(error), request_id)(scope, receive, send_dressed)
        route = getattr(scope.get("route"), "path", "none")
        self._metrics.answered(route, scope["method"], status, perf_counter() - started)

    async def _answer(self, scope: Scope, receive: Receive, send: Send) -> None:
        if self._crowded():
            full = NotAvailable("too many connections", headers=_AGAIN_ELSEWHERE)
            answer = json_problem(problem_of(full), scope["state"]["request_id"])
            await answer(scope, receive, send)
            return
        await self._app(scope, receive, send)


_AGAIN_ELSEWHERE = {"Retry-After": "2", "Connection": "close"}


def _request_id(headers: Iterable[tuple[bytes, bytes]]) -> str:
    """Return the trace id of a valid ``traceparent``, else a new one of the same form."""
    given = [value for name, value in headers if name == b"traceparent"]
    found = _TRACEPARENT.fullmatch(given[0].decode("latin-1")) if len(given) == 1 else None
    if found is not None:
        version, trace_id, parent_id, more = found.groups()
        is_allowed = version != "ff" and not (version == "00" and more)
        if is_allowed and trace_id.strip("0") and parent_id.strip("0"):
            return trace_id
    return new_request_id()


def new_request_id() -> str:
    """Return a request id for a request that brought none."""
    return secrets.token_hex(16)


def _in_origin_form(scope: Scope) -> None:
    """Take scheme and host off a target that is a whole address (RFC 9112, 3.2.2)."""
    found = _ABSOLUTE.match(scope["path"])
    if found is not None:
        scope["path"] = scope["path"][found.end() :] or "/"
        raw = scope.get("raw_path", b"").decode("latin-1")
        scope["raw_path"] = (_ABSOLUTE.sub("", raw) or "/").encode("latin-1")


def _dressed(headers: Iterable[tuple[bytes, bytes]], request_id: str) -> list[tuple[bytes, bytes]]:
    dressed = list(headers)
    present = {name.lower() for name, _ in dressed}
    # A page may bring a policy of its own; the rest is the same everywhere.
    dressed += [(name, value) for name, value in _SECURITY_HEADERS if name not in present]
    dressed.append((b"x-request-id", request_id.encode("ascii")))
    return dressed
