"""The HTTP parser's own refusal in our form: what it cannot read gets a problem of a fixed length.

Left out: everything it can read, which the app answers.
"""

import asyncio
from typing import Any

import h11
from uvicorn.protocols.http.h11_impl import H11Protocol

from service.envelope import new_request_id
from service.errors import Unparseable
from service.problems import MEDIA_TYPE, problem_of
from service.wire.answers import json_bytes

_CAN_ANSWER = (h11.IDLE, h11.SEND_RESPONSE)


class _Uncopied(h11.Connection):
    """A connection that passes bodies on as they are; they would be copied once more."""

    def send(self, event: h11.Event) -> bytes | None:  # type: ignore[override]
        """Return what is to be sent for an event, None where the connection is to be closed."""
        parts = self.send_with_data_passthrough(event)
        if parts is None:
            return None
        return parts[0] if len(parts) == 1 else b"".join(parts)


class FixedLengthH11(H11Protocol):
    """The server's protocol; it would send chunks to a client whose request it cannot read.

    Handlers find the connection itself as ``state.connection``: a stream of events has to cut one
    that takes nothing any more.
    """

    def connection_made(self, transport: asyncio.Transport) -> None:  # type: ignore[override]
        """Begin as the base does, and keep the connection for handlers."""
        super().connection_made(transport)
        self.app_state = {**self.app_state, "connection": transport}

    def __init__(self, *args: Any, **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self.conn = _Uncopied(h11.SERVER)

    def send_400_response(self, msg: str) -> None:
        """Send the problem document and close; ``msg`` says nothing that helps."""
        if self.conn.our_state in _CAN_ANSWER:
            error = Unparseable(
                "this is no HTTP request",
                location="header",
                way_out="write a blank within the address as %20, and end the head with an empty "
                "line",
            )
            request_id = new_request_id()
            body = json_bytes(problem_of(error).document(request_id))
            headers = {
                "content-type": MEDIA_TYPE,
                "content-length": str(len(body)),
                "connection": "close",
                "x-content-type-options": "nosniff",
                "x-request-id": request_id,
            }
            response = h11.Response(
                status_code=400, headers=list(headers.items()), reason=b"Bad Request"
            )
            for event in (response, h11.Data(data=body), h11.EndOfMessage()):
                self.transport.write(self.conn.send(event) or b"")
        self.transport.close()
