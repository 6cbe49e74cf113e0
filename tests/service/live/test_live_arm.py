"""What stands, what is doubted, what is dropped: by the clock of the test, without waiting."""

import math

import pytest

from service.live.samples import DROPS, REASONS
from tests.service.live.made import ARM, Bench, stored

HOUR_S = 3600.0


@pytest.fixture
def bench() -> Bench:
    return Bench()


def test_the_newest_good_sample_stands(bench: Bench) -> None:
    assert bench.feed(10, 20, sequence=1, tag=5).accepted
    bench.clock.go_on(0.1)
    taken = bench.feed(11, 20, sequence=2, tag=6)
    standing = bench.live.standing
    assert taken.standing is standing
    assert (standing.quality, standing.reason, standing.say) == ("good", "", "")
    assert standing.sample.joints == pytest.approx((math.radians(11), math.radians(20)))
    assert standing.sample.tag == 6
    assert bench.live.rates() == pytest.approx((math.radians(10), 0.0))


@pytest.mark.parametrize(
    ("joints", "more", "reason", "said"),
    [
        ((171, 0), {}, "outside-travel", "joint 1 is at 171 deg, beyond its travel limit 170 deg"),
        ((0, -151), {}, "outside-travel", "joint 2 is at -151 deg"),
        ((60, 0), {}, "jump", "joint 1 moved faster than its top speed"),
        ((math.nan, 0), {}, "not-finite", "not all finite"),
        ((0, -math.inf), {}, "not-finite", "not all finite"),
        ((0, 0), {"ahead_s": HOUR_S}, "time-in-future", "from the future"),
        ((0, 0), {"ahead_s": 3.0}, "time-in-future", "from the future"),
        ((0, 0), {"ahead_s": -HOUR_S}, "time-too-old", "are old"),
    ],
)
def test_what_cannot_be_is_uncertain_and_displaces_nothing(
    bench: Bench, joints: tuple[float, ...], more: dict[str, float], reason: str, said: str
) -> None:
    bench.feed(0, 0, sampled_ms=bench.clock.wall)
    good = bench.live.standing.sample
    bench.clock.go_on(0.1)
    at = bench.clock.wall + more.get("ahead_s", 0.0) * 1000.0
    taken = bench.feed(*joints, sampled_ms=at)
    standing = bench.live.standing
    assert (standing.quality, standing.reason) == ("uncertain", reason)
    assert said in standing.say
    assert taken.doubted == reason
    assert not taken.accepted
    assert standing.sample is good
    assert bench.live.counts == {"good": 1, reason: 1}
    bench.clock.go_on(0.1)
    assert bench.feed(1, 0, sampled_ms=bench.clock.wall).accepted
    assert bench.live.standing.quality == "good"


def test_at_its_limits_an_arm_is_within_travel(bench: Bench) -> None:
    assert bench.feed(170, -150).accepted
    bench.clock.go_on(10.0)
    assert bench.feed(-170, 150).accepted


def test_top_speed_over_the_time_there_was(bench: Bench) -> None:
    """180 deg/s, and 50 ms that two samples may be closer than they say."""
    bench.feed(0, 0)
    bench.clock.go_on(0.25)
    assert bench.feed(55, 0).doubted == "jump"
    assert bench.feed(53, 0).accepted
    # What stays elsewhere is believed once the arm could have come there.
    bench.clock.go_on(0.25)
    assert bench.feed(-53, 0).doubted == "jump"
    bench.clock.go_on(0.35)
    assert bench.feed(-53, 0).accepted


def test_a_joint_without_a_top_speed_may_do_anything(bench: Bench) -> None:
    bench.feed(0, -100)
    assert bench.feed(0, 100).accepted


def test_samples_together_have_the_time_they_say_between_them(bench: Bench) -> None:
    at = bench.clock.wall
    samples = [bench.sample(20 * n, 0, sampled_ms=at - 400 + 100 * n) for n in range(5)]
    taken = bench.arms.feed(bench.stored, samples)
    assert [one.doubted for one in taken] == [""] * 5
    assert bench.live.standing.sample.joints[0] == pytest.approx(math.radians(80))
    assert bench.live.rates() == pytest.approx((math.radians(200), 0.0))
    table = bench.live.history.table(0.0)
    assert table[:, 0] == pytest.approx([bench.clock.steady - 0.4 + n / 10 for n in range(5)])


