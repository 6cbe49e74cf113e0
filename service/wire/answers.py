"""JSON answers: one printer, a fixed length, problems in their own media type.

Left out: flat lines and tables, and what stands in an answer.
"""

import asyncio
from collections.abc import Mapping, Sequence
from typing import Any

import orjson
from starlette.responses import Response
from starlette.types import Receive, Scope, Send

from kinematics.table import FloatArray
from service.problems import MEDIA_TYPE, Problem

# Statuses after which the rest of a body is unread: the connection cannot be used again.
_CLOSING = frozenset({408, 413})
# A sender that pushes its whole body before it reads would lose the answer to a reset connection,
# so what still comes is read and thrown away for a moment.
_LINGER_S = 5.0
_LINGER_BYTES = 256 * 2**20
_PART_BYTES = 2**20


def json_bytes(content: object) -> bytes:
    """Return ``content`` as UTF-8 JSON: shortest doubles, numpy arrays as lists.

    Examples
    --------
    >>> json_bytes({"x": 0.1})
    b'{"x":0.1}'
    """
    return orjson.dumps(content, option=orjson.OPT_SERIALIZE_NUMPY)


def plain_items(form: str, positions: FloatArray, orientations: FloatArray) -> bytes:
    """Return items that tell a pose and nothing else, with commas between them.

    Numbers are printed from the arrays and put between what all items share; an object for each
    would take as long again.

    Examples
    --------
    >>> import numpy as np
    >>> item = plain_items("rotation-vector", np.array([[0.5, 0, 0]]), np.array([[0, 0, 0.1]]))
    >>> item[17:45], item[45:96]
    (b':0,"position":[0.5,0.0,0.0],', b'"orientation":{"form":"rotation-vector","values":[0')
    """
    if not len(positions):
        return b""
    opened, closed = (b"[[", b"]]") if orientations.ndim == 3 else (b"[", b"]")
    begin = b'{"ok":true,"code":0,"position":['
    middle = b'],"orientation":{"form":"%b","values":%b' % (form.encode("ascii"), opened)
    end = closed + b'},"findings":[]}'
    between = closed + b"," + opened
    inner = len(opened) + 1
    values = json_bytes(orientations)[inner:-inner].split(between)
    places = json_bytes(positions)[2:-2].split(b"],[")
    # All parts joined at once: to put each item together first would copy every byte twice.
    parts = [middle] * (4 * len(places))
    parts[0::4], parts[2::4] = places, values
    parts[3::4] = [end + b"," + begin] * len(places)
    parts[-1] = end
    return begin + b"".join(parts)


def json_answer(
    content: object, status: int = 200, headers: Mapping[str, str] | None = None
) -> Response:
    """Return a JSON answer with a fixed ``Content-Length``."""
    return Response(
        json_bytes(content), status, headers=dict(headers or {}), media_type="application/json"
    )


class FreshAnswer(Response):
    """An answer that is right now and later is not: never to be stored; its few headers ready."""

    def __init__(self, body: bytes, media_type: str) -> None:
        # What the parent does, less the work of joining headers that nobody adds.
        self.status_code, self.media_type, self.background = 200, media_type, None
        self.body = body
        self.raw_headers = [
            (b"cache-control", b"no-store"),
            (b"content-length", b"%d" % len(body)),
            (b"content-type", media_type.encode("latin-1")),
        ]


class PartsAnswer(Response):
    """An answer in parts that are there already, sent one by one with a fixed length.

    Sent as one, a long answer would stand in memory a second time until the network takes it.
    """

    def __init__(
        self,
        parts: Sequence[bytes | memoryview],
        *,
        media_type: str,
        headers: Mapping[str, str] | None = None,
    ) -> None:
        length = str(sum(map(len, parts)))
        super().__init__(
            headers={**(headers or {}), "content-length": length, "content-type": media_type}
        )
        self._parts = parts

    async def __call__(self, scope: Scope, receive: Receive, send: Send) -> None:
        """Send the parts, none larger than the network's buffers may wait for."""
        await send(
            {
                "type": "http.response.start",
                "status": self.status_code,
                "headers": self.raw_headers,
            }
        )
        for part in self._parts:
            for begin in range(0, len(part), _PART_BYTES):
                body = memoryview(part)[begin : begin + _PART_BYTES]
                await send({"type": "http.response.body", "body": body, "more_body": True})
        await send({"type": "http.response.body", "body": b"", "more_body": False})


def json_problem(
    problem: Problem, request_id: str, headers: Mapping[str, str] | None = None
) -> Response:
    """Return the problem document as an answer; 408 and 413 end the connection."""
    kind = ClosingAnswer if problem.status in _CLOSING else Response
    return kind(
        json_bytes(problem.document(request_id)),
        problem.status,
        headers={**problem.headers, **(headers or {})},
        media_type=MEDIA_TYPE,
    )


class ClosingAnswer(Response):
    """An answer given before the body was read; it closes the connection without losing itself."""

    def __init__(self, *args: Any, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.headers["connection"] = "close"

    async def __call__(self, scope: Scope, receive: Receive, send: Send) -> None:
        """Send the whole answer, let a hasty sender finish, then end."""
        await send(
            {
                "type": "http.response.start",
                "status": self.status_code,
                "headers": self.raw_headers,
            }
        )
        await send({"type": "http.response.body", "body": self.body, "more_body": True})
        if self.status_code == 413 and not _waits_for_leave(scope):
            await _read_away(receive)
        await send({"type": "http.response.body", "body": b"", "more_body": False})


def _waits_for_leave(scope: Scope) -> bool:
    # With "Expect: 100-continue" the body is not sent before it is asked for.
    return any(name == b"expect" for name, _ in scope["headers"])


async def _read_away(receive: Receive) -> None:
    thrown = 0
    try:
        async with asyncio.timeout(_LINGER_S):
            while thrown < _LINGER_BYTES:
                message = await receive()
                if message["type"] != "http.request" or not message.get("more_body", False):
                    return
                thrown += len(message.get("body", b""))
    except (TimeoutError, asyncio.CancelledError):
        # Also when the server stops: the answer is out, what follows only ends it.
        return
