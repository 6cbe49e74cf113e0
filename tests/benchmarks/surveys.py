"""Surveys of targets against the solver alone, one process against two, and who waits meanwhile.

    python -m tests.benchmarks.surveys [targets] [seed]

Asked: 0.9 of the solver's rate on a core, 1.8 times on two, at most 5 ms of queue for a chunk, and
a GET pose whose p99 is at most 1.5 times that without a survey. The solver is asked in processes of
its own, as many as the survey has, for such targets in such pieces, and for what a survey tells:
verdict and best posture, and its singularity. Targets come as a table (NPY) and as JSON, which
workers still have to read. A survey is timed from its beginning to its end, with its processes
started before; the queue is by how much a chunk takes longer than the work on it. Solver and
surveys take turns, for a machine that is slow for half a minute would else be slow for one of them
alone; what is said is the median of turns, and between what they lie.
"""

import gc
import io
import json
import os
import subprocess
import sys
import tempfile
import time
from collections.abc import Mapping, Sequence
from concurrent.futures import ProcessPoolExecutor
from contextlib import closing
from datetime import datetime
from functools import partial
from http.client import HTTPConnection
from multiprocessing import get_context
from pathlib import Path
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray
from scipy.spatial.transform import Rotation

from kinematics.chain import tool_in_base
from kinematics.jacobian import motion_of
from kinematics.reach.checks import Reacher
from kinematics.reach.targets import Target, Targets
from kinematics.singularity import judge
from kinematics.task_space import task_space
from service.operations.arms import Arms
from service.operations.cells import Cells
from service.settings import Settings
from service.storage.opening import open_storage
from service.storage.ports import GivenPiece
from service.surveys import worker
from service.surveys.desk import Surveys
from service.surveys.kinds import LARGEST_PIECE
from service.surveys.reach_checks import ReachChecks, Setup
from service.surveys.targets_sent import TableOfDoubles
from service.wire.arms import read_arm
from service.wire.surveys import SurveyRequest
from tests.benchmarks.watched_processes import Watched
from tests.conftest import ROOT

REPEATS = 3
TURNS = 5
SOME = 100_000
"""Targets where a survey's many would take long and show no more."""

LONGER = 2
"""Times as many targets in surveys beside which poses are asked for, so that 1 % is some dozen."""

LOOK_S = 0.5
"""How often it is looked whether a survey has ended: each look takes some ms from it."""

ARM = json.loads((ROOT / "service/demo/arms/housing-loader.json").read_text("utf-8"))
ARM = {key: value for key, value in ARM.items() if key not in ("cell", "frames")}
NPY = "application/x-npy"


class Way(NamedTuple):
    """How many processes a survey has, and what its targets came as."""

    workers: int
    name: str


class Turn(NamedTuple):
    """Targets a second of a process of the bare solver, and of a whole survey right after it."""

    solver: float
    survey: float


class Asked(NamedTuple):
    """The same targets as a body, as a table, and for the solver."""

    body: dict[str, Any]
    table: NDArray[np.float64]
    targets: Targets


def question(count: int, seed: int) -> Asked:
    """Return poses that postures within travel have."""
    arm = read_arm(ARM).arm
    random = np.random.default_rng(seed)
    low, high = np.array([row.travel for row in arm.table.rows]).T
    joints = random.uniform(low, high, (count, len(low)))
    poses = tool_in_base(arm, joints, np.eye(4))
    turns = Rotation.from_matrix(poses[:, :3, :3]).as_quat(scalar_first=True)
    table = np.column_stack([poses[:, :3, 3] * 1000.0, turns])
    form = "quaternion-wxyz"
    rows = [
        {"pose": {"position": row[:3], "orientation": {"form": form, "values": row[3:]}}}
        for row in table.tolist()
    ]
    request = {"arm": ARM, "tool": "flange", "targets": rows}
    targets = Targets.of([Target(pose) for pose in poses])
    return Asked({"kind": "reach-checks", "request": request}, table, targets)


def solver_seconds(targets: Targets, *, judged: bool, repeats: int = REPEATS) -> float:
    """Return how long the solver takes alone, in the pieces of a survey."""
    arm = read_arm(ARM).arm
    reacher, space = Reacher(arm, np.eye(4)), task_space(arm, np.eye(4))
    reacher.check(targets.only(np.arange(10)))
    best = np.inf
    for _ in range(repeats):
        begin = time.perf_counter()
        for first in range(0, len(targets), LARGEST_PIECE):
            last = min(first + LARGEST_PIECE, len(targets))
            checks = reacher.check(targets.only(np.arange(first, last)), best_only=True)
            if judged:
                judge(arm, space, motion_of(arm, checks.joint_values, np.eye(4)))
        best = min(best, time.perf_counter() - begin)
    return best


