"""What live values mean for events: times of both clocks, arms that change or go, and how often."""

from datetime import timedelta
from typing import Any

import pytest

from service.events.ports import ENDED, OPEN, UNKNOWN, Event
from service.events.watch import EventWatch
from service.sorted_ids import ID
from tests.service.live.made import ARM, ROW, Bench, stored

INSIDE, STRETCHED = (10.0, 90.0), (10.0, 0.0)
"""Two links side by side, and in one line: the hand cannot move outwards."""


class Watched(Bench):
    """Live arms that are watched."""

    def __init__(self, document: dict[str, Any] | None = None) -> None:
        super().__init__(document)
        self.told: list[Event] = []
        self.watch = EventWatch(self.told.append, self.clock)
        self.arms.observers.append(self.watch)

    def feed_all(self, *postures: tuple[float, ...], every_s: float = 1.0, **more: Any) -> None:
        for posture in postures:
            assert self.feed(*posture, period_s=60.0, **more).accepted
            self.clock.go_on(every_s)

    def words(self) -> list[str]:
        return [f"{event.state} {event.kind}" for event in self.told]


def test_an_arm_that_stretches_is_near_singular_and_singular() -> None:
    bench = Watched()
    bench.feed_all(INSIDE, STRETCHED, INSIDE)
    assert bench.words() == [
        *("open near-singular", "open singular", "ended near-singular", "ended singular"),
    ]
    begun, ended = bench.told[0], bench.told[2]
    assert begun.id == ended.id
    assert ID.fullmatch(begun.id)
    assert begun.document["revision"] == 1
    assert not begun.simulated
    assert ended.ended_at is not None
    assert ended.ended_at - ended.began_at == timedelta(seconds=1)
    assert ended.document["peak"] <= ended.document["begins_at"] < ended.document["ends_at"]


def test_thresholds_are_those_of_the_arm() -> None:
    own = {**ARM, "singularity_thresholds": {"near": 0.05, "singular": 1e-6}}
    bench = Watched(own)
    bench.feed_all(INSIDE, STRETCHED)
    by_kind = {event.kind: event.document["begins_at"] for event in bench.told}
    assert by_kind == {"near-singular": 0.05, "singular": 1e-6}


@pytest.mark.parametrize("hours", [1.0, -1.0])
def test_no_event_ends_before_it_began_whatever_the_wall_clock_is_set_to(hours: float) -> None:
    bench = Watched()
    bench.feed_all(INSIDE, STRETCHED)
    bench.clock.step_wall(3600.0 * hours)
    bench.feed_all(STRETCHED, INSIDE)
    for event in bench.told:
        assert event.began_at <= event.seen_at
    ended = [event for event in bench.told if event.state == ENDED]
    assert len(ended) == 2
    for event in ended:
        assert event.ended_at is not None
        assert event.ended_at - event.began_at == timedelta(seconds=2)


def test_silence_begins_by_the_clock_and_ends_with_values() -> None:
    bench = Watched()
    for _ in range(6):
        bench.feed(*INSIDE)
        bench.clock.go_on(0.1)
    bench.clock.go_on(10.0)
    assert bench.words() == ["open stale"]
    assert bench.told[0].document["peak"] == pytest.approx(0.3, abs=0.02)
    for _ in range(3):
        bench.feed(*INSIDE)
        bench.clock.go_on(0.1)
    assert bench.words() == ["open stale", "ended stale"]
    assert bench.told[1].document["peak"] == pytest.approx(10.1, abs=0.02)


def test_an_input_that_is_doubted_is_not_silent() -> None:
    bench = Watched()
    bench.feed_all(INSIDE, INSIDE)
    bench.clock.go_on(200.0)
    assert bench.words() == ["open stale"]
    for _ in range(3):
        assert bench.feed(171.0, 0.0, period_s=60.0).doubted
        bench.clock.go_on(0.1)
    assert bench.words() == ["open stale", "ended stale"]


def test_another_source_and_another_revision() -> None:
    bench = Watched()
    bench.feed_all(INSIDE, source="plc")
    bench.clock.go_on(6.0)
    bench.feed_all(INSIDE, source="gateway")
    assert bench.words() == ["open source-changed", "ended source-changed"]
    assert [bench.told[-1].document[key] for key in ("from", "to")] == ["plc", "gateway"]
    bench.told.clear()
    bench.arms.of(stored({**ARM, "notes": "measured anew"}, revision=4))
    assert bench.words() == ["open revision-changed", "ended revision-changed"]
    assert [bench.told[-1].document[key] for key in ("from", "to", "revision")] == [1, 4, 4]


def test_outside_working_travel_is_told_by_the_share() -> None:
    rows = [{**ROW, "travel": [-170, 170], "working_travel": [-100, 100]}, ARM["rows"][1]]
    bench = Watched({**ARM, "rows": rows})
    bench.feed_all((0.0, 90.0), (110.0, 90.0), (99.0, 90.0), (97.0, 90.0))
    assert bench.words() == ["open outside-working-travel", "ended outside-working-travel"]
    # 10 degrees of 200; over only two degrees inside.
    assert bench.told[0].document["peak"] == pytest.approx(-0.05)
    assert bench.told[0].document["say"] == "outside working travel by 5 % of it"
    assert bench.told[1].ended_at == bench.told[1].began_at + timedelta(seconds=2)


def test_an_arm_with_tools_and_no_default_is_judged_at_its_flange() -> None:
    tool = {"position": [0, 0, 10], "orientation": {"form": "xyz-fixed", "values": [0, 0, 0]}}
    bench = Watched({**ARM, "tools": {"pen": tool}})
    bench.feed_all(INSIDE, STRETCHED)
    assert bench.words() == ["open near-singular", "open singular"]


def test_an_arm_that_goes_leaves_no_event_open() -> None:
    bench = Watched()
    bench.feed_all(INSIDE, STRETCHED)
    bench.arms.forget("two")
    left = bench.told[2:]
    assert [(event.state, event.ended_at) for event in left] == [(UNKNOWN, None)] * 2
    assert [event.id for event in left] == [event.id for event in bench.told[:2]]
    # Stored and fed again, it begins anew.
    bench.told.clear()
    bench.feed_all(INSIDE, STRETCHED)
    assert {event.state for event in bench.told} == {OPEN}


def test_who_watches_no_more_says_that_nobody_knows() -> None:
    bench = Watched()
    bench.feed_all(INSIDE, STRETCHED, simulated=True)
    assert all(event.simulated for event in bench.told)
    bench.watch.leave()
    assert [event.state for event in bench.told[2:]] == [UNKNOWN, UNKNOWN]


def test_fast_inputs_are_measured_fifty_times_a_second() -> None:
    """What lies between two looks is not seen: stretched for a millisecond in twenty."""
    bench = Watched()
    bench.feed_all(*[INSIDE, *[STRETCHED] * 9] * 40, every_s=0.002)
    assert bench.told == []
    bench.feed_all(*[INSIDE, *[STRETCHED] * 10] * 10, every_s=0.002)
    assert bench.words()[:2] == ["open near-singular", "open singular"]
