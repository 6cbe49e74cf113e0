"""Surveys of targets against the solver alone, one process against two, and who waits meanwhile.

    python -m tests.benchmarks.surveys [targets] [seed]

Asked: 0.9 of the solver's rate on a core, 1.8 times on two, and a GET pose whose p99 is at most
1.5 times that without a survey. The solver is asked in this process, with the same targets in the
same pieces; the survey is timed from its beginning to its end, with its processes started before.
Least of three. What a survey by one process falls short of "read, solved, told" is the queue: pool,
store, and the first chunks, which are small.
"""

import json
import os
import subprocess
import sys
import tempfile
import time
from datetime import datetime
from http.client import HTTPConnection
from pathlib import Path
from typing import Any

import numpy as np

from kinematics.chain import tool_in_base
from kinematics.reach.checks import Reacher
from kinematics.reach.targets import Target, Targets
from service.storage.ports import GivenPiece
from service.surveys.kinds import LARGEST_PIECE
from service.surveys.reach_checks import ReachChecks, Setup
from service.wire.arms import read_arm
from tests.conftest import ROOT

REPEATS = 3
ARM = json.loads((ROOT / "service/demo/arms/housing-loader.json").read_text("utf-8"))
ARM = {key: value for key, value in ARM.items() if key not in ("cell", "frames")}


def question(count: int, seed: int) -> tuple[dict[str, Any], Targets]:
    """Return a body and the same targets for the solver: poses that postures within travel have."""
    arm = read_arm(ARM).arm
    random = np.random.default_rng(seed)
    low, high = np.array([row.travel for row in arm.table.rows]).T
    joints = random.uniform(low, high, (count, len(low)))
    poses = tool_in_base(arm, joints, np.eye(4))
    rows = []
    for pose in poses:
        metres = pose.copy()
        metres[:3, 3] *= 1000.0
        rows.append({"pose": {"matrix": metres.tolist()}})
    request = {"arm": ARM, "tool": "flange", "targets": rows}
    body = {"kind": "reach-checks", "request": request}
    return body, Targets.of([Target(pose) for pose in poses])


def solver_rate(targets: Targets) -> float:
    """Return targets a second of the solver alone, in pieces of a survey."""
    reacher = Reacher(read_arm(ARM).arm, np.eye(4))
    reacher.check(targets.only(np.arange(10)))
    best = np.inf
    for _ in range(REPEATS):
        begin = time.perf_counter()
        for first in range(0, len(targets), LARGEST_PIECE):
            last = min(first + LARGEST_PIECE, len(targets))
            reacher.check(targets.only(np.arange(first, last)), best_only=True)
        best = min(best, time.perf_counter() - begin)
    return len(targets) / best


def piece_rate(body: dict[str, Any]) -> float:
    """Return targets a second of reading, solving and telling, in this process."""
    kind, request = ReachChecks(), body["request"]
    accepted = kind.accept(None, request)  # type: ignore[arg-type]
    prepared = kind.prepare(Setup(accepted.request, None, None))
    pieces: list[GivenPiece] = list(accepted.pieces)
    best = np.inf
    for _ in range(REPEATS):
        begin = time.perf_counter()
        for piece in pieces:
            kind.make(prepared, piece)
        best = min(best, time.perf_counter() - begin)
    return accepted.total / best


class Served:
    """A service in a process of its own with so many survey workers."""

    def __init__(self, workers: int, folder: Path) -> None:
        database = str(folder / f"arms-{workers}.db")
        options = [
            "--port",
            "0",
            "--database",
            database,
            "--survey-workers",
            str(workers),
            "--demo",
        ]
        self._process = subprocess.Popen(
            [sys.executable, "-m", "service", "serve", *options],
            cwd=ROOT,
            stdout=subprocess.PIPE,
            text=True,
        )
        assert self._process.stdout is not None
        self.port = int(self._process.stdout.readline().rsplit(":", 1)[1])

    def ask(self, method: str, path: str, body: object = None) -> Any:
        """Return an answer's JSON."""
        connection = HTTPConnection("127.0.0.1", self.port, timeout=300)
        raw = None if body is None else json.dumps(body).encode()
        connection.request(method, path, raw, {"Content-Type": "application/json"})
        answer = json.loads(connection.getresponse().read())
        connection.close()
        return answer

    def taken_in(self, body: object) -> str:
        """Return the id of a survey that has been taken in."""
        found: str = self.ask("POST", "/v1/surveys", body)["id"]
        return found

    def seconds(self, survey: str) -> float:
        """Return how long a survey took from its beginning to its end."""
        while True:
            found = self.ask("GET", f"/v1/surveys/{survey}")
            if found["finished_at"]:
                break
            time.sleep(0.05)
        assert found["state"] == "succeeded", found
        ends = [datetime.fromisoformat(found[key]) for key in ("started_at", "finished_at")]
        return (ends[1] - ends[0]).total_seconds()

    def p99(self, seconds: float) -> float:
        """Return the 99th percentile of milliseconds that a GET pose takes."""
        connection = HTTPConnection("127.0.0.1", self.port, timeout=60)
        taken, until = [], time.perf_counter() + seconds
        while (begin := time.perf_counter()) < until:
            q = f"{begin % 60:.3f},10,-20,30,40,50"
            connection.request("GET", f"/v1/arms/housing-loader/pose?q={q}&tool=flange")
            connection.getresponse().read()
            taken.append((time.perf_counter() - begin) * 1e3)
            time.sleep(0.002)
        connection.close()
        return float(np.quantile(taken, 0.99))

    def stop(self) -> None:
        """End it."""
        self._process.terminate()
        self._process.wait(10)


def main() -> None:
    """Print everything."""
    count = int(sys.argv[1]) if len(sys.argv) > 1 else 20_000
    seed = int(sys.argv[2]) if len(sys.argv) > 2 else int.from_bytes(os.urandom(4), "big")
    print(f"{count} targets, seed {seed}, {os.cpu_count()} processors")
    body, targets = question(count, seed)
    alone, pieces = solver_rate(targets), piece_rate(body)
    print(f"solver alone         {alone:10.0f} targets/s")
    print(f"read, solved, told   {pieces:10.0f} targets/s, {pieces / alone:.2f} of it")
    rates = {}
    with tempfile.TemporaryDirectory() as folder:
        for workers in (1, 2):
            served = Served(workers, Path(folder))
            served.seconds(served.taken_in(body))
            rates[workers] = count / min(
                served.seconds(served.taken_in(body)) for _ in range(REPEATS)
            )
            said = f"{rates[workers] / alone:.2f} of the solver (asked: 0.9 a core)"
            print(f"survey, {workers} process(es) {rates[workers]:10.0f} targets/s, {said}")
            if workers == 2:
                idle = min(served.p99(2.0) for _ in range(REPEATS))
                busy = []
                for _ in range(REPEATS):
                    survey = served.taken_in(body)
                    busy.append(served.p99(max(count / rates[2] * 0.8, 0.5)))
                    served.seconds(survey)
                said = f"{min(busy) / idle:.2f} times (asked: 1.5)"
                print(f"GET pose p99 {idle:.2f} ms idle, {min(busy):.2f} ms meanwhile, {said}")
            served.stop()
    print(f"two processes {rates[2] / rates[1]:.2f} times one (asked: 1.8)")


if __name__ == "__main__":
    main()
