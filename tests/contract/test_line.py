"""What goes over the line, byte by byte: a real server, plain sockets, the clients of controllers.

Such a client reads until Content-Length, knows no chunks, may speak HTTP/1.0, ends lines with a
bare line feed or sends in pieces. Left out: what the answers say (test_controller,
test_text_answers).
"""

import json
import socket
import time
from dataclasses import dataclass
from typing import Any

import httpx
import pytest

from tests.conftest import ServerProcess
from tests.contract.test_controller import ADDRESS, BENT, BEYOND, largest_arm

ROW = {"joint": "revolute", "a": 400, "alpha": 0, "d": 0, "theta": 0, "travel": [-170, 170]}
ARM: dict[str, Any] = {
    "name": "on-the-line",
    "convention": "standard",
    "units": "mm-deg",
    "rows": [ROW, ROW],
}
POSE = "/v1/arms/on-the-line/pose"
JACOBIAN = "/v1/arms/on-the-line/jacobian"
PATIENCE_S = 5.0


@dataclass(frozen=True)
class Reply:
    """An answer as it came: its first line, its headers by small names, its body."""

    status: int
    headers: dict[str, str]
    body: bytes

    @property
    def told(self) -> Any:
        return json.loads(self.body)


@pytest.fixture(scope="module")
def port(server: ServerProcess) -> int:
    """The port of a server that holds the arms."""
    for arm in (ARM, largest_arm()):
        answer = httpx.post(f"{server.url}/v1/arms", json=arm)
        assert answer.status_code == 201, answer.text
    return server.port


class Line:
    """A connection that reads as a controller does: to the blank line, then by Content-Length."""

    def __init__(self, port: int) -> None:
        self._socket = socket.create_connection(("127.0.0.1", port), PATIENCE_S)
        self._read = b""

    def __enter__(self) -> "Line":
        return self

    def __exit__(self, *_: object) -> None:
        self._socket.close()

    def send(self, data: bytes) -> None:
        self._socket.sendall(data)

    def reply(self, *, has_body: bool = True) -> Reply:
        """Return the next answer, which must be of a fixed length and not chunked."""
        while b"\r\n\r\n" not in self._read:
            self._more()
        head, self._read = self._read.split(b"\r\n\r\n", 1)
        first, *lines = head.decode("ascii").split("\r\n")
        headers: dict[str, str] = {}
        for line in lines:
            name, value = line.split(":", 1)
            assert name.lower() not in headers
            headers[name.lower()] = value.strip()
        assert first.startswith("HTTP/1.1 ")
        assert "transfer-encoding" not in headers
        assert "content-encoding" not in headers
        length = int(headers["content-length"]) if has_body else 0
        while len(self._read) < length:
            self._more()
        body, self._read = self._read[:length], self._read[length:]
        return Reply(int(first.split(" ")[1]), headers, body)

    def is_at_its_end(self) -> bool:
        """Return whether the server closes now, and sends nothing more."""
        return not self._read and self._socket.recv(1) == b""

    def _more(self) -> None:
        got = self._socket.recv(65536)
        assert got, "the server closed within an answer"
        self._read += got


def asked(port: int, target: str, *lines: str, method: str = "GET", last: bool = True) -> Reply:
    """Ask once and require that nothing follows the answer."""
    with Line(port) as line:
        close = ("Connection: close",) if last else ()
        text = "\r\n".join([f"{method} {target} HTTP/1.1", "Host: a", *lines, *close, "", ""])
        line.send(text.encode("ascii"))
        reply = line.reply(has_body=method != "HEAD")
        if last:
            assert reply.headers["connection"].lower() == "close"
            assert line.is_at_its_end()
        return reply


# --- lengths -------------------------------------------------------------------------------

