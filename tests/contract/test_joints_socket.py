"""Joint values by WebSocket, against a real server: what is told, what is refused, how it ends."""

import asyncio
import json
from collections.abc import Callable
from contextlib import suppress
from typing import Any

import pytest
from websockets.asyncio.client import ClientConnection, connect
from websockets.exceptions import ConnectionClosed, InvalidStatus

from tests.conftest import ServerProcess
from tests.contract.test_live_streams import ask, with_arm

pytestmark = pytest.mark.anyio


def address(server: ServerProcess, arm: str, query: str = "") -> str:
    return f"ws://127.0.0.1:{server.port}/v1/arms/{arm}/joints/socket{query}"


def sample(*joints: float | None, **more: Any) -> str:
    return json.dumps({"joints": joints, "period_ms": 600_000, **more})


async def told(socket: ClientConnection) -> dict[str, Any]:
    found: dict[str, Any] = json.loads(await asyncio.wait_for(socket.recv(), 10))
    return found


async def closed(socket: ClientConnection) -> tuple[int, str]:
    """Read until the end; return the server's code and reason."""
    try:
        while True:
            await asyncio.wait_for(socket.recv(), 10)
    except ConnectionClosed as ended:
        frame = ended.rcvd
    assert frame is not None
    return frame.code, frame.reason


async def test_rubbish_from_who_has_left_is_no_failure(
    launch: Callable[..., ServerProcess],
) -> None:
    server = launch()
    with_arm(server, "gone")
    for number in range(10):
        async with connect(address(server, "gone")) as socket:
            for _ in range(40):
                with suppress(ConnectionClosed):
                    await socket.send("{rubbish")
            if number % 2:
                socket.transport.abort()
    server.terminate()
    assert server.errors.read_text("utf-8") == ""


async def test_values_stand_and_are_told_of_in_few_words(server: ServerProcess) -> None:
    port = with_arm(server, "socket")
    async with connect(address(server, "socket")) as socket:
        await socket.send(sample(0, 0, sequence=0))
        first = await told(socket)
        assert (first["ok"], first["good"], first["sequence"]) == (True, 1, 0)
        for number in range(1, 301):
            await socket.send(sample(number / 100, 0, sequence=number))
        await socket.send(json.dumps({"samples": [{"joints": [3, 0], "sequence": 300}]}))
        messages, last = 1, first
        while last["good"] + last["dropped"] + last["passed_over"] < 302:
            last = await told(socket)
            messages += 1
        # The last has the sequence of the one before: one of the two, never both.
        assert last["good"] + last["passed_over"] + last["dropped"] == 302
        assert (last["doubted"], last["refused"]) == (0, 0)
        assert messages < 40  # ten a second, however many came
        live = ask(port, "GET", "/v1/arms/socket/live")[1]
        assert live["joints"] == [3, 0]
        assert live["input"]["sequence"] == 300
        await socket.send(sample(3, None, sequence=301))
        while last["doubted"] == 0:
            last = await told(socket)
        assert (last["quality"], last["reason"]) == ("uncertain", "not-finite")


async def test_who_reads_nothing_is_not_held_up(server: ServerProcess) -> None:
    port = with_arm(server, "deaf")
    async with connect(address(server, "deaf"), max_queue=1, close_timeout=0.2) as socket:
        for number in range(1000):
            await socket.send(sample(0, 0, sequence=number))
        for _ in range(100):
            live = ask(port, "GET", "/v1/arms/deaf/live")[1]
            if live["ok"] is True and live["input"]["sequence"] == 999:
                break
            await asyncio.sleep(0.05)
        assert live["input"]["sequence"] == 999


async def test_what_came_last_stands_where_the_sender_goes_at_once(server: ServerProcess) -> None:
    port = with_arm(server, "hasty")
    for turn in range(1, 6):
        async with connect(address(server, "hasty")) as socket:
            for number in range(10):
                await socket.send(sample(turn, number, sequence=10 * turn + number))
        # The end of a socket is answered before what came is worked on.
        for _ in range(100):
            live = ask(port, "GET", "/v1/arms/hasty/live")[1]
            if live["ok"] is True and live["input"]["sequence"] == 10 * turn + 9:
                break
            await asyncio.sleep(0.02)
        assert live["input"]["sequence"] == 10 * turn + 9


