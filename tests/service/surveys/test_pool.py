"""How many chunks processes have in hand, and when one of them rests."""

import pytest

import service.metrics
from service.metrics import Metrics
from service.surveys.pool import OwnProcesses


@pytest.mark.parametrize(("count", "quiet", "busy"), [(1, 2, 2), (2, 4, 1), (8, 16, 7)])
def test_one_of_several_rests_while_others_ask(count: int, quiet: int, busy: int) -> None:
    asked = False
    pool = OwnProcesses(count, lambda: asked)
    assert pool.room == quiet
    asked = True
    assert pool.room == busy


@pytest.mark.parametrize(
    ("route", "waited_for"),
    [
        ("/v1/arms/{arm}/pose", True),
        ("/v1/poses", True),
        ("/v1/surveys/{survey}", False),
        ("/livez", False),
        ("/metrics", False),
    ],
)
def test_whoever_watches_a_survey_does_not_slow_it(
    monkeypatch: pytest.MonkeyPatch, route: str, waited_for: bool
) -> None:
    now = 100.0
    monkeypatch.setattr(service.metrics, "monotonic", lambda: now)
    metrics = Metrics()
    assert not metrics.is_asked()
    metrics.answered(route, "GET", 200, 0.001)
    assert metrics.is_asked() == waited_for
    now += 1.1
    assert not metrics.is_asked()
