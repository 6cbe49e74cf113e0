"""When events begin and end: hysteresis, one of a kind at a time, begin before end."""

from dataclasses import replace
from typing import Any

from hypothesis import given, settings
from hypothesis import strategies as st

from service.events.detector import Detector, Happening
from service.events.kinds import (
    FRESH_TO_END,
    NEAR_ENDS,
    TOLD_AGAIN_S,
    WORKING_ENDS,
    thresholds_of,
)

NEAR, SINGULAR = 0.01, 1e-9
THRESHOLDS = thresholds_of(NEAR, SINGULAR)


class Seen:
    """A detector and what it told, each as it was at the time."""

    def __init__(self) -> None:
        self.told: list[Happening] = []
        self.detector = Detector(lambda one: self.told.append(replace(one, told=dict(one.told))))

    def values(self, *values: float, every_s: float = 1.0, kind: str = "near-singular") -> None:
        for number, value in enumerate(values):
            self.detector.measured(number * every_s, {kind: value}, THRESHOLDS)  # type: ignore[dict-item]

    def words(self) -> list[str]:
        return [("end " if one.ended_s is not None else "begin ") + one.kind for one in self.told]


def test_an_event_begins_below_one_value_and_ends_from_another_on() -> None:
    seen = Seen()
    seen.values(0.1, 0.0101, 0.01, 0.004, 0.0124, 0.007, 0.0125, 0.02)
    assert seen.words() == ["begin near-singular", "end near-singular"]
    begun, ended = seen.told
    assert (begun.began_s, begun.peak) == (2.0, 0.01)
    assert (ended.began_s, ended.seen_s, ended.ended_s, ended.peak) == (2.0, 6.0, 6.0, 0.004)
    assert seen.detector.open == []


def test_a_value_that_trembles_about_a_threshold_makes_one_event() -> None:
    for kind, about in (("near-singular", NEAR), ("singular", SINGULAR)):
        seen = Seen()
        wobble = [about * (1.0 + (-1.0) ** number * 1e-3) for number in range(1000)]
        seen.values(*wobble, 1.0, kind=kind, every_s=0.01)
        assert seen.words() == [f"begin {kind}", f"end {kind}"]
    seen = Seen()
    wobble = [(-1.0) ** number * 0.9 * WORKING_ENDS for number in range(1000)]
    seen.values(*wobble, kind="outside-working-travel")
    assert seen.words()[0] == "begin outside-working-travel"
    assert seen.words().count("end outside-working-travel") == 0


def test_at_the_border_of_working_travel_an_arm_is_within_it() -> None:
    seen = Seen()
    seen.values(0.0, 0.1, 0.0, kind="outside-working-travel")
    assert seen.told == []
    seen.values(-1e-12, kind="outside-working-travel")
    assert seen.words() == ["begin outside-working-travel"]


def test_where_nothing_bounds_an_event_ends() -> None:
    seen = Seen()
    seen.values(-0.1, float("inf"), kind="outside-working-travel")
    assert seen.words() == ["begin outside-working-travel", "end outside-working-travel"]


