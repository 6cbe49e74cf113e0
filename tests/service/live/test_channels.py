"""Each way of telling is made once, for however many listen."""

from collections.abc import Callable

from service.live.channels import Channels
from service.live.live_arm import LiveArm
from service.slots import Slot
from tests.service.live.made import Bench


class Told:
    """Makes events, and counts how often."""

    def __init__(self) -> None:
        self.made: list[int] = []

    def __call__(self, live: LiveArm) -> bytes:
        self.made.append(live.standing.change)
        return b"%d;" % live.standing.change


def gone(name: str, change: int) -> bytes:
    return b"%b gone %d;" % (name.encode(), change)


def listening(
    channels: Channels, name: str | None, choice: object, told: Told, after: int = 0
) -> tuple[Slot, Callable[[], None]]:
    slot = Slot()
    return slot, channels.attach(name, choice, told, after, slot)


def test_made_once_for_all_who_ask_alike() -> None:
    bench, told, other = Bench(), Told(), Told()
    channels = Channels(bench.arms, gone)
    bench.feed(0, 0)
    alike = [listening(channels, "two", "a", told) for _ in range(200)]
    slot, leave = listening(channels, "two", "b", other)
    assert len(channels) == 2
    for number in range(3):
        bench.clock.go_on(0.1)
        change = bench.feed(number, 0).standing.change
        assert {one.taken() for one, _ in alike} == {b"%d;" % change}
        assert slot.taken() == b"%d;" % change
    assert len(told.made) == len(other.made) == 3
    leave()
    for _, go in alike:
        go()
    assert len(channels) == 0
    assert not bench.arms.is_looked_at("two")
    bench.feed(1, 0)
    assert not slot.is_filled


def test_an_event_told_later_is_made_anew_for_its_age() -> None:
    bench, told = Bench(), Told()
    channels = Channels(bench.arms, gone)
    bench.feed(0, 0, period_s=100.0)
    first, _ = listening(channels, "two", "a", told)
    late, _ = listening(channels, "two", "a", told)
    first.taken()
    bench.clock.go_on(0.04)
    late.taken()
    assert len(told.made) == 1
    last, _ = listening(channels, "two", "a", told)
    bench.clock.go_on(0.02)
    last.taken()
    assert len(told.made) == 2


def test_who_knows_the_newest_is_told_the_next() -> None:
    bench, told = Bench(), Told()
    channels = Channels(bench.arms, gone)
    change = bench.feed(0, 0).standing.change
    slot, _ = listening(channels, "two", "a", told, change)
    assert not slot.is_filled
    bench.feed(1, 0)
    assert slot.is_filled


def test_who_knows_what_never_was_is_told_how_it_stands() -> None:
    """Numbers of a former process may be higher: its clock was set, or it was fed for long."""
    bench, told = Bench(), Told()
    channels = Channels(bench.arms, gone)
    change = bench.feed(0, 0).standing.change
    slot, _ = listening(channels, "two", "a", told, change + 1)
    assert slot.taken() == b"%d;" % change


def test_of_all_arms_the_newest_of_each() -> None:
    bench, told = Bench(), Told()
    channels = Channels(bench.arms, gone)
    slot, leave = listening(channels, None, "a", told)
    for number in range(5):
        bench.feed(number / 10, 0)
    assert slot.taken().count(b";") == 1
    bench.feed(0, 0)
    bench.arms.forget("two")
    assert slot.taken() == b"two gone %d;" % bench.arms.change
    bench.arms.forget("two")
    assert not slot.is_filled
    bench.arms.forget("two")
    bench.feed(0, 0)
    assert slot.taken() == b"%d;" % bench.arms.change
    assert not slot.ended
    leave()


def test_an_arm_that_is_gone_ends_its_streams() -> None:
    bench, told = Bench(), Told()
    channels = Channels(bench.arms, gone)
    bench.feed(0, 0)
    slot, leave = listening(channels, "two", "a", told)
    bench.arms.forget("two")
    assert slot.ended
    assert slot.taken() == b""
    leave()
    assert len(channels) == 0