def test_repeated_and_older_ones_are_dropped_and_counted(bench: Bench) -> None:
    assert [bench.feed(0, 0, sequence=one).dropped for one in (7, 7, 6, 8)] == [
        "",
        "repeated",
        "out-of-order",
        "",
    ]
    assert bench.live.counts == {"good": 2, "repeated": 1, "out-of-order": 1}
    assert bench.live.standing.quality == "good"


def test_by_time_where_there_is_no_sequence(bench: Bench) -> None:
    at = bench.clock.wall
    told = [bench.feed(0, 0, sampled_ms=at + one).dropped for one in (0.0, 0.0, -5.0, 1.0)]
    assert told == ["", "repeated", "out-of-order", ""]


def test_a_count_begun_anew_is_believed(bench: Bench) -> None:
    bench.feed(0, 0, sequence=1000)
    told = [bench.feed(0, 0, sequence=one).dropped for one in (1, 2, 3, 4)]
    assert told == ["out-of-order", "out-of-order", "", ""]
    # At once where its clock went on.
    at = bench.clock.wall
    bench.feed(0, 0, sequence=500, sampled_ms=at)
    assert bench.feed(0, 0, sequence=1, sampled_ms=at + 10).accepted
    # And after a pause.
    bench.clock.go_on(100.0)
    assert bench.live.standing.reason == "stale"
    assert bench.feed(0, 0, sequence=0).accepted


def test_a_doubted_sample_is_not_taken_a_second_time(bench: Bench) -> None:
    assert bench.feed(171, 0, sequence=1).doubted
    assert bench.feed(171, 0, sequence=1).dropped == "repeated"


def test_silence_is_told_after_three_periods(bench: Bench) -> None:
    for number in range(5):
        bench.feed(0, 0, sequence=number)
        bench.clock.go_on(0.1)
    seen: list[str] = []
    bench.arms.observers.append(lambda notice: seen.append(notice.kind))
    bench.clock.go_on(0.19)
    assert bench.live.standing.quality == "good"
    bench.clock.go_on(0.02)
    assert (bench.live.standing.quality, bench.live.standing.reason) == ("bad", "stale")
    assert seen == ["stale"]
    assert bench.live.rates() is None
    # Told once, and the last good posture stays.
    bench.clock.go_on(10.0)
    assert seen == ["stale"]
    assert bench.live.standing.sample.sequence == 4
    assert bench.live.age_s(bench.clock.steady) == pytest.approx(10.31)
    assert bench.live.standing.say == "joint values have stopped: stale after 0.3 s without any"
    bench.feed(0, 0, sequence=5)
    assert bench.live.standing.quality == "good"


@pytest.mark.parametrize("has_times", [True, False])
def test_an_input_that_repeats_its_last_value_has_stopped(bench: Bench, has_times: bool) -> None:
    """A gateway goes on asking a controller that shows the same for ever."""
    for number in range(5):
        bench.clock.go_on(0.1)
        last = {"sequence": number, "sampled_ms": bench.clock.wall if has_times else None}
        bench.feed(number, 0, **last)
    told: list[str] = []
    bench.arms.observers.append(lambda notice: told.append(notice.standing.reason))
    for _ in range(100):
        bench.clock.go_on(0.1)
        taken = bench.feed(4, 0, **last)
        # After ten seconds its time alone is doubted.
        assert (taken.dropped, taken.doubted) in (("repeated", ""), ("", "time-too-old"))
    assert told[0] == "stale"
    assert "" not in told
    assert bench.live.standing.quality != "good"
    # A new value makes it good at once.
    assert bench.feed(5, 0, sequence=5).accepted


def test_what_comes_twice_each_time_is_no_faster_input(bench: Bench) -> None:
    """Two network cards, or a sender that asks again too soon."""
    told: list[str] = []
    bench.arms.observers.append(lambda notice: told.append(notice.kind))
    for number in range(20):
        for _ in range(2):
            bench.feed(0, 0, sequence=number)
            bench.clock.go_on(0.001)
        bench.clock.go_on(0.098)
    assert set(told) == {"good"}
    assert bench.live.period.seconds == pytest.approx(0.1)


