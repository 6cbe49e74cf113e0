"""Two clocks: one that only goes forward, for order and ages, and the wall's, for stamps.

Left out: the clocks of sources (source_clock.py).
"""

import time
from typing import Protocol


class Clock(Protocol):
    """What the live part asks the time."""

    def steady_s(self) -> float:
        """Return seconds since some moment; nobody can set this clock."""

    def wall_ms(self) -> float:
        """Return Unix time in milliseconds; may be set forward and back at any moment."""


class SystemClock:
    """The clocks of this machine."""

    def steady_s(self) -> float:
        """See ``Clock``."""
        return time.monotonic()

    def wall_ms(self) -> float:
        """See ``Clock``."""
        return time.time_ns() / 1e6


def wall_at(clock: Clock, steady_s: float) -> float:
    """Return the Unix time in milliseconds of a moment of the steady clock, as the wall has it now.

    After the wall clock has been set, moments before are told in the new time too, so that their
    order stays what it was.
    """
    return clock.wall_ms() + (steady_s - clock.steady_s()) * 1000.0