CLASSES = [
    ("GET", f"{POSE}?q=0,90&format=txt", 200, "text/plain; charset=us-ascii"),
    ("GET", f"{POSE}?q=0,90&format=flat", 200, "application/json"),
    ("GET", f"{POSE}?q=0,90&format=csv", 200, "text/csv; charset=utf-8"),
    ("GET", f"{POSE}?q=0,90", 200, "application/json"),
    ("GET", f"{JACOBIAN}?q=0,90", 200, "application/json"),
    ("GET", f"{JACOBIAN}?q=0,90&format=flat", 200, "application/json"),
    ("GET", f"{JACOBIAN}?q=0,90&format=txt&row=1", 200, "text/plain; charset=us-ascii"),
    ("GET", f"{POSE}?q=0&errors=inline", 200, "application/json"),
    ("GET", f"{POSE}?q=0&format=txt&errors=inline", 200, "text/plain; charset=us-ascii"),
    ("GET", "/v1/ping", 200, "text/plain; charset=utf-8"),
    ("GET", f"{POSE}?q=x,0", 400, "application/problem+json"),
    ("GET", f"{POSE}?q=x,0&format=txt", 400, "text/plain; charset=us-ascii"),
    ("GET", f"{POSE}?q=0&format=flat", 422, "application/json"),
    ("GET", f"{POSE}?q=0&format=csv", 422, "text/csv; charset=utf-8"),
    ("GET", f"{POSE}?q=0", 422, "application/problem+json"),
    ("GET", "/v1/arms/nobody/pose?q=0", 404, "application/problem+json"),
    ("GET", "/v1/nowhere", 404, "application/problem+json"),
    ("DELETE", f"{POSE}?q=0,90", 405, "application/problem+json"),
    ("POST", "/v1/ping", 405, "application/problem+json"),
]


@pytest.mark.parametrize(("method", "target", "status", "media"), CLASSES)
def test_every_answer_has_a_fixed_length(
    port: int, method: str, target: str, status: int, media: str
) -> None:
    reply = asked(port, target, method=method)
    assert (reply.status, reply.headers["content-type"]) == (status, media)
    assert reply.body
    assert int(reply.headers["content-length"]) == len(reply.body)


@pytest.mark.parametrize(
    ("target", "status", "media"),
    [(target, status, media) for method, target, status, media in CLASSES if method == "GET"],
)
def test_head_tells_the_length_and_sends_nothing(
    port: int, target: str, status: int, media: str
) -> None:
    got, head = asked(port, target), asked(port, target, method="HEAD")
    assert (head.status, head.headers["content-type"], head.body) == (status, media, b"")
    # Numbers of the moment may have one digit more by now, where the width is not fixed.
    lengths = int(head.headers["content-length"]), len(got.body)
    assert abs(lengths[0] - lengths[1]) <= (0 if "format=txt" in target else 2)


def test_nobody_asked_for_compression_and_nobody_gets_it(port: int) -> None:
    reply = asked(port, f"{JACOBIAN}?q=0,90", "Accept-Encoding: gzip, deflate, br")
    assert reply.told["ok"] is True


def test_the_heartbeat_is_short(port: int) -> None:
    reply = asked(port, "/v1/ping")
    one, number, uptime = reply.body.decode("ascii").split(";")
    assert (one, int(number) > 0, int(uptime) >= 0) == ("1", True, True)
    assert len(reply.body) < 40


# --- how clients speak ---------------------------------------------------------------------


@pytest.mark.parametrize("wanted", ["txt", "flat", "csv", "json"])
def test_http_1_0_without_a_host(port: int, wanted: str) -> None:
    with Line(port) as line:
        line.send(f"GET {POSE}?q=0,90&format={wanted} HTTP/1.0\r\n\r\n".encode())
        reply = line.reply()
        assert (reply.status, reply.headers["connection"].lower()) == (200, "close")
        assert line.is_at_its_end()


def test_two_questions_on_one_connection(port: int) -> None:
    with Line(port) as line:
        for tag in (1, 2):
            line.send(
                f"GET {POSE}?q=0,90&format=flat&tag={tag} HTTP/1.1\r\nHost: a\r\n\r\n".encode()
            )
            reply = line.reply()
            assert reply.headers.get("connection", "keep-alive") == "keep-alive"
            assert reply.told["tag"] == tag
        # A refusal does not end it either.
        line.send(b"GET /v1/nowhere HTTP/1.1\r\nHost: a\r\n\r\n")
        assert line.reply().status == 404
        line.send(b"GET /v1/ping HTTP/1.1\r\nHost: a\r\nConnection: close\r\n\r\n")
        assert line.reply().body.startswith(b"1;")
        assert line.is_at_its_end()


def test_head_and_body_in_segments_of_their_own(port: int) -> None:
    body = json.dumps({"arm": "on-the-line", "joints": [[0, 90]]}).encode()
    head = (
        "POST /v1/poses HTTP/1.1\r\nHost: a\r\nContent-Type: application/json\r\n"
        f"Content-Length: {len(body)}\r\nConnection: close\r\n\r\n"
    )
    with Line(port) as line:
        for part in (head[:30].encode(), head[30:].encode(), body[:10], body[10:]):
            line.send(part)
            time.sleep(0.03)
        reply = line.reply()
        assert (reply.status, reply.told["poses"][0]["ok"]) == (200, True)
        assert line.is_at_its_end()


