"""What it costs to watch live arms for events, to write events, and to keep records.

    python -m tests.benchmarks.traces

Fifty arms of six joints are fed in turns, with nobody watching and with events noted; the
difference of the least of several rounds is the watching. Records are kept on a file, one after the
other and eight at once, each on the disk before it is answered. No figure was asked for; events are
not to hurt fifty arms at twenty values a second.
"""

import asyncio
import tempfile
from pathlib import Path
from time import perf_counter, process_time
from typing import Any

import httpx

from service.app import create_app
from service.events.ports import Event
from service.events.watch import EventWatch
from service.live.samples import Sample
from service.settings import Settings
from service.simulation.motion import wandering_of

ARMS, HZ, SECONDS, ROUNDS = 50, 20, 20, 5
RECORDS, AT_ONCE = 200, 8
LOADER = "/v1/arms/housing-loader/records"
POSTURE = [0, -90, 90, 0, 45, 0]


def watching(state: Any) -> list[Event]:
    """Print what one value costs, alone and watched; return the events."""
    live, document = state.live, state.arms.get("housing-loader").record.document
    arms = [state.arms.create({**document, "name": f"arm-{number}"}) for number in range(ARMS)]
    steps = HZ * SECONDS
    postures = []
    for one in arms:
        wandering = wandering_of(one.read.arm, 3)
        postures.append([tuple(wandering.at(step / HZ).tolist()) for step in range(steps)])
    noted: list[Event] = []
    usual = list(live.observers)

    def feed_all() -> float:
        begun = process_time()
        for step in range(steps):
            for number, one in enumerate(arms):
                # Received as if in real time, so that nothing is too fast or looked at too often.
                received_s = at_s + step / HZ
                sample = Sample(postures[number][step], received_s, 0.0, period_s=60.0)
                live.feed(one, [sample])
        return process_time() - begun

    least = {"alone": float("inf"), "watched": float("inf")}
    at_s = live.clock.steady_s()
    for _ in range(ROUNDS):
        for name in least:
            watch = EventWatch(noted.append, live.clock)
            watch_each = _Unthrottled(watch)
            live.observers[:] = [watch_each] if name == "watched" else []
            least[name] = min(least[name], feed_all())
            at_s += SECONDS
    live.observers[:] = usual
    for name, took in least.items():
        print(f"a value {name}: {1e6 * took / (steps * ARMS):.1f} us")
    share = (least["watched"] - least["alone"]) / SECONDS
    print(f"{ARMS} arms at {HZ} Hz watched: {100 * share:.1f} % of a core more")
    return noted


class _Unthrottled:
    """Has each value measured, as at twenty a second; here they come all at once."""

    def __init__(self, watch: EventWatch) -> None:
        self._watch = watch

    def __call__(self, notice: Any) -> None:
        watched = self._watch._arms.get(notice.standing.arm)
        if watched is not None:
            watched._measured_s = float("-inf")
        self._watch(notice)


def writing(state: Any, noted: list[Event]) -> None:
    """Print how long events take into the store, a hundred in one step."""
    store, took = state.opened.events, []
    for begin in range(0, min(len(noted), 2000) - 99, 100):
        begun = perf_counter()
        store.write(noted[begin : begin + 100], 1)
        took.append(perf_counter() - begun)
    print(f"100 events into the store: {1e3 * min(took):.1f} to {1e3 * max(took):.1f} ms")


async def records(client: httpx.AsyncClient) -> None:
    """Print how long a record takes, how many a second are kept, and how quick the table is."""

    async def keep(number: int) -> float:
        body = {"joints": POSTURE, "tool": "flange", "serial": f"HP-{number}"}
        begun = perf_counter()
        answer = await client.post(LOADER, json=body)
        assert answer.status_code == 201, answer.text
        return perf_counter() - begun

    took = sorted([await keep(number) for number in range(RECORDS)])
    print(f"a record: median {1e3 * took[RECORDS // 2]:.1f} ms, p99 {1e3 * took[-3]:.1f} ms")
    begun = perf_counter()
    for _ in range(RECORDS // AT_ONCE):
        await asyncio.gather(*map(keep, range(AT_ONCE)))
    print(f"{AT_ONCE} at once: {RECORDS / (perf_counter() - begun):.0f} records a second")
    begun = perf_counter()
    lines = (await client.get("/v1/records?format=csv")).text.count("\r\n") - 1
    print(f"as CSV: {1e6 * (perf_counter() - begun) / lines:.0f} us a record")


async def main() -> None:
    """Print the figures."""
    with tempfile.TemporaryDirectory() as folder:
        app = create_app(Settings(database=str(Path(folder) / "arms.db"), demo=True))
        transport = httpx.ASGITransport(app)
        async with (
            app.router.lifespan_context(app),
            httpx.AsyncClient(transport=transport, base_url="http://armspan.test") as client,
        ):
            await records(client)
            writing(app.state, watching(app.state))


if __name__ == "__main__":
    asyncio.run(main())
