"""A start on a machine that has never run the kernels: two processes compile, questions wait."""

import threading
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any

import httpx
import pytest

ARM = {
    "name": "one-turn",
    "convention": "standard",
    "units": "m-rad",
    "rows": [{"joint": "revolute", "a": 0.5, "alpha": 0, "d": 0, "theta": 0}],
}
Launch = Callable[..., Any]


@pytest.fixture
def cold(launch: Launch, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Any:
    """A server that has just begun to compile."""
    monkeypatch.setenv("NUMBA_CACHE_DIR", str(tmp_path))
    server = launch()
    for _ in range(200):
        if compiling(server):
            return server
        time.sleep(0.05)
    pytest.fail("no process compiles")


def compiling(server: Any) -> list[str]:
    children = Path(f"/proc/{server.process.pid}/task").glob("*/children")
    return [child for listed in children for child in listed.read_text("ascii").split()]


needs_proc = pytest.mark.skipif(
    not Path("/proc/self/task").exists(), reason="processes are looked up in /proc"
)


@needs_proc
def test_questions_wait_for_the_kernels_and_others_do_not(cold: Any) -> None:
    answers: list[httpx.Response] = []

    def ask() -> None:
        body = {"arm": ARM, "joints": [[0.0]]}
        answers.append(httpx.post(f"{cold.url}/v1/poses", json=body, timeout=120))

    asking = threading.Thread(target=ask)
    asking.start()
    while compiling(cold) and not answers:
        assert httpx.get(f"{cold.url}/livez", timeout=10).status_code == 200
        time.sleep(0.1)
    asking.join()
    assert answers[0].json()["poses"][0]["position"] == [0.5, 0.0, 0.0]
    turn = {"units": "m-rad", "forms": ["matrix"], "steps": []}
    assert httpx.post(f"{cold.url}/v1/rotations", json=turn, timeout=120).status_code < 500


@needs_proc
def test_a_stop_ends_those_that_compile(cold: Any) -> None:
    children = compiling(cold)
    cold.terminate()
    assert cold.process.returncode == 0
    for _ in range(50):
        if not any(Path(f"/proc/{child}").exists() for child in children):
            break
        time.sleep(0.1)
    else:
        pytest.fail("a process that compiles is still there")
    assert cold.errors.read_text(encoding="utf-8") == ""
