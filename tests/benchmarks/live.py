"""Live poses from input to screen: how late, and whether anything older ever follows the newest.

    python -m tests.benchmarks.live

Asked, on two cores, one server process, client on the other core: one arm at 100 Hz to 200
subscribers, and 50 arms at 20 Hz to 4 each, with p99 from input to screen below 50 ms and nothing
older than the newest. The client sends by WebSocket and reads all streams itself, on the other
core; both use the same clock. A third run has a source of 10 000 Hz beside the 100 Hz one, a
fourth 20 subscribers that stop reading, a fifth connects and leaves a thousand times.
"""

import asyncio
import json
import os
import re
import resource
import socket
import subprocess
import sys
import time
from pathlib import Path
from typing import Any

import numpy as np
from websockets.asyncio.client import connect

ROOT = Path(__file__).resolve().parents[2]
SEQUENCE = re.compile(rb'"sequence":(\d+)')
IDENTITY = re.compile(rb"^id: (\d+)", re.MULTILINE)
SECONDS = 10.0
ARM = json.loads((ROOT / "service/demo/arms/housing-loader.json").read_text("utf-8"))
ARM = {key: value for key, value in ARM.items() if key not in ("cell", "frames")}
POSTURE = (25.0, -70.0, 95.0, 30.0, -40.0, 15.0)


class Server:
    """The server in a process of its own, on the first core."""

    def __init__(self) -> None:
        command = [
            sys.executable,
            "-m",
            "service",
            "serve",
            "--port",
            "0",
            "--database",
            ":memory:",
        ]
        self.process = subprocess.Popen(
            [*command, "--connections", "1000"], cwd=ROOT, stdout=subprocess.PIPE, text=True
        )
        assert self.process.stdout is not None
        self.port = int(self.process.stdout.readline().rsplit(":", 1)[1])
        on_core(self.process.pid, 0)

    def memory_mib(self) -> float:
        """Return what it holds."""
        text = Path(f"/proc/{self.process.pid}/status").read_text("ascii")
        return int(re.search(r"VmRSS:\s+(\d+)", text)[1]) / 1024  # type: ignore[index]

    def files(self) -> int:
        """Return how many files and sockets it has open."""
        return len(os.listdir(f"/proc/{self.process.pid}/fd"))

    def stop(self) -> float:
        """End it; return the seconds that took."""
        begun = time.monotonic()
        self.process.terminate()
        self.process.wait(10)
        return time.monotonic() - begun


class Screen(asyncio.Protocol):
    """One subscriber: when each event came, and whether it was newer than all before."""

    def __init__(self, arm: str, sent: list[float], query: str, bell: "Bell") -> None:
        self._arm, self._sent, self._query, self._bell = arm, sent, query, bell
        self._rest = b""
        self.last = self._identity = -1
        self.delays: list[float] = []
        self.older = 0

    def connection_made(self, transport: Any) -> None:
        """Ask for the stream."""
        self.transport = transport
        path = f"/v1/arms/{self._arm}/live/stream?{self._query}"
        transport.write(f"GET {path} HTTP/1.1\r\nHost: x\r\n\r\n".encode())

    def data_received(self, data: bytes) -> None:
        """Take events in."""
        now = time.monotonic()
        *whole, self._rest = (self._rest + data).split(b"\n\n")
        for one in whole:
            found, named = SEQUENCE.search(one), IDENTITY.search(one)
            if found is None or named is None:
                continue
            self.older += int(named[1]) <= self._identity
            self._identity, number = int(named[1]), int(found[1])
            if number == self.last:
                continue  # the same value, of another quality
            self.last = number
            if number < len(self._sent) and self._bell.rings:
                self.delays.append(now - self._sent[number])

    def stop_reading(self) -> None:
        """Take nothing any more."""
        self.transport.pause_reading()


class Bell:
    """Whether what comes counts: not before everybody is there."""

    rings = False


async def feed(port: int, arm: str, hz: float, sent: list[float], seconds: float) -> None:
    """Send joint values at an even pace, and note when."""
    address = f"ws://127.0.0.1:{port}/v1/arms/{arm}/joints/socket"
    async with connect(address, compression=None) as sending:
        begun = time.monotonic()
        for number in range(round(seconds * hz)):
            due = begun + number / hz
            if (left := due - time.monotonic()) > 0.0:
                await asyncio.sleep(left)
            joints = [POSTURE[0] + np.sin(number / hz) * 5, *POSTURE[1:]]
            sent.append(time.monotonic())
            told = {"joints": joints, "sequence": number, "sampled_ms": time.time() * 1000}
            await sending.send(json.dumps(told))


async def flood(port: int, arm: str, hz: float, seconds: float) -> dict[str, Any]:
    """Send as many values as that; return what the server last said of them."""
    address = f"ws://127.0.0.1:{port}/v1/arms/{arm}/joints/socket"
    said: dict[str, Any] = {}
    async with connect(address, compression=None) as sending:

        async def listen() -> None:
            async for text in sending:
                said.update(json.loads(text))

        listening = asyncio.create_task(listen())
        begun, number = time.monotonic(), 0
        while (elapsed := time.monotonic() - begun) < seconds:
            while number < elapsed * hz:
                told = {"joints": list(POSTURE), "sequence": number}
                await sending.send(json.dumps(told))
                number += 1
            await asyncio.sleep(0.001)
        await asyncio.sleep(1.0)
        listening.cancel()
    return {"sent": number, **said}


