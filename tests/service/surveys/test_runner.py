"""The thread that works through surveys: what it hands out, what it does when workers die or fail.

Pieces are made in threads of the test here; processes and kills are met in tests/contract.
"""

import os
import sys
import threading
import time
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import BrokenExecutor, Executor, Future, ThreadPoolExecutor
from dataclasses import replace
from datetime import UTC, datetime, timedelta
from typing import Any

import pytest

from service.errors import NotAvailable, StorageUnavailable
from service.settings import Settings
from service.storage.opening import OpenStorage, open_storage
from service.storage.ports import GivenPiece, MadePiece, Survey
from service.surveys import registry, runner, worker
from service.surveys.chunks import Chunks
from service.surveys.runner import MOST_DEATHS, Runner

AT = datetime(2026, 3, 4, 5, 6, 7, tzinfo=UTC)
ONE = Survey("a1", "echo", "", {}, {}, 60, AT)
PIECES = [GivenPiece(number, 3, bytes([number])) for number in range(20)]


class Echo:
    """A kind whose pieces are made at once, unless the test says otherwise."""

    name = "echo"
    formats = ("json",)

    def __init__(self) -> None:
        self.made: list[int] = []
        self.meanwhile: Callable[[int], None] = lambda number: None

    def setup(self, arms: object, survey: Survey) -> object:
        return survey.about

    def prepare(self, setup: object) -> object:
        return setup

    def make(self, prepared: object, piece: GivenPiece) -> MadePiece:
        self.meanwhile(piece.number)
        self.made.append(piece.number)
        return MadePiece(piece.number, piece.given * 2, {"seen": piece.size})


class GatheringEcho(Echo):
    """The same, with a last piece that tells how many others there were, and all of them."""

    def gather(self, prepared: object, piece: GivenPiece, made: Sequence[bytes]) -> MadePiece:
        self.meanwhile(piece.number)
        self.made.append(piece.number)
        return MadePiece(piece.number, bytes([len(made)]) + b"".join(made), {})


class DyingExecutor(Executor):
    """Every task finds its process dead."""

    def submit(self, *_: Any, **__: Any) -> Future[Any]:
        future: Future[Any] = Future()
        future.set_exception(BrokenExecutor("killed"))
        return future


class ThreadsPool:
    """Makes pieces in two threads, after so many executors whose processes die."""

    room = 4

    def __init__(self) -> None:
        self.deaths = self.started = 0
        self.refuses: NotAvailable | None = None
        self._threads = ThreadPoolExecutor(2)

    def executor(self) -> Executor:
        self.started += 1
        if self.refuses is not None:
            raise self.refuses
        return DyingExecutor() if self.started <= self.deaths else self._threads

    def stop(self) -> None:
        """Leave the threads: what they do ends of itself."""


class DyingWhenAskedAgain(ThreadsPool):
    """Its processes end once, after their first chunk has come back."""

    room = 1

    def executor(self) -> Executor:
        self.started += 1
        return AnswersOnce() if self.started == 1 else self._threads


class AnswersOnce(DyingExecutor):
    """The first task is done; whoever hands another over finds the processes dead."""

    def __init__(self) -> None:
        self._asked = 0

    def submit(self, task: Callable[..., Any], /, *given: Any, **named: Any) -> Future[Any]:
        self._asked += 1
        if self._asked > 1:
            raise BrokenExecutor("killed")
        future: Future[Any] = Future()
        future.set_result(task(*given, **named))
        return future


class Bench:
    """A store in memory, a kind, a pool and the thread under test."""

    def __init__(self, opened: OpenStorage, kind: Echo) -> None:
        self.store, self.kind, self.pool = opened.surveys, kind, ThreadsPool()
        self.runner = Runner(self.store, None, self.pool)  # type: ignore[arg-type]

    def add(self, name: str = "a1") -> None:
        self.store.add(replace(ONE, id=name), PIECES, key=None, digest="")

    def get(self, name: str = "a1") -> Survey:
        found = self.store.get(name)
        assert found is not None
        return self.runner.seen(found)

    def over(self, name: str = "a1") -> Survey:
        # The thread gives way to all else, also to the tests that run beside this one.
        deadline = time.monotonic() + 90
        while self.get(name).state in ("queued", "running"):
            assert time.monotonic() < deadline, self.get(name)
            time.sleep(0.01)
        return self.get(name)