def test_a_source_that_becomes_slower_is_stale_a_few_times_and_then_not(bench: Bench) -> None:
    for _ in range(20):
        bench.feed(0, 0)
        bench.clock.go_on(0.01)
    stale: list[float] = []
    bench.arms.observers.append(
        lambda notice: stale.append(bench.clock.steady) if notice.kind == "stale" else None
    )
    for _ in range(30):
        bench.feed(0, 0)
        bench.clock.go_on(1.0)
    assert 1 <= len(stale) <= 5
    assert bench.live.period.seconds == pytest.approx(1.0)


def test_a_service_that_was_held_up_reads_what_is_there_first(bench: Bench) -> None:
    """Timers are late then, and what came is still to be read."""
    for number in range(9):
        bench.feed(number / 100, 0)
        bench.clock.go_on(0.01)
    told: list[str] = []
    bench.arms.observers.append(lambda notice: told.append(notice.kind))
    bench.clock.steady += 0.2
    bench.clock.go_on(0.001)
    bench.feed(0.1, 0)
    bench.clock.go_on(0.045)
    assert told == ["good"]
    # Once: who is held up again and again still tells of silence.
    for _ in range(2):
        bench.clock.steady += 0.2
        bench.clock.go_on(0.001)
    assert told == ["good", "stale"]


def test_who_says_a_hundred_a_second_is_silent_after_three(bench: Bench) -> None:
    for number in range(9):
        bench.feed(number / 100, 0, period_s=0.01)
        bench.clock.go_on(0.01)
    bench.clock.go_on(0.019)
    assert bench.live.standing.quality == "good"
    bench.clock.go_on(0.002)
    assert bench.live.standing.reason == "stale"


def test_a_declared_period_counts(bench: Bench) -> None:
    bench.feed(0, 0, period_s=10.0)
    bench.clock.go_on(29.0)
    assert bench.live.standing.quality == "good"
    bench.clock.go_on(2.0)
    assert bench.live.standing.reason == "stale"


def test_doubted_samples_keep_an_input_from_being_stale(bench: Bench) -> None:
    bench.feed(0, 0)
    for _ in range(40):
        bench.clock.go_on(0.1)
        bench.feed(171, 0)
    assert bench.live.standing.quality == "uncertain"
    assert bench.live.age_s(bench.clock.steady) == pytest.approx(4.0)
    bench.clock.go_on(1.0)
    assert bench.live.standing.reason == "stale"


@pytest.mark.parametrize("hours", [1.0, -1.0, 24.0 * 365])
def test_setting_our_wall_clock_changes_no_order_and_no_age(bench: Bench, hours: float) -> None:
    """The source goes on by its own clock, which nobody sets."""
    theirs = bench.clock.wall - 5000.0
    for number in range(60):
        theirs += 100.0
        assert bench.feed(number / 10, 0, sampled_ms=theirs).accepted
        if number == 30:
            bench.clock.step_wall(hours * HOUR_S)
        bench.clock.go_on(0.1)
    table = bench.live.history.table(0.0)
    assert len(table) == 60
    assert (table[1:, 0] > table[:-1, 0]).all()
    assert bench.live.age_s(bench.clock.steady) == pytest.approx(0.1, abs=1e-5)
    # The offset told is against the clock as it now is.
    assert bench.live.offset_ms() == pytest.approx(-5000 + 100 - hours * 3.6e6, abs=1.0)


@pytest.mark.parametrize("hours", [1.0, -1.0])
def test_a_source_that_sets_its_clock_is_believed_after_a_second(
    bench: Bench, hours: float
) -> None:
    shift = 0.0
    told: list[str] = []
    for number in range(60):
        if number == 30:
            shift = hours * 3.6e6
        taken = bench.feed(number / 10, 0, sequence=number, sampled_ms=bench.clock.wall + shift)
        told.append(taken.doubted)
        assert not taken.dropped
        bench.clock.go_on(0.1)
    reason = "time-in-future" if hours > 0 else "time-too-old"
    assert told == [""] * 30 + [reason] * 10 + [""] * 20
    assert bench.live.offset_ms() == pytest.approx(hours * 3.6e6, abs=1.0)
    table = bench.live.history.table(0.0)
    assert (table[1:, 0] >= table[:-1, 0]).all()
    assert bench.live.age_s(bench.clock.steady) == pytest.approx(0.1, abs=1e-5)


