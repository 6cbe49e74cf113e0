"""Many postures by NPY, CSV and JSON against a raw echo: `python tests/benchmarks/bulk.py`.

The yardstick sends the same doubles through the same server and gets them back unread. Times are
medians, the sides taking turns; each comes with the server's memory above idle, with what a
controller's question takes meanwhile, and with the longest time the event loop stood still.
"""

import asyncio
import http.client
import json
import subprocess
import sys
import time
from collections.abc import Iterator
from concurrent.futures import Future, ProcessPoolExecutor
from contextlib import contextmanager
from multiprocessing import get_context
from pathlib import Path
from typing import Any

ROOT = Path(__file__).resolve().parents[2]
sys.path.insert(0, str(ROOT))

import numpy as np  # noqa: E402
from fastapi import FastAPI  # noqa: E402
from starlette.requests import Request  # noqa: E402
from starlette.responses import Response  # noqa: E402

from service import server  # noqa: E402
from service.app import create_app  # noqa: E402
from service.settings import Settings  # noqa: E402
from service.wire.body import read_bytes  # noqa: E402
from service.wire.npy import MEDIA_TYPE, npy_head  # noqa: E402

VECTORS = 100_000
JUDGED = 20_000
TURNS = 7
SEED = 20_261_201
TICK_S = 0.001
WARM_S = 3.0
LENGTHS = ((60, 410), (520, 0), (30, 0), (0, 470), (0, 0), (0, 110))
TWISTS = (90, 0, 90, -90, 90, 0)
ARM: dict[str, Any] = {
    "name": "measured",
    "convention": "standard",
    "units": "mm-deg",
    "rows": [
        {"joint": "revolute", "a": a, "alpha": alpha, "d": d, "theta": 0, "travel": [-170, 170]}
        for (a, d), alpha in zip(LENGTHS, TWISTS, strict=True)
    ],
}


def serve() -> None:
    """Run the service with two more addresses: the yardstick, and how long the loop stood still."""
    longest = 0.0

    async def echo(request: Request) -> Response:
        return Response(await read_bytes(request, MEDIA_TYPE), media_type=MEDIA_TYPE)

    async def stall(_: Request) -> Response:
        nonlocal longest
        found, longest = longest, 0.0
        return Response(str(found))

    async def watch() -> None:
        nonlocal longest
        last = time.perf_counter()
        while True:
            await asyncio.sleep(TICK_S)
            now = time.perf_counter()
            longest, last = max(longest, now - last - TICK_S), now

    watching: list[asyncio.Task[None]] = []

    async def start_watch(_: Request) -> Response:
        watching.append(asyncio.get_running_loop().create_task(watch()))
        return Response("")

    def with_more(settings: Settings) -> FastAPI:
        app = create_app(settings)
        app.router.add_route("/echo", echo, methods=["POST"])
        app.router.add_route("/stall", stall)
        app.router.add_route("/watch", start_watch, methods=["POST"])
        return app

    server.create_app = with_more  # type: ignore[attr-defined]
    server.run(Settings(port=0, database=":memory:"))


def send(port: int, path: str, body: bytes, content_type: str) -> tuple[float, int, bytes]:
    """Return seconds, status and body of one POST on a connection of its own."""
    connection = http.client.HTTPConnection("127.0.0.1", port, timeout=120)
    started = time.perf_counter()
    connection.request("POST", path, body, {"Content-Type": content_type})
    answer = connection.getresponse()
    content = answer.read()
    taken = time.perf_counter() - started
    connection.close()
    return taken, answer.status, content


def get_times(port: int, until: Future[None]) -> list[float]:
    """Return what single poses take, asked one after the other until something else is done."""
    connection = http.client.HTTPConnection("127.0.0.1", port, timeout=120)
    times = []
    while not until.done():
        started = time.perf_counter()
        connection.request("GET", "/v1/arms/measured/pose?q=10,20,30,40,50,60&format=flat")
        answer = connection.getresponse()
        answer.read()
        assert answer.status == 200
        times.append(time.perf_counter() - started)
        time.sleep(0.002)
    connection.close()
    return times


def memory(pid: int, key: str) -> float:
    """Return a field of the process's status in MiB: VmRSS now, VmHWM at the most."""
    for line in Path(f"/proc/{pid}/status").read_text(encoding="ascii").splitlines():
        if line.startswith(key + ":"):
            return int(line.split()[1]) / 1024
    raise LookupError(key)


