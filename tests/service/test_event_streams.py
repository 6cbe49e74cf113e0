"""Event streams without a network: what is held, who is cut off, how many there are."""

import asyncio
import socket
from collections.abc import AsyncIterator, Callable
from contextlib import asynccontextmanager, suppress
from typing import Any

import pytest
import uvicorn

from service import event_streams
from service.errors import NotAvailable
from service.event_streams import EventStream, EventStreams, event, last_event_id
from service.http_line import FixedLengthH11
from service.slots import Slot

pytestmark = pytest.mark.anyio


_ASKING = b"GET / HTTP/1.1\r\nHost: x\r\n\r\n"


class Connection:
    """A connection that can be full, and cut."""

    def __init__(self) -> None:
        self.free = asyncio.Event()
        self.free.set()
        self.cut = False
        self.high: int | None = None

    def abort(self) -> None:
        self.cut = True
        self.free.set()

    def set_write_buffer_limits(self, high: int) -> None:
        self.high = high

    def get_extra_info(self, name: str) -> None:
        return None


class Reader:
    """Who asked for a stream: what was sent to it, and a way to leave."""

    def __init__(self) -> None:
        self.connection = Connection()
        self.sent: list[bytes] = []
        self.is_over = False
        self.left = asyncio.Event()

    async def receive(self) -> dict[str, Any]:
        await self.left.wait()
        return {"type": "http.disconnect"}

    async def send(self, message: Any) -> None:
        await self.connection.free.wait()
        if message["type"] == "http.response.body":
            self.sent.append(message["body"])
            self.is_over = not message["more_body"]


class Source:
    """What fills slots; ``slots`` are those it fills now."""

    def __init__(self) -> None:
        self.slots: list[Slot] = []

    def __call__(self, slot: Slot) -> Callable[[], None]:
        self.slots.append(slot)
        return lambda: self.slots.remove(slot)

    def tell(self, text: bytes, key: str = "") -> None:
        for slot in self.slots:
            slot.put(key, lambda: text)


@asynccontextmanager
async def stream(
    streams: EventStreams, source: Source, gap_s: float = 0.0
) -> AsyncIterator[tuple[Reader, EventStream]]:
    """Have one reader read while the body runs; it has ended afterwards."""
    reader, answer = Reader(), EventStream(streams, source, gap_s=gap_s)
    scope = {"type": "http", "state": {"connection": reader.connection}}
    running = asyncio.create_task(answer(scope, reader.receive, reader.send))
    await settled()
    yield reader, answer
    await asyncio.wait_for(running, 5)
    assert source.slots == []
    assert answer not in streams.open


@asynccontextmanager
async def served(app: Any) -> AsyncIterator[int]:
    """Serve an app on a free port, on this loop and as the service does."""
    config = uvicorn.Config(app, http=FixedLengthH11, lifespan="off", log_config=None)
    server = uvicorn.Server(config)
    listener = socket.create_server(("127.0.0.1", 0))
    serving = asyncio.create_task(server.serve([listener]))
    yield listener.getsockname()[1]
    server.should_exit = True
    await asyncio.wait_for(serving, 10)


async def until(enough: Callable[[], bool]) -> None:
    async with asyncio.timeout(10):
        while not enough():
            await asyncio.sleep(0.005)


def rest_of(lazy: socket.socket) -> int:
    """Return how many bytes can still be read of a socket until its end."""
    lazy.settimeout(5)
    count = 0
    with suppress(ConnectionError):
        while content := lazy.recv(65536):
            count += len(content)
    return count


async def stays() -> dict[str, Any]:
    """Receive nothing: the asker waits for its answer."""
    await asyncio.Event().wait()
    raise AssertionError


async def settled() -> None:
    for _ in range(10):
        await asyncio.sleep(0)


async def test_events_until_the_reader_leaves() -> None:
    source = Source()
    async with stream(EventStreams(), source) as (reader, _):
        source.tell(b"1")
        await asyncio.sleep(0.02)
        source.tell(b"2")
        await asyncio.sleep(0.02)
        assert reader.sent == [b"retry: 2000\n\n", b"1", b"2"]
        assert reader.connection.high == 32 * 1024
        reader.left.set()
    assert reader.is_over


async def test_the_newest_of_each_wins_while_a_connection_is_full() -> None:
    source = Source()
    async with stream(EventStreams(), source) as (reader, _):
        reader.connection.free.clear()
        source.tell(b"a0", "a")
        await asyncio.sleep(0.02)
        for number in range(1, 1000):
            source.tell(b"a%d" % number, "a")
            source.tell(b"b%d" % number, "b")
        reader.connection.free.set()
        await asyncio.sleep(0.02)
        assert reader.sent[1:] == [b"a0", b"a999b999"]
        reader.left.set()


async def test_an_event_is_made_when_it_is_sent() -> None:
    source, made = Source(), []
    async with stream(EventStreams(), source) as (reader, _):
        for number in range(5):
            source.slots[0].put("", lambda number=number: made.append(number) or b"x")
        await asyncio.sleep(0.02)
        assert made == [4]
        reader.left.set()