def test_what_is_sent_after_the_fact_is_never_taken_for_another_clock(bench: Bench) -> None:
    """An hour of samples kept while the network was away, in one burst."""
    for number in range(3600):
        at = bench.clock.wall - HOUR_S * 1000.0 + number * 1000.0
        taken = bench.feed(0, 0, sequence=number, sampled_ms=at)
        bench.clock.go_on(0.001)
        assert taken.doubted == ("time-too-old" if bench.clock.wall - at > 10_100 else "")
    assert bench.live.counts == {"time-too-old": 3590, "good": 10}


def test_a_clock_that_never_was_right_is_learnt(bench: Bench) -> None:
    """A controller that thinks it is 1970, at 10 Hz."""
    told = []
    for number in range(20):
        told.append(bench.feed(0, 0, sampled_ms=1000.0 + number * 100.0).doubted)
        bench.clock.go_on(0.1)
    assert told == ["time-too-old"] * 10 + [""] * 10
    assert bench.live.offset_ms() == pytest.approx(2000.0 - bench.clock.wall + 1000.0, abs=150)


def test_late_samples_are_as_old_as_they_are(bench: Bench) -> None:
    bench.feed(0, 0, sampled_ms=bench.clock.wall - 2.0)
    bench.clock.go_on(1.0)
    bench.feed(0, 0, sampled_ms=bench.clock.wall - 702.0)
    assert bench.live.age_s(bench.clock.steady) == pytest.approx(0.7)


def test_of_two_sources_the_last_wins_and_both_are_told(bench: Bench) -> None:
    notices = []
    bench.arms.observers.append(notices.append)
    bench.feed(0, 0, sequence=100, source="a")
    bench.clock.go_on(0.1)
    bench.feed(1, 0, sequence=3, source="b")
    assert bench.live.standing.sample.source == "b"
    assert notices[0].sources == ("a",)
    assert notices[1].sources == ("a", "b")
    bench.clock.go_on(0.1)
    assert bench.feed(1, 0, sequence=100, source="a").dropped == "repeated"
    assert bench.feed(1, 0, sequence=101, source="a").accepted
    bench.clock.go_on(6.0)
    bench.feed(1, 0, sequence=102, source="a")
    assert notices[-1].sources == ("a",)


def test_more_sources_than_are_told_apart(bench: Bench) -> None:
    for number in range(30):
        assert bench.feed(0, 0, sequence=0, source=f"s{number}").accepted
    assert len(bench.live.sources(bench.clock.steady)) == 8


def test_a_real_input_ends_a_simulated_one_for_good(bench: Bench) -> None:
    bench.feed(0, 0, simulated=True, source="simulation", sequence=50)
    assert bench.live.standing.sample.simulated
    assert bench.feed(90, 0, sequence=1).accepted  # no jump: nothing moved there
    assert not bench.live.standing.sample.simulated
    assert bench.live.counts == {"good": 1}  # of the real ones alone
    bench.clock.go_on(60.0)
    assert bench.feed(0, 0, simulated=True, source="simulation").dropped == "superseded"
    assert bench.live.standing.reason == "stale"


def test_a_doubted_real_input_ends_a_simulated_one_too(bench: Bench) -> None:
    bench.feed(0, 0, simulated=True)
    bench.feed(171, 0)
    assert bench.live.standing.sample is None
    assert bench.live.standing.quality == "uncertain"


def test_a_new_revision_is_told_and_judges_what_comes(bench: Bench) -> None:
    kinds = []
    bench.arms.observers.append(lambda notice: kinds.append(notice.kind))
    bench.feed(100, 0)
    rows = [{**ARM["rows"][0], "travel": [-90, 90]}, ARM["rows"][1]]
    bench.stored = stored({**ARM, "rows": rows}, revision=2)
    bench.clock.go_on(0.1)
    assert bench.feed(100, 0).doubted == "outside-travel"
    assert kinds == ["good", "revision", "uncertain"]
    assert bench.live.standing.stored.record.revision == 2


