"""What is seen of an arm at a moment: now the newest good posture, in the past one between samples.

Left out: poses (service/operations/live.py).
"""

from dataclasses import dataclass

from kinematics.sampled_motion import joint_rates, posture_between
from service.errors import NoLivePose
from service.live.clocks import Clock, wall_at
from service.live.history import KEPT_S, WIDEST_S, Kept
from service.live.live_arm import LiveArm
from service.live.samples import Quality, Sample


@dataclass(frozen=True, slots=True)
class Seen:
    """One posture of an arm and how far it can be relied on.

    Attributes
    ----------
    joints : SI; rates : their speeds, None where samples are too few or old.
    age_s : how long ago it was so.
    sample : the newest good one; None for a moment in the past.
    happened_ms : when it was so, Unix milliseconds by our clock.
    between_ms : the times of the two samples it was interpolated between, by our clock.
    period_s, offset_ms, counts : of the input.
    """

    joints: tuple[float, ...]
    rates: tuple[float, ...] | None
    quality: Quality
    reason: str
    say: str
    age_s: float
    simulated: bool
    happened_ms: float
    change: int
    sample: Sample | None = None
    between_ms: tuple[float, float] | None = None
    period_s: float | None = None
    offset_ms: float | None = None
    counts: dict[str, int] | None = None


def seen_now(live: LiveArm, clock: Clock) -> Seen:
    """Return the newest good posture.

    Raises
    ------
    NoLivePose : none was good yet.
    """
    standing, sample = live.standing, live.standing.sample
    if sample is None:
        raise NoLivePose(
            f"no joint values that can be relied on have come of {live.name!r} yet"
            + (f": {standing.say}" if standing.say else ""),
            where=("arm",),
            location="path",
            value=live.name,
            way_out="have its joint values sent to /v1/arms/{arm}/joints",
        )
    now_s = clock.steady_s()
    return Seen(
        joints=sample.joints,
        rates=live.rates(),
        quality=standing.quality,
        reason=standing.reason,
        say=standing.say,
        age_s=live.age_s(now_s),
        simulated=sample.simulated,
        happened_ms=wall_at(clock, sample.happened_s),
        change=standing.change,
        sample=sample,
        period_s=live.period.seconds,
        offset_ms=live.offset_ms(),
        counts=dict(live.counts),
    )


def seen_at(live: LiveArm, at_ms: float, clock: Clock) -> Seen:
    """Return the posture at a moment of the last ten minutes, by our wall clock.

    Between two samples that are close enough it is interpolated.

    Raises
    ------
    NoLivePose : there are no samples around it, or they are too far from each other.
    """
    now_s = clock.steady_s()
    age_s = (clock.wall_ms() - at_ms) / 1000.0
    found = live.history.around(now_s - age_s)
    if found is None:
        raise _no_samples(live, at_ms, age_s)
    before, after = found
    gap_s = after.happened_s - before.happened_s
    bridged_s = max(live.period.stale_after_s, WIDEST_S)
    if gap_s > bridged_s:
        raise _refusal(
            live,
            at_ms,
            f"the samples around that time are {gap_s:.3g} s apart",
            f"at most {bridged_s:.3g} s, three periods of the input, are bridged",
        )
    joints, rates = _between(before, after, now_s - age_s)
    return Seen(
        joints=joints,
        rates=rates,
        quality="good",
        reason="",
        say="",
        age_s=age_s,
        simulated=before.simulated or after.simulated,
        happened_ms=at_ms,
        change=live.standing.change,
        between_ms=None
        if before is after
        else (wall_at(clock, before.happened_s), wall_at(clock, after.happened_s)),
    )


def _between(
    before: Kept, after: Kept, at_s: float
) -> tuple[tuple[float, ...], tuple[float, ...] | None]:
    gap_s = after.happened_s - before.happened_s
    if gap_s <= 0.0:
        return after.joints, None
    share = (at_s - before.happened_s) / gap_s
    joints = posture_between(before.joints, after.joints, share)
    return joints, joint_rates(before.joints, after.joints, gap_s)


def _no_samples(live: LiveArm, at_ms: float, age_s: float) -> NoLivePose:
    if age_s < 0.0:
        return _refusal(live, at_ms, "that time is still to come", "ask for one that is past")
    if age_s > KEPT_S:
        say = f"that is {age_s:.6g} s ago"
        return _refusal(live, at_ms, say, f"the last {KEPT_S:.0f} s are kept")
    say = "there is no sample on one side of that time"
    return _refusal(live, at_ms, say, "/live/history lists the samples")


def _refusal(live: LiveArm, at_ms: float, say: str, way_out: str) -> NoLivePose:
    return NoLivePose(
        f"{live.name!r}: {say}", where=("at",), location="query", value=at_ms, way_out=way_out
    )
