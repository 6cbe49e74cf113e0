"""Streams of live poses from a real server: what stands in them, who is cut off, how they end.

Left out: how many at how short a delay (tests/benchmarks/live.py).
"""

import json
import os
import re
import socket
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from http.client import HTTPConnection
from pathlib import Path
from typing import Any

import pytest
from websockets.exceptions import ConnectionClosed
from websockets.sync.client import connect

from tests.conftest import ServerProcess
from tests.service.live.made import ARM

LONG_MS = 600_000


class Reader:
    """One reader of a stream, over a socket of its own."""

    def __init__(self, port: int, path: str, **headers: str) -> None:
        self.socket = socket.create_connection(("127.0.0.1", port), timeout=10)
        lines = [f"{name.replace('_', '-')}: {value}" for name, value in headers.items()]
        head = "\r\n".join([f"GET {path} HTTP/1.1", "Host: x", *lines, "", ""])
        self.socket.sendall(head.encode())
        self._file = self.socket.makefile("rb")
        self.status = int(self._file.readline().split()[1])
        self.head = b"".join(iter(self._file.readline, b"\r\n")).decode().lower()

    def chunk(self) -> bytes:
        """Return what was sent in one go; empty at the end."""
        length = int(self._file.readline() or b"0", 16)
        content = self._file.read(length)
        self._file.readline()
        return content

    def events(self) -> Iterator[dict[str, Any]]:
        """Yield events: their fields, and ``data`` as it was before it was JSON."""
        while content := self.chunk():
            for text in content.decode().split("\n\n"):
                fields = dict(line.split(": ", 1) for line in text.splitlines() if ": " in line)
                if "data" in fields:
                    yield {**fields, "data": json.loads(fields["data"])}

    def close(self) -> None:
        self._file.close()
        self.socket.close()


@contextmanager
def reading(port: int, path: str, **headers: str) -> Iterator[Reader]:
    reader = Reader(port, path, **headers)
    try:
        yield reader
    finally:
        reader.close()


def ask(port: int, method: str, path: str, body: Any = None) -> tuple[int, Any]:
    connection = HTTPConnection("127.0.0.1", port, timeout=10)
    content = None if body is None else json.dumps(body)
    connection.request(method, path, content, {"content-type": "application/json"})
    answer = connection.getresponse()
    told = answer.read()
    connection.close()
    return answer.status, json.loads(told) if told else None


def put(port: int, arm: str, *joints: float, **more: Any) -> int:
    body = {"joints": joints, "period_ms": LONG_MS, **more}
    status, told = ask(port, "PUT", f"/v1/arms/{arm}/joints", body)
    assert status == 200
    change: int = told["change"]
    return change


def remove(port: int, arm: str) -> None:
    connection = HTTPConnection("127.0.0.1", port, timeout=10)
    connection.request("DELETE", f"/v1/arms/{arm}", headers={"if-match": "*"})
    assert connection.getresponse().status == 204
    connection.close()


def with_arm(server: ServerProcess, name: str) -> int:
    """Have an arm stored and return the port."""
    status, told = ask(server.port, "POST", "/v1/arms", {**ARM, "name": name})
    assert status == 201, told
    return server.port


def test_events_are_the_answers_and_quality_is_pushed(server: ServerProcess) -> None:
    port = with_arm(server, "pushed")
    with reading(port, "/v1/arms/pushed/live/stream") as reader:
        assert reader.status == 200
        assert "content-type: text/event-stream" in reader.head
        assert "cache-control: no-store" in reader.head
        assert reader.chunk() == b"retry: 2000\n\n"
        events = reader.events()
        change = put(port, "pushed", 0, 0, sequence=1)
        first = next(events)
        assert (first["event"], first["id"]) == ("pose", str(change))
        assert first["data"]["quality"] == "good"
        assert first["data"]["change"] == first["data"]["seq"] == change
        assert first["data"]["poses"][0]["position"] == [800, 0, 0]
        assert put(port, "pushed", 171, 0, sequence=2) > change
        assert next(events)["data"]["reason"] == "outside-travel"
        put(port, "pushed", 1, 0, sequence=3, period_ms=50)
        assert next(events)["data"]["joints"] == [1, 0]
        begun = time.monotonic()
        stale = next(events)["data"]
        assert (stale["quality"], stale["reason"], stale["code"]) == ("bad", "stale", 7)
        assert time.monotonic() - begun < 2.0