async def test_a_gap_between_events() -> None:
    source = Source()
    async with stream(EventStreams(), source, gap_s=0.2) as (reader, _):
        loop = asyncio.get_running_loop()
        begun = loop.time()
        while len(reader.sent) < 3:
            source.tell(b"%d" % len(reader.sent))
            await asyncio.sleep(0.005)
        # The first comes at once, the second after the gap.
        assert loop.time() - begun >= 0.19
        reader.left.set()


async def test_who_takes_nothing_is_cut_off_and_a_quiet_one_kept_alive() -> None:
    now = 0.0
    streams, source = EventStreams(lambda: now), Source()
    async with stream(streams, source) as (reader, answer):
        now = answer._sent_at + 4.0
        answer.look_after(now)
        await asyncio.sleep(0.02)
        assert len(reader.sent) == 1
        answer.look_after(now + 2.0)
        await asyncio.sleep(0.02)
        assert reader.sent[-1] == b": \n\n"
        reader.connection.free.clear()
        source.tell(b"x")
        await asyncio.sleep(0.02)
        answer.look_after(answer._sent_at + 9.0)
        assert not reader.connection.cut
        answer.look_after(answer._sent_at + 11.0)
        assert reader.connection.cut
        reader.left.set()


async def test_a_socket_that_is_read_no_more_is_cut_and_costs_others_nothing(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    """Over the network as it is: its buffers fill, and only then nothing is taken any more."""
    monkeypatch.setattr(event_streams, "_BLOCKED_S", 0.5)
    monkeypatch.setattr(event_streams, "_SWEEP_S", 0.05)
    streams, source = EventStreams(), Source()

    async def app(scope: Any, receive: Any, send: Any) -> None:
        await EventStream(streams, source)(scope, receive, send)

    async with served(app) as port:
        with socket.socket() as lazy:
            # Before it is connected: what the other side may send is agreed on then.
            lazy.setsockopt(socket.SOL_SOCKET, socket.SO_RCVBUF, 4096)
            lazy.setblocking(False)
            await asyncio.get_running_loop().sock_connect(lazy, ("127.0.0.1", port))
            lazy.sendall(_ASKING)
            reader, writer = await asyncio.open_connection("127.0.0.1", port)
            writer.write(_ASKING)
            await until(lambda: len(streams.open) == 2)
            (mine,) = [one for one in source.slots if one is not source.slots[0]]
            for number in range(1000):
                source.tell(b"event: %d\n%b\n\n" % (number, b"x" * 8000))
                await asyncio.wait_for(reader.readuntil(b"event: %d\n" % number), 5)
                if len(streams.open) == 1:
                    break
                await asyncio.sleep(0.01)
            # Cut after it had taken nothing for a while; a few events had found room on the way.
            assert number < 999
            assert source.slots == [mine]
            # What it had yet to read is little, and then comes the end.
            held = await asyncio.get_running_loop().run_in_executor(None, rest_of, lazy)
            assert held < 4 * event_streams._BUFFER_BYTES
            writer.close()


async def test_a_reader_who_left_before_it_began_is_no_failure() -> None:
    class Closed(Connection):
        def get_extra_info(self, name: str) -> Any:
            return closed

    closed = socket.socket()
    closed.close()
    streams, source = EventStreams(), Source()
    reader = Reader()
    reader.connection = Closed()
    reader.left.set()
    scope = {"type": "http", "state": {"connection": reader.connection}}
    await asyncio.wait_for(EventStream(streams, source)(scope, reader.receive, reader.send), 5)
    assert streams.open == set()


async def test_a_source_that_fails_leaves_no_stream() -> None:
    def fail(slot: Slot) -> Callable[[], None]:
        raise RuntimeError

    streams, reader = EventStreams(), Reader()
    with pytest.raises(RuntimeError):
        await EventStream(streams, fail)({"type": "http"}, reader.receive, reader.send)
    assert streams.open == set()


async def test_a_stop_ends_all_of_them_the_full_ones_too() -> None:
    streams, source = EventStreams(), Source()
    async with stream(streams, source) as (reader, _), stream(streams, source) as (full, _):
        full.connection.free.clear()
        source.tell(b"x")
        await asyncio.sleep(0.02)
        waiting = asyncio.create_task(streams.wait(Slot(), 20.0, stays))
        await settled()
        streams.stop()
        assert await waiting is False
    assert reader.is_over
    assert full.connection.cut
    async with stream(streams, source) as (late, _):
        pass
    assert late.is_over
    assert await streams.wait(Slot(), 20.0, stays) is False


async def test_waiting_for_a_change() -> None:
    streams, slot = EventStreams(), Slot()
    assert await streams.wait(slot, 0.01, stays) is False
    slot.put("", bytes)
    assert await streams.wait(slot, 20.0, stays) is True
    assert streams.waiting == set()


async def test_there_is_room_for_so_many(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(event_streams, "MOST_STREAMS", 1)
    streams, source = EventStreams(), Source()
    async with stream(streams, source) as (reader, _):
        with pytest.raises(NotAvailable) as refused:
            EventStream(streams, source)
        assert refused.value.headers["Retry-After"] == "10"
        reader.left.set()


def test_what_an_event_looks_like() -> None:
    assert event("pose", 7, b"{}") == b"event: pose\nid: 7\ndata: {}\n\n"
    for value, number in ((b"12", 12), (b"", 0), (b"-1", 0), (b"9" * 30, 0), (b"\xb2", 0)):
        assert last_event_id([(b"last-event-id", value)]) == number
