"""Whether an arm can be where a sample says: travel, and top speed by whichever clock is slower."""

import pytest

from service.live.samples import JUMP, OUTSIDE_TRAVEL
from service.live.weighing import Weighing, elapsed_s
from tests.service.live.made import Bench

DEGREES_A_SECOND, UNEVEN_S = 180.0, 0.05
"""Top speed of joint 1; what samples may be off by in time."""


@pytest.mark.parametrize(
    ("joint", "why"), [(169.9, ""), (170.1, OUTSIDE_TRAVEL), (-170.1, OUTSIDE_TRAVEL)]
)
def test_travel(joint: float, why: str) -> None:
    bench = Bench()
    found, say = Weighing(bench.stored.read).doubt(None, bench.sample(joint, 0))
    assert found == why
    assert bool(say) == bool(why)


@pytest.mark.parametrize("share", [0.99, 1.01])
def test_top_speed_from_the_last_good_sample(share: float) -> None:
    bench = Bench()
    before = bench.sample(0, 0)
    bench.clock.go_on(0.1)
    after = bench.sample(share * DEGREES_A_SECOND * (0.1 + UNEVEN_S), 0)
    found, _ = Weighing(bench.stored.read).doubt(before, after)
    assert found == ("" if share < 1.0 else JUMP)


def test_what_was_measured_in_time_may_come_late() -> None:
    """As much as 45 degrees within 10 ms by arrival, within 250 ms by the source's clock."""
    bench = Bench()
    before = bench.sample(0, 0, sampled_ms=1000.0)
    bench.clock.go_on(0.01)
    after = bench.sample(45, 0, sampled_ms=1250.0)
    assert elapsed_s(before, after) == pytest.approx(0.25)
    assert Weighing(bench.stored.read).doubt(before, after) == ("", "")


def test_times_of_two_sources_are_not_compared() -> None:
    bench = Bench()
    before = bench.sample(0, 0, sampled_ms=1000.0)
    bench.clock.go_on(0.5)
    other = bench.sample(0, 0, sampled_ms=9000.0, source="other")
    assert elapsed_s(before, other) == pytest.approx(0.5)