def bodies() -> dict[str, tuple[str, bytes, str]]:
    """Return address, body and content type of every side."""
    joints = np.random.default_rng(SEED).uniform(-170, 170, (VECTORS, 6))
    raw = joints.astype("<f8").tobytes()
    npy = npy_head(joints.shape) + raw
    rows = joints.tolist()
    head = "q1,q2,q3,q4,q5,q6\n"

    def csv(part: list[list[float]]) -> bytes:
        return (head + "\n".join(",".join(map(repr, row)) for row in part)).encode()

    def as_json(part: list[list[float]], singularity: bool) -> bytes:
        asked = {"arm": "measured", "joints": part, "singularity": singularity}
        return json.dumps(asked).encode()

    few, is_json = rows[:JUDGED], "application/json"
    rounded = np.round(joints, 3).tolist()
    return {
        "echo": ("/echo", raw, MEDIA_TYPE),
        "NPY poses": ("/v1/poses?arm=measured", npy, MEDIA_TYPE),
        "NPY Jacobians": ("/v1/jacobians?arm=measured", npy, MEDIA_TYPE),
        "CSV poses": ("/v1/poses?arm=measured&singularity=false", csv(rows), "text/csv"),
        "JSON poses": ("/v1/poses", as_json(rows, False), is_json),
        "JSON poses, 3 decimals": ("/v1/poses", as_json(rounded, False), is_json),
        "JSON in, NPY out": ("/v1/poses?format=npy", as_json(rows, False), is_json),
        f"CSV poses, judged, {JUDGED}": ("/v1/poses?arm=measured", csv(few), "text/csv"),
        f"JSON poses, judged, {JUDGED}": ("/v1/poses", as_json(few, True), is_json),
    }


def measure() -> None:
    """Print every figure."""
    sides = bodies()
    peaks = {name: peak_of(side) for name, side in sides.items()}
    with running() as (port, _), ProcessPoolExecutor(1, get_context("spawn")) as other:
        for path, body, content_type in sides.values():  # so that nothing is compiled later
            assert send(port, path, body, content_type)[1] == 200, path
        times: dict[str, list[float]] = {name: [] for name in sides}
        for _ in range(TURNS):
            for name, side in sides.items():
                times[name].append(send(port, *side)[0])
        yardstick = float(np.median(times["echo"]))
        print(f"{VECTORS} joint vectors; a raw echo of their doubles: {1e3 * yardstick:.1f} ms")
        print(f"{'':28}{'ms':>8}{'x echo':>8}{'+ MiB':>8}{'GET p50':>9}{'p99':>7}{'stall':>7}")
        send(port, "/watch", b"", "")
        other.submit(time.sleep, 0).result()
        print(f"{'idle':28}{'':24}{quantiles(get_times(port, other.submit(time.sleep, 3.0)))}")
        for name, side in sides.items():
            get(port, "/stall")
            meanwhile = get_times(port, other.submit(repeated, port, side))
            stood = 1e3 * float(get(port, "/stall"))
            median = float(np.median(times[name]))
            print(
                f"{name:28}{1e3 * median:8.1f}{median / yardstick:8.1f}{peaks[name]:8.0f}"
                f"{quantiles(meanwhile)}{stood:7.1f}"
            )


def peak_of(side: tuple[str, bytes, str]) -> float:
    """Return by how many MiB one request lifts the serving process above idle."""
    with running() as (port, pid):
        assert get(port, "/v1/arms/measured/pose?q=0,0,0,0,0,0")
        before = memory(pid, "VmRSS")
        Path(f"/proc/{pid}/clear_refs").write_text("5", encoding="ascii")
        assert send(port, *side)[1] == 200
        return memory(pid, "VmHWM") - before


@contextmanager
def running() -> Iterator[tuple[int, int]]:
    """Start a server that knows the arm; gives its port and process number."""
    command = [sys.executable, __file__, "serve"]
    with subprocess.Popen(command, stdout=subprocess.PIPE, text=True, cwd=ROOT) as process:
        try:
            assert process.stdout is not None
            port = int(process.stdout.readline().rsplit(":", 1)[1])
            time.sleep(WARM_S)
            assert send(port, "/v1/arms", json.dumps(ARM).encode(), "application/json")[1] == 201
            yield port, process.pid
        finally:
            process.terminate()


def repeated(port: int, side: tuple[str, bytes, str]) -> None:
    """Send the same five times."""
    for _ in range(5):
        send(port, *side)


def get(port: int, path: str) -> str:
    """Return the body of one GET."""
    connection = http.client.HTTPConnection("127.0.0.1", port)
    connection.request("GET", path)
    text = connection.getresponse().read().decode()
    connection.close()
    return text


def quantiles(times: list[float]) -> str:
    """Return median and 99th percentile in milliseconds as columns."""
    half, most = np.quantile(times, (0.5, 0.99))
    return f"{1e3 * half:9.1f}{1e3 * most:7.1f}"


if __name__ == "__main__":
    if sys.argv[1:] == ["serve"]:
        serve()
    else:
        measure()