@pytest.fixture
def kind() -> Echo:
    return Echo()


@pytest.fixture
def bench(kind: Echo, monkeypatch: pytest.MonkeyPatch) -> Iterator[Bench]:
    for module in (runner, worker, registry):
        monkeypatch.setattr(module, "SURVEY_KINDS", {"echo": kind})
    opened = open_storage(Settings(database=":memory:"))
    made = Bench(opened, kind)
    yield made
    kind.meanwhile = lambda number: None
    made.runner.stop()
    opened.close()


def made_of(bench: Bench, name: str = "a1") -> Sequence[bytes]:
    return [bench.store.made(name, piece.number) for piece in PIECES]


def test_all_pieces_are_made_once_and_kept(bench: Bench) -> None:
    bench.add()
    bench.runner.wake()
    found = bench.over()
    assert (found.state, found.done, found.counts) == ("succeeded", 60, {"seen": 60})
    assert made_of(bench) == [piece.given * 2 for piece in PIECES]
    assert sorted(bench.kind.made) == list(range(20))
    assert found.started_at is not None
    assert found.finished_at is not None


def test_the_next_is_made_while_the_last_is_written(
    bench: Bench, monkeypatch: pytest.MonkeyPatch
) -> None:
    bench.pool.room = 1
    bench.add()
    begun: list[int] = []
    bench.kind.meanwhile = begun.append
    keep, waited = bench.store.keep, []

    def slowly(survey: str, made: Sequence[MadePiece]) -> bool:
        last = made[-1].number
        deadline = time.monotonic() + 10
        while last < 19 and max(begun) <= last and time.monotonic() < deadline:
            time.sleep(0.001)
        waited.append(last == 19 or max(begun) > last)
        return keep(survey, made)

    monkeypatch.setattr(bench.store, "keep", slowly)
    bench.runner.wake()
    assert bench.over().state == "succeeded"
    assert all(waited)
    assert sorted(bench.kind.made) == list(range(20))


def test_what_came_back_before_a_death_is_not_made_again(bench: Bench) -> None:
    bench.pool = pool = DyingWhenAskedAgain()
    bench.runner = Runner(bench.store, None, pool)  # type: ignore[arg-type]
    bench.add()
    bench.runner.wake()
    found = bench.over()
    assert (found.state, found.done) == ("succeeded", 60)
    assert pool.started > 1
    assert sorted(bench.kind.made) == list(range(20))


@pytest.mark.skipif(sys.platform != "linux", reason="elsewhere threads have no own priority")
def test_what_keeps_surveys_gives_way_and_nobody_else(bench: Bench) -> None:
    before = os.getpriority(os.PRIO_PROCESS, 0)
    seen: set[int] = set()
    # The threads that make pieces here are started by the survey's, and are as it is.
    bench.kind.meanwhile = lambda number: seen.add(os.getpriority(os.PRIO_PROCESS, 0))
    bench.add()
    bench.runner.wake()
    bench.over()
    assert seen == {max(before, worker.NICENESS)}
    assert os.getpriority(os.PRIO_PROCESS, 0) == before


def test_the_oldest_comes_first(bench: Bench) -> None:
    for name in ("c3", "a1", "b2"):
        bench.add(name)
    bench.runner.wake()
    ends = [bench.over(name).finished_at for name in ("a1", "b2", "c3")]
    assert ends == sorted(ends)  # type: ignore[type-var]


