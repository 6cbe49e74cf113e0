"""Three joints that must carry a point, or a plane, to another: F_a(a) F_b(b) F_c(c) start = goal.

Joint c carries the start along a circle; what a and b can bring to the goal is a torus (a cylinder,
a hyperboloid, with a slide), so c are the angles where the circle meets it: the roots of one sum of
squares, at most four, and a and b follow by arc tangents. The same sum serves a plane, whose normal
is carried along a circle likewise. Where two axes meet or run parallel the sum is one square, and
two linear equations take its place. Where the start lies on an axis, that joint is free: samples of
it are given and it is flagged.

Source: Pieper, The Kinematics of Manipulators under Computer Control, 1968 (points, turning axes);
the four terms, the planes and the slides as in regional_equations.py.
Not covered: planes moved by two slides, which no target of a six-joint arm asks for; a and b on one
line, and three joints that move the point in a plane only (flagged, nothing found).
"""

import math

import numpy as np

from kinematics.inverse.kernel_numbers import NONE
from kinematics.inverse.regional_closing import (
    NO_TERM,
    close,
    fits,
    special_term,
    sum_of_squares,
    swing_of_goal,
)
from kinematics.inverse.regional_equations import (
    BESIDE,
    write_equations,
    write_path,
)
from kinematics.inverse.regional_pairs import (
    KIND,
    PAIR,
    QA,
    QB,
    SLIDE_SLIDE,
    TURN_TURN,
    Flags,
    write_pair,
)
from kinematics.inverse.regional_rows import (
    C_FREE,
    FREE,
    NONE_FREE,
    REGULAR,
    SAMPLES,
    flags_of,
)
from kinematics.inverse.regional_slides import plane_with_slide, two_slides
from kinematics.inverse.tolerances import EXACT_AXES, NEARLY_FREE
from kinematics.inverse.trig_roots import (
    CONSTANT,
    COSINE,
    MOST_ROOTS_FOUND,
    SINE,
    SLACK,
    WEIGHT,
    linear_roots,
    roots_of_squares,
)
from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray


@compiled
def _turning_c(
    pair: FloatArray,
    is_plane: bool,
    goal: FloatArray,
    equations: FloatArray,
    swing: float,
    found: FloatArray,
    out: FloatArray,
) -> tuple[int, int]:
    """Write all answers where joint c turns."""
    special, count = special_term(pair), NONE
    flags = flags_of(swing) | flags_of(swing_of_goal(pair, is_plane, goal))
    if special == NO_TERM:
        roots = roots_of_squares(equations, found)
    else:
        roots = linear_roots(
            equations[special, CONSTANT],
            equations[special, COSINE],
            equations[special, SINE],
            equations[special, SLACK],
            found,
        )
    samples = SAMPLES if swing <= NEARLY_FREE else 0
    for k in range(samples + roots):
        c, free = 2.0 * math.pi / SAMPLES * k, C_FREE
        if k >= samples:
            c, free = found[k - samples], NONE_FREE
        cosine, sine = math.cos(c), math.sin(c)
        if k >= samples or fits(equations, special, cosine, sine, swing):
            count, more = close(
                pair, is_plane, goal, equations, special, c, cosine, sine, free, out, count
            )
            flags |= more
    return count, flags


@compiled
def _quadratic_roots(equations: FloatArray) -> tuple[int, float, float]:
    """Return the places on a line where the sum of squares vanishes: how many, and both."""
    q0, q1, q2 = 0.0, 0.0, 0.0
    for row in range(BESIDE):
        w, k0, k1 = equations[row, WEIGHT], equations[row, CONSTANT], equations[row, COSINE]
        q0, q1, q2 = q0 + w * k0 * k0, q1 + w * k0 * k1, q2 + w * k1 * k1
    if abs(q2) <= EXACT_AXES * EXACT_AXES:
        # The line leads to a point at infinity of the surface: one place is left.
        return (1, -0.5 * q0 / q1, 0.0) if abs(q1) > EXACT_AXES * EXACT_AXES else (0, 0.0, 0.0)
    middle = -q1 / q2
    value, off = sum_of_squares(equations, middle, 0.0)
    if value * q2 > 0.0 and abs(value) > off:
        return 0, 0.0, 0.0
    # About the middle, where the sum keeps its accuracy near double roots.
    aside = math.sqrt(abs(value / q2))
    return 2, middle - aside, middle + aside


@compiled
def _sliding_c(
    pair: FloatArray, is_plane: bool, goal: FloatArray, equations: FloatArray, out: FloatArray
) -> tuple[int, int]:
    """Write all answers where joint c slides and one of a and b does."""
    special, flags, count = special_term(pair), REGULAR, NONE
    gain = 0.0
    for row in range(BESIDE):
        if special == NO_TERM or row == special:
            gain = max(gain, abs(equations[row, COSINE]))
    if gain <= EXACT_AXES:
        return NONE, FREE
    if special == NO_TERM:
        roots, one, other = _quadratic_roots(equations)
    else:
        gain = equations[special, COSINE]
        roots, one, other = 1, -equations[special, CONSTANT] / gain, 0.0
    for k in range(roots):
        c = one if k == 0 else other
        count, more = close(
            pair, is_plane, goal, equations, special, c, c, 0.0, NONE_FREE, out, count
        )
        flags |= more
    return count, flags


