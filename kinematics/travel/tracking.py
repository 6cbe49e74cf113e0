"""Along a line with the tool, joint values in hand: predicted, corrected, and never onto a branch
that is not theirs.

Idea: where the Jacobian is sound, one velocity of the tool has one answer in the joints, so from a
posture on a line the next one is known but for a small correction. A step counts when Newton's
corrections shrink fast and stay small beside the step, when the joint rates at both ends agree, and
when the determinant keeps its sign; else it is halved. Branches meet only where the determinant
vanishes, so a way that needs steps below ``least`` has come to such a place, and ends there.

Source: predictor and corrector, Allgower and Georg, Numerical Continuation Methods, 1990; the sign
of the determinant tells the ways of an arm apart: Borrel and Liegeois 1986.

Not covered: what ends a way in words (breaks.py); limits of travel (extremes.py); arms that pass
from one branch to another at no singular posture, for whom a branch is what is connected.
"""

import math
from typing import NamedTuple

import numpy as np

from kinematics.inverse.descent_arrays import Lines
from kinematics.inverse.kernel_numbers import NONE
from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray
from kinematics.travel.on_line import SETTLED, Bench, Line, corrected

ARRIVED, NOT_THERE, STALLED, CROSSED, OUTSIDE, ENDLESS = range(6)
"""How following ends: at the end of the line; the first posture is not on it; steps became too
short; the determinant changes its sign within the last step; a joint is beyond its travel; there
is no room for more steps."""

_NEAR, _EASY = 0.1, 0.02
"""First correction, over the step, above which a step is too long, below which the next doubles."""
_BENDS = 0.5
"""Change of the joint rates along a step, over the larger of them: at a fold they grow without end,
and a step then takes at most three quarters of what is left."""
_STRAIGHT = 1e-5
"""The same in radians or shares of the length below which it does not matter."""
_LONGEST = 0.05
"""Radians, or shares of the length, that a joint moves in a step: between two such postures its
path is a cubic to 1e-7."""

_NOWHERE = 1e300
"""Share of a line at which no posture of another branch was met."""
_BESIDE = 50.0
"""Times ``located`` within which such a posture says that the branch was crossed there: closer to a
singular posture than some 1e-6 rad corrections no longer settle."""


class Track(NamedTuple):
    """Postures along a line, one after the other; room for so many.

    Attributes
    ----------
    shares : (room,), of the line, rising from 0. values, rates : (room, joints), and per share.
    gaps : (room, 2), how far off the line, length and angle.
    """

    shares: FloatArray
    values: FloatArray
    rates: FloatArray
    gaps: FloatArray


def room_for(steps: int, joints: int) -> Track:
    """Return room for so many postures."""
    return Track(
        np.empty(steps), np.empty((steps, joints)), np.empty((steps, joints)), np.empty((steps, 2))
    )


@compiled
def follow(
    lines: Lines,
    line: Line,
    bench: Bench,
    least: float,
    located: float,
    first_step: float,
    q: FloatArray,
    track: Track,
    outcome: FloatArray,
) -> int:
    """Follow a line from a posture as far as its branch goes.

    Parameters
    ----------
    least : share of the line below which no step is taken. located : share within which places
        are one: an end so near is reached. first_step : share tried at first.
    q : (joints,), the posture at the start, near enough to be corrected; overwritten.
    track : written: postures that count, the first at share 0.
    outcome : (1,), written: how it ends, ARRIVED to ENDLESS.

    Returns
    -------
    count : how many postures were written.
    """
    joints, sign = q.shape[0], np.zeros(1)
    if corrected(lines, line, bench, 0.0, q, sign) < 0.0:
        outcome[0] = NOT_THERE
        return 0
    _keep(track, NONE, 0.0, q, bench)
    branch, count, step, other = sign[0], 1, first_step, _NOWHERE
    while track.shares[count - 1] < 1.0:
        if count == track.shares.shape[0]:
            outcome[0] = ENDLESS
            return count
        before = track.shares[count - 1]
        longest = _fastest(track, count - 1)
        if step * longest > _LONGEST:
            step = _LONGEST / longest
        if step < least:
            # Right beside a singular posture nothing converges; a little further it did.
            outcome[0] = CROSSED if other - before < _BESIDE * located else STALLED
            if 1.0 - before < located:
                outcome[0] = ARRIVED
            return count
        share = before + step
        if share > 1.0 - least:
            share, step = 1.0, 1.0 - before
        _predict(track, count, step, bench.trial)
        first = corrected(lines, line, bench, share, bench.trial, sign)
        fits = first >= 0.0 and first <= _NEAR * step * longest + SETTLED
        fits = fits and _goes_on(track.rates[count - 1], bench.onward, step)
        if fits and sign[0] == branch:
            for joint in range(joints):
                q[joint] = bench.trial[joint]
            _keep(track, count, share, q, bench)
            count += 1
            if _is_outside(line, q):
                outcome[0] = OUTSIDE
                return count
            step *= 2.0 if first <= _EASY * step * longest + SETTLED else 1.0
            continue
        other = share if fits else other
        step *= 0.5
    outcome[0] = ARRIVED
    return count


