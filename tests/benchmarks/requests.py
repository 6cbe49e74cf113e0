"""One question at a time over HTTP against FastAPI's own hello-world: ratios in one run.

`python tests/benchmarks/requests.py`. Both run as real servers with the same middleware and the
same server options; one client on one kept connection takes turns between them.
"""

import json
import os
import signal
import socket
import statistics
import subprocess
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from tempfile import TemporaryDirectory
from time import perf_counter, sleep

ROUNDS = 40
REQUESTS = 50
HERE = Path(__file__).resolve()
DEMO_ARM = "housing-loader"
POSTURE = "0,-30,60,20,45,10"

HELLO = """
import asyncio, itertools, sys
from fastapi import FastAPI
from pydantic import BaseModel
from service import server
from service.envelope import Envelope
from service.metrics import Metrics
from service.settings import Settings

class Hello(BaseModel):
    message: str

def create_app(settings):
    app = FastAPI(redirect_slashes=False)
    app.state.sequence = itertools.count(1)

    @app.get("/", response_model=Hello)
    async def hello():
        return Hello(message="hello world")

    app.add_middleware(Envelope, metrics=Metrics(), crowded=lambda: False)
    return app

server.create_app = create_app
server._start_text = lambda app, listener: "listening"
server.run(Settings.from_environment({"port": sys.argv[1]}))
"""


def free_port() -> int:
    """Return a port that was free a moment ago."""
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        port: int = probe.getsockname()[1]
        return port


@contextmanager
def running(*arguments: str) -> Iterator[None]:
    """Run a server process until the block ends."""
    process = subprocess.Popen(
        [sys.executable, *arguments], cwd=HERE.parents[2], stdout=subprocess.DEVNULL
    )
    try:
        yield
    finally:
        process.send_signal(signal.SIGTERM)
        process.wait(10)


class Connection:
    """One kept connection."""

    def __init__(self, port: int) -> None:
        for _ in range(400):
            try:
                self.socket = socket.create_connection(("127.0.0.1", port))
                break
            except OSError:
                sleep(0.05)
        self.socket.setsockopt(socket.IPPROTO_TCP, socket.TCP_NODELAY, 1)

    def ask(self, method: str, target: str, body: bytes = b"") -> bytes:
        """Send one request and return the whole answer's body."""
        kind = b"Content-Type: application/json\r\n" if body else b""
        head = f"{method} {target} HTTP/1.1\r\nHost: x\r\nContent-Length: {len(body)}\r\n"
        self.socket.sendall(head.encode() + kind + b"\r\n" + body)
        received = b""
        while b"\r\n\r\n" not in received:
            received += self.socket.recv(65536)
        header, _, answer = received.partition(b"\r\n\r\n")
        assert header.startswith(b"HTTP/1.1 200"), received
        length = int(header.lower().split(b"content-length:")[1].split(b"\r\n")[0])
        while len(answer) < length:
            answer += self.socket.recv(65536)
        return answer


def times(connection: Connection, method: str, target: str, body: bytes = b"") -> list[float]:
    """Return the seconds that each of a batch of questions took."""
    taken = []
    for _ in range(REQUESTS):
        started = perf_counter()
        connection.ask(method, target, body)
        taken.append(perf_counter() - started)
    return taken


def main() -> None:
    """Print every ratio."""
    ours, theirs = free_port(), free_port()
    with TemporaryDirectory() as folder:
        service = ("-m", "service", "serve", "--demo", "--port", str(ours))
        with (
            running(*service, "--database", os.path.join(folder, "arms.db")),
            running("-c", HELLO, str(theirs)),
        ):
            arms, hello = Connection(ours), Connection(theirs)
            stored = json.loads(arms.ask("GET", f"/v1/arms/{DEMO_ARM}"))["arm"]
            posture = [float(value) for value in POSTURE.split(",")]
            body = json.dumps({"arm": stored, "joints": [posture]}).encode()
            pose = f"/v1/arms/{DEMO_ARM}/pose?q={POSTURE}"
            questions = {
                "GET pose, flat, with singularity": ("GET", f"{pose}&format=flat", b""),
                "GET pose, json, with singularity": ("GET", pose, b""),
                "POST poses, one inline arm": ("POST", "/v1/poses", body),
            }
            for question in questions.values():
                times(arms, *question)
            taken: dict[str, list[float]] = {name: [] for name in (*questions, "hello")}
            for _ in range(ROUNDS):
                taken["hello"] += times(hello, "GET", "/")
                for name, question in questions.items():
                    taken[name] += times(arms, *question)
    yard = taken.pop("hello")
    print(f"hello-world with response model: median {statistics.median(yard) * 1e6:.0f} us")
    yard_99 = statistics.quantiles(yard, n=100)[98]
    for name, mine in taken.items():
        share = statistics.median(yard) / statistics.median(mine)
        late = statistics.quantiles(mine, n=100)[98] / yard_99
        print(f"{name}: {share:.2f} of hello-world's rate, p99 {late:.2f} times")


if __name__ == "__main__":
    main()
