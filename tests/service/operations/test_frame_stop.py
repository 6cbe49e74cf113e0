"""An estimate that nobody waits for any more gives up, so that a stop is not held up."""

from collections.abc import Callable
from typing import Any

import pytest

from kinematics import block_system
from kinematics.frame_estimate import estimate
from service.bulk.threads import Threads
from service.errors import NotAvailable, TooLarge
from service.operations import frame_estimates
from service.operations.frames import frames_answer
from service.wire.frames import FramesBody
from tests.made_relations import anywhere, body_of


def answer_of(between: Callable[[], None]) -> dict[str, Any]:
    body = FramesBody(body_of((30, 60), anywhere, estimate=True))
    return frames_answer(None, None, body, between)  # type: ignore[arg-type]  # neither is named


def test_a_stop_ends_an_estimate() -> None:
    threads = Threads()
    asked: list[int] = []

    def between() -> None:
        asked.append(1)
        if len(asked) == 2:
            threads.stop()
        threads.refuse_if_stopping()

    with pytest.raises(NotAvailable):
        answer_of(between)
    assert len(asked) == 2


@pytest.mark.parametrize("way", ["dense", "factors", "steps"])
def test_a_stop_ends_the_search_for_suspects(way: str, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(block_system, "MOST_DENSE", 1200 if way == "dense" else 0)
    monkeypatch.setattr(block_system, "MOST_ENVELOPE", 0 if way == "steps" else 1e9)
    threads = Threads()
    estimated: list[object] = []

    def estimate_and_stop(*asked: Any) -> object:
        estimated.append(estimate(*asked))
        threads.stop()
        return estimated[0]

    monkeypatch.setattr(frame_estimates, "estimate", estimate_and_stop)
    with pytest.raises(NotAvailable):
        answer_of(threads.refuse_if_stopping)
    assert estimated, "it was the search that gave up"


def test_an_estimate_is_given_its_time_and_no_more(monkeypatch: pytest.MonkeyPatch) -> None:
    now = [100.0]
    monkeypatch.setattr(frame_estimates, "monotonic", lambda: now[0])
    asked: list[int] = []

    def between() -> None:
        asked.append(1)
        now[0] += frame_estimates.MOST_SECONDS / 2.5

    with pytest.raises(TooLarge, match="after 20 s") as refused:
        answer_of(between)
    assert len(asked) == 3
    assert (refused.value.status, refused.value.where) == (422, ("estimate",))


def test_what_is_done_in_time_is_answered(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(frame_estimates, "monotonic", lambda: 100.0)
    assert answer_of(lambda: None)["estimate"]["converged"]
