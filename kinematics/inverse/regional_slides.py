"""The regional problems that need no circle: two slides next to each other, and planes and slides.

Two slides sweep a plane, so joint c must bring the start onto it: one equation linear in cos c and
sin c, or in c. A slide moves a plane along its normal and turns nothing, so two turning joints
bring the normal where it must be, whichever place the slide has among them, and the slide makes up
the offset.

Source: worked out here from the two invariants of a turn, height along and distance from its axis;
two turns that carry one direction to another: Paden, Kinematics and control of robot manipulators,
1986, subproblem 2.
Not covered: planes moved by two slides or three: one turn cannot place a normal.
"""

import math

import numpy as np

from kinematics.inverse.kernel_numbers import NONE
from kinematics.inverse.regional_pairs import ACROSS, ALONG, E2, HA, HB, Flags, dot_at
from kinematics.inverse.regional_rows import (
    C_FREE,
    FREE,
    NONE_FREE,
    REGULAR,
    SAMPLES,
    flags_of,
    put,
)
from kinematics.inverse.tolerances import EXACT_AXES, NEARLY_FREE
from kinematics.inverse.trig_roots import linear_roots
from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray


@compiled
def _put_slides(
    pair: FloatArray,
    path: FloatArray,
    goal: FloatArray,
    c: float,
    cosine: float,
    sine: float,
    free: int,
    out: FloatArray,
    count: int,
) -> int:
    """Write the answer for c, given with its cosine and sine, or as c and 0 of a slide."""
    x = goal[0] - path[0, 0] - cosine * path[1, 0] - sine * path[2, 0]
    y = goal[1] - path[0, 1] - cosine * path[1, 1] - sine * path[2, 1]
    z = goal[2] - path[0, 2] - cosine * path[1, 2] - sine * path[2, 2]
    on_a, on_b = dot_at(pair, HA, x, y, z), dot_at(pair, HB, x, y, z)
    squared = pair[ACROSS] * pair[ACROSS]
    a = (on_a - pair[ALONG] * on_b) / squared
    b = (on_b - pair[ALONG] * on_a) / squared
    return put(out, count, a, b, c, free)


@compiled
def two_slides(
    pair: FloatArray,
    path: FloatArray,
    swing: float,
    c_slides: bool,
    goal: FloatArray,
    slack: float,
    out: FloatArray,
) -> tuple[int, int]:
    """Write all answers where a and b slide; return their count and flags, as ``regional`` does.

    Two slides along one line, and a third within their plane, find nothing and are flagged.
    """
    if pair[ACROSS] <= EXACT_AXES:
        return NONE, FREE
    constant = dot_at(pair, E2, path[0, 0] - goal[0], path[0, 1] - goal[1], path[0, 2] - goal[2])
    cosine = dot_at(pair, E2, path[1, 0], path[1, 1], path[1, 2])
    if c_slides:
        if abs(cosine) <= EXACT_AXES:
            return NONE, FREE
        c = -constant / cosine
        return _put_slides(pair, path, goal, c, c, 0.0, NONE_FREE, out, NONE), REGULAR
    sine = dot_at(pair, E2, path[2, 0], path[2, 1], path[2, 2])
    # The circle may lie in the plane of the slides, or shrink to a point.
    amplitude = math.hypot(cosine, sine)
    flags, count = flags_of(amplitude), NONE
    samples = SAMPLES if flags and abs(constant) <= slack + amplitude else 0
    found = np.empty(3)
    roots = linear_roots(constant, cosine, sine, slack, found)
    for k in range(samples + roots):
        c, free = 2.0 * math.pi / SAMPLES * k, C_FREE
        if k >= samples:
            c, free = found[k - samples], NONE_FREE
        count = _put_slides(pair, path, goal, c, math.cos(c), math.sin(c), free, out, count)
    return count, flags


@compiled
def _turned(axis: FloatArray, angle: float, vector: FloatArray, turned: FloatArray) -> float:
    """Write a vector turned about a direction, and return the length of the part that turns."""
    x, y, z = vector[0], vector[1], vector[2]
    hx, hy, hz = axis[0], axis[1], axis[2]
    sx, sy, sz = hy * z - hz * y, hz * x - hx * z, hx * y - hy * x
    cx, cy, cz = sy * hz - sz * hy, sz * hx - sx * hz, sx * hy - sy * hx
    cosine, sine = math.cos(angle) - 1.0, math.sin(angle)
    turned[0] = x + cosine * cx + sine * sx
    turned[1] = y + cosine * cy + sine * sy
    turned[2] = z + cosine * cz + sine * sz
    return math.sqrt(cx * cx + cy * cy + cz * cz)