def test_an_event_that_lasts_is_told_again_now_and_then() -> None:
    seen = Seen()
    seen.values(*[0.005] * 150, every_s=1.0)
    assert len(seen.told) == 1 + int(149 // TOLD_AGAIN_S)
    assert [one.seen_s for one in seen.told] == [0.0, TOLD_AGAIN_S, 2 * TOLD_AGAIN_S]
    assert {one.ended_s for one in seen.told} == {None}


def test_silence_ends_with_several_values_in_a_row() -> None:
    seen, detector = Seen(), None
    detector = seen.detector
    detector.heard(0.0, "a", ("a",))
    detector.silent(3.0, 0.0)
    detector.silent(3.0, 0.0)
    assert seen.words() == ["begin stale"]
    assert seen.told[0].peak == 3.0
    for at in (10.0, 11.0):
        detector.heard(at, "a", ("a",))
    detector.silent(20.0, 11.0)
    for number in range(FRESH_TO_END):
        detector.heard(24.0 + number, "a", ("a",))
    assert seen.words() == ["begin stale", "end stale"]
    ended = seen.told[-1]
    # The longest of both silences: to 10 s, and from 11 s to 24 s.
    assert (ended.began_s, ended.ended_s, ended.peak) == (3.0, 26.0, 13.0)


def test_another_source_is_an_event_of_a_moment_unless_both_go_on() -> None:
    seen = Seen()
    seen.detector.heard(0.0, "a", ("a",))
    seen.detector.heard(9.0, "b", ("b",))
    assert seen.words() == ["begin source-changed", "end source-changed"]
    assert seen.told[-1].told == {"from": "a", "to": "b"}
    seen.told.clear()
    for number in range(100):
        seen.detector.heard(10.0 + number / 100, "ab"[number % 2], ("a", "b"))
    seen.detector.heard(17.0, "b", ("b",))
    assert seen.words() == ["begin source-changed", "end source-changed"]
    assert (seen.told[-1].peak, seen.told[-1].told["to"]) == (100.0, "b")
    seen.detector.heard(18.0, "c", ("b", "c"))
    seen.detector.silent(30.0, 18.0)
    assert seen.words()[2:] == ["begin source-changed", "begin stale", "end source-changed"]


def test_a_revision_is_an_event_of_a_moment() -> None:
    seen = Seen()
    seen.detector.revised(4.0, 1, 3)
    assert seen.words() == ["begin revision-changed", "end revision-changed"]
    assert seen.told[-1].told == {"from": 1, "to": 3}
    assert seen.detector.open == []


def test_thresholds_leave_room_between_begin_and_end_for_any_arm() -> None:
    for near, singular in ((0.01, 1e-9), (1e-9, 1e-9), (0.5, 0.4), (1e-3, 1e-3)):
        for threshold in thresholds_of(near, singular).values():
            assert threshold.ends > threshold.begins
    assert thresholds_of(0.01, 0.0)["near-singular"].ends == NEAR_ENDS * 0.01


MOMENTS = st.lists(
    st.tuples(
        st.floats(0.0, 100.0),
        st.sampled_from(["near", "working", "heard", "silent", "revised"]),
        st.floats(-0.02, 0.03) | st.sampled_from([0.0, NEAR, NEAR * NEAR_ENDS, SINGULAR, 0.01]),
        st.sampled_from("abc"),
    ),
    max_size=60,
)


def play(moments: list[tuple[float, str, float, str]], seen: Seen) -> None:
    detector = seen.detector
    for at_s, what, value, source in moments:
        if what == "near":
            measured: Any = {"near-singular": abs(value), "singular": abs(value)}
            detector.measured(at_s, measured, THRESHOLDS)
        elif what == "working":
            detector.measured(at_s, {"outside-working-travel": value}, THRESHOLDS)
        elif what == "heard":
            detector.heard(at_s, source, (source,) if value < 0 else ("a", "b", "c"))
        elif what == "silent":
            detector.silent(at_s, at_s - abs(value))
        else:
            detector.revised(at_s, 1, 2)


@given(MOMENTS)
@settings(deadline=None)
def test_of_each_kind_one_is_open_at_most_and_none_ends_before_it_began(
    moments: list[tuple[float, str, float, str]],
) -> None:
    """In whatever order moments come: also with a clock that is no clock."""
    seen = Seen()
    play(moments, seen)
    open_now: dict[str, float] = {}
    for one in seen.told:
        assert one.began_s <= one.seen_s
        if one.ended_s is not None:
            assert one.ended_s >= one.began_s
            assert open_now.pop(one.kind) == one.began_s
        elif one.kind in open_now:
            assert open_now[one.kind] == one.began_s  # told again, not begun anew
            assert one.seen_s - one.began_s >= TOLD_AGAIN_S
        else:
            open_now[one.kind] = one.began_s
    assert {one.kind: one.began_s for one in seen.detector.open} == open_now


@given(MOMENTS)
@settings(deadline=None)
def test_a_peak_is_the_worst_value_from_begin_to_end(
    moments: list[tuple[float, str, float, str]],
) -> None:
    moments = sorted(moments, key=lambda moment: moment[0])
    seen = Seen()
    play(moments, seen)
    for kind, what in (("near-singular", "near"), ("outside-working-travel", "working")):
        lows: list[float] = []
        inside = False
        for _, said, value, _ in moments:
            if said != what:
                continue
            value = abs(value) if what == "near" else value
            threshold = THRESHOLDS[kind]  # type: ignore[index]
            if not inside and threshold.begun(value):
                inside = True
                lows.append(value)
            elif inside and value >= threshold.ends:
                inside = False
            elif inside:
                lows[-1] = min(lows[-1], value)
        ended = [one.peak for one in seen.told if one.kind == kind and one.ended_s is not None]
        still = [one.peak for one in seen.detector.open if one.kind == kind]
        assert ended + still == lows
