"""Runs the service on a port: what it says at the start, how it ends, what it does when full.

Left out: TLS, several processes and any proxy in front, which the operator's own means provide.
"""

import asyncio
import gc
import logging
import os
import signal
import socket
import sys
from collections.abc import AsyncIterator, Callable
from contextlib import asynccontextmanager
from types import FrameType

import uvicorn
from fastapi import FastAPI

from service import demo
from service.app import create_app
from service.cautions import NOT_A_SAFETY_FUNCTION
from service.errors import StorageUnavailable, StorageUnusable
from service.http_line import FixedLengthH11
from service.readiness import Readiness
from service.routes.joints_socket import MOST_MESSAGE_BYTES
from service.settings import Settings, unknown_variables
from service.simulation.moving_cell import MovingCell
from service.socket_line import RefusingSockets
from service.web.page_answers import version_here

_SEARCHES_AFTER = (5000, 20, 20)
"""So many new objects before the youngest are searched for garbage, so many searches before older
ones are. Answers leave hardly any that the count of references does not free, and a search of all
holds up every stream by 20 ms: with the usual numbers four times a second."""

_TURN_S = 1e-4
"""After so long a thread lets another have the interpreter. A pose is answered in several turns;
with the usual 5 ms each of them could wait as long for the one that keeps a survey."""

_KEEP_ALIVE_S = 65
# A stop is to be over within a second: requests still open after this are answered 503.
_GRACE_S = 0.25
_LOOPBACK = ("127.", "::1")
_EVERYWHERE = ("0.0.0.0", "::")


class _Server(uvicorn.Server):
    """A server that tells when it listens, and when it is told to end."""

    def __init__(
        self,
        config: uvicorn.Config,
        on_listening: Callable[[], None],
        on_exit: Callable[[], object],
    ) -> None:
        super().__init__(config)
        self._on_listening, self._on_exit = on_listening, on_exit

    async def startup(self, sockets: list[socket.socket] | None = None) -> None:
        """Start as the base does, then tell."""
        await super().startup(sockets)
        self._on_listening()

    def handle_exit(self, sig: int, frame: FrameType | None) -> None:
        """End as the base does; streams do so at once, before it looks for what is still open."""
        super().handle_exit(sig, frame)
        self._on_exit()


def run(settings: Settings) -> int:
    """Serve until a signal ends it; return the exit code: 0, or 1 with one line that says why."""
    gc.set_threshold(*_SEARCHES_AFTER)
    sys.setswitchinterval(_TURN_S)
    # After its clean stop the server raises the signal again; that must not look like a crash.
    signal.signal(signal.SIGTERM, _leave)
    logging.basicConfig(
        level=settings.log_level.upper(), format="%(asctime)s %(levelname)s %(name)s: %(message)s"
    )
    try:
        listener = _bound(settings.host, settings.port)
    except OSError as error:
        return _failed(f"cannot listen on {_url(settings.host, settings.port)}: {_reason(error)}")
    try:
        asyncio.run(_serve(create_app(settings), listener, settings))
    except (StorageUnusable, StorageUnavailable) as error:
        return _failed(f"{error.say}; {error.way_out}" if error.way_out else error.say)
    except OSError as error:
        return _failed(f"cannot serve: {_reason(error)}")
    except KeyboardInterrupt:
        return 0
    finally:
        listener.close()
    return 0


async def _serve(app: FastAPI, listener: socket.socket, settings: Settings) -> None:
    config = uvicorn.Config(
        app,
        # The faster parser sends chunks to HTTP/1.0 clients and refuses bare line feeds.
        http=FixedLengthH11,
        ws=RefusingSockets,
        ws_max_size=MOST_MESSAGE_BYTES,
        # Joint values are short; what is packed could be any size once it is unpacked.
        ws_per_message_deflate=False,
        # Run below instead, so that a store that cannot be opened is one line, no traceback.
        lifespan="off",
        log_config=None,
        access_log=False,
        server_header=False,
        proxy_headers=False,
        timeout_keep_alive=_KEEP_ALIVE_S,
        timeout_graceful_shutdown=_GRACE_S,  # type: ignore[arg-type]
        # Up to `connections` we answer ourselves, in our own form; this is the hard stop.
        limit_concurrency=2 * settings.connections,
    )
    loop, streams = asyncio.get_running_loop(), app.state.streams
    server = _Server(
        config,
        lambda: print(_start_text(app, listener), flush=True),
        lambda: loop.call_soon_threadsafe(streams.stop),
    )
    readiness: Readiness = app.state.readiness
    readiness.prepare()
    app.state.crowded = lambda: len(server.server_state.connections) > settings.connections
    try:
        async with app.router.lifespan_context(app), _demonstration(app):
            await server.serve([listener])
    finally:
        readiness.stop()


@asynccontextmanager
async def _demonstration(app: FastAPI) -> AsyncIterator[None]:
    """Have the demonstration cell move, if that is wanted."""
    state = app.state
    if not state.settings.demo:
        yield
        return
    names = [document["name"] for document in demo.documents()]
    cell = MovingCell(names, state.arms, state.live, state.events.is_looked_at)
    async with cell.moving(state.readiness.postures):
        yield


def _bound(host: str, port: int) -> socket.socket:
    family, kind, protocol, _, address = socket.getaddrinfo(
        host, port, type=socket.SOCK_STREAM, flags=socket.AI_PASSIVE
    )[0]
    listener = socket.socket(family, kind, protocol)
    try:
        if os.name == "posix":
            # Lets a restart take the port at once; on Windows it would let two servers share it.
            listener.setsockopt(socket.SOL_SOCKET, socket.SO_REUSEADDR, 1)
        listener.bind(address)
    except OSError:
        listener.close()
        raise
    return listener


def _start_text(app: FastAPI, listener: socket.socket) -> str:
    host, port = listener.getsockname()[:2]
    state = app.state
    everywhere = host in _EVERYWHERE
    where = f"every address of this machine, port {port}" if everywhere else _url(host, port)
    docs = _url("127.0.0.1", port) if everywhere else _url(host, port)
    notices = list(state.notices)
    if not host.startswith(_LOOPBACK):
        notices.append("reachable from other machines, and it asks nobody for a key")
    notices += [f"{name} means nothing here" for name in unknown_variables()]
    lines = [
        f"Armspan {version_here()} listens on {where}",
        f"  arms    {state.arms.count()} in {state.opened.description}",
        f"  docs    {docs}/docs",
        *(f"  notice  {notice}" for notice in notices),
        NOT_A_SAFETY_FUNCTION,
    ]
    return "\n".join(lines)


def _url(host: str, port: int) -> str:
    return f"http://[{host}]:{port}" if ":" in host else f"http://{host}:{port}"


def _reason(error: OSError) -> str:
    return (error.strerror or str(error)).lower()


def _failed(say: str) -> int:
    print(f"armspan: {say}", file=sys.stderr)
    return 1


def _leave(number: int, frame: FrameType | None) -> None:
    raise SystemExit(0)
