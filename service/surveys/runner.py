"""Works through surveys, the oldest first, in a thread that hands pieces to a pool.

Idea: what is to be done stands in the store, and only there: the thread asks for the oldest open
survey and its unmade pieces, keeps some chunks of them in hand, and writes each chunk that comes
back in one step with the count of what is done. So a start after a kill goes on where the store
is, and a worker that dies costs the chunks in hand. Of a kind that gathers the last piece is handed
out when all others are in the store.

Left out: what a piece is (kinds.py), which make a chunk (chunks.py), where it is made (pool.py).
"""

import logging
import sys
import threading
from collections.abc import Callable, Sequence
from concurrent.futures import FIRST_COMPLETED, BrokenExecutor, Executor, Future, wait
from contextlib import suppress
from dataclasses import replace
from datetime import datetime
from time import monotonic
from typing import Any

from kinematics.errors import KinematicsError
from service.errors import NotAvailable, ServiceError, StorageUnavailable
from service.operations.arms import Arms
from service.operations.stored import utc_now
from service.storage.ports import (
    FAILED,
    OPEN_STATES,
    SUCCEEDED,
    GivenPiece,
    MadePiece,
    Survey,
    SurveyStorage,
)
from service.surveys import worker
from service.surveys.chunks import Chunks
from service.surveys.kinds import Gathers
from service.surveys.pool import Pool
from service.surveys.progress import Pace
from service.surveys.registry import SURVEY_KINDS
from service.surveys.retention import Retention
from service.wire.arms import ReadArm

_LOG = logging.getLogger(__name__)

_ENDS_WITHIN_S = 0.7
"""A chunk of a cancelled survey, else its process is ended: a cancel takes a second at most."""

_LOOK_S = 0.1
"""How often a cancelled survey or a stop is looked for."""

_LOOK_ELSEWHERE_S = 2.0
"""How often surveys that other server processes took in are looked for, and a store that failed."""

_IDLE_S = 60.0
"""Then the processes end, and give their memory back."""

MOST_DEATHS = 3
"""Of workers in a row, with nothing made between: then it is the survey that kills them."""

_Made = tuple[list[MadePiece], float]
_Finished = tuple[Sequence[GivenPiece], list[MadePiece]]
"""A chunk that has come back and is not in the store yet."""


class _Over(Exception):
    """The survey in hand is not to be gone on with: cancelled, removed, or the service stops."""