async def test_rubbish_is_told_why_and_then_cut_off(server: ServerProcess) -> None:
    port = with_arm(server, "rubbish")
    async with connect(address(server, "rubbish")) as socket:
        await socket.send("rubbish")
        why = await told(socket)
        assert (why["ok"], why["refused"], why["problem"]["code"]) == (False, 1, "unparseable")
        await socket.send(sample(1))
        assert (await told(socket))["problem"]["code"] == "wrong-joint-count"
        # A good one between them: it is not the wrong program.
        await socket.send(sample(1, 2, sequence=1))
        assert (await told(socket))["good"] == 1
        for _ in range(20):
            await socket.send('{"joints": [')
        code, reason = await closed(socket)
        assert (code, "20 messages" in reason) == (1008, True)
    assert ask(port, "GET", "/v1/arms/rubbish/live")[1]["quality"] == "good"


@pytest.mark.parametrize(
    ("message", "code"),
    [(b"\x00\x01", 1003), ("x" * 1_000_000, 1009), ('{"joints": [1, 2]}' + " " * 600_000, 1009)],
)
async def test_what_ends_a_socket(server: ServerProcess, message: str | bytes, code: int) -> None:
    arm = f"ends-{code}-{len(message)}"
    with_arm(server, arm)
    async with connect(address(server, arm), max_size=None) as socket:
        await socket.send(message)
        assert (await closed(socket))[0] == code


@pytest.mark.parametrize(
    ("arm", "query", "origin", "status", "code"),
    [
        ("no-such-arm", "", None, 404, "unknown-arm"),
        ("handshake", "?speed=high", None, 422, "unknown-field"),
        ("handshake", "", "http://elsewhere.test", 422, "unusable-value"),
    ],
)
async def test_a_handshake_is_refused_in_words(
    server: ServerProcess, arm: str, query: str, origin: str | None, status: int, code: str
) -> None:
    ask(server.port, "POST", "/v1/arms", {"name": "handshake", "convention": "standard",
        "units": "mm-deg", "rows": []})  # fmt: skip
    with pytest.raises(InvalidStatus) as refused:
        async with connect(address(server, arm, query), origin=origin):  # type: ignore[arg-type]
            pass
    response = refused.value.response
    assert response.status_code == status
    assert response.headers["content-type"] == "application/problem+json"
    assert json.loads(response.body or b"")["code"] == code


async def test_without_a_handshake_there_is_no_such_address(server: ServerProcess) -> None:
    status, problem = ask(server.port, "GET", "/v1/arms/socket/joints/socket")
    assert (status, problem["code"]) == (404, "unknown-path")


async def test_ten_thousand_a_second_do_not_hold_up_others(server: ServerProcess) -> None:
    """Others get their answers, and the newest value is the one that stands."""
    port = with_arm(server, "flood")
    async with connect(address(server, "flood")) as socket:
        said: dict[str, Any] = {}

        async def listen() -> None:
            async for text in socket:
                said.update(json.loads(text))

        listening = asyncio.create_task(listen())
        answers = 0
        for number in range(10_000):
            await socket.send(sample(0, 0, sequence=number))
            if number % 1000 == 999:
                status, _ = await asyncio.to_thread(ask, port, "GET", "/v1/ping?format=json")
                answers += status in (200, 422)
        assert answers == 10
        for _ in range(200):
            live = (await asyncio.to_thread(ask, port, "GET", "/v1/arms/flood/live"))[1]
            if live["input"]["sequence"] == 9999:
                break
            await asyncio.sleep(0.05)
        assert live["input"]["sequence"] == 9999
        # Some were passed over: that is told, and the sum is right.
        await asyncio.sleep(0.2)
        assert said["good"] + said["passed_over"] == 10_000
        assert live["input"]["counts"] == {"good": said["good"]}
        listening.cancel()
