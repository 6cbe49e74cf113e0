"""Events over HTTP: begun and ended by live values, read from a change on, waited for, refused."""

import asyncio
import time
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import Any

import httpx
import pytest
from fastapi import FastAPI

from service.live.samples import Sample
from service.settings import Settings
from service.slots import Slot
from tests.conftest import ServerProcess
from tests.contract.refusals import refusal
from tests.contract.test_live_streams import ask, reading

pytestmark = pytest.mark.anyio

LOADER = "housing-loader"
INSIDE = (0.0, -1.5, 1.5, 0.0, 0.4, 0.0)
WRIST = (0.0, -1.5, 1.5, 0.0, 0.0, 0.0)
"""Axes 4 and 6 in one line."""

Launch = Callable[..., ServerProcess]


@pytest.fixture
def settings() -> Settings:
    """The demonstration cell."""
    return Settings(database=":memory:", demo=True)


class Feeding:
    """Feeds an arm, no faster than its joints can move from one posture of these to the other."""

    def __init__(self, app: FastAPI) -> None:
        self.app = app

    async def __call__(self, *postures: Sequence[float], arm: str = LOADER, **more: Any) -> None:
        live, stored = self.app.state.live, self.app.state.arms.get(arm)
        for joints in postures:
            clock = live.clock
            said = {"source": "gateway", "period_s": 60.0, **more}
            sample = Sample(tuple(joints), clock.steady_s(), clock.wall_ms(), **said)
            (taken,) = live.feed(stored, [sample])
            assert taken.accepted, taken
            await asyncio.sleep(0.06)


@pytest.fixture
def feed(app: FastAPI) -> Feeding:
    return Feeding(app)


async def listed(client: httpx.AsyncClient, query: str = "") -> dict[str, Any]:
    answer = await client.get(f"/v1/events?{query}")
    assert answer.status_code == 200, answer.text
    found: dict[str, Any] = answer.json()
    return found


async def until(
    client: httpx.AsyncClient, count: int, query: str = "after=0"
) -> list[dict[str, Any]]:
    """Wait for so many events."""
    deadline = time.monotonic() + 10.0
    while True:
        found = (await listed(client, query))["events"]
        if len(found) >= count:
            return found
        assert time.monotonic() < deadline, found
        await asyncio.sleep(0.02)


async def test_a_wrist_in_line_begins_two_events_and_ends_them(
    client: httpx.AsyncClient, feed: Feeding
) -> None:
    await feed(INSIDE, WRIST, WRIST)
    found = await until(client, 2, "after=0&state=open")
    assert {one["kind"] for one in found} == {"near-singular", "singular"}
    for one in found:
        assert (one["arm"], one["ended_at"], one["revision"]) == (LOADER, None, 1)
        assert one["peak"] <= one["begins_at"] < one["ends_at"]
        assert one["say"].startswith(one["kind"].replace("-", " "))
    await feed((0.0, -1.5, 1.5, 0.0, 0.05, 0.0), INSIDE)
    ended = await until(client, 2, "after=0&state=ended")
    by_kind = {one["kind"]: one for one in ended}
    assert by_kind["singular"]["ended_at"] < by_kind["near-singular"]["ended_at"]
    assert {one["id"] for one in ended} == {one["id"] for one in found}
    assert all(one["began_at"] <= one["seen_at"] <= one["ended_at"] for one in ended)
    assert min(one["change"] for one in ended) > max(one["change"] for one in found)


async def test_a_reader_that_goes_on_from_each_answer_misses_nothing(
    client: httpx.AsyncClient, feed: Feeding
) -> None:
    await feed(*[INSIDE, WRIST] * 4, INSIDE)
    await until(client, 8, "after=0&state=ended")
    whole = await listed(client, "after=0")
    seen: list[dict[str, Any]] = []
    after, more = 0, True
    while more:
        page = await listed(client, f"after={after}&page_size=2")
        seen += page["events"]
        after, more = page["after"], page["more"]
    assert seen == whole["events"]
    assert after == whole["after"] == max(one["change"] for one in seen)
    newest = await listed(client, "page_size=3")
    assert newest["events"] == seen[-3:]
    # Where a filter leaves nothing, a reader is led past what it need not look at again.
    nothing = await listed(client, "after=0&kind=stale")
    assert (nothing["events"], nothing["after"]) == ([], after)


