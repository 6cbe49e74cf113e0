"""One question at a time over HTTP against FastAPI's own hello-world: ratios in one run.

`python -m tests.benchmarks.requests`. Both run as real servers with the same middleware and the
same server options, and take turns. The rate is measured with some kept connections, of which each
asks anew as soon as it has its answer, by a client that never sleeps: the server always has work,
and what is compared is the work. With a client that sleeps between answers, a virtual machine adds
0.1 ms and more for waking it as soon as it has slept too long, here or there. Every question is
about another posture.
"""

import json
import os
import select
import signal
import socket
import statistics
import subprocess
import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path
from random import Random
from tempfile import TemporaryDirectory
from time import perf_counter, sleep

ROUNDS = 30
REQUESTS = 300
CONNECTIONS = 4
HERE = Path(__file__).resolve()
DEMO_ARM = "housing-loader"
POSTURE = (0.0, -30.0, 60.0, 20.0, 45.0, 10.0)
AROUND = 4.0
"""Degrees that the postures differ from the middle one; none is near singular."""

HELLO = """
import asyncio, itertools, sys
from fastapi import FastAPI
from pydantic import BaseModel
from service import server
from service.envelope import Envelope
from service.metrics import Metrics
from service.event_streams import EventStreams
from service.readiness import Readiness
from service.settings import Settings

class Hello(BaseModel):
    message: str

def create_app(settings):
    app = FastAPI(redirect_slashes=False)
    app.state.settings = settings
    app.state.sequence = itertools.count(1)
    app.state.readiness, app.state.streams = Readiness(), EventStreams()

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


Question = tuple[str, str, bytes]


class Connection:
    """One kept connection with a question on its way."""

    def __init__(self, port: int) -> None:
        for _ in range(400):
            try:
                self.socket = socket.create_connection(("127.0.0.1", port))
                break
            except OSError:
                sleep(0.05)
        self.socket.setsockopt(socket.IPPROTO_TCP, socket.TCP_NODELAY, 1)
        self.asked_at = 0.0
        self._received = b""

    def send(self, question: Question) -> None:
        """Ask."""
        method, target, body = question
        kind = b"Content-Type: application/json\r\n" if body else b""
        head = f"{method} {target} HTTP/1.1\r\nHost: x\r\nContent-Length: {len(body)}\r\n"
        self._received = b""
        self.asked_at = perf_counter()
        self.socket.sendall(head.encode() + kind + b"\r\n" + body)

    def receive(self) -> bytes | None:
        """Take what has come; return the body once the answer is there."""
        self._received += self.socket.recv(65536)
        header, end, answer = self._received.partition(b"\r\n\r\n")
        if not end:
            return None
        assert header.startswith(b"HTTP/1.1 200"), self._received
        length = int(header.lower().split(b"content-length:")[1].split(b"\r\n")[0])
        return answer if len(answer) >= length else None

    def ask(self, question: Question) -> bytes:
        """Ask and wait for the answer's body."""
        self.send(question)
        while (answer := self.receive()) is None:
            pass
        return answer


def busy(
    connections: list[Connection], questions: Callable[[], Question], count: int
) -> tuple[float, list[float]]:
    """Return seconds per answer of a server that always has work, and how long each one took."""
    ready = select.epoll()
    of = {connection.socket.fileno(): connection for connection in connections}
    for number in of:
        ready.register(number, select.EPOLLIN)
    waits: list[float] = []
    started = perf_counter()
    for connection in connections:
        connection.send(questions())
    asked = len(connections)
    while len(waits) < asked:
        for number, _ in ready.poll(0):
            if of[number].receive() is not None:
                waits.append(perf_counter() - of[number].asked_at)
                if asked < count:
                    of[number].send(questions())
                    asked += 1
    return (perf_counter() - started) / len(waits), waits


def questions_about(arm: object) -> dict[str, Callable[[], Question]]:
    """Return what makes the questions, by name."""
    random = Random(1)
    address = f"/v1/arms/{DEMO_ARM}/pose?q="

    def posture() -> list[float]:
        return [round(value + random.uniform(-AROUND, AROUND), 3) for value in POSTURE]

    def target() -> str:
        return address + ",".join(map(str, posture()))

    def body() -> bytes:
        return json.dumps({"arm": arm, "joints": [posture()]}).encode()

    return {
        "GET pose, flat, with singularity": lambda: ("GET", f"{target()}&format=flat", b""),
        "GET pose, json, with singularity": lambda: ("GET", target(), b""),
        "POST poses, one inline arm": lambda: ("POST", "/v1/poses", body()),
    }


def main() -> None:
    """Print every ratio."""
    ours, theirs = free_port(), free_port()
    with TemporaryDirectory() as folder:
        service = ("-m", "service", "serve", "--demo", "--port", str(ours))
        with (
            running(*service, "--database", os.path.join(folder, "arms.db")),
            running("-c", HELLO, str(theirs)),
        ):
            arms = [Connection(ours) for _ in range(CONNECTIONS)]
            hello = [Connection(theirs) for _ in range(CONNECTIONS)]
            stored = json.loads(arms[0].ask(("GET", f"/v1/arms/{DEMO_ARM}", b"")))["arm"]
            questions = questions_about(stored)
            taken: dict[str, list[tuple[float, list[float]]]] = {"hello": []}
            for name, made in questions.items():
                taken[name] = []
                busy(arms, made, REQUESTS)
            for _ in range(ROUNDS):
                taken["hello"].append(busy(hello, lambda: ("GET", "/", b""), REQUESTS))
                for name, made in questions.items():
                    taken[name].append(busy(arms, made, REQUESTS))
    rates = {name: statistics.median(each for each, _ in of) for name, of in taken.items()}
    late = {
        name: statistics.quantiles([wait for _, waits in of for wait in waits], n=100)[98]
        for name, of in taken.items()
    }
    print(f"hello-world with response model: {rates['hello'] * 1e6:.0f} us an answer")
    for name in questions:
        share, p99 = rates["hello"] / rates[name], late[name] / late["hello"]
        print(f"{name}: {share:.2f} of hello-world's rate, p99 {p99:.2f} times")


if __name__ == "__main__":
    main()