def test_lines_may_end_with_a_bare_line_feed(port: int) -> None:
    with Line(port) as line:
        line.send(f"GET {POSE}?q=0,90&format=txt HTTP/1.1\nHost: a\nConnection: close\n\n".encode())
        reply = line.reply()
        assert (reply.status, reply.body[:2], reply.body[-2:]) == (200, b"1;", b"\r\n")


def test_the_target_may_be_a_whole_address(port: int) -> None:
    reply = asked(port, f"http://127.0.0.1:{port}/v1/ping")
    assert (reply.status, reply.body[:2]) == (200, b"1;")
    reply = asked(port, f"http://127.0.0.1:{port}{POSE}?q=0,90&format=txt&tag=6")
    assert (reply.status, reply.body.split(b";")[4]) == (200, b"6         ")


@pytest.mark.parametrize("path", ["/v1/ping/", f"{POSE}/?q=0,90", "/v1/arms/", "/docs/"])
def test_nothing_is_redirected(port: int, path: str) -> None:
    reply = asked(port, path)
    assert reply.status == 404
    assert "location" not in reply.headers


# --- numbers as controllers print them -----------------------------------------------------


@pytest.mark.parametrize(
    "text",
    ["15", "1.5E+01", "1.5E%2B01", "1.5e1", "+15.0", "%2B15.0", "+1.5E+01", "0015.000", "15."],
)
def test_numbers_as_controllers_print_them(port: int, text: str) -> None:
    for query in (f"q1={text}&q2=-90", f"q={text},-90"):
        reply = asked(port, f"{POSE}?{query}&format=flat&form=xyz-fixed")
        assert (reply.status, reply.told["ok"]) == (200, 1), reply.told
        assert reply.told["r3"] == pytest.approx(-75, abs=1e-9)


def test_a_decimal_comma_is_refused_by_name(port: int) -> None:
    reply = asked(port, f"{POSE}?q1=1,5&q2=0")
    assert (reply.status, reply.told["code"], reply.told["number"]) == (400, "unparseable", 100)
    assert "decimal comma" in reply.told["detail"]
    assert "decimal point" in reply.told["errors"][0]["way_out"]
    assert asked(port, f"{POSE}?q1=1,5&q2=0&format=txt").body[:5] == b"0;100"
    # In a list the same comma makes a value too many.
    assert asked(port, f"{POSE}?q=1,5,0&format=txt").body[:5] == b"0;101"


@pytest.mark.parametrize(
    "request_text",
    [
        f"GET {POSE}?q=0, 90 HTTP/1.1\r\nHost: a\r\n\r\n",
        f"GET {POSE}?q=0,90 HTTP/1.1\r\n\r\n",
        f"GET {POSE}?q=0,\x01 HTTP/1.1\r\nHost: a\r\n\r\n",
        "hello\r\n\r\n",
    ],
    ids=["a blank in the address", "no host", "a control character", "no HTTP"],
)
def test_what_is_no_request_is_refused_in_the_same_shape(port: int, request_text: str) -> None:
    with Line(port) as line:
        line.send(request_text.encode())
        reply = line.reply()
        assert (reply.status, reply.headers["connection"]) == (400, "close")
        assert reply.headers["content-type"] == "application/problem+json"
        assert (reply.told["code"], reply.told["number"]) == ("unparseable", 100)
        assert reply.told["request_id"] == reply.headers["x-request-id"]
        assert line.is_at_its_end()


# --- budgets -------------------------------------------------------------------------------


@pytest.mark.parametrize("q", [BENT, BEYOND])
def test_budgets_in_bytes(port: int, q: str) -> None:
    name = largest_arm()["name"]
    more = "&tag=2147483647&tool=998&frame=999"
    for what, wanted, limit in [
        ("pose", "txt", 254),
        ("jacobian", "txt&row=6", 254),
        ("pose", "flat", 1000),
        ("jacobian", "flat", 1000),
        ("pose", "json", 16_000),
        ("jacobian", "json", 16_000),
    ]:
        for given in (more, more.replace("998", "997")):
            target = f"/v1/arms/{name}/{what}?q={q}{given}&format={wanted}"
            assert len(ADDRESS + target) <= 255
            reply = asked(port, target)
            assert reply.status == (200 if given == more else 422)
            assert len(reply.body) <= limit
