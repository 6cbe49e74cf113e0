"""Three joints in one plane: every way to bring a plane figure from one place to another.

Idea: a joint of a plane mechanism turns about a point or slides along a direction, and complex
numbers say both: p + e^(ia) (x - p), x + u d. The turns must add up to the figure's. The last joint
that turns leaves its own point in place, so the other two must bring that point where it belongs:
by the triangle of two links, by a line through a circle, or by two lines. Where the last joint
slides, the mechanism is read backwards.

Source: law of cosines for two links, with the half angle from both reaches, (R - r)(R + r) over
(r - s)(r + s), as Kahan 1983 has it for needle-like triangles: no digits are lost when stretched.

Not covered: three slides, and joints on one point or along one direction, which leave a freedom for
every target (``degenerate``).
"""

import cmath
import math

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.tolerances import NEARLY_FREE, UNCERTAIN
from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray

ComplexArray = NDArray[np.complex128]

MOST = 2 + 24
"""Solutions written at most: two, and one for each sample of a free joint."""

ROUNDING = 1e-12
"""Distance, a share of the length, that doubles leave by themselves at the edge of reach."""


@compiled
def nearly_free(slack: float) -> float:
    """Return within which distance of an axis turning about it counts as free.

    Where the table leaves axes a little uncertain, so is the turn that a point near them asks for.
    """
    return max(NEARLY_FREE, UNCERTAIN * slack)


@compiled
def three_joints(
    slides: NDArray[np.bool_],
    places: ComplexArray,
    turn: float,
    shift: complex,
    slack: float,
    samples: FloatArray,
    found: FloatArray,
) -> tuple[int, float, bool]:
    """Write the motions of three joints that move a plane figure by x -> e^(i turn) x + shift.

    Parameters
    ----------
    slides : (3,), whether a joint slides along, or turns about, its ``places`` (3,): a unit
        direction, or a point, at zero motion.
    slack : distance from the edge of reach, a share of the length, within which both ways are told
        so far apart that settling on a table a little different finds both.
    samples : (k,), up to 24, rad, that stand for a joint that may turn as it likes.
    found : (26, 3), written.

    Returns
    -------
    count, shortfall, free : solutions written; how far the figure is from where it can be, 0 within
        reach; whether a joint was nearly free. Out of reach the solutions are the nearest ones.

    Examples
    --------
    Two links of 1 and a turn at their end; the end is to stand at 1 + i, unturned.

    >>> found = np.zeros((MOST, 3))
    >>> places = np.array([0.0, 1.0, 2.0], dtype=complex)
    >>> three_joints(np.zeros(3, bool), places, 0.0, -1 + 1j, 0.0, np.zeros(0), found)
    (2, 0.0, False)
    >>> (found[:2] * 2 / np.pi).round(12) + 0.0
    array([[ 0.,  1., -1.],
           [ 1., -1.,  0.]])
    """
    rotation = cmath.rect(1.0, turn)
    if slides[0] and slides[2]:
        gap = shift - places[1] + rotation * places[1]
        short, free = _two_lines(places[0], rotation * places[2], gap, found)
        found[0, 2], found[0, 1] = found[0, 1], turn
        return 1, short, free
    # Backwards, where the last joint slides: all motions undone bring the first joint's point home.
    back = slides[2]
    first, last, sign = (2, 0, -1.0) if back else (0, 2, 1.0)
    goal = (places[0] - shift) / rotation if back else rotation * places[2] + shift
    count, short, free = _two_joints(slides, places, first, last, goal, slack, samples, found)
    for k in range(count):
        one, two = sign * found[k, 0], sign * found[k, 1]
        found[k, first], found[k, 1] = one, two
        turned = (0.0 if slides[first] else one) + (0.0 if slides[1] else two)
        found[k, last] = turn - turned
    return count, short, free