@compiled
def _keep(track: Track, at: int, share: float, q: FloatArray, bench: Bench) -> None:
    track.shares[at] = share
    for joint in range(q.shape[0]):
        track.values[at, joint], track.rates[at, joint] = q[joint], bench.onward[joint]
    gap = bench.gap
    track.gaps[at, 0] = math.sqrt(gap[0] * gap[0] + gap[1] * gap[1] + gap[2] * gap[2])
    track.gaps[at, 1] = math.sqrt(gap[3] * gap[3] + gap[4] * gap[4] + gap[5] * gap[5])


@compiled
def _is_outside(line: Line, q: FloatArray) -> bool:
    """Tell whether a joint is beyond its own travel."""
    for joint in range(q.shape[0]):
        if q[joint] < line.lower[joint] or q[joint] > line.upper[joint]:
            return True
    return False


@compiled
def _fastest(track: Track, at: int) -> float:
    """Return the largest rate of a joint there."""
    fastest = 0.0
    for joint in range(track.rates.shape[1]):
        fastest = max(fastest, abs(track.rates[at, joint]))
    return fastest


@compiled
def _predict(track: Track, count: int, step: float, trial: FloatArray) -> None:
    """Write where joints will be after a step if their rates go on changing as they did."""
    last = count - 1
    for joint in range(trial.shape[0]):
        rate = track.rates[last, joint]
        bend = 0.0
        if count > 1:
            bend = rate - track.rates[last - 1, joint]
            bend /= track.shares[last] - track.shares[last - 1]
        trial[joint] = track.values[last, joint] + step * (rate + 0.5 * step * bend)


@compiled
def _goes_on(rates: FloatArray, onward: FloatArray, step: float) -> bool:
    """Tell whether rates at both ends of a step agree."""
    apart, before, after = 0.0, 0.0, 0.0
    for joint in range(rates.shape[0]):
        apart += (onward[joint] - rates[joint]) ** 2
        before += rates[joint] ** 2
        after += onward[joint] ** 2
    larger = max(before, after)
    return apart <= _BENDS * _BENDS * larger or apart * step * step <= _STRAIGHT * _STRAIGHT


@compiled
def cubic(track: Track, at: int, share: float, q: FloatArray) -> None:
    """Write joint values between two postures of a track, by the cubic through both.

    Source: Hermite.
    """
    begin, width = track.shares[at], track.shares[at + 1] - track.shares[at]
    u = (share - begin) / width
    for joint in range(q.shape[0]):
        a, b = track.values[at, joint], track.values[at + 1, joint]
        da, db = width * track.rates[at, joint], width * track.rates[at + 1, joint]
        bent = 3.0 * (b - a) - 2.0 * da - db
        q[joint] = a + u * (da + u * (bent + u * (da + db - 2.0 * (b - a))))


@compiled
def postures_at(
    lines: Lines,
    line: Line,
    bench: Bench,
    track: Track,
    count: int,
    shares: FloatArray,
    found: Track,
) -> None:
    """Write postures at rising shares (m,) that a track leads past, to ``found``.

    A share beyond the track's last is told as the last.
    """
    sign, at = np.zeros(1), 0
    for place in range(shares.shape[0]):
        while at < count - 2 and track.shares[at + 1] <= shares[place]:
            at += 1
        known = at if shares[place] <= track.shares[at] else count - 1
        if count == 1 or known == at or shares[place] >= track.shares[count - 1]:
            # One of the track's own: it may be singular, and not to be corrected.
            found.shares[place] = track.shares[known]
            for k in range(2):
                found.gaps[place, k] = track.gaps[known, k]
            for joint in range(bench.trial.shape[0]):
                found.values[place, joint] = track.values[known, joint]
                found.rates[place, joint] = track.rates[known, joint]
            continue
        cubic(track, at, shares[place], bench.trial)
        corrected(lines, line, bench, shares[place], bench.trial, sign)
        _keep(found, place, shares[place], bench.trial, bench)