def test_what_is_made_already_is_not_made_again(bench: Bench) -> None:
    bench.add()
    bench.store.begin("a1", AT)
    bench.store.keep("a1", [MadePiece(4, b"before", {"seen": 3})])
    bench.runner.wake()
    assert bench.over().done == 60
    assert bench.store.made("a1", 4) == b"before"
    assert sorted(bench.kind.made) == [n for n in range(20) if n != 4]


GATHERED = bytes([19]) + b"".join(piece.given * 2 for piece in PIECES[:-1])


@pytest.mark.parametrize("kind", [GatheringEcho()])
@pytest.mark.parametrize("deaths", [0, MOST_DEATHS])
@pytest.mark.parametrize("before", [[], [0, 7], [*range(19)]], ids=len)
def test_the_last_piece_waits_for_all_others(bench: Bench, deaths: int, before: list[int]) -> None:
    bench.kind.made.clear()
    bench.pool.deaths = deaths
    bench.add()
    bench.store.begin("a1", AT)
    bench.store.keep("a1", [MadePiece(n, PIECES[n].given * 2, {}) for n in before])
    bench.runner.wake()
    found = bench.over()
    assert (found.state, found.done) == ("succeeded", 60)
    assert sorted(bench.kind.made) == [n for n in range(20) if n not in before]
    assert bench.kind.made[-1] == 19
    assert bench.store.made("a1", 19) == GATHERED


@pytest.mark.parametrize("kind", [GatheringEcho()])
def test_a_worker_that_dies_at_the_last_piece_costs_that_alone(bench: Bench) -> None:
    dies = [True]

    def meanwhile(number: int) -> None:
        if number == 19 and dies:
            dies.clear()
            raise BrokenExecutor("killed")

    bench.kind.made.clear()
    bench.kind.meanwhile = meanwhile
    bench.add()
    bench.runner.wake()
    assert bench.over().state == "succeeded"
    assert not dies
    assert sorted(bench.kind.made) == list(range(20))
    assert bench.store.made("a1", 19) == GATHERED


def test_at_the_end_chunks_share_what_is_left(bench: Bench) -> None:
    bench.add()
    chunks = Chunks(bench.store, "a1", gathers=False)
    for _ in range(6):
        chunks.took(1e-3, 64)
    given = iter(lambda: len(chunks.next(4, none_in_hand=False)), 0)
    assert list(given) == [5, 4, 3, 2, 2, 1, 1, 1, 1]


def test_dead_workers_cost_their_chunks_alone(bench: Bench) -> None:
    bench.pool.deaths = MOST_DEATHS
    bench.add()
    bench.runner.wake()
    assert bench.over().state == "succeeded"
    assert bench.pool.started == MOST_DEATHS + 1
    assert sorted(bench.kind.made) == list(range(20))


def test_a_survey_that_kills_every_worker_fails_and_the_next_one_runs(bench: Bench) -> None:
    bench.pool.deaths = MOST_DEATHS + 1
    bench.add()
    bench.add("b2")
    bench.runner.wake()
    found = bench.over()
    assert (found.state, found.done) == ("failed", 0)
    assert "ended 4 times" in found.reason
    assert bench.over("b2").state == "succeeded"


def test_where_there_are_no_workers_the_survey_says_so(bench: Bench) -> None:
    bench.pool.refuses = NotAvailable("the cluster does not answer", way_out="start it")
    bench.add()
    bench.runner.wake()
    assert bench.over().reason == "the cluster does not answer; start it"


def test_a_fault_in_a_piece_fails_the_survey_without_its_text(bench: Bench) -> None:
    def fault(number: int) -> None:
        raise ZeroDivisionError("secret")

    bench.kind.meanwhile = fault
    bench.add()
    bench.runner.wake()
    found = bench.over()
    assert found.state == "failed"
    assert "secret" not in found.reason


def test_a_cancelled_one_is_let_go_of(bench: Bench) -> None:
    begun, go_on = threading.Event(), threading.Event()

    def meanwhile(number: int) -> None:
        begun.set()
        go_on.wait(5)

    bench.kind.meanwhile = meanwhile
    bench.add()
    bench.add("b2")
    bench.runner.wake()
    assert begun.wait(5)
    assert bench.store.end("a1", "cancelled", AT)
    bench.runner.let_go("a1")
    go_on.set()
    assert bench.over("b2").state == "succeeded"
    assert (bench.get().state, bench.get().done) == ("cancelled", 0)


