"""How often an input comes, with the pauses and bursts that networks make."""

import pytest

from service.live.period import Period


def period_of(*intervals: float) -> Period:
    period, at = Period(), 5.0
    period.arrived(at)
    for interval in intervals:
        at += interval
        period.arrived(at)
    return period


def test_a_pause_or_a_burst_moves_it_little() -> None:
    even = [0.1] * 9
    assert period_of(*even).seconds == pytest.approx(0.1)
    assert period_of(*even, 30.0).seconds == pytest.approx(0.1)
    assert period_of(*even, 0.4, 0.0, 0.001, 0.001).seconds == pytest.approx(0.1)


def test_it_follows_another_pace_after_five() -> None:
    assert period_of(*[0.1] * 9, *[2.0] * 5).seconds == pytest.approx(2.0)


def test_three_periods_and_the_least_of_them() -> None:
    assert period_of(*[0.2] * 9).stale_after_s == pytest.approx(0.6)
    assert period_of(*[0.001] * 9).stale_after_s == 0.05
    assert Period().stale_after_s == 3.0


def test_what_is_declared_counts_as_long_as_it_is() -> None:
    period = period_of(*[0.1] * 9)
    period.arrived(100.0, 5.0)
    assert (period.seconds, period.stale_after_s) == (5.0, 15.0)
    period.arrived(100.0, 0.01)
    assert period.stale_after_s == pytest.approx(0.03)
    period.arrived(100.0, 0.001)
    assert period.stale_after_s == 0.01
    period.arrived(100.1)
    assert period.seconds == pytest.approx(0.1)
