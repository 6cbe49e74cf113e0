"""An arm, a clock that stands still unless it is moved, and timers that go off when it is."""

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Any

from service.live.live_arms import LiveArms
from service.live.samples import Sample, Taken
from service.operations.arms import StoredArm
from service.storage.ports import Revision
from service.wire.arms import ReadArm, read_arm

ROW = {"joint": "revolute", "a": 400, "alpha": 0, "d": 0, "theta": 0}
ARM: dict[str, Any] = {
    "name": "two",
    "convention": "standard",
    "units": "mm-deg",
    "rows": [{**ROW, "travel": [-170, 170], "top_speed": 180}, {**ROW, "travel": [-150, 150]}],
}


def stored(document: dict[str, Any] | None = None, revision: int = 1) -> StoredArm[ReadArm]:
    """Return an arm as the store gives it."""
    read = read_arm(document or ARM)
    record = Revision.__new__(Revision)
    object.__setattr__(record, "revision", revision)
    return StoredArm(record, read)


@dataclass
class HandClock:
    """A clock that is moved by hand; ``step_wall`` sets the wall's without time going by."""

    steady: float = 1000.0
    wall: float = 1_796_000_000_000.0
    timers: list["HandTimer"] = field(default_factory=list)

    def steady_s(self) -> float:
        """See ``Clock``."""
        return self.steady

    def wall_ms(self) -> float:
        """See ``Clock``."""
        return self.wall

    def step_wall(self, seconds: float) -> None:
        """Set the wall clock."""
        self.wall += seconds * 1000.0

    def later(self, seconds: float, call: Callable[[], None]) -> "HandTimer":
        """See ``Later``."""
        timer = HandTimer(self.steady + seconds, call)
        self.timers.append(timer)
        return timer

    def go_on(self, seconds: float) -> None:
        """Let time go by, and what is due happen at its time."""
        end = self.steady + seconds
        while True:
            due = [one for one in self.timers if not one.cancelled and one.due <= end]
            if not due:
                break
            first = min(due, key=lambda one: one.due)
            self.timers.remove(first)
            self._to(max(first.due, self.steady))
            first.call()
        self._to(end)

    def _to(self, steady: float) -> None:
        self.wall += (steady - self.steady) * 1000.0
        self.steady = steady


@dataclass(eq=False)
class HandTimer:
    """What ``HandClock.later`` returns."""

    due: float
    call: Callable[[], None]
    cancelled: bool = False

    def cancel(self) -> None:
        """See ``Timer``."""
        self.cancelled = True

    def when(self) -> float:
        """See ``Timer``."""
        return self.due


class Bench:
    """Live arms, their clock, and one arm to be fed."""

    def __init__(self, document: dict[str, Any] | None = None) -> None:
        self.clock = HandClock()
        self.arms = LiveArms(self.clock, self.clock.later)
        self.stored = stored(document)

    def sample(self, *joints: float, **more: Any) -> Sample:
        """Return a sample as it would come now; joint values in degrees."""
        radians = tuple(value * 3.141592653589793 / 180.0 for value in joints)
        given = {"source": "line", **more}
        return Sample(radians, self.clock.steady, self.clock.wall, **given)

    def feed(self, *joints: float, **more: Any) -> Taken:
        """Feed one sample."""
        (taken,) = self.arms.feed(self.stored, [self.sample(*joints, **more)])
        return taken

    @property
    def live(self) -> Any:
        """The live arm."""
        found = self.arms.get("two")
        assert found is not None
        return found
