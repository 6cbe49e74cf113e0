"""The service as tests meet it: in process over ASGI, or as a process on a loopback port.

Left out: arms; the tests that need them bring them.
"""

import os
import signal
import subprocess
import sys
import time
from collections.abc import AsyncIterator, Callable, Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import httpx
import pytest
import sqlalchemy as sa
from fastapi import FastAPI

from kinematics.warm_up import POSTURES, REACH, RELATIONS, to_be_compiled
from service.app import create_app
from service.settings import Settings

ROOT = Path(__file__).resolve().parents[1]
POSTGRES = "ARMSPAN_TEST_POSTGRES"
MOST_AT_ONCE = 4
"""Each has servers, and one of them a browser: more would be short of memory before of time."""


# --- tests side by side (``pytest -n auto``) ---------------------------------------------------


def pytest_configure(config: pytest.Config) -> None:
    """Give one that runs beside others a database of its own: tests wipe it."""
    me, url = os.environ.get("PYTEST_XDIST_WORKER"), os.environ.get(POSTGRES)
    if me and url:
        os.environ[POSTGRES] = _database_beside(sa.make_url(url), me)


def _database_beside(given: sa.URL, suffix: str) -> str:
    own = given.set(database=f"{given.database}_{suffix}")
    engine = sa.create_engine(given.set(drivername="postgresql+psycopg"))
    with engine.connect().execution_options(isolation_level="AUTOCOMMIT") as connection:
        known = sa.text("SELECT 1 FROM pg_database WHERE datname = :name")
        if not connection.execute(known, {"name": own.database}).scalar():
            connection.exec_driver_sql(f'CREATE DATABASE "{own.database}"')
    engine.dispose()
    return own.render_as_string(hide_password=False)


@pytest.hookimpl(optionalhook=True)
def pytest_xdist_setupnodes() -> None:
    """Compile before they start, or each of them would."""
    _compile_once()


@pytest.hookimpl(optionalhook=True)
def pytest_xdist_auto_num_workers() -> int:
    """Return how many ``-n auto`` means."""
    return min(os.cpu_count() or 1, MOST_AT_ONCE)


@pytest.hookimpl(optionalhook=True)
def pytest_xdist_make_scheduler(config: pytest.Config, log: Any) -> Any:
    """Keep the tests of a file together, since they share servers and compiled code."""
    from xdist.scheduler import LoadFileScheduling

    return LoadFileScheduling(config, log)


# --- the service -------------------------------------------------------------------------------


@pytest.fixture(scope="session")
def anyio_backend() -> str:
    """Run coroutines on asyncio, the loop the server runs on."""
    return "asyncio"


@pytest.fixture
def settings() -> Settings:
    """Settings of a service that keeps its arms in memory."""
    return Settings(database=":memory:")


@pytest.fixture
async def app(settings: Settings, anyio_backend: str) -> AsyncIterator[FastAPI]:
    """The service, with its lifespan run around the test."""
    made = create_app(settings)
    async with made.router.lifespan_context(made):
        yield made


@pytest.fixture
async def client(app: FastAPI) -> AsyncIterator[httpx.AsyncClient]:
    """A client that speaks to ``app`` without a network."""
    transport = httpx.ASGITransport(app)
    async with httpx.AsyncClient(transport=transport, base_url="http://armspan.test") as made:
        yield made


@dataclass
class ServerProcess:
    """A server in a process of its own.

    Attributes
    ----------
    process : the process.
    start_text : what it printed until the caution line.
    errors : the file that its standard error goes to.
    """

    process: subprocess.Popen[str]
    start_text: str
    errors: Path

    @property
    def port(self) -> int:
        """The port it says it listens on."""
        return int(self.start_text.splitlines()[0].rsplit(":", 1)[1])

    @property
    def url(self) -> str:
        """The address it says it listens on."""
        return f"http://127.0.0.1:{self.port}"

    def terminate(self, patience_s: float = 10.0) -> float:
        """Send SIGTERM and return the seconds until the process was gone."""
        started = time.monotonic()
        self.process.send_signal(signal.SIGTERM)
        self.process.wait(patience_s)
        return time.monotonic() - started


def _compile_once() -> None:
    """Leave the kernels where all servers find them: those that start together would each do it."""
    parts = to_be_compiled([*POSTURES, *RELATIONS, *REACH])
    beside = [
        subprocess.Popen([sys.executable, "-m", "kinematics.warm_up", part], cwd=ROOT)
        for part in parts
    ]
    for process in beside:
        assert process.wait() == 0


@pytest.fixture(scope="session")
def launch(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Callable[..., ServerProcess]]:
    """Start servers with further options; all that still run are ended afterwards."""
    _compile_once()
    started: list[subprocess.Popen[str]] = []

    def start(*options: str, database: str = ":memory:") -> ServerProcess:
        errors = tmp_path_factory.mktemp("server") / "errors.txt"
        command = [sys.executable, "-m", "service", "serve", "--port", "0"]
        with errors.open("w", encoding="utf-8") as sink:
            process = subprocess.Popen(
                [*command, "--database", database, *options],
                cwd=ROOT,
                env={k: v for k, v in os.environ.items() if not k.startswith("ARMSPAN_")},
                stdout=subprocess.PIPE,
                stderr=sink,
                text=True,
            )
        started.append(process)
        assert process.stdout is not None
        lines: list[str] = []
        for line in process.stdout:
            lines.append(line)
            if line.startswith("Not a safety function"):
                return ServerProcess(process, "".join(lines), errors)
        pytest.fail(f"the server did not start: {errors.read_text(encoding='utf-8')}")

    yield start
    for process in started:
        if process.poll() is None:
            process.kill()
            process.wait(10)
        assert process.stdout is not None
        process.stdout.close()


@pytest.fixture(scope="session")
def server(launch: Callable[..., ServerProcess]) -> ServerProcess:
    """One server for all tests that leave it running."""
    return launch()