@compiled
def _angle_between(axis: FloatArray, one: FloatArray, other: FloatArray) -> float:
    """Return the turn about a direction that brings one vector's part square to it to another's."""
    x, y, z = one[0], one[1], one[2]
    u, v, w = other[0], other[1], other[2]
    hx, hy, hz = axis[0], axis[1], axis[2]
    turning = hx * (y * w - z * v) + hy * (z * u - x * w) + hz * (x * v - y * u)
    along = (hx * x + hy * y + hz * z) * (hx * u + hy * v + hz * w)
    return math.atan2(turning, x * u + y * v + z * w - along)


@compiled
def _put_plane(
    prismatic: Flags,
    axes: FloatArray,
    points: FloatArray,
    motions: FloatArray,
    start: FloatArray,
    goal: FloatArray,
    slack: float,
    free: int,
    out: FloatArray,
    count: int,
) -> tuple[int, int]:
    """Write the answer whose turns are known, with what the slide has to make up of the offset.

    ``motions`` (3,) holds the turns; its entry of the slide is written. A slide within the plane
    changes nothing: it is free where the offset is right, and of no use where it is not.
    """
    before, after = np.empty(3), np.empty(3)
    offset, gain, slide = start[3], 0.0, 0
    for i in range(3):
        before[i] = start[i]
    for k in range(3):
        joint = 2 - k
        h, p = axes[joint], points[joint]
        if prismatic[joint]:
            slide = joint
            gain = before[0] * h[0] + before[1] * h[1] + before[2] * h[2]
            continue
        _turned(h, motions[joint], before, after)
        for i in range(3):
            offset += (after[i] - before[i]) * p[i]
            before[i] = after[i]
    flags = flags_of(abs(gain))
    missing = goal[3] - offset
    if abs(gain) <= NEARLY_FREE:
        if abs(missing) > slack + abs(gain):
            return count, flags
        motions[slide], free = 0.0, slide
    else:
        motions[slide] = missing / gain
    return put(out, count, motions[0], motions[1], motions[2], free), flags


@compiled
def plane_with_slide(
    prismatic: Flags,
    axes: FloatArray,
    points: FloatArray,
    start: FloatArray,
    goal: FloatArray,
    slack: float,
    out: FloatArray,
) -> tuple[int, int]:
    """Write all answers for a plane, two turning joints and one slide, as ``regional`` does."""
    first = 1 if prismatic[0] else 0
    second = 1 if prismatic[2] else 2
    h = axes[first]
    motions, turned, quarter = np.zeros(3), np.empty(3), np.empty(3)
    swing = _turned(axes[second], 0.5 * math.pi, start, quarter)
    _turned(axes[second], math.pi, start, turned)
    # h . R n is linear in cosine and sine of R's angle: three values tell it.
    at_none = h[0] * start[0] + h[1] * start[1] + h[2] * start[2]
    at_half = h[0] * turned[0] + h[1] * turned[1] + h[2] * turned[2]
    at_quarter = h[0] * quarter[0] + h[1] * quarter[1] + h[2] * quarter[2]
    middle = 0.5 * (at_none + at_half)
    wanted = h[0] * goal[0] + h[1] * goal[1] + h[2] * goal[2]
    cosine, sine = 0.5 * (at_none - at_half), at_quarter - middle
    found = np.empty(3)
    roots = linear_roots(middle - wanted, cosine, sine, slack, found)
    # Little, where the joint hardly swings the normal or the axes are parallel.
    flags, count = flags_of(math.hypot(cosine, sine)), NONE
    goal_swing = _turned(h, 0.0, goal, turned)
    flags |= flags_of(goal_swing)
    samples = SAMPLES if swing <= NEARLY_FREE and abs(middle - wanted) <= slack + swing else 0
    for k in range(samples + roots):
        free = second if k < samples else NONE_FREE
        angle = 2.0 * math.pi / SAMPLES * k
        if k >= samples:
            angle = found[k - samples]
        _turned(axes[second], angle, start, turned)
        aim = _angle_between(h, turned, goal)
        motions[second] = angle
        spread = SAMPLES if goal_swing <= NEARLY_FREE else 1
        for i in range(spread):
            motions[first] = aim + 2.0 * math.pi / SAMPLES * i
            count, more = _put_plane(
                prismatic,
                axes,
                points,
                motions,
                start,
                goal,
                slack,
                first if spread > 1 else free,
                out,
                count,
            )
            flags |= more
    return count, flags
