"""The twelve orders in which six joints can be eliminated, and which of them are sound for an arm.

Idea: the joints and the target make a loop, and a loop has no beginning: any joint may be the one
that drops out, in either direction round. Each order is another set of equations for the same
solutions. In some the equations are dependent whatever the target: when the pair that goes first
meets or runs parallel, or when the arm slides in the wrong places. So an arm is tried out: every
order on a few targets made from known motions, with a measure of what was divided by.

Source: the cyclic and reversed orders are mentioned by Raghavan and Roth 1993; choosing by such a
measure: derived here.

Not covered: solving for whole sets of targets, checks of one order by another (elimination.py).
"""

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.elimination_companion import ROOTS
from kinematics.inverse.elimination_pencil import ANGLE_AT_ZERO, write_companions
from kinematics.inverse.elimination_postures import write_postures
from kinematics.inverse.elimination_sides import (
    AFTER_FIRST,
    AFTER_SECOND,
    BEFORE_FIRST,
    EQUATIONS,
    FADING,
    KEPT,
    LEFT,
    RIGHT,
    eliminate_sides,
    write_sides,
)
from kinematics.inverse.line_forms import FORM, joint_matrices, line_forms
from kinematics.inverse.screws import Screws
from kinematics.inverse.tolerances import (
    ELIMINATION_ANGLE,
    ELIMINATION_STILL,
    NEIGHBOURS_PARALLEL,
)
from kinematics.number_checks import FloatArray
from kinematics.transforms import inverse

FURTHEST = 1e100
"""Tangent of a half angle beyond which it is a right angle, whatever more."""


class Candidates(NamedTuple):
    """Motions that may be solutions, from the eigenvalues of one order.

    Attributes
    ----------
    motions : (k, 6), lengths over L. of : (k,), ascending, which target.
    apart : (k,), rad, distance of the third joint's value from the real axis; 0 for a real root.
    health : (m,), the least of what was divided by for each target, 1 at best.
    """

    motions: FloatArray
    of: NDArray[np.int64]
    apart: FloatArray
    health: FloatArray


@dataclass(frozen=True, eq=False)
class Order:
    """One order of the joints of an arm, with all that does not depend on a target.

    Attributes
    ----------
    screws : the arm. positions : (6,), which row is first, second ... sixth.
    reverse : whether it runs from the tool to the base.
    slot : where among the positions the target stands (elimination_sides.py).
    still : how many of the six equations know nothing of the third joint.
    origin : (3,), over L, from where lengths count: a point on the second joint's axis.
    signs : (6,), row motion per unknown. slides : (6,), by position.
    matrices, start, still_left, still_right, fading : as ``eliminate_sides`` takes them.
    """

    screws: Screws
    positions: NDArray[np.int64]
    reverse: bool
    slot: int
    still: int
    origin: FloatArray
    signs: FloatArray
    slides: NDArray[np.bool_]
    matrices: FloatArray
    start: FloatArray
    still_left: FloatArray
    still_right: FloatArray
    fading: FloatArray

    def candidates(self, targets: FloatArray) -> Candidates:
        """Return what may be motions for targets (m, 4, 4), lengths over L.

        Examples
        --------
        >>> from kinematics.inverse.landing import land_all
        >>> axes, points = np.eye(3)[[2, 1, 0, 1, 2, 0]], np.arange(18.0).reshape(6, 3) % 5 / 5
        >>> screws = Screws(axes, points, np.zeros(6, bool), np.eye(4), 1.0)
        >>> order, tool = order_of(screws, 0, False), np.empty((1, 4, 4))
        >>> motions = np.array([[0.3, -0.5, 0.7, 0.2, 1.1, -0.9]])
        >>> land_all(axes, points, screws.prismatic, screws.tool_at_zero, motions, tool)
        >>> found = order.candidates(tool).motions
        >>> bool(np.abs(found - motions).max(axis=1).min() < 1e-6)
        True
        """
        m = len(targets)
        moves = targets @ inverse(self.screws.tool_at_zero)
        about = moves.copy()
        about[:, :3, 3] += moves[:, :3, :3] @ self.origin - self.origin
        on_right = self.slot in (BEFORE_FIRST, AFTER_FIRST, AFTER_SECOND)
        if on_right == self.reverse:
            about = inverse(about)
        order, tops = np.empty((m, RIGHT), np.int64), np.empty((m, RIGHT, RIGHT + LEFT))
        kept, spans = np.empty((m, KEPT, LEFT + FADING)), np.empty(m)
        eliminate_sides(
            self.matrices, self.start, self.still_left, self.still_right, self.fading,
            self.slot, np.ascontiguousarray(about), order, tops, kept, spans,
        )  # fmt: skip
        powers, companions = np.empty((m, KEPT, LEFT)), np.empty((m, ROOTS, ROOTS))
        health, leftover = np.empty(m), np.empty(m)
        write_companions(self.slides, self.still, kept, powers, companions, health, leftover)
        health[leftover > ELIMINATION_STILL] = 0.0
        third, of, apart = _thirds(companions, health)
        motions = np.empty((len(of), 6))
        write_postures(
            self.screws.axis, self.screws.prismatic, self.positions, self.signs,
            np.ascontiguousarray(moves), powers, tops, order, third, of, motions,
        )  # fmt: skip
        return Candidates(motions, of, apart, np.minimum(health, spans))