@compiled
def _two_joints(
    slides: NDArray[np.bool_],
    places: ComplexArray,
    first: int,
    last: int,
    goal: complex,
    slack: float,
    samples: FloatArray,
    found: FloatArray,
) -> tuple[int, float, bool]:
    """Write to columns 0 and 1 how the first and the middle joint bring the last one's point."""
    a, b, point = places[first], places[1], places[last]
    if not slides[first] and not slides[1]:
        return two_links(b - a, point - b, goal - a, slack, samples, found)
    if slides[first] and slides[1]:
        short, free = _two_lines(a, b, goal - point, found)
        return 1, short, free
    if slides[first]:
        short = _line_through_circle(goal - b, -a, abs(point - b), slack, found, 0)
        for k in range(2):
            reached = goal - b - found[k, 0] * a
            found[k, 1] = cmath.phase(reached / (point - b))
        return 2, short, False
    short = _line_through_circle(point - a, b, abs(goal - a), slack, found, 1)
    for k in range(2):
        found[k, 0] = cmath.phase((goal - a) * (point - a + found[k, 1] * b).conjugate())
    near = nearly_free(slack)
    if abs(goal - a) > near or short > near:
        return 2, short, False
    return _sampled(samples, found, 2), short, True


@compiled
def two_links(
    near: complex,
    far: complex,
    goal: complex,
    slack: float,
    samples: FloatArray,
    found: FloatArray,
) -> tuple[int, float, bool]:
    """Write turns with e^(i t0) (near + e^(i t1) far) = goal.

    Returns and parameters as of ``three_joints``; columns 0 and 1 of ``found`` are written.
    """
    inner, outer, reach = abs(near), abs(far), abs(goal)
    longest, shortest = inner + outer, abs(inner - outer)
    bent = math.atan2(
        math.sqrt(max(longest - reach, slack) * (longest + reach)),
        math.sqrt(max(reach - shortest, slack) * (reach + shortest)),
    )
    straight = cmath.phase(near * far.conjugate())
    for k in range(2):
        found[k, 1] = straight + (2.0 * bent if k == 0 else -2.0 * bent)
        reached = near + cmath.rect(1.0, found[k, 1]) * far
        found[k, 0] = cmath.phase(goal * reached.conjugate())
    short = max(reach - longest, shortest - reach, 0.0)
    free = nearly_free(slack)
    if reach > free or short > free:
        return 2, short, False
    return _sampled(samples, found, 2), short, True


@compiled
def _sampled(samples: FloatArray, found: FloatArray, count: int) -> int:
    """Add solutions with the first joint at each sample and the second as in the first solution."""
    for sample in samples:
        found[count, 0], found[count, 1] = sample, found[0, 1]
        count += 1
    return count


@compiled
def _line_through_circle(
    start: complex, along: complex, radius: float, slack: float, found: FloatArray, column: int
) -> float:
    """Write both u with ``abs(start + u along) = radius``; return the distance that lacks."""
    across = along.conjugate() * start
    beside = abs(across.imag)
    half = math.sqrt(max(radius - beside, slack) * (radius + beside))
    found[0, column], found[1, column] = half - across.real, -half - across.real
    return max(beside - radius, 0.0)


@compiled
def _two_lines(
    along: complex, beside: complex, gap: complex, found: FloatArray
) -> tuple[float, bool]:
    """Write u, w with ``u along + w beside = gap``; by ``along`` alone where both are parallel."""
    sine = (along.conjugate() * beside).imag
    if abs(sine) > NEARLY_FREE:
        found[0, 0] = (gap * beside.conjugate()).imag / (along * beside.conjugate()).imag
        found[0, 1] = (along.conjugate() * gap).imag / sine
        return 0.0, False
    found[0, 0], found[0, 1] = (along.conjugate() * gap).real, 0.0
    return abs((along.conjugate() * gap).imag), True


def degenerate(slides: NDArray[np.bool_], places: ComplexArray, same: float) -> bool:
    """Return whether neighbouring joints turn about one point or slide along one direction.

    Such a mechanism has a freedom to spare and lacks another. ``same`` is the distance, or sine,
    within which points and directions are one. Three slides count too.

    Examples
    --------
    >>> degenerate(np.zeros(3, bool), np.array([0, 0, 1], dtype=complex), 1e-9)
    True
    """
    if slides.all():
        return True
    for first in range(2):
        a, b = places[first], places[first + 1]
        if slides[first] != slides[first + 1]:
            continue
        apart = abs((np.conj(a) * b).imag) if slides[first] else abs(b - a)
        if apart < same:
            return True
    return False
