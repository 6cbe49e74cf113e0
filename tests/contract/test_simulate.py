"""``armspan simulate`` and the moving demonstration cell, as seen from outside."""

import asyncio
import io
import json
import signal
import subprocess
import sys
import time
from collections.abc import Callable
from typing import Any

import httpx
import pytest
from fastapi import FastAPI

from service.__main__ import main
from service.settings import Settings
from service.simulation.sending import Simulation, simulate
from tests.conftest import ROOT, ServerProcess

pytestmark = pytest.mark.anyio

HERE = "http://armspan.test"
LOADER = "/v1/arms/housing-loader"
Launch = Callable[..., ServerProcess]


@pytest.fixture
def settings() -> Settings:
    """The demonstration cell."""
    return Settings(database=":memory:", demo=True)


class Run:
    """Runs the simulation against a service in process."""

    def __init__(self, app: FastAPI) -> None:
        self._transport: httpx.AsyncBaseTransport = httpx.ASGITransport(app)

    async def __call__(self, **asked: Any) -> tuple[int, list[str]]:
        out = io.StringIO()
        simulation = Simulation(**{"url": HERE, "duration_s": 0.5, **asked})
        code = await simulate(simulation, out, transport=self._transport)
        return code, out.getvalue().splitlines()


@pytest.fixture
def run(app: FastAPI) -> Run:
    return Run(app)


async def test_all_arms_move_and_say_that_they_are_simulated(
    client: httpx.AsyncClient, run: Run
) -> None:
    running = asyncio.create_task(run(duration_s=1.0))
    await asyncio.sleep(0.6)
    live = (await client.get(f"{LOADER}/live?tool=flange")).json()
    flat = (await client.get(f"{LOADER}/live?tool=flange&format=flat")).json()
    code, lines = await running
    assert (code, len(lines)) == (0, 7)
    for line in lines:
        name, _, told = line.partition(": ")
        sent, taken = (int(part.split()[0]) for part in told.split(", "))
        assert sent == taken == 20, line
        assert (await client.get(f"/v1/arms/{name}/live/history")).status_code == 200
    assert (live["code"], live["simulated"], live["quality"]) == (8, True, "good")
    assert (flat["code"], flat["flags"] & 128) == (8, 128)


async def test_high_rates_go_several_in_one_request(app: FastAPI, run: Run) -> None:
    code, (line,) = await run(arms=("wash-arm",), rate_hz=400.0)
    assert (code, line) == (0, "wash-arm: 200 sent, 200 taken")
    assert app.state.live.get("wash-arm").counts == {"good": 200}


async def test_the_seed_says_how_it_moves(client: httpx.AsyncClient, app: FastAPI) -> None:
    async def postures(seed: int) -> Any:
        run = Run(app)
        await run(arms=("seal-setter",), seed=seed, duration_s=0.25)
        sample = app.state.live.newest("seal-setter").sample
        app.state.live.forget("seal-setter")
        return sample.joints

    assert await postures(4) == await postures(4) != await postures(5)


async def test_a_real_value_ends_the_simulation_of_its_arm(
    client: httpx.AsyncClient, run: Run
) -> None:
    running = asyncio.create_task(run(arms=("housing-loader", "wash-arm"), duration_s=1.5))
    await asyncio.sleep(0.5)
    body = {"joints": [0, -85, 85, 0, 40, 0], "source": "gateway"}
    assert (await client.put(f"{LOADER}/joints", json=body)).json()["accepted"]
    code, lines = await running
    assert code == 0
    (loader,) = [line for line in lines if line.startswith("housing-loader")]
    assert loader.endswith("real values have come, and nothing more is simulated")
    live = (await client.get(f"{LOADER}/live?tool=flange")).json()
    assert (live["simulated"], live["joints"]) == (False, [0.0, -85.0, 85.0, 0.0, 40.0, 0.0])
    # Begun anew it does not come back either.
    code, (line,) = await run(arms=("housing-loader",))
    assert (code, line.startswith("housing-loader: 1 sent, 0 taken")) == (1, True)


async def test_what_cannot_be_simulated_is_said(client: httpx.AsyncClient, run: Run) -> None:
    code, lines = await run(arms=("no-arm",))
    assert (code, lines) == (1, ["armspan: there is no arm 'no-arm'"])
    slide = {"joint": "prismatic", "a": 0, "alpha": 0, "d": 0, "theta": 0}
    endless = {"name": "endless", "convention": "standard", "units": "mm-deg", "rows": [slide]}
    assert (await client.post("/v1/arms", json=endless)).status_code == 201
    code, (line,) = await run(arms=("endless",))
    assert code == 1
    assert "slides without end" in line


class Answers(httpx.AsyncBaseTransport):
    """A service that answers other things than it should, in turn."""

    def __init__(self, app: FastAPI, *between: httpx.Response | Exception) -> None:
        self._service, self._between = httpx.ASGITransport(app), list(between)

    async def handle_async_request(self, request: httpx.Request) -> httpx.Response:
        if request.method == "PUT" and self._between:
            told = self._between.pop(0)
            if isinstance(told, Exception):
                raise told
            return told
        return await self._service.handle_async_request(request)