def test_each_reader_chooses(server: ServerProcess) -> None:
    port = with_arm(server, "chosen")
    put(port, "chosen", 30, 0)
    query = "format=flat&units=m-rad&form=zyx-current&tz=100"
    with reading(port, f"/v1/arms/chosen/live/stream?{query}") as reader:
        flat = next(reader.events())["data"]
        status, pose = ask(port, "GET", f"/v1/arms/chosen/pose?q=0.5235987755982988,0&{query}")
        assert status == 200
        same = ("x", "y", "z", "r1", "r2", "r3", "form", "units", "digest")
        assert {key: flat[key] for key in same} == {key: pose[key] for key in same}
        assert (flat["quality"], flat["units"]) == ("good", "m-rad")


def test_going_on_after_an_event(server: ServerProcess) -> None:
    port = with_arm(server, "known")
    change = put(port, "known", 0, 0)
    with reading(port, "/v1/arms/known/live/stream", Last_Event_ID=str(change)) as reader:
        newer = put(port, "known", 1, 0)
        assert next(reader.events())["id"] == str(newer)
    with reading(port, "/v1/arms/known/live/stream", Last_Event_ID=str(change)) as reader:
        assert next(reader.events())["id"] == str(newer)
    with reading(port, f"/v1/arms/known/live/stream?after={newer}") as reader:
        newest = put(port, "known", 2, 0)
        assert next(reader.events())["id"] == str(newest)
    # Who comes back asks the address of the beginning once more.
    again = f"/v1/arms/known/live/stream?after={change}"
    with reading(port, again, Last_Event_ID=str(newest)) as reader:
        last = put(port, "known", 3, 0)
        assert next(reader.events())["id"] == str(last)


def test_the_newest_wins_for_a_reader_who_wants_few(server: ServerProcess) -> None:
    port = with_arm(server, "few")
    with reading(port, "/v1/arms/few/live/stream?rate=4") as reader:
        events = reader.events()
        put(port, "few", 0, 0, sequence=0)
        assert next(events)["data"]["input"]["sequence"] == 0
        begun = time.monotonic()
        for number in range(1, 31):
            put(port, "few", number / 10, 0, sequence=number)
        sequences = [0]
        while sequences[-1] < 30:
            sequences.append(next(events)["data"]["input"]["sequence"])
        assert sequences == sorted(set(sequences))
        # Each at least a quarter of a second after the one before.
        assert len(sequences) - 1 <= (time.monotonic() - begun) * 4 + 1


def test_all_arms_in_one_stream(server: ServerProcess) -> None:
    port = with_arm(server, "all-a")
    with_arm(server, "all-b")
    before = put(port, "all-a", 0, 0)
    with reading(port, f"/v1/live/stream?after={before}") as reader:
        changes = [put(port, name, 1, 1) for name in ("all-a", "all-b")]
        events = reader.events()
        told = [next(events) for _ in range(2)]
        assert [one["data"]["arm"]["name"] for one in told] == ["all-a", "all-b"]
        assert [int(one["id"]) for one in told] == changes
        with_arm(server, "all-c")
        newest = put(port, "all-c", 0, 0)
        assert int(next(events)["id"]) == newest
        remove(port, "all-c")
        last = next(events)
        assert (last["event"], last["data"]) == ("removed", {"arm": "all-c"})
        assert int(last["id"]) > newest
    with reading(port, f"/v1/live/stream?after={before}&format=flat") as reader:
        events = reader.events()
        flat = {data["arm"]: data for data in (next(events)["data"] for _ in range(2))}
        assert flat.keys() == {"all-a", "all-b"}
        assert [flat[name]["seq"] for name in ("all-a", "all-b")] == changes
    with reading(port, "/v1/arms/all-a/live/stream?format=flat") as reader:
        assert "arm" not in next(reader.events())["data"]