def test_an_end_that_cannot_be_written_is_told_and_written_later(
    bench: Bench, monkeypatch: pytest.MonkeyPatch
) -> None:
    full = threading.Event()
    full.set()
    keep, end = bench.store.keep, bench.store.end

    def refusing(name: str, call: Callable[..., bool]) -> Callable[..., bool]:
        def refuse(*given: Any) -> bool:
            if full.is_set():
                raise StorageUnavailable("the disk is full")
            return call(*given)

        return refuse

    monkeypatch.setattr(bench.store, "keep", refusing("keep", keep))
    monkeypatch.setattr(bench.store, "end", refusing("end", end))
    bench.add()
    bench.runner.wake()
    assert bench.over().reason == "the disk is full"
    stored = bench.store.get("a1")
    assert stored is not None
    assert stored.state == "running"
    full.clear()
    bench.add("b2")
    bench.runner.wake()
    assert bench.over("b2").state == "succeeded"
    stored = bench.store.get("a1")
    assert stored is not None
    assert (stored.state, stored.reason) == ("failed", "the disk is full")


def test_a_stop_leaves_open_what_is_open(bench: Bench) -> None:
    begun = threading.Event()

    def meanwhile(number: int) -> None:
        begun.set()
        time.sleep(0.05)

    bench.kind.meanwhile = meanwhile
    bench.add()
    bench.runner.wake()
    assert begun.wait(5)
    bench.runner.stop()
    stored = bench.store.get("a1")
    assert stored is not None
    assert stored.state == "running"
    bench.runner.wake()
    assert bench.store.get("a1") == stored


def test_a_look_into_the_store_that_fails_is_not_the_last(
    bench: Bench, monkeypatch: pytest.MonkeyPatch
) -> None:
    looks = []

    def may_lead() -> bool:
        looks.append(1)
        if len(looks) == 1:
            raise RuntimeError("the store is gone")
        return True

    monkeypatch.setattr(runner, "_LOOK_ELSEWHERE_S", 0.01)
    monkeypatch.setattr(bench.store, "may_lead", may_lead)
    bench.add()
    bench.runner.wake()
    assert bench.over().state == "succeeded"
    assert len(looks) > 1


def test_processes_that_a_stop_takes_away_are_no_failure(
    bench: Bench, monkeypatch: pytest.MonkeyPatch
) -> None:
    class Gone(ThreadPoolExecutor):
        def submit(self, *_: Any, **__: Any) -> Any:
            bench.runner._stopping.set()
            raise RuntimeError("cannot schedule new futures after shutdown")

    monkeypatch.setattr(bench.pool, "executor", Gone)
    bench.add()
    bench.runner.wake()
    assert bench.runner._thread is not None
    bench.runner._thread.join(5)
    assert not bench.runner._thread.is_alive()
    assert bench.get().state == "running"


def test_what_is_over_is_kept_for_as_many_days_as_said(bench: Bench) -> None:
    for name in ("a1", "b2", "c3"):
        bench.add(name)
    bench.store.begin("a1", AT)
    bench.store.end("a1", "succeeded", AT)
    bench.store.end("b2", "cancelled", AT + timedelta(days=5))
    for days, left in ((0, ["c3", "b2", "a1"]), (7, ["c3", "b2"])):
        cared_for = Runner(
            bench.store,
            None,  # type: ignore[arg-type]
            bench.pool,
            now=lambda: AT + timedelta(days=8),
            days=days,
        )
        cared_for.wake()
        while (found := bench.store.get("c3")) is None or found.state != "succeeded":
            time.sleep(0.01)
        cared_for.stop()
        assert [survey.id for survey in bench.store.page("", 9)] == left
