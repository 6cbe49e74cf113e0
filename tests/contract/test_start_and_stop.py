"""A real server on a loopback port: what it says, how it ends, what it does with bad senders.

Left out: the answers to questions about arms.
"""

import json
import os
import socket
import subprocess
import sys
import threading
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any

import httpx
import pytest

Launch = Callable[..., Any]
ROOT = Path(__file__).resolve().parents[2]
HEAD = b"POST /v1/arms HTTP/1.1\r\nHost: t\r\nContent-Type: application/json\r\n"


def connected(port: int, sent: bytes = b"") -> socket.socket:
    made = socket.create_connection(("127.0.0.1", port), timeout=10)
    made.sendall(sent)
    return made


def everything(reading: socket.socket) -> bytes:
    """Return all that comes until the other side closes."""
    parts = []
    while part := reading.recv(65536):
        parts.append(part)
    return b"".join(parts)


def problem_in(answer: bytes) -> dict[str, Any]:
    head, _, body = answer.partition(b"\r\n\r\n")
    assert b"content-type: application/problem+json" in head.lower()
    assert b"x-request-id: " in head.lower()
    found: dict[str, Any] = json.loads(body)
    return found


def run(*arguments: str, **environment: str) -> subprocess.CompletedProcess[str]:
    plain = {k: v for k, v in os.environ.items() if not k.startswith("ARMSPAN_")}
    return subprocess.run(
        [sys.executable, "-m", "service", *arguments],
        cwd=ROOT,
        env=plain | environment,
        capture_output=True,
        text=True,
        timeout=60,
    )


def test_the_start_text_says_where_what_and_the_caution(server: Any) -> None:
    lines = server.start_text.splitlines()
    assert lines[0].startswith("Armspan ")
    assert lines[0].endswith(f"listens on {server.url}")
    assert lines[1] == "  arms    0 in memory"
    assert lines[2] == f"  docs    {server.url}/docs"
    assert lines[-1].startswith("Not a safety function")
    assert httpx.get(f"{server.url}/docs").status_code == 200


def test_a_ping_is_short_and_counts(server: Any) -> None:
    with httpx.Client() as client:
        answers = [client.get(f"{server.url}/v1/ping") for _ in range(2)]
        head = client.head(f"{server.url}/v1/ping")
    fields = [answer.text.split(";") for answer in answers]
    assert [int(field[0]) for field in fields] == [1, 1]
    assert int(fields[1][1]) == int(fields[0][1]) + 1
    assert int(fields[1][2]) >= 0
    for answer in answers:
        assert len(answer.content) < 40
        assert answer.headers["content-length"] == str(len(answer.content))
        assert answer.headers["content-type"].startswith("text/plain")
        assert "server" not in answer.headers
    assert (head.status_code, head.content) == (200, b"")


def test_old_clients_get_a_length_and_a_close(server: Any) -> None:
    with connected(server.port, b"GET /v1/ping HTTP/1.0\r\n\r\n") as client:
        answer = everything(client).lower()
    assert b"content-length: " in answer
    assert b"transfer-encoding" not in answer


def test_a_body_that_stops_half_way_is_told_so(launch: Launch) -> None:
    server = launch("--body-timeout-s", "0.3")
    with connected(server.port, HEAD + b'Content-Length: 100\r\n\r\n{"name":') as client:
        answer = everything(client)
    assert answer.startswith(b"HTTP/1.1 408 ")
    assert b"connection: close" in answer.lower()
    problem = problem_in(answer)
    assert (problem["code"], problem["number"]) == ("request-timeout", 100)
    assert problem["detail"] == "the body stopped after 8 bytes"
    assert httpx.get(f"{server.url}/livez").status_code == 200


@pytest.mark.parametrize("begun", [b"Content-Length: 100\r\n\r\n{", b"Content-Length: 9\r\n"])
def test_a_sender_that_leaves_half_way_does_no_harm(server: Any, begun: bytes) -> None:
    before = server.errors.read_text(encoding="utf-8")
    connected(server.port, HEAD + begun).close()
    with connected(server.port, HEAD + begun) as client:
        client.shutdown(socket.SHUT_WR)
        assert b" 500 " not in everything(client)
    assert httpx.get(f"{server.url}/livez").status_code == 200
    assert server.errors.read_text(encoding="utf-8") == before


