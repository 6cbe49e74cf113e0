"""One trigonometric polynomial whose roots are all postures of six rows of which two slide.

Idea: turns a, b, c, d of a ring R P ... must add up to the target's turn, whatever slides. Turn a
can bring where b and c point axis d to where the target has it only if that is at its angle to axis
a: an equation A cos u + B sin u + C = 0 for one of b and c, given the other, t. Then the slides
have two directions to make up what is missing of the place; what is missing across both, r(t, u),
must vanish. The product of r at both answers u, times a power of A^2 + B^2, has no root left in
it: it is a trigonometric polynomial in t of degree 4, 6 or 8, known from as many samples as it has
coefficients, and its roots are the eigenvalues of a companion matrix.

Source: a resultant, taken as the norm of r over the two answers, e.g. Cox, Little and O'Shea, Using
Algebraic Geometry, chapter 3; roots by companion matrix, Edelman and Murakami, Polynomial roots
from companion matrix eigenvalues, 1995. The equation itself: derived here.

Not covered: targets that turn axis d into line with axis a, where t has no such equation; arms
whose slides are parallel in every posture.
"""

from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.slide_rings import Lines, Ring
from kinematics.inverse.tolerances import NEAR_CIRCLE
from kinematics.number_checks import FloatArray

ComplexArray = NDArray[np.complex128]

_BEGIN = 0.4142
"""Where samples begin: off the right angles, where A and B of drawing-board arms vanish."""

_NO_LEAD = 1e-15
"""Share of the largest coefficient that the last is taken for at least: less is rounding."""

NOTHING = 1e-30
"""What is divided by at least; where squares are as small, nothing is determined, and what comes
out is seen to be none when it is walked through the table."""


class Closure(NamedTuple):
    """What must close, for m targets; (m, 1, 1, 3) each but for the last two, lengths over L.

    Attributes
    ----------
    axes : of the turning rows a, b, c, d. points : of a, b, c, and one on axis d.
    slides : directions of the two sliding rows.
    goal : where the target brings the point on axis d. aim : what of axis d, turned as the target
        has it, lies across axis a. along : (m, 1, 1), the rest. across : (m, 1, 1), |aim|^2.
    """

    axes: tuple[FloatArray, ...]
    points: tuple[FloatArray, ...]
    slides: tuple[FloatArray, ...]
    goal: FloatArray
    aim: FloatArray
    along: FloatArray
    across: FloatArray

    def only(self, which: NDArray[np.intp]) -> "Closure":
        """Return those of the targets that ``which`` picks, in its order."""
        axes, points, slides = (tuple(one[which] for one in group) for group in self[:3])
        return Closure(axes, points, slides, *(one[which] for one in self[3:]))


class Placed(NamedTuple):
    """How a closure stands at turns of b and c; (m, s, 2, ...) for s turns and both answers.

    Attributes
    ----------
    miss : r, what is missing across both slides. gap : what is missing in all, in axes that a
        carries. slides : both directions there. cosine, sine : of a's turn back.
    """

    miss: FloatArray
    gap: FloatArray
    slides: tuple[FloatArray, FloatArray]
    cosine: FloatArray
    sine: FloatArray


def closure_of(ring: Ring, lines: Lines) -> Closure:
    """Return what must close for the lines of a ring.

    Examples
    --------
    Turns about z, x, x, y, both slides along y; the target turns nothing, so axis d stays at right
    angles to axis a:

    >>> from kinematics.inverse.screws import Screws
    >>> from kinematics.inverse.slide_rings import lines_around, rings_of
    >>> slides = np.array([False, True, False, True, False, False])
    >>> screws = Screws(np.eye(3)[[2, 1, 0, 1, 0, 1]], np.zeros((6, 3)), slides, np.eye(4), 1.0)
    >>> ring = rings_of(slides)[0]
    >>> closure = closure_of(ring, lines_around(ring, screws, np.eye(4)[None]))
    >>> ring.rows, float(closure.along[0, 0, 0]), closure.aim[0, 0, 0]
    ((0, 1, 2, 3, 4, 5), 0.0, array([0., 1., 0.]))
    """
    axes = tuple(lines.axis[:, None, None, place] for place in ring.turning)
    points = tuple(lines.point[:, None, None, place] for place in ring.turning)
    slides = tuple(lines.axis[:, None, None, place] for place in ring.sliding)
    turn = lines.closing[:, None, None, :3, :3]
    goal = _times(turn, points[3]) + lines.closing[:, None, None, :3, 3]
    pointing = _times(turn, axes[3])
    along = _dot(axes[0], pointing)
    aim = pointing - along[..., None] * axes[0]
    return Closure(axes, points, slides, goal, aim, along, np.maximum(_dot(aim, aim), NOTHING))