class Runner:
    """The thread of one service; it begins with the first ``wake``."""

    def __init__(
        self,
        store: SurveyStorage,
        arms: Arms[ReadArm],
        pool: Pool,
        *,
        now: Callable[[], datetime] = utc_now,
        days: int = 0,
    ) -> None:
        self._store, self._arms, self._pool, self._now = store, arms, pool, now
        self._retention = Retention(store, days, now)
        self._thread: threading.Thread | None = None
        self._wanted, self._stopping = threading.Event(), threading.Event()
        self._lock = threading.Lock()
        self._cancelled: set[str] = set()
        self._unwritten: dict[str, str] = {}
        self._pace: Pace | None = None

    def wake(self) -> None:
        """Look into the store: there is something to do."""
        self._wanted.set()
        with self._lock:
            if self._thread is None and not self._stopping.is_set():
                self._thread = threading.Thread(target=self._work, name="surveys", daemon=True)
                self._thread.start()

    def let_go(self, survey: str) -> None:
        """Stop working on a survey that has been cancelled in the store."""
        self._cancelled.add(survey)

    def stop(self) -> None:
        """End all work at once; what is open stays open."""
        self._stopping.set()
        self._wanted.set()
        self._pool.stop()
        if self._thread is not None:
            self._thread.join(1.0)

    def seen(self, survey: Survey) -> Survey:
        """Return a survey as it is, also where its end could not be written yet."""
        reason = self._unwritten.get(survey.id)
        if reason is not None and survey.state in OPEN_STATES:
            return replace(survey, state=FAILED, reason=reason)
        return survey

    def remaining_s(self, survey: Survey) -> float | None:
        """Return how long it still takes at the pace of now; None where nobody can tell."""
        pace = self._pace
        if pace is None or pace.survey != survey.id or survey.state not in OPEN_STATES:
            return None
        return pace.remaining_s(survey.total)

    def _work(self) -> None:
        if sys.platform == "linux":  # elsewhere it would be the whole service that gives way
            worker.give_way()
        idle_since = monotonic()
        while not self._stopping.is_set():
            self._wanted.clear()
            try:
                survey = self._next()
                if survey is not None:
                    self._run(survey)
                    idle_since = monotonic()
                    continue
                self._wanted.wait(_LOOK_ELSEWHERE_S)
                if monotonic() - idle_since > _IDLE_S:
                    self._pool.stop()
            except Exception:  # without this thread no survey would ever go on
                _LOG.exception("surveys are looked for again in %g s", _LOOK_ELSEWHERE_S)
                self._stopping.wait(_LOOK_ELSEWHERE_S)

    def _next(self) -> Survey | None:
        """Return the oldest survey to work on, None where there is none or the store fails."""
        with suppress(StorageUnavailable):
            self._write_what_was_not()
            if not self._store.may_lead():
                return None
            self._retention.tidy()
            survey = self._store.next_open()
            if survey is not None and survey.id not in self._unwritten:
                return survey
        return None

    def _run(self, survey: Survey) -> None:
        # Whatever was cancelled up to here does not begin; only what is cancelled from now on
        # has to be let go of.
        self._cancelled.clear()
        try:
            with suppress(_Over):
                if self._store.begin(survey.id, self._now()):
                    self._make_all(survey)
                    self._store.end(survey.id, SUCCEEDED, self._now())
        except (ServiceError, KinematicsError) as error:
            self._fail(survey.id, f"{error.say}; {error.way_out}" if error.way_out else error.say)
        except Exception:
            # A stop takes the processes away, maybe just as a chunk is handed to them: that is
            # no failure, and what is open stays open.
            if not self._stopping.is_set():
                _LOG.exception("survey %s failed", survey.id)
                self._fail(survey.id, "the service failed at it; its log tells more")
        finally:
            self._pace = None

    def _fail(self, survey: str, reason: str) -> None:
        _LOG.error("survey %s failed: %s", survey, reason)
        self._unwritten[survey] = reason
        with suppress(StorageUnavailable):
            self._write_what_was_not()

    def _write_what_was_not(self) -> None:
        """Write the ends that a full disk kept from being written."""
        for survey, reason in list(self._unwritten.items()):
            self._store.end(survey, FAILED, self._now(), reason)
            del self._unwritten[survey]

    def _make_all(self, survey: Survey) -> None:
        setup = SURVEY_KINDS[survey.kind].setup(self._arms, survey)
        executor = self._pool.executor()
        pace = self._pace = Pace(survey.id, survey.done)
        gathers = isinstance(SURVEY_KINDS[survey.kind], Gathers)
        chunks = Chunks(self._store, survey.id, gathers=gathers)
        in_hand: dict[Future[_Made], Sequence[GivenPiece]] = {}
        unwritten: list[_Finished] = []
        deaths = 0
        try:
            while True:
                try:
                    # First what is next: no process waits for the disk.
                    self._hand_out(executor, survey, setup, chunks, in_hand, unwritten)
                    if not in_hand and not unwritten:
                        return
                    while unwritten:
                        pieces, made = unwritten.pop(0)
                        if not self._store.keep(survey.id, made):
                            raise _Over
                        pace.went_on(sum(piece.size for piece in pieces))
                    for future in wait(in_hand, _LOOK_S, FIRST_COMPLETED).done:
                        made, seconds = future.result()
                        unwritten.append((in_hand.pop(future), made))
                        chunks.took(seconds, len(made))
                        deaths = 0
                except BrokenExecutor:
                    deaths += 1
                    executor = self._anew(chunks, in_hand, deaths)
                self._go_on(survey.id)
        finally:
            self._drop(in_hand)

    def _hand_out(
        self,
        executor: Executor,
        survey: Survey,
        setup: Any,
        chunks: Chunks,
        in_hand: dict[Future[_Made], Sequence[GivenPiece]],
        unwritten: Sequence[_Finished],
    ) -> None:
        while (beside := len(in_hand)) < (room := self._pool.room):
            pieces = chunks.next(room, none_in_hand=not (beside or unwritten))
            if not pieces:
                return
            given = survey.kind, survey.id, setup, pieces, chunks.others(pieces)
            try:
                future = executor.submit(worker.make, *given)
            except BrokenExecutor:
                chunks.back(pieces)
                raise
            in_hand[future] = pieces

    def _anew(
        self,
        chunks: Chunks,
        in_hand: dict[Future[_Made], Sequence[GivenPiece]],
        deaths: int,
    ) -> Executor:
        """Return processes in place of those that died, with what they had in hand to do again."""
        if self._stopping.is_set():
            raise _Over
        if deaths > MOST_DEATHS:
            raise NotAvailable(f"the processes that worked on it ended {deaths} times")
        _LOG.warning("a survey worker ended; its chunks are made again")
        for pieces in in_hand.values():
            chunks.back(pieces)
        in_hand.clear()
        self._pool.stop()
        return self._pool.executor()

    def _go_on(self, survey: str) -> None:
        if self._stopping.is_set() or survey in self._cancelled:
            raise _Over

    def _drop(self, in_hand: dict[Future[_Made], Sequence[GivenPiece]]) -> None:
        """Take back what has not begun; do not wait long for what has."""
        for future in in_hand:
            future.cancel()
        begun = [future for future in in_hand if not future.cancelled()]
        if begun and not self._stopping.is_set() and wait(begun, _ENDS_WITHIN_S).not_done:
            self._pool.stop()
