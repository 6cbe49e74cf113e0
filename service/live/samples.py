"""What comes in and what stands: samples of joint values, and the newest good one with its quality.

Left out: who decides which is which (live_arm.py).
"""

from dataclasses import dataclass
from typing import Literal

from service.operations.arms import StoredArm
from service.wire.arms import ReadArm

Quality = Literal["good", "uncertain", "bad"]

Kind = Literal["good", "uncertain", "stale", "revision", "gone"]

# Why quality is not good. The first is told by a timer, the others by a sample.
STALE = "stale"
OUTSIDE_TRAVEL = "outside-travel"
JUMP = "jump"
NOT_FINITE = "not-finite"
IN_FUTURE = "time-in-future"
TOO_OLD = "time-too-old"
JOINTS_CHANGED = "joints-changed"
REASONS = (STALE, OUTSIDE_TRAVEL, JUMP, NOT_FINITE, IN_FUTURE, TOO_OLD, JOINTS_CHANGED)

# Why a sample is left out without any change of quality.
REPEATED = "repeated"
OUT_OF_ORDER = "out-of-order"
SUPERSEDED = "superseded"
"""Simulated, after a real one came; or not the newest of those that came together."""

DROPS = (REPEATED, OUT_OF_ORDER, SUPERSEDED)


@dataclass(frozen=True, slots=True)
class Sample:
    """Joint values at one moment.

    Attributes
    ----------
    joints : SI, one for each driven row.
    received_s, received_ms : when it came, by our steady clock and by our wall clock.
    sampled_ms : when it was measured, Unix milliseconds by the clock of its source; None: not said.
    tag, sequence : as the source says them; ``sequence`` rises by any steps.
    source : who sent it.
    simulated : whether no arm stood there.
    period_s : how often the source says it will send; None: found from what comes.
    delay_s : how much longer it was under way than the fastest of late (source_clock.py).
    """

    joints: tuple[float, ...]
    received_s: float
    received_ms: float
    sampled_ms: float | None = None
    tag: int = 0
    sequence: int | None = None
    source: str = ""
    simulated: bool = False
    period_s: float | None = None
    delay_s: float = 0.0

    @property
    def happened_s(self) -> float:
        """When it was so, by our steady clock, as well as can be told."""
        return self.received_s - self.delay_s


@dataclass(frozen=True, slots=True)
class Standing:
    """How an arm stands: its newest good sample and what is to be thought of it.

    Attributes
    ----------
    arm : its name.
    stored : the arm as it is stored now.
    sample : the last good one; None where none was good yet.
    quality, reason, say : whether it can be relied on, and why not: one of REASONS and a sentence.
    change : counts what changed, of all arms together; it only rises.
    at_s, at_ms : when this began to be so.
    """

    arm: str
    stored: StoredArm[ReadArm]
    sample: Sample | None
    quality: Quality
    reason: str
    say: str
    change: int
    at_s: float
    at_ms: float


@dataclass(frozen=True, slots=True)
class Notice:
    """What observers are told: each change, and when an arm is stored no more (``gone``).

    ``sources`` are all that sent values within the last seconds: more than one take turns.
    """

    kind: Kind
    standing: Standing
    sources: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Taken:
    """What became of a sample: it stands, or it is doubted, or it was dropped."""

    standing: Standing
    dropped: str = ""
    doubted: str = ""
    say: str = ""

    @property
    def accepted(self) -> bool:
        """Whether it is the newest good one now."""
        return not (self.dropped or self.doubted)