def test_a_revision_that_was_looked_up_too_early_changes_nothing(bench: Bench) -> None:
    before = bench.stored
    bench.feed(100, 0)
    bench.stored = stored({**ARM, "rows": ARM["rows"][:1]}, revision=2)
    bench.feed(100)
    change = bench.arms.change
    assert bench.arms.newer(before) is bench.arms.newer(bench.stored) is bench.stored
    bench.arms.of(before)
    assert (bench.arms.change, bench.live.standing.stored) == (change, bench.stored)
    unknown = stored({**ARM, "name": "other"})
    assert bench.arms.newer(unknown) is unknown


def test_nothing_makes_no_live_arm_and_one_less_is_a_change(bench: Bench) -> None:
    assert bench.arms.feed(bench.stored, []) == []
    assert bench.arms.names() == []
    bench.feed(0, 0)
    change = bench.arms.change
    bench.arms.forget("two")
    assert bench.arms.change > change


def test_a_clock_that_is_set_shows_no_speed(bench: Bench) -> None:
    for number in range(30):
        bench.clock.go_on(0.1)
        ahead = 3_600_000.0 if number >= 10 else 0.0
        bench.feed(number, 0, sampled_ms=bench.clock.wall + ahead)
        rates = bench.live.rates()
        assert rates is None or rates[0] == pytest.approx(0.1745, rel=0.01)
    assert bench.live.standing.quality == "good"
    assert rates is not None


def test_another_count_of_joints_forgets_what_came(bench: Bench) -> None:
    bench.feed(0, 0)
    bench.stored = stored({**ARM, "rows": ARM["rows"][:1]}, revision=2)
    bench.arms.of(bench.stored)
    standing = bench.live.standing
    assert (standing.quality, standing.reason, standing.sample) == ("bad", "joints-changed", None)
    assert len(bench.live.history) == 0
    assert bench.feed(5).accepted


def test_an_arm_that_is_gone_is_forgotten(bench: Bench) -> None:
    gone = []
    bench.feed(0, 0)
    bench.arms.follow("two", lambda name, standing: gone.append((name, standing)))
    bench.arms.forget("two")
    assert gone == [("two", None)]
    assert bench.arms.names() == []
    bench.clock.go_on(100.0)  # no timer is left
    assert gone == [("two", None)]
    bench.arms.forget("two")


def test_followers_are_told_the_newest_of_what_came_together(bench: Bench) -> None:
    told = []
    leave = bench.arms.follow(None, lambda name, standing: told.append(standing.sample.sequence))
    samples = [bench.sample(0, 0, sequence=number) for number in range(10)]
    assert all(one.accepted for one in bench.arms.feed(bench.stored, samples))
    assert told == [9]
    leave()
    bench.feed(0, 0, sequence=10)
    assert told == [9]


def test_an_observer_that_fails_keeps_nothing_from_standing(
    bench: Bench, caplog: pytest.LogCaptureFixture
) -> None:
    seen = []
    bench.arms.observers += [lambda notice: 1 / 0, seen.append]
    assert bench.feed(0, 0).accepted
    assert len(seen) == 1
    assert "division by zero" in caplog.text


def test_changes_only_rise(bench: Bench) -> None:
    changes = [bench.feed(0, 0, sequence=number).standing.change for number in range(5)]
    assert changes == sorted(set(changes))


def test_who_looks(bench: Bench) -> None:
    assert not bench.arms.is_looked_at("two")
    bench.feed(0, 0)
    bench.arms.look_at("two")
    assert bench.arms.is_looked_at("two")
    bench.clock.go_on(11.0)
    assert not bench.arms.is_looked_at("two")
    leave = bench.arms.follow("two", lambda name, standing: None)
    assert bench.arms.is_looked_at("two")
    leave()
    assert not bench.arms.is_looked_at("two")


def test_reasons_and_drops_have_places_in_a_line() -> None:
    assert all(len(one) <= 14 for one in (*REASONS, *DROPS))
    assert not set(REASONS) & set(DROPS)
