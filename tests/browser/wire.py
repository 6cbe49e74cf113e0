"""A wire before a server that can be cut and mended, as a network is: cheaper than another server.

Idea: bytes are passed on both ways between two sockets; cut, all are closed and nobody listens.
Mended to lead elsewhere it stands for a server that was started anew and knows nothing of before.
Left out: what is said on it.
"""

import socket
import threading
from collections.abc import Iterator
from contextlib import contextmanager, suppress

_PIECE = 65536


class Wire:
    """A port of this machine that leads to another one."""

    def __init__(self, to: int) -> None:
        self._to = to
        self._ends: list[socket.socket] = []
        self.port = 0
        self.mend()

    @property
    def url(self) -> str:
        """The address of what is at the other end."""
        return f"http://127.0.0.1:{self.port}"

    def mend(self, to: int | None = None) -> None:
        """Take connections, at the port that was taken first, and lead them to a port."""
        self._to = to or self._to
        listener = socket.create_server(("127.0.0.1", self.port))
        self.port = listener.getsockname()[1]
        self._ends.append(listener)
        threading.Thread(target=self._accept, args=(listener,), daemon=True).start()

    def cut(self) -> None:
        """Close all connections and take no more."""
        for end in self._ends:
            with suppress(OSError):
                end.shutdown(socket.SHUT_RDWR)
            end.close()
        self._ends.clear()

    def _accept(self, listener: socket.socket) -> None:
        with suppress(OSError):
            while True:
                near, _ = listener.accept()
                far = socket.create_connection(("127.0.0.1", self._to))
                self._ends += [near, far]
                for ends in ((near, far), (far, near)):
                    threading.Thread(target=_pass_on, args=ends, daemon=True).start()


def _pass_on(source: socket.socket, sink: socket.socket) -> None:
    with suppress(OSError):
        while piece := source.recv(_PIECE):
            sink.sendall(piece)
    with suppress(OSError):
        sink.shutdown(socket.SHUT_WR)


@contextmanager
def wire_to(port: int) -> Iterator[Wire]:
    """Lay a wire to a port of this machine, and cut it afterwards."""
    laid = Wire(port)
    try:
        yield laid
    finally:
        laid.cut()
