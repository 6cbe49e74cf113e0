"""Whatever comes, in whatever order and by whatever clocks: what stands is good and newest.

Arrivals are drawn: sequences that repeat and fall back, times that jump, values that cannot be, two
sources, pauses, a wall clock that somebody sets. Held against a plain account of what was accepted.
"""

import math
from collections import Counter
from typing import Any

from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from service.live.history import History
from service.live.samples import DROPS, REASONS
from service.live.source_clock import SourceClock
from tests.service.live.made import Bench

JOINTS = st.one_of(
    st.floats(-20, 20),
    st.sampled_from([170.0, -170.0, 171.0, -200.0, math.nan, math.inf, 1e9]),
)
ARRIVALS = st.fixed_dictionaries(
    {
        "joint": JOINTS,
        "after_s": st.sampled_from([0.0, 0.001, 0.01, 0.1, 0.1, 0.1, 1.0, 20.0]),
        "source": st.sampled_from(["a", "a", "a", "b"]),
        "sequence": st.one_of(st.none(), st.integers(0, 12)),
        "ahead_s": st.one_of(
            st.none(), st.sampled_from([0.0, 0.0, -0.02, -1.0, 3600.0, -3600.0, 1.5])
        ),
        "simulated": st.sampled_from([False, False, False, True]),
        "wall_s": st.sampled_from([0.0, 0.0, 0.0, 0.0, 3600.0, -3600.0]),
    }
)
FINDING = settings(
    max_examples=150, deadline=None, database=None, suppress_health_check=list(HealthCheck)
)


@FINDING
@given(st.lists(ARRIVALS, max_size=40))
def test_what_stands_was_accepted_last_and_time_goes_forward(arrivals: list[Any]) -> None:
    bench = Bench()
    changes: list[int] = []
    told: list[int] = []
    accepted: list[tuple[float, ...]] = []
    counts: Counter[str] = Counter()
    bench.arms.follow(None, lambda name, standing: told.append(standing.change))
    bench.arms.observers.append(lambda notice: changes.append(notice.standing.change))
    real = False
    for one in arrivals:
        bench.clock.step_wall(one["wall_s"])
        bench.clock.go_on(one["after_s"])
        ahead = one["ahead_s"]
        taken = bench.feed(
            one["joint"],
            0,
            source=one["source"],
            sequence=one["sequence"],
            sampled_ms=None if ahead is None else bench.clock.wall + ahead * 1000.0,
            simulated=one["simulated"],
        )
        if real and one["simulated"]:
            assert taken.dropped == "superseded"
        if not one["simulated"] and not real:
            real, accepted = True, []
            counts.clear()
        counts["good" if taken.accepted else taken.dropped or taken.doubted] += 1
        assert taken.dropped in ("", *DROPS)
        assert taken.doubted in ("", *REASONS)
        standing = bench.live.standing
        if taken.accepted:
            accepted.append(standing.sample.joints)
            assert standing.quality == "good"
            assert abs(one["joint"]) <= 170
        elif taken.doubted:
            assert (standing.quality, standing.reason) == ("uncertain", taken.doubted)
        # The last one accepted stands, whatever came since.
        assert (None if standing.sample is None else standing.sample.joints) == (
            accepted[-1] if accepted else None
        )
        age = bench.live.age_s(bench.clock.steady)
        assert age >= 0.0
        assert (standing.quality == "good") == (standing.reason == "")
    assert bench.live is not None if arrivals else bench.arms.names() == []
    assert changes == sorted(set(changes)) == told
    if arrivals:
        assert bench.live.counts == counts
        happened = bench.live.history.table(-math.inf)[:, 0]
        assert (happened[1:] >= happened[:-1]).all()
    # Silence ends in stale, from anywhere.
    bench.clock.go_on(120.0)
    assert all(bench.arms.get(name).standing.reason == "stale" for name in bench.arms.names())  # type: ignore[union-attr]


@FINDING
@given(
    offset_s=st.floats(-1e9, 1e9),
    delays=st.lists(st.floats(0.0, 1.0), min_size=1, max_size=100),
)
def test_delays_are_told_from_offsets_but_for_the_smallest(
    offset_s: float, delays: list[float]
) -> None:
    """Within the minute that is remembered, each delay is known less the smallest so far."""
    clock = SourceClock()
    smallest = math.inf
    for number, delay in enumerate(delays):
        received = 50.0 + number * 0.5
        sampled = received - delay + offset_s
        clock.heard(received, sampled, -offset_s)
        smallest = min(smallest, delay)
        assert clock.doubt(received, sampled, -offset_s) == ""
        # 1e9 s in doubles are exact to 1e-7 s.
        assert abs(clock.delay(received, sampled) - (delay - smallest)) < 1e-6


@FINDING
@given(steps=st.lists(st.sampled_from([0.0, 0.001, 0.01, 0.02, 0.05, 1.0, 300.0]), max_size=200))
def test_history_keeps_the_newest_in_order_and_forgets_the_old(steps: list[float]) -> None:
    history, at, all_of_them = History(1), 0.0, []
    for number, step in enumerate(steps):
        at += step
        all_of_them.append(at)
        history.add(at, number, False, (float(number),))
    table = history.table(-math.inf)
    assert len(table) == len(history) <= len(steps)
    if steps:
        assert table[-1, 1] == len(steps) - 1
        assert at - table[0, 0] <= 600.0
        assert [all_of_them[int(number)] for number in table[:, 1]] == table[:, 0].tolist()
        # Not thinned by more than is said: there is one within 20 ms of each there was.
        kept = table[:, 0]
        for one in all_of_them:
            if at - one <= 599.0:
                assert min(abs(kept - one)) <= 0.02