class Solver:
    """Processes that solve and judge, and do nothing else."""

    def __init__(self, processes: int, seed: int) -> None:
        self.processes = processes
        self._pool = ProcessPoolExecutor(processes, get_context("spawn"), _ready, (seed,))
        self.rate()

    def rate(self) -> float:
        """Return targets a second of each of them, all at the same time."""
        ends = [self._pool.submit(_solve) for _ in range(self.processes)]
        return sum(end.result() for end in ends) / self.processes

    def stop(self) -> None:
        """End them."""
        self._pool.shutdown()


_targets: list[Targets] = []


def _ready(seed: int) -> None:
    _targets.append(question(SOME, seed).targets)
    gc.disable()  # as in the processes of surveys


def _solve() -> float:
    return SOME / solver_seconds(_targets[0], judged=True, repeats=1)


def pieces_seconds(asked: Asked, *, table: bool) -> float:
    """Return how long reading, solving and telling take, in this process."""
    kind, request = ReachChecks(), asked.body["request"]
    sent = TableOfDoubles(asked.table) if table else None
    accepted = kind.accept(None, request, sent)  # type: ignore[arg-type]
    prepared = kind.prepare(Setup(accepted.request, None, None))
    pieces: list[GivenPiece] = list(accepted.pieces)
    best = np.inf
    gc.disable()  # as in the processes of surveys
    for _ in range(REPEATS):
        begin = time.perf_counter()
        for piece in pieces:
            kind.make(prepared, piece)
        best = min(best, time.perf_counter() - begin)
    gc.enable()
    return best


def queue_ms(asked: Asked, folder: Path) -> float:
    """Return by how many milliseconds a chunk takes longer than its work in its process."""
    with closing(open_storage(Settings(database=str(folder / "queue.db")))) as opened:
        arms = Arms(opened.arms, read_arm, Cells(opened.cells, opened.arms, read_arm))
        pool = Watched(1)
        surveys = Surveys(opened.surveys, arms, pool, "0")
        try:
            taken = [_per_chunk(surveys, asked, pool) for _ in range(REPEATS)]
        finally:
            surveys.stop()
    return 1e3 * min(taken)


def _per_chunk(surveys: Surveys, asked: Asked, pool: Watched) -> float:
    request = {**asked.body["request"], "targets": []}
    wanted = SurveyRequest(kind="reach-checks", request=request)
    pool.seconds.clear()
    survey, _ = surveys.create(wanted, None, b"", TableOfDoubles(asked.table))
    while not (found := surveys.get(survey.id)).finished_at:
        time.sleep(LOOK_S)
    assert found.state == "succeeded", found.reason
    assert found.started_at
    taken = (found.finished_at - found.started_at).total_seconds()
    return (taken - sum(pool.seconds)) / len(pool.seconds)


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

    def ask(self, method: str, path: str, raw: bytes | None = None, kind: str = "") -> Any:
        """Return an answer's JSON."""
        connection = HTTPConnection("127.0.0.1", self.port, timeout=300)
        connection.request(method, path, raw, {"Content-Type": kind})
        answer = json.loads(connection.getresponse().read())
        connection.close()
        return answer

    def of_body(self, asked: Asked) -> str:
        """Return the id of a survey whose targets came as JSON."""
        raw = json.dumps(asked.body).encode()
        found: str = self.ask("POST", "/v1/surveys", raw, "application/json")["id"]
        return found

    def of_table(self, asked: Asked) -> str:
        """Return the id of a survey whose targets came as a table."""
        file = io.BytesIO()
        np.save(file, asked.table)
        path = "/v1/surveys?kind=reach-checks&arm=housing-loader&tool=flange&frame=base"
        found: str = self.ask("POST", path, file.getvalue(), NPY)["id"]
        return found

    def seconds(self, survey: str) -> float:
        """Return how long a survey took from its beginning to its end."""
        while True:
            found = self.ask("GET", f"/v1/surveys/{survey}")
            if found["finished_at"]:
                break
            time.sleep(LOOK_S)
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