def other_turn(
    closure: Closure, scan_last: bool, cosine: FloatArray, sine: FloatArray
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return A, B, C (m, s, 1) of the turn that is not scanned.

    Parameters
    ----------
    scan_last : whether the turn that is scanned is c, else b.
    cosine, sine : (m or 1, s, 1), of the scanned turn.

    Examples
    --------
    The arm of ``closure_of``: b and c turn about one line, and what is left is sin(t + u) = 0.

    >>> from kinematics.inverse.screws import Screws
    >>> from kinematics.inverse.slide_rings import lines_around, rings_of
    >>> slides = np.array([False, True, False, True, False, False])
    >>> screws = Screws(np.eye(3)[[2, 1, 0, 1, 0, 1]], np.zeros((6, 3)), slides, np.eye(4), 1.0)
    >>> ring = rings_of(slides)[0]
    >>> closure = closure_of(ring, lines_around(ring, screws, np.eye(4)[None]))
    >>> t = np.array([[[0.3]]])
    >>> a, b, c = other_turn(closure, False, np.cos(t), np.sin(t))
    >>> bool(np.isclose(a, np.sin(t))), bool(np.isclose(b, np.cos(t))), float(c[0, 0, 0])
    (True, True, 0.0)
    """
    first, second, third, fourth = closure.axes
    if scan_last:
        axis, held, carried = second, first, turned(third, cosine, sine, fourth)
    else:
        axis, held, carried = third, turned(second, cosine, -sine, first), fourth
    still = _dot(held, axis) * _dot(axis, carried)
    swings = _dot(held, carried) - still, _dot(held, np.cross(axis, carried))
    return *swings, still - closure.along


def placed(
    ring: Ring,
    closure: Closure,
    second: tuple[FloatArray, FloatArray],
    third: tuple[FloatArray, FloatArray],
) -> Placed:
    """Return how a closure stands where b and c have turned; cosine and sine of each, broadcast.

    They may be complex, as long as each pair is of one angle.

    Examples
    --------
    The arm of ``closure_of``, as it stands at zero: nothing is missing, and a is not turned.

    >>> from kinematics.inverse.screws import Screws
    >>> from kinematics.inverse.slide_rings import lines_around, rings_of
    >>> slides = np.array([False, True, False, True, False, False])
    >>> screws = Screws(np.eye(3)[[2, 1, 0, 1, 0, 1]], np.zeros((6, 3)), slides, np.eye(4), 1.0)
    >>> ring = rings_of(slides)[0]
    >>> closure = closure_of(ring, lines_around(ring, screws, np.eye(4)[None]))
    >>> zero = np.ones((1, 1, 1)), np.zeros((1, 1, 1))
    >>> stands = placed(ring, closure, zero, zero)
    >>> float(np.abs(stands.gap).max()), float(stands.cosine[0, 0, 0])
    (0.0, 1.0)
    """
    first, axis_b, axis_c, fourth = closure.axes
    points = closure.points

    def carried(direction: FloatArray) -> FloatArray:
        return turned(axis_b, *second, turned(axis_c, *third, direction))

    pointing = carried(fourth)
    cosine = _dot(closure.aim, pointing) / closure.across
    sine = _dot(first, np.cross(closure.aim, pointing)) / closure.across
    wanted = turned(first, cosine, sine, closure.goal - points[0]) + points[0]
    elbow = turned(axis_c, *third, points[3] - points[2]) + points[2] - points[1]
    gap = wanted - turned(axis_b, *second, elbow) - points[1]
    last = closure.slides[1]
    if ring.between > 1:
        last = carried(last) if ring.between > 2 else turned(axis_b, *second, last)
    normal = np.cross(closure.slides[0], last)
    return Placed(_dot(normal, gap), gap, (closure.slides[0], last), cosine, sine)


def answers_of(
    a: FloatArray, b: FloatArray, c: FloatArray, root: Any
) -> tuple[FloatArray, FloatArray]:
    """Return cosine and sine (..., 2) of both angles with a cos + b sin + c = 0, (..., 1) each.

    ``root`` : of a^2 + b^2 - c^2.

    Examples
    --------
    >>> one, half, none = np.array([1.0]), np.array([-0.5]), np.array([0.0])
    >>> cosine, sine = answers_of(one, none, half, np.array([0.75**0.5]))
    >>> np.degrees(np.arctan2(sine, cosine)).round(9)
    array([ 60., -60.])
    """
    both, size = np.array([1.0, -1.0]) * root, np.maximum(a * a + b * b, NOTHING)
    return (-c * a - both * b) / size, (-c * b + both * a) / size


def roots_of(ring: Ring, closure: Closure, scan_last: bool) -> tuple[ComplexArray, FloatArray]:
    """Return all roots exp(i t), complex ones too, (m, 2 N), and the polynomial's size, (m,).

    Examples
    --------
    The second slide turns with b but not with c: degree 6.

    >>> from kinematics.inverse.screws import Screws
    >>> from kinematics.inverse.slide_rings import lines_around, rings_of
    >>> slides = np.array([False, True, False, True, False, False])
    >>> screws = Screws(np.eye(3)[[2, 1, 0, 1, 0, 1]], np.zeros((6, 3)), slides, np.eye(4), 1.0)
    >>> ring = rings_of(slides)[0]
    >>> closure = closure_of(ring, lines_around(ring, screws, np.eye(4)[None]))
    >>> roots_of(ring, closure, False)[0].shape
    (1, 12)
    """
    degree, power = _degrees(ring, scan_last)
    count = 2 * degree + 1
    turns = _BEGIN + 2.0 * np.pi / count * np.arange(count)
    scanned = np.cos(turns)[None, :, None], np.sin(turns)[None, :, None]
    a, b, c = other_turn(closure, scan_last, *scanned)
    size = a * a + b * b
    other = answers_of(a, b, c, np.sqrt(size - c * c + 0j))
    turns_of = (other, scanned) if scan_last else (scanned, other)
    miss = placed(ring, closure, *turns_of).miss
    norm = (size[..., 0] ** power * miss[..., 0] * miss[..., 1]).real
    terms = np.fft.fft(norm, axis=1) / count
    terms = np.concatenate([terms[:, -degree:], terms[:, : degree + 1]], axis=1)
    largest: FloatArray = np.abs(terms).max(axis=1)
    return _roots(terms, largest) * np.exp(1j * _BEGIN), largest


def near_turns(roots: ComplexArray) -> tuple[NDArray[np.intp], FloatArray, FloatArray]:
    """Return of which target (k,), the turn t (k,), and how far it is from real (k,).

    A double root that rounding has split lies a little off the circle, to both sides.

    Examples
    --------
    >>> near_turns(np.array([[1j, 3.0]]))[1] * 2 / np.pi
    array([1.])
    """
    away = np.abs(np.log(np.maximum(np.abs(roots), _NO_LEAD)))
    of, place = np.nonzero(away < NEAR_CIRCLE)
    return of, np.angle(roots[of, place]), away[of, place]


def turned(axis: FloatArray, cosine: FloatArray, sine: FloatArray, way: FloatArray) -> FloatArray:
    """Return directions (..., 3) turned about axes by angles given by cosine and sine (...).

    Examples
    --------
    >>> x, _, z = np.eye(3)
    >>> turned(z, np.zeros(1), np.ones(1), x)
    array([[0., 1., 0.]])
    """
    still = _dot(axis, way)[..., None] * axis
    turned: FloatArray = (
        still + cosine[..., None] * (way - still) + sine[..., None] * np.cross(axis, way)
    )
    return turned


def _degrees(ring: Ring, scan_last: bool) -> tuple[int, int]:
    """Return the degree in t, and in the other turn's cosine and sine that of r.

    What is missing has degree 1 in each; a second slide that turns with them adds its own.
    """
    with_b, with_c = 1 + (ring.between > 1), 1 + (ring.between > 2)
    return 2 * (with_b + with_c), with_b if scan_last else with_c


def _roots(terms: ComplexArray, largest: FloatArray) -> ComplexArray:
    """Return the roots of polynomials with coefficients (m, n + 1), lowest first."""
    lead = np.where(np.abs(terms[:, -1]) > _NO_LEAD * largest, terms[:, -1], _NO_LEAD * largest)
    count, n = len(terms), terms.shape[1] - 1
    companion = np.zeros((count, n, n), np.complex128)
    companion[:, np.arange(1, n), np.arange(n - 1)] = 1.0
    # Where all of it vanishes, every t is a root, and none is told.
    some = largest > NOTHING
    companion[some, :, -1] = -terms[some, :-1] / lead[some, None]
    return np.linalg.eigvals(companion).astype(np.complex128, copy=False)


def _dot(one: FloatArray, other: FloatArray) -> FloatArray:
    product: FloatArray = (one * other).sum(axis=-1)
    return product


def _times(turn: FloatArray, way: FloatArray) -> FloatArray:
    turned: FloatArray = (turn @ way[..., None])[..., 0]
    return turned