async def test_a_service_that_is_away_for_a_while_is_asked_again(
    app: FastAPI, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr("service.simulation.sending._AGAIN_S", 0.1)
    away = (httpx.ConnectError("refused"), httpx.Response(503, json={"detail": "full"}))
    out = io.StringIO()
    asked = Simulation(HERE, arms=("wash-arm",), duration_s=1.0)
    assert await simulate(asked, out, transport=Answers(app, *away)) == 0
    first, last = out.getvalue().splitlines()
    assert first == "wash-arm: not taken, trying again: refused"
    assert 10 < int(last.split()[1]) < 20


async def test_times_are_those_it_moves_by_however_late_it_wakes(app: FastAPI) -> None:
    """With times of its own waking, an arm would seem to move faster than it can."""
    times: list[float] = []

    class HeldUp(Answers):
        async def handle_async_request(self, request: httpx.Request) -> httpx.Response:
            if request.method == "PUT":
                times.extend(one["sampled_ms"] for one in json.loads(request.content)["samples"])
                time.sleep(0.03)
            return await super().handle_async_request(request)

    asked = Simulation(HERE, arms=("wash-arm",), rate_hz=50.0, duration_s=0.4)
    assert await simulate(asked, io.StringIO(), transport=HeldUp(app)) == 0
    since = [one - times[0] for one in times]
    assert since == pytest.approx([20.0 * number for number in range(20)], abs=0.01)


@pytest.mark.parametrize("answer", [httpx.Response(403, text="no"), httpx.Response(403, json=[1])])
async def test_something_else_than_this_service_ends_it(
    app: FastAPI, answer: httpx.Response
) -> None:
    out = io.StringIO()
    asked = Simulation(HERE, arms=("wash-arm",))
    assert await simulate(asked, out, transport=Answers(app, answer)) == 1
    assert out.getvalue() == "wash-arm: 0 sent, 0 taken; it answered 403\n"


def hears_interrupts() -> None:
    """Be interrupted as at a keyboard: who is started in the background inherits deafness."""
    signal.signal(signal.SIGINT, signal.SIG_DFL)


def command(*options: str) -> "subprocess.Popen[str]":
    words = [sys.executable, "-m", "service", "simulate", *options]
    pipes: Any = {"stdout": subprocess.PIPE, "stderr": subprocess.PIPE, "text": True}
    return subprocess.Popen(words, cwd=ROOT, preexec_fn=hears_interrupts, **pipes)


def test_the_command_simulates_until_it_is_interrupted(launch: Launch) -> None:
    server = launch("--demo")
    process = command("--url", server.url, "--arm", "wash-arm", "--rate", "50")
    with httpx.Client(base_url=server.url, timeout=20) as client:
        deadline = time.monotonic() + 30
        while time.monotonic() < deadline:
            live = client.get("/v1/arms/wash-arm/live").json()
            if live.get("input", {}).get("source") == "simulation":
                break
            time.sleep(0.1)
        assert (live["simulated"], live["quality"]) == (True, "good"), live
        assert live["input"]["period_ms"] == 20.0
    process.send_signal(signal.SIGINT)
    process.communicate(timeout=10)
    assert process.returncode == 0
    server.terminate()


@pytest.mark.parametrize(
    ("options", "code", "say"),
    [
        (("--rate", "0"), 2, "--rate"),
        (("--rate", "nan"), 2, "--rate"),
        (("--speed", "1.5"), 2, "--speed"),
        (("--seed", "x"), 2, "--seed"),
        (("--url", "http://127.0.0.1:9"), 1, "does not answer"),
        (("--url", "somewhere"), 1, "does not answer"),
    ],
)
def test_a_command_that_cannot_work_says_why(
    options: tuple[str, ...], code: int, say: str, capsys: pytest.CaptureFixture[str]
) -> None:
    try:
        ended = main(["simulate", *options])
    except SystemExit as exit_:
        ended = int(str(exit_.code))
    told = "".join(capsys.readouterr())
    assert ended == code
    assert say in told


def test_the_demonstration_moves_until_a_real_value_comes(launch: Launch) -> None:
    server = launch("--demo")
    with httpx.Client(base_url=server.url, timeout=60) as client:
        seen = []
        deadline = time.monotonic() + 60
        while len(seen) < 4 and time.monotonic() < deadline:
            live = client.get(f"{LOADER}/live?tool=flange")
            if live.status_code == 200:
                assert live.json()["simulated"]
                assert live.json()["code"] == 8
                assert live.json()["quality"] == "good"
                seen.append(json.dumps(live.json()["joints"]))
            time.sleep(0.6)
        assert len(set(seen)) >= 2
        body = {"joints": [0, -85, 85, 0, 40, 0], "period_ms": 60_000}
        assert client.put(f"{LOADER}/joints", json=body).json()["accepted"]
        time.sleep(1.0)
        live = client.get(f"{LOADER}/live?tool=flange").json()
        assert (live["simulated"], live["joints"][4]) == (False, 40.0)
        other = client.get("/v1/arms/wash-arm/live").json()
        assert other["simulated"]
    assert server.terminate() < 3