def in_turns(
    servers: Mapping[int, Served], solvers: Mapping[int, Solver], asked: Asked
) -> Mapping[Way, Sequence[Turn]]:
    """Return what each turn of each survey came to, just after one of as many bare solvers."""
    ways = {
        Way(workers, name): (served, create)
        for name in ("table", "JSON")
        for workers, served in servers.items()
        for create in [partial(served.of_table if name == "table" else served.of_body, asked)]
    }
    count = len(asked.table)
    turns: dict[Way, list[Turn]] = {way: [] for way in ways}
    for served, create in ways.values():
        served.seconds(create())
    for _ in range(TURNS):
        for way, (served, create) in ways.items():
            alone = solvers[way.workers].rate()
            turns[way].append(Turn(alone, count / served.seconds(create())))
    return turns


def spread(numbers: NDArray[np.float64]) -> str:
    """Return a median, and between what it lies."""
    return f"{np.median(numbers):.2f} ({numbers.min():.2f} to {numbers.max():.2f})"


def meanwhile(served: Served, asked: Asked, rate: float) -> str:
    """Return what a GET pose takes with and without a survey."""
    idle, beside, busy = np.inf, np.inf, np.inf
    asked = asked._replace(table=np.tile(asked.table, (LONGER, 1)))
    seconds = max(len(asked.table) / rate * 0.8, 0.5)
    for _ in range(REPEATS):
        idle = min(idle, served.p99(seconds))
        beside = min(beside, _beside_bare_work(served))
        survey = served.of_table(asked)
        busy = min(busy, served.p99(seconds))
        served.seconds(survey)
    ratio = f"{busy / idle:.2f} times (asked: 1.5), {busy / beside:.2f} times that beside them"
    return (
        f"GET pose p99 {idle:.2f} ms idle, {beside:.2f} ms beside two processes that give way and "
        f"have nothing to do with the service, {busy:.2f} ms during a survey: {ratio}"
    )


def _beside_bare_work(served: Served) -> float:
    """Return p99 while two processes as surveys have solve targets of their own."""
    with ProcessPoolExecutor(2, get_context("spawn"), initializer=worker.start) as pool:
        ends = [pool.submit(_solve_for, 7.0, number) for number in range(2)]
        for end in ends:
            while not end.running():
                time.sleep(0.01)
        time.sleep(4.0)
        return served.p99(2.0)


def _solve_for(seconds: float, seed: int) -> None:
    until = time.perf_counter() + seconds
    targets = question(LARGEST_PIECE, seed).targets
    while time.perf_counter() < until:
        solver_seconds(targets, judged=True)


def main() -> None:
    """Print everything."""
    count = int(sys.argv[1]) if len(sys.argv) > 1 else 250_000
    seed = int(sys.argv[2]) if len(sys.argv) > 2 else int.from_bytes(os.urandom(4), "big")
    print(f"{count} targets, seed {seed}, {os.cpu_count()} processors")
    asked, some = question(count, seed), question(SOME, seed)
    alone, whole = (solver_seconds(some.targets, judged=judged) for judged in (False, True))
    print(f"solver alone, verdict and posture {SOME / alone:8.0f} targets/s")
    print(f"the same and its singularity      {SOME / whole:8.0f} targets/s")
    for name in ("table", "JSON"):
        each = pieces_seconds(some, table=name == "table")
        print(f"{name}: read, solved, told {SOME / each:8.0f} targets/s, {whole / each:.2f} of it")
    with tempfile.TemporaryDirectory() as folder:
        print(f"queue {queue_ms(asked, Path(folder)):.1f} ms a chunk (asked: 5)")
        servers = {workers: Served(workers, Path(folder)) for workers in (1, 2)}
        solvers = {processes: Solver(processes, seed) for processes in (1, 2)}
        turns = in_turns(servers, solvers, asked)
        for way, each in turns.items():
            share = np.array([turn.survey / turn.solver / way.workers for turn in each])
            rate = np.median([turn.survey for turn in each])
            said = f"{spread(share)} of the solver's rate a core (asked: 0.9)"
            print(f"survey of {way.name}, {way.workers} process(es) {rate:8.0f} targets/s, {said}")
        for solver in solvers.values():
            solver.stop()
        one, two = (np.array([turn.solver for turn in turns[Way(n, "table")]]) for n in (1, 2))
        print(f"two bare solvers: {spread(2 * two / one)} times one")
        for name in ("table", "JSON"):
            one, two = (np.array([turn.survey for turn in turns[Way(n, name)]]) for n in (1, 2))
            print(f"two processes: {spread(two / one)} times one ({name}, asked: 1.8)")
        print(meanwhile(servers[2], asked, min(turn.survey for turn in turns[Way(2, "table")])))
        for served in servers.values():
            served.stop()


if __name__ == "__main__":
    main()