def test_a_body_of_100_mb_is_refused_even_if_sent_before_reading(server: Any) -> None:
    size = 100_000_000
    with connected(server.port) as client:
        client.sendall(HEAD + f"Content-Length: {size}\r\n\r\n".encode())
        block = b" " * 1_000_000
        for _ in range(size // len(block)):
            client.sendall(block)
        answer = everything(client)
    assert answer.startswith(b"HTTP/1.1 413 ")
    assert b"connection: close" in answer.lower()
    problem = problem_in(answer)
    assert (problem["code"], problem["number"], problem["status"]) == ("too-large", 108, 413)


def test_100_mb_in_chunks_are_refused(server: Any) -> None:
    block = b"f4240\r\n" + b" " * 1_000_000 + b"\r\n"
    with connected(server.port, HEAD + b"Transfer-Encoding: chunked\r\n\r\n") as client:
        for _ in range(100):
            client.sendall(block)
        client.sendall(b"0\r\n\r\n")
        answer = everything(client)
    assert answer.startswith(b"HTTP/1.1 413 ")


def test_a_polite_sender_is_refused_before_it_sends(server: Any) -> None:
    asked = HEAD + b"Content-Length: 100000000\r\nExpect: 100-continue\r\n\r\n"
    with connected(server.port, asked) as client:
        answer = everything(client)
    assert answer.startswith(b"HTTP/1.1 413 ")


def test_a_polite_sender_is_let_through(server: Any) -> None:
    asked = HEAD + b"Content-Length: 2\r\nExpect: 100-continue\r\nConnection: close\r\n\r\n"
    with connected(server.port, asked) as client:
        assert client.recv(65536).startswith(b"HTTP/1.1 100 ")
        client.sendall(b"[]")
        assert b" 422 " in everything(client)


def test_head_and_body_may_come_apart(server: Any) -> None:
    with connected(server.port, HEAD + b"Connection: close\r\nContent-Length: 2\r\n\r\n") as client:
        time.sleep(0.1)
        client.sendall(b"[]")
        assert everything(client).startswith(b"HTTP/1.1 422 ")


def test_an_upgrade_is_an_ordinary_request(server: Any) -> None:
    asked = (
        b"GET /nowhere HTTP/1.1\r\nHost: t\r\nConnection: Upgrade\r\nUpgrade: websocket\r\n"
        b"Sec-WebSocket-Version: 13\r\nSec-WebSocket-Key: dGhlIHNhbXBsZSBub25jZQ==\r\n\r\n"
    )
    with connected(server.port, asked) as client:
        assert client.recv(65536).startswith(b"HTTP/1.1 404 ")


def test_too_many_connections_are_told_so(launch: Launch) -> None:
    server = launch("--connections", "3")
    held = [connected(server.port) for _ in range(3)]
    try:
        time.sleep(0.2)
        with connected(server.port, b"GET /v1/ping HTTP/1.1\r\nHost: t\r\n\r\n") as client:
            answer = everything(client)
        assert answer.startswith(b"HTTP/1.1 503 ")
        assert b"retry-after: " in answer.lower()
        assert problem_in(answer)["code"] == "not-available"
    finally:
        for one in held:
            one.close()
    time.sleep(0.2)
    assert httpx.get(f"{server.url}/v1/ping").status_code == 200


def test_a_stop_is_over_within_a_second_whatever_is_open(launch: Launch) -> None:
    server = launch()
    held = [
        connected(server.port),
        connected(server.port, b"GET /v1/ping HTTP/1.1\r\nHo"),
        connected(server.port, b"GET /v1/ping HTTP/1.1\r\nHost: t\r\n\r\n"),
        connected(server.port, HEAD + b"Content-Length: 100\r\n\r\n{"),
        connected(server.port, HEAD + b"Content-Length: 100000000\r\n\r\n{"),
    ]
    dripping = threading.Event()

    def drip() -> None:
        with connected(server.port, HEAD + b"Content-Length: 1000\r\n\r\n") as client:
            try:
                while not dripping.wait(0.02):
                    client.sendall(b" ")
            except OSError:
                return

    thread = threading.Thread(target=drip)
    thread.start()
    try:
        time.sleep(0.3)
        taken_s = server.terminate()
        waiting = everything(held[3])
    finally:
        dripping.set()
        thread.join()
        for one in held:
            one.close()
    assert taken_s < 1.0
    assert server.process.returncode == 0
    assert waiting.startswith(b"HTTP/1.1 503 ")
    assert problem_in(waiting)["detail"] == "the service is stopping"
    assert "Traceback" not in server.errors.read_text(encoding="utf-8")


def test_a_stop_when_nothing_is_open(launch: Launch) -> None:
    server = launch()
    assert server.terminate() < 1.0
    assert server.process.returncode == 0
    assert server.errors.read_text(encoding="utf-8") == ""


def test_a_taken_port_is_one_line(server: Any) -> None:
    found = run("serve", "--port", str(server.port), "--database", ":memory:")
    assert found.returncode == 1
    assert found.stderr.startswith(f"armspan: cannot listen on {server.url}: ")
    assert (found.stderr.count("\n"), found.stdout) == (1, "")


def test_a_host_that_is_not_here_is_one_line() -> None:
    found = run("serve", "--host", "192.0.2.1", "--port", "0", "--database", ":memory:")
    assert found.returncode == 1
    assert found.stderr.startswith("armspan: cannot listen on http://192.0.2.1:0: ")
    assert found.stderr.count("\n") == 1


def test_a_file_that_is_no_database_is_one_line(tmp_path: Path) -> None:
    place = tmp_path / "notes.txt"
    place.write_text("not a database " * 100, encoding="utf-8")
    found = run("serve", "--port", "0", "--database", str(place))
    assert found.returncode == 1
    assert found.stderr.startswith("armspan: ")
    assert str(place) in found.stderr
    assert (found.stderr.count("\n"), found.stdout) == (1, "")
    assert place.read_text(encoding="utf-8") == "not a database " * 100


def test_a_wrong_variable_is_one_line() -> None:
    found = run("serve", ARMSPAN_PORT="http")
    assert (found.returncode, found.stderr.count("\n")) == (2, 1)
    assert found.stderr.startswith("armspan: ARMSPAN_PORT: ")


def test_the_database_is_named_at_the_start(launch: Launch, tmp_path: Path) -> None:
    place = tmp_path / "arms.db"
    server = launch(database=str(place))
    assert f"0 in {place}" in server.start_text
    assert server.terminate() < 1.0