async def test_a_new_revision_is_an_event_though_nothing_comes_in(
    client: httpx.AsyncClient, feed: Feeding
) -> None:
    await feed(INSIDE)
    path = f"/v1/arms/{LOADER}"
    arm = (await client.get(path)).json()["arm"]
    own = {key: arm[key] for key in ("name", "convention", "units", "rows", "tools")}
    put = await client.put(path, json={**own, "notes": "new"}, headers={"if-match": "*"})
    assert put.status_code == 200, put.text
    (found,) = await until(client, 1, f"after=0&kind=revision-changed&arm={LOADER}")
    assert (found["from"], found["to"], found["state"]) == (1, 2, "ended")
    assert found["began_at"] == found["ended_at"]


async def test_an_input_that_stops_is_an_event_until_it_is_back(
    client: httpx.AsyncClient, feed: Feeding
) -> None:
    await feed(INSIDE, period_s=0.02)
    (found,) = await until(client, 1, "after=0&kind=stale")
    assert (found["state"], found["arm"]) == ("open", LOADER)
    assert found["peak"] > 0.05
    await feed(INSIDE, INSIDE, INSIDE)
    (found,) = await until(client, 1, "after=0&kind=stale&state=ended")
    assert found["began_at"] < found["ended_at"]


async def test_outside_working_travel(client: httpx.AsyncClient, feed: Feeding) -> None:
    for name in ("housing-loader", "lathe-tender", "seal-setter", "wash-arm", "line-runner"):
        arm = feed.app.state.arms.get(name).read.arm
        bounded = [row for row in arm.table.rows if row.working_travel is not None]
        if bounded:
            break
    index = arm.table.rows.index(bounded[0])
    beyond = [0.0] * arm.joint_count
    within = bounded[0].working_travel
    beyond[index] = within.upper + 0.1 * (bounded[0].travel.upper - within.upper)
    await feed(beyond, arm=name)
    (found,) = await until(client, 1, f"after=0&kind=outside-working-travel&arm={name}")
    assert found["peak"] < 0.0 == found["begins_at"] < found["ends_at"]


async def test_waiting_ends_with_the_first_event_or_with_the_time(
    client: httpx.AsyncClient, feed: Feeding
) -> None:
    begun = time.monotonic()
    page = await listed(client, "after=0&wait=0.2")
    assert page["events"] == []
    assert time.monotonic() - begun >= 0.2
    waiting = asyncio.create_task(listed(client, f"after={page['after']}&wait=30&kind=singular"))
    await asyncio.sleep(0.05)
    await feed(INSIDE, source="a")
    await feed(INSIDE, source="b")
    await feed(WRIST)
    found = await asyncio.wait_for(waiting, 10)
    assert [one["kind"] for one in found["events"]] == ["singular"]


async def test_who_waits_is_answered_when_the_service_stops(
    app: FastAPI, client: httpx.AsyncClient
) -> None:
    waiting = asyncio.create_task(client.get("/v1/events?after=0&wait=60"))
    await asyncio.sleep(0.1)
    app.state.streams.stop()
    answer = await asyncio.wait_for(waiting, 5)
    assert answer.json()["events"] == []


async def test_a_stream_tells_each_change_once_and_goes_on_where_it_was(
    launch: Launch,
) -> None:
    server = launch("--demo")
    port = server.port

    def fed(elbow: float, sequence: int) -> None:
        body = {"joints": [0, -90, 90, 0, elbow, 0], "sequence": sequence, "period_ms": 600_000}
        status, told = ask(port, "PUT", f"/v1/arms/{LOADER}/joints", body)
        assert (status, told["accepted"]) == (200, True)
        time.sleep(0.4)

    with reading(port, f"/v1/events/stream?arm={LOADER}&kind=singular") as reader:
        assert reader.status == 200
        assert reader.chunk() == b"retry: 2000\n\n"
        events = reader.events()
        fed(20, 1)
        fed(0, 2)
        begun = next(events)
        assert (begun["event"], begun["data"]["kind"]) == ("change", "singular")
        assert (begun["id"], begun["data"]["state"]) == (str(begun["data"]["change"]), "open")
    fed(20, 3)
    fed(0, 4)
    # Left meanwhile: what was missed comes first, in order; the header counts before `after`.
    path = f"/v1/events/stream?kind=singular&after={begun['id']}"
    with reading(port, path) as reader:
        events = reader.events()
        missed = [next(events)["data"] for _ in range(2)]
        assert [one["state"] for one in missed] == ["ended", "open"]
        assert missed[0]["id"] == begun["data"]["id"]
    with reading(port, path, Last_Event_ID=str(missed[0]["change"])) as reader:
        assert next(reader.events())["data"] == missed[1]
    with reading(port, "/v1/events/stream?kind=singular", Last_Event_ID="999999") as reader:
        # Of another database: all of this one is new.
        assert next(reader.events())["data"]["change"] == missed[0]["change"]
        assert server.terminate() < 2.0
    assert server.errors.read_text("utf-8") == ""


