"""Joint values that a record is made of, and what is thought of them: live ones, or given ones.

Left out: the pose they make.
"""

from dataclasses import dataclass
from datetime import datetime
from typing import Literal

from service.errors import NoLivePose
from service.live.live_arms import LiveArms
from service.live.samples import STALE
from service.live.seen import seen_now
from service.problems import SIMULATED_CODE, STALE_CODE
from service.wire.records import Quality
from service.wire.times import utc_at


@dataclass(frozen=True, slots=True)
class Measured:
    """Joint values (joints,) in SI as they were measured, and what is thought of them.

    ``codes`` are those of answers that apply beside those of the pose. Times are by our clock.
    """

    joints: tuple[float, ...]
    source: Literal["live", "given"]
    quality: Quality
    reason: str | None
    sampled_at: datetime
    received_at: datetime
    codes: frozenset[int] = frozenset()


def measured_live(arms: LiveArms, name: str) -> Measured:
    """Return the newest values of an arm that could be relied on; called on the loop they live on.

    Raises
    ------
    NoLivePose : none have come.
    """
    live = arms.get(name)
    try:
        seen = None if live is None else seen_now(live, arms.clock)
    except NoLivePose:
        seen = None
    if seen is None or seen.sample is None:
        raise NoLivePose(
            f"no joint values that can be relied on have come of {name!r} yet",
            where=("joints",),
            way_out=f"give joints, or have them sent to /v1/arms/{name}/joints",
        )
    applying = {STALE_CODE: seen.reason == STALE, SIMULATED_CODE: seen.simulated}
    return Measured(
        joints=seen.joints,
        source="live",
        quality=seen.quality,
        reason=seen.reason or None,
        sampled_at=utc_at(seen.happened_ms),
        received_at=utc_at(seen.sample.received_ms),
        codes=frozenset(code for code, applies in applying.items() if applies),
    )
