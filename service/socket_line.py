"""The server's side of WebSockets, as far as it must be another than the base's.

Left out: what is said over a socket (routes/joints_socket.py).
"""

from typing import Any

from uvicorn.protocols.websockets.websockets_sansio_impl import WebSocketsSansIOProtocol


class RefusingSockets(WebSocketsSansIOProtocol):
    """A socket that may be refused before it is one, with an answer of HTTP and no line in the log.

    The base takes a handshake that was answered with a refusal for one that was forgotten.
    """

    async def send(self, message: Any) -> None:
        """Send as the base does."""
        await super().send(message)
        is_last = not message.get("more_body", False)
        if message["type"] == "websocket.http.response.body" and is_last:
            self.handshake_complete = True