@pytest.mark.parametrize(
    ("query", "code"),
    [
        ("after=999999", "unusable-value"),
        ("wait=1", "unknown-field"),
        ("page_size=1", "unknown-field"),
        ("kind=late", "unusable-value"),
        ("arm=nobody", "unknown-arm"),
    ],
)
async def test_a_stream_that_cannot_be_is_refused(
    client: httpx.AsyncClient, query: str, code: str
) -> None:
    refusal(await client.get(f"/v1/events/stream?{query}"), code, 422 if "arm" in query else None)


async def test_who_has_left_is_not_waited_for(app: FastAPI, client: httpx.AsyncClient) -> None:
    """Else some hundred who are impatient would keep all others out."""
    server = app.state.streams
    left = asyncio.Event()

    async def receive() -> dict[str, Any]:
        await left.wait()
        return {"type": "http.disconnect"}

    waiting = asyncio.create_task(server.wait(Slot(), 60.0, receive))
    await asyncio.sleep(0.01)
    assert len(server.waiting) == 1
    left.set()
    assert await asyncio.wait_for(waiting, 5) is False
    assert len(server.waiting) == 0


async def test_a_removed_arm_leaves_its_events_and_none_open(
    client: httpx.AsyncClient, feed: Feeding
) -> None:
    await feed(INSIDE, WRIST)
    await until(client, 2, "after=0&state=open")
    assert (await client.delete(f"/v1/arms/{LOADER}")).status_code == 204
    found = await until(client, 2, f"after=0&state=unknown&arm={LOADER}")
    assert all(one["ended_at"] is None for one in found)


@pytest.mark.parametrize(
    ("query", "code"),
    [
        ("after=x", "unparseable"),
        ("after=1.5", "unparseable"),
        ("after=-1", "unusable-value"),
        ("after=999999", "unusable-value"),
        ("after=9999999999999999999999", "unusable-value"),
        ("page_size=0", "unusable-value"),
        ("page_size=201", "unusable-value"),
        ("kind=hot", "unusable-value"),
        ("state=closed", "unusable-value"),
        ("wait=61", "unusable-value"),
        ("wait=-1", "unusable-value"),
        ("wait=nan", "not-finite"),
        ("wait=soon", "unparseable"),
        ("arms=a", "unknown-field"),
        ("after=1&after=2", "unusable-value"),
    ],
)
async def test_a_question_that_cannot_be_answered_is_refused(
    client: httpx.AsyncClient, query: str, code: str
) -> None:
    refusal(await client.get(f"/v1/events?{query}"), code)


async def test_an_unknown_arm_has_no_events(client: httpx.AsyncClient) -> None:
    for name in ("no-arm", "a%00b", "%22%3B--"):
        refusal(await client.get(f"/v1/events?arm={name}"), "unknown-arm", 422)
    assert (await listed(client, f"arm={LOADER}"))["events"] == []


def test_a_kill_leaves_no_event_open_for_ever(launch: Launch, tmp_path: Path) -> None:
    database = str(tmp_path / "arms.db")
    first = launch("--database", database, "--demo", database=database)
    with httpx.Client(base_url=first.url, timeout=20) as client:
        for _ in range(3):
            body = {"joints": [0, -85, 85, 0, 0, 0], "period_ms": 60_000}
            put = client.put(f"/v1/arms/{LOADER}/joints", json=body)
            assert put.status_code == 200, put.text
            time.sleep(0.05)
        page = client.get(f"/v1/events?after=0&state=open&arm={LOADER}&wait=10").json()
        left = {one["id"] for one in page["events"]}
        assert left
        first.process.kill()
        first.process.wait(10)
    again = launch("--database", database, "--demo", database=database)
    with httpx.Client(base_url=again.url, timeout=20) as client:
        found = client.get(f"/v1/events?after={page['after']}&arm={LOADER}").json()["events"]
        closed = {one["id"]: one for one in found if one["id"] in left}
        assert closed.keys() == left
        assert {(one["state"], one["ended_at"]) for one in closed.values()} == {("unknown", None)}
    assert again.terminate() < 3
