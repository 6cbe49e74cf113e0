"""What is learnt of a source's clock, and what is not believed."""

import pytest

from service.live.source_clock import SourceClock


def heard(clock: SourceClock, received: float, sampled: float) -> str:
    clock.heard(received, sampled, 0.0)
    return clock.doubt(received, sampled, 0.0)


def test_the_fastest_of_the_last_minute_counts() -> None:
    clock = SourceClock()
    for number, delay in enumerate((0.5, 0.2, 0.4, 0.3)):
        assert heard(clock, number * 1.0, number - delay) == ""
    assert clock.difference_s == pytest.approx(0.2)
    for number in range(4, 80):
        heard(clock, number * 1.0, number - 0.3)
    assert clock.difference_s == pytest.approx(0.3)


@pytest.mark.parametrize(
    ("over_s", "reason"),
    [(-1.9, ""), (-2.1, "time-in-future"), (9.9, ""), (10.1, "time-too-old")],
)
def test_how_far_a_time_may_be_off(over_s: float, reason: str) -> None:
    clock = SourceClock()
    assert heard(clock, 100.0, 100.0) == ""
    assert clock.doubt(101.0, 101.0 - over_s, 0.0) == reason


def test_before_anything_came_the_wall_clock_counts() -> None:
    clock = SourceClock()
    assert clock.doubt(5.0, 1_000_000.0, -999_995.0) == ""
    assert clock.doubt(5.0, 1_003_600.0, -999_995.0) == "time-in-future"
    assert clock.delay(5.0, 1_000_000.0) == 0.0


def test_a_time_that_is_kept_to_is_believed_after_a_second() -> None:
    clock = SourceClock()
    heard(clock, 0.0, 0.0)
    told = [heard(clock, 1.0 + n * 0.25, 3601.0 + n * 0.25) for n in range(6)]
    assert told == ["time-in-future"] * 4 + ["", ""]
    assert clock.times_set == 1
    assert clock.difference_s == pytest.approx(-3600.0)


@pytest.mark.parametrize(
    "sampled",
    [
        [3600.0 + n * 2.0 for n in range(20)],  # twice as fast as time
        [3600.0] * 20,  # it stands still
        [3600.0 - n * 0.1 for n in range(20)],  # it goes backwards
        [3600.0 * (-1) ** n for n in range(20)],  # it jumps
    ],
)
def test_a_time_that_is_no_clock_is_never_believed(sampled: list[float]) -> None:
    clock = SourceClock()
    heard(clock, 0.0, 0.0)
    assert all(heard(clock, 1.0 + n * 0.25, at) for n, at in enumerate(sampled))
    assert clock.times_set == 0


def test_two_samples_a_second_apart_are_not_enough() -> None:
    clock = SourceClock()
    heard(clock, 0.0, 0.0)
    assert heard(clock, 1.0, 3601.0)
    assert heard(clock, 3.0, 3603.0)
    assert heard(clock, 5.0, 3605.0) == ""