def _thirds(
    companions: FloatArray, health: FloatArray
) -> tuple[FloatArray, NDArray[np.int64], FloatArray]:
    """Return the third joint's values, their targets, and how far they are from being real."""
    finite = np.isfinite(companions).reshape(len(companions), ROOTS * ROOTS)
    sound: NDArray[np.bool_] = np.all(finite, axis=1)
    companions[~sound], health[~sound] = 0.0, 0.0
    tangents = _eigenvalues(companions, sound)
    health[~sound] = 0.0
    # Half a turn from where x is 0 it is infinite: a huge number says so, its square still is one.
    real = np.clip(tangents.real, -FURTHEST, FURTHEST)
    imaginary = np.minimum(np.abs(tangents.imag), FURTHEST)
    square = real * real
    # x = tan(psi / 2) with a complex angle psi: its imaginary part says how far from real it is.
    with np.errstate(divide="ignore"):
        apart = 0.5 * np.log((square + (1.0 + imaginary) ** 2) / (square + (1.0 - imaginary) ** 2))
    taken = (apart < ELIMINATION_ANGLE) & (tangents.imag >= 0.0) & sound[:, None]
    of, which = np.nonzero(taken)
    x, y = real[of, which], imaginary[of, which]
    angle = np.arctan2(2.0 * x, 1.0 - x * x - y * y)
    return ANGLE_AT_ZERO + angle, of.astype(np.int64), apart[of, which]


def _eigenvalues(companions: FloatArray, sound: NDArray[np.bool_]) -> NDArray[np.complex128]:
    """Return the eigenvalues (m, 16); ``sound`` becomes False where the iteration fails."""
    try:
        return np.linalg.eigvals(companions).astype(np.complex128)
    except np.linalg.LinAlgError:
        values = np.zeros((len(companions), ROOTS), np.complex128)
        for b, companion in enumerate(companions):
            try:
                values[b] = np.linalg.eigvals(companion)
            except np.linalg.LinAlgError:
                sound[b] = False
        return values


def order_of(screws: Screws, shift: int, reverse: bool, still: int = 0) -> Order | None:
    """Return one order of the joints of an arm; None where the third or sixth joint slides.

    Parameters
    ----------
    screws : an arm of six rows. shift : 0 to 5, which joint, counted in the order, is first.
    reverse : whether it runs from the tool to the base.
    still : how many of the six equations know nothing of the third joint, 0 to 2.
    """
    rows = [(shift + position) % 6 for position in range(6)]
    positions = [5 - row for row in rows] if reverse else rows
    slides = screws.prismatic[positions]
    if slides[2] or slides[5]:
        return None
    axis, origin = screws.axis[positions], screws.point[positions[1]]
    point = screws.point[positions] - origin
    matrices = joint_matrices(axis, point, slides)
    # On the right joints turn back, and so they all do where the order is reversed.
    signs = np.array([-1.0, -1.0, 1.0, 1.0, 1.0, 1.0]) * (-1.0 if reverse else 1.0)
    order = Order(
        screws,
        np.array(positions, np.int64),
        reverse,
        positions.index(0 if reverse else 5) + 1,
        still,
        origin.copy(),
        signs,
        slides,
        matrices,
        line_forms(axis[5], _nearest_point(axis, point)),
        np.zeros((FORM, LEFT)),
        np.zeros((FORM, LEFT)),
        _fading(matrices[2]),
    )
    _write_still(order)
    return order


def _write_still(order: Order) -> None:
    """Work out the side that the target has no part in: with one that leaves all where it is."""
    work, motion, other = np.empty((2, FORM, LEFT)), np.empty((FORM, FORM)), np.empty((FORM, LEFT))
    for slot, side in ((AFTER_FIRST, order.still_right), (EQUATIONS, order.still_left)):
        left, right = (other, side) if slot == AFTER_FIRST else (side, other)
        write_sides(
            *(order.matrices, order.start, other, other, slot, np.eye(4)),
            *(work, motion, left, right),
        )


def _nearest_point(axis: FloatArray, point: FloatArray) -> FloatArray:
    """Return the point of the sixth axis nearest to the fifth, (3,): numbers stay small there."""
    line, other = axis[5], axis[4]
    apart, cosine = point[5] - point[4], float(axis[5] @ axis[4])
    across = 1.0 - cosine * cosine
    along = -(line @ apart)
    if across > NEIGHBOURS_PARALLEL:
        along = (along + cosine * (other @ apart)) / across
    nearest: FloatArray = point[5] + along * line
    return nearest


def _fading(terms: FloatArray) -> FloatArray:
    """Return what the part of a turning joint along exp(-i t) reaches, (14, 8): real, imaginary."""
    reached = np.linalg.svd(terms[1, 1:] + 1j * terms[2, 1:])[0][:, : FADING // 2]
    return np.ascontiguousarray(np.hstack([reached.real, reached.imag]))