async def store(port: int, names: list[str]) -> None:
    """Store an arm under each name."""
    for name in names:
        body = json.dumps({**ARM, "name": name})
        reader, writer = await asyncio.open_connection("127.0.0.1", port)
        head = f"Content-Type: application/json\r\nContent-Length: {len(body)}"
        writer.write(f"POST /v1/arms HTTP/1.0\r\n{head}\r\n\r\n{body}".encode())
        answer = await reader.read()
        assert b" 201 " in answer[:20], answer
        writer.close()


async def watched(
    server: Server, arms: list[str], hz: float, each: int, more: Any = None, blocked: int = 0
) -> None:
    """Run one case and print it."""
    bell, query = Bell(), ""
    sent: dict[str, list[float]] = {arm: [] for arm in arms}
    screens: list[Screen] = []
    loop = asyncio.get_running_loop()
    for arm in arms:
        for _ in range(each + blocked):
            screen = Screen(arm, sent[arm], query, bell)
            await loop.create_connection(lambda screen=screen: screen, "127.0.0.1", server.port)
            screens.append(screen)
    await asyncio.sleep(0.5)
    for screen in screens[:blocked]:
        screen.stop_reading()
    held = server.memory_mib()
    feeding = [feed(server.port, arm, hz, sent[arm], SECONDS) for arm in arms]

    async def ring() -> None:
        await asyncio.sleep(1.0)
        bell.rings = True

    *_, told = await asyncio.gather(
        *feeding, ring(), more if more is not None else asyncio.sleep(0)
    )
    await asyncio.sleep(0.3)
    reading = screens[blocked:]
    delays = np.sort(np.concatenate([screen.delays for screen in reading])) * 1000.0
    wanted = sum(len(sent[arm]) for arm in arms) * each * (SECONDS - 1.0) / SECONDS
    at_end = sum(screen.last == len(screen._sent) - 1 for screen in reading)
    middle, late = np.percentile(delays, 50), np.percentile(delays, 99)
    print(
        f"  {len(arms)} arm(s) at {hz:g} Hz to {each} each: p50 {middle:.1f} ms, p99 {late:.1f} ms "
        f"(asked 50), longest {delays[-1]:.1f} ms;\n    {len(delays) / wanted:.1%} of all values "
        f"told, older after newer {sum(screen.older for screen in reading)}, newest at the end "
        f"{at_end} of {len(reading)}, {server.memory_mib() - held:+.1f} MiB"
    )
    if told:
        print(f"    beside it {told}")
    for screen in screens:
        screen.transport.abort()
    await asyncio.sleep(0.5)


async def come_and_go(server: Server, times: int) -> None:
    """Connect and leave so many times, half of them in the middle of an event."""
    await asyncio.sleep(2.0)
    await _come_and_go(server, 100)
    held, files = server.memory_mib(), server.files()
    await _come_and_go(server, times)
    await asyncio.sleep(2.0)
    print(
        f"  {times} connects and disconnects: files {files} -> {server.files()}, "
        f"memory {held:.1f} -> {server.memory_mib():.1f} MiB"
    )


async def _come_and_go(server: Server, times: int) -> None:
    for number in range(times):
        reader, writer = await asyncio.open_connection("127.0.0.1", server.port)
        writer.write(b"GET /v1/arms/arm-0/live/stream HTTP/1.1\r\nHost: x\r\n\r\n")
        await reader.readuntil(b"retry")
        if number % 2:
            writer.get_extra_info("socket").setsockopt(
                socket.SOL_SOCKET, socket.SO_LINGER, b"\1\0\0\0\0\0\0\0"
            )
        writer.close()


def on_core(process: int, core: int) -> None:
    """Keep a process on one core, where there are two."""
    if (os.cpu_count() or 1) > 1:
        os.sched_setaffinity(process, {core})


async def run() -> None:
    """Print all figures."""
    resource.setrlimit(
        resource.RLIMIT_NOFILE, (4096, resource.getrlimit(resource.RLIMIT_NOFILE)[1])
    )
    on_core(0, 1)
    server = Server()
    names = [f"arm-{number}" for number in range(50)]
    try:
        await store(server.port, names)
        await feed(server.port, names[0], 20.0, [], 1.0)
        await watched(server, names[:1], 100.0, 200)
        await watched(server, names, 20.0, 4)
        print("  with a source of 10 000 Hz:")
        await watched(server, names[:1], 100.0, 20, flood(server.port, "arm-1", 10_000.0, SECONDS))
        print("  with 20 subscribers that stop reading:")
        await watched(server, names[:1], 100.0, 20, blocked=20)
        await come_and_go(server, 1000)
    finally:
        print(f"  SIGTERM: over after {server.stop():.2f} s")


if __name__ == "__main__":
    asyncio.run(run())