def test_what_cannot_be_told_is_refused_before_or_is_an_event(server: ServerProcess) -> None:
    port = with_arm(server, "told")
    for path, code in [
        ("/v1/arms/no-such-arm/live/stream", "unknown-arm"),
        ("/v1/arms/told/live/stream?tool=pen", "unknown-tool"),
        ("/v1/arms/told/live/stream?rate=0", "unusable-value"),
        ("/v1/arms/told/live/stream?format=txt", "unusable-value"),
        ("/v1/arms/told/live/stream?q=1", "unknown-field"),
        ("/v1/live/stream?expect=1", "unknown-field"),
    ]:
        assert ask(port, "GET", path)[1]["code"] == code
    tools = {
        "pen": {"position": [0, 0, 9], "orientation": {"form": "xyz-fixed", "values": [0] * 3}}
    }
    put(port, "told", 0, 0)
    with reading(port, "/v1/arms/told/live/stream") as reader:
        events = reader.events()
        assert next(events)["event"] == "pose"
        # Now it has a tool and nobody says which.
        connection = HTTPConnection("127.0.0.1", port, timeout=10)
        connection.request("GET", "/v1/arms/told")
        answer = connection.getresponse()
        answer.read()
        tag = answer.headers["etag"] or ""
        connection.request(
            "PUT",
            "/v1/arms/told",
            json.dumps({**ARM, "name": "told", "tools": tools}),
            {"content-type": "application/json", "if-match": tag},
        )
        assert connection.getresponse().status == 200
        connection.close()
        problem = next(events)
        assert (problem["event"], problem["data"]["problem"]["code"]) == (
            "problem",
            "tool-not-said",
        )


def test_a_reader_who_stops_costs_others_nothing(server: ServerProcess) -> None:
    """Its buffers fill, others are told on; what it has yet to read is little."""
    port = with_arm(server, "blocked")
    with (
        reading(port, "/v1/arms/blocked/live/stream") as lazy,
        reading(port, "/v1/arms/blocked/live/stream") as eager,
    ):
        lazy.socket.setsockopt(socket.SOL_SOCKET, socket.SO_RCVBUF, 4096)
        events = eager.events()
        body = {"samples": [{"joints": [0, 0]}], "period_ms": LONG_MS}
        connection = HTTPConnection("127.0.0.1", port, timeout=10)
        longest = 0.0
        for _ in range(400):
            begun = time.monotonic()
            connection.request(
                "PUT",
                "/v1/arms/blocked/joints",
                json.dumps(body),
                {"content-type": "application/json"},
            )
            change = json.loads(connection.getresponse().read())["change"]
            while int(next(events)["id"]) < change:
                pass
            longest = max(longest, time.monotonic() - begun)
        connection.close()
        assert longest < 5.0  # a hang, not a delay


def test_a_stop_ends_streams_and_sockets_at_once(launch: Callable[..., ServerProcess]) -> None:
    server = launch()
    port = with_arm(server, "ended")
    put(port, "ended", 0, 0)
    with (
        reading(port, "/v1/arms/ended/live/stream") as reader,
        reading(port, "/v1/live/stream") as other,
        connect(f"ws://127.0.0.1:{port}/v1/arms/ended/joints/socket") as sender,
    ):
        events = reader.events()
        next(events)
        next(other.events())
        sender.send(json.dumps({"joints": [1, 0]}))
        assert json.loads(sender.recv(10))["good"] == 1
        assert server.terminate() < 2.0
        with pytest.raises(ConnectionClosed) as closed:
            sender.recv(10)
        assert closed.value.rcvd is not None
        assert closed.value.rcvd.code == 1012
        # Ended, not broken off: the last chunk is there.
        assert all(one["event"] == "pose" for one in events)
    assert server.errors.read_text("utf-8") == ""


def test_connects_and_disconnects_leave_nothing(launch: Callable[..., ServerProcess]) -> None:
    server = launch()
    port = with_arm(server, "left")
    put(port, "left", 0, 0)
    come_and_go(port, 50)
    time.sleep(0.5)
    files, held = open_files(server), memory_kib(server)
    come_and_go(port, 300)
    give_up = time.monotonic() + 10.0
    while open_files(server) > files and time.monotonic() < give_up:
        time.sleep(0.05)
    assert open_files(server) <= files
    # A thing kept of each would be 300 times some kB.
    assert memory_kib(server) - held < 3000
    assert server.errors.read_text("utf-8") == ""


def come_and_go(port: int, times: int) -> None:
    """Connect and leave; every other one breaks the connection off."""
    for number in range(times):
        with reading(port, "/v1/arms/left/live/stream") as reader:
            assert reader.chunk() == b"retry: 2000\n\n"
            if number % 2:
                reader.socket.setsockopt(socket.SOL_SOCKET, socket.SO_LINGER, b"\1\0\0\0\0\0\0\0")


def open_files(server: ServerProcess) -> int:
    return len(os.listdir(f"/proc/{server.process.pid}/fd"))


def memory_kib(server: ServerProcess) -> int:
    text = Path(f"/proc/{server.process.pid}/status").read_text("ascii")
    found = re.search(r"VmRSS:\s+(\d+)", text)
    assert found is not None
    return int(found[1])