@compiled
def _in_order(
    pair: FloatArray,
    prismatic: Flags,
    axes: FloatArray,
    points: FloatArray,
    is_plane: bool,
    start: FloatArray,
    goal: FloatArray,
    slack: float,
    out: FloatArray,
) -> tuple[int, int]:
    """Write all answers, as ``regional``, but where c slides a slide must be in the pair."""
    path = np.empty((3, 4))
    swing = write_path(prismatic[2], axes[2], points[2], is_plane, start, path)
    if pair[KIND] == SLIDE_SLIDE:
        return two_slides(pair, path, swing, prismatic[2], goal, slack, out)
    if max(abs(pair[QA]), abs(pair[QB])) <= EXACT_AXES:
        return NONE, FREE
    equations = np.zeros((5, 6))
    write_equations(pair, path, is_plane, goal, slack, equations)
    if prismatic[2]:
        return _sliding_c(pair, is_plane, goal, equations, out)
    found = np.empty(MOST_ROOTS_FOUND)
    return _turning_c(pair, is_plane, goal, equations, swing, found, out)


@compiled
def _turned_round(
    prismatic: Flags,
    axes: FloatArray,
    points: FloatArray,
    is_plane: bool,
    start: FloatArray,
    goal: FloatArray,
    slack: float,
    out: FloatArray,
) -> tuple[int, int]:
    """Write all answers for a point by carrying the goal back to the start."""
    pair, backwards = np.empty(PAIR), np.empty(3, np.bool_)
    axes_back, points_back = np.empty((3, 3)), np.empty((3, 3))
    for i in range(3):
        backwards[i] = prismatic[2 - i]
        for k in range(3):
            axes_back[i, k], points_back[i, k] = axes[2 - i, k], points[2 - i, k]
    write_pair(backwards, axes_back, points_back, pair)
    count, flags = _in_order(
        pair, backwards, axes_back, points_back, is_plane, goal, start, slack, out
    )
    for k in range(count):
        out[k, 0], out[k, 1], out[k, 2] = -out[k, 2], -out[k, 1], -out[k, 0]
        if out[k, 3] >= 0.0:
            out[k, 3] = 2.0 - out[k, 3]
    return count, flags


@compiled
def regional(
    pair: FloatArray,
    prismatic: Flags,
    axes: FloatArray,
    points: FloatArray,
    is_plane: bool,
    start: FloatArray,
    goal: FloatArray,
    slack: float,
    out: FloatArray,
) -> tuple[int, int]:
    """Write all a, b, c with F_a(a) F_b(b) F_c(c) start = goal; return how many, and flags.

    F turns about the axis given by a positive angle (not wrapped here), or slides along it. The
    other way round is the caller's: F_c(-c) F_b(-b) F_a(-a) goal = start. Choose the way in which
    the pair a, b stays the same for all targets; of two such ways the one whose pair meets or runs
    parallel, as that takes half the time.

    Parameters
    ----------
    pair : (PAIR,), of ``write_pair`` for the first two rows of the next three.
    prismatic : (3,); axes : (3, 3), unit; points : (3, 3), of a, b, c.
    is_plane : whether a plane is carried; then at most one joint may slide.
    start, goal : (4,), a point and anything, or a plane's unit normal and offset n . x.
    slack : by how much the geometry or the goal may be off, over the arm's length: 1e-9 for an
        exact table. What misses by no more gives answers as if it did not: check them.
    out : (MOST_ROWS_FOUND, 4), written: a, b, c, and which of them is free (0, 1, 2; or -1). Where
        one is, the rows are samples of it.

    Returns
    -------
    count : rows of ``out``, 0 to 4 and as many for what just misses, more with samples.
    flags : FREE and NEAR_FREE bits; where there are any, a no is not proved.

    Examples
    --------
    Links of 0.5 and 0.3, a lift under them; the tip of the second goes to its side, and 0.1 up:

    >>> prismatic, axes = np.array([True, False, False]), np.tile([0.0, 0.0, 1.0], (3, 1))
    >>> points, pair = np.array([[0, 0, 0], [0, 0, 0], [0.5, 0, 0]]), np.zeros(PAIR)
    >>> write_pair(prismatic, axes, points, pair)
    >>> start, goal = np.array([0.8, 0, 0, 0]), np.array([0.5, 0.3, 0.1, 0])
    >>> out = np.zeros((64, 4))
    >>> count, flags = regional(pair, prismatic, axes, points, False, start, goal, 1e-9, out)
    >>> np.degrees(out[:count, 1:3]).round(2)
    array([[ 61.93, -90.  ],
           [ -0.  ,  90.  ]])
    """
    slides = 0
    for i in range(3):
        slides += 1 if prismatic[i] else 0
    if is_plane and slides > 1:
        return NONE, FREE
    if is_plane and slides == 1:
        return plane_with_slide(prismatic, axes, points, start, goal, slack, out)
    if prismatic[2] and pair[KIND] == TURN_TURN:
        return _turned_round(prismatic, axes, points, is_plane, start, goal, slack, out)
    return _in_order(pair, prismatic, axes, points, is_plane, start, goal, slack, out)
