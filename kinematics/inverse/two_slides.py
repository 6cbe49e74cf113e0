"""All motions of six joints of which two slide, wherever they stand.

Idea: read as a ring, such an arm is one of three orders, and one trigonometric polynomial in one of
its turns has all its postures for roots (slide_equation.py): eight, twelve or sixteen of them,
complex ones too. For each root that is nearly real the other turn and the first follow from
triangles, the last from the turn that is left, the slides from two linear equations. Every
candidate is bettered on the table as it stands. A target that nothing reaches, or an odd number of
postures, is asked again by another reading of the ring, with another equation.

Source: derived here; what it rests on is named in slide_equation.py.

Not covered: three slides (three_slides.py); an interval proof: a no rests on floating point, and on
two equations that agree.
"""

from dataclasses import dataclass
from functools import cached_property
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.candidates import (
    Landed,
    found_of,
    in_metres,
    land_candidates,
    nearest_motions,
)
from kinematics.inverse.found import Found
from kinematics.inverse.landing import land_all
from kinematics.inverse.screws import Screws
from kinematics.inverse.slide_equation import (
    NOTHING,
    Closure,
    Placed,
    answers_of,
    closure_of,
    near_turns,
    other_turn,
    placed,
    roots_of,
    turned,
)
from kinematics.inverse.slide_rings import ROWS, Lines, Ring, lines_around, rings_of
from kinematics.inverse.starts import scrambled_halton
from kinematics.inverse.tolerances import (
    ACCEPTED,
    DOUBTFUL_ROOT,
    FURTHEST_SLIDE,
    HARDLY_TURNS,
    IN_LINE,
    NEARLY_CLOSES,
    SLIDE_AT_HAND,
    VANISHES,
)
from kinematics.number_checks import FloatArray
from kinematics.transforms import inverse

_CHUNK = 256
"""Targets at once: so many that arrays cost little beside their numbers, and stay in the cache."""

_PROBES, _SEED = 8, 20_261_202
_MISSED = 1e-4
"""Radians, or over L, by which an equation may miss a posture that it was asked for the pose of:
far more than its roots are rounded by, and so little that polishing finds the posture itself."""


@dataclass(frozen=True)
class SlidesGeometry:
    """What the solver rests on, for people."""

    rows: tuple[int, int]

    @property
    def say(self) -> str:
        """'rows 1 and 4 slide: one equation in one turn has all solutions for roots'."""
        one, other = self.rows
        return f"rows {one} and {other} slide: one equation in one turn has all solutions for roots"


@dataclass(frozen=True, eq=False)
class Reading:
    """A ring of an arm with the turn that is scanned: one equation.

    Attributes
    ----------
    scan_last : whether the third turn of the ring is scanned, else the second.
    size : of the polynomial, as a rule. worst : by how much probes are missed at most.
    """

    ring: Ring
    scan_last: bool
    size: float = 1.0
    worst: float = 0.0


@dataclass(frozen=True, eq=False)
class TwoSlides:
    """A solver for six rows of which two slide.

    Attributes
    ----------
    screws : the arm. readings : the equation to ask, and one to ask again if there is another.
    """

    screws: Screws
    readings: tuple[Reading, ...]
    proof: str = "elimination"

    @cached_property
    def geometry(self) -> SlidesGeometry:
        """Which rows slide."""
        one, other = np.flatnonzero(self.screws.prismatic).tolist()
        return SlidesGeometry((one + 1, other + 1))

    def solve(self, targets: FloatArray) -> Found:
        """Return all motions for targets (m, 4, 4), the tool in base, metres; travel ignored."""
        scaled = np.ascontiguousarray(self.screws.scaled(targets))
        landed, is_open = _ask(self.readings[0], self.screws, scaled)
        again = np.flatnonzero(is_open | (landed.counts() == 0))
        if len(again) and len(self.readings) > 1:
            landed, is_open[again] = self._ask_again(landed, scaled, again)
        return found_of(self.screws, landed, is_open)

    def _ask_again(
        self, landed: Landed, scaled: FloatArray, again: NDArray[np.intp]
    ) -> tuple[Landed, NDArray[np.bool_]]:
        """Return solutions with those of the other equation for some targets; which stay open."""
        other, doubtful = _ask(self.readings[1], self.screws, scaled[again])
        motions = np.concatenate([landed.motions[landed.kept], other.motions[other.kept]])
        of = np.concatenate([landed.of[landed.kept], again[other.of[other.kept]]])
        order = np.argsort(of, kind="stable")
        both = land_candidates(self.screws, scaled, motions[order], of[order])
        counts = both.counts()[again]
        # What the other equation does not know of, it has lost.
        return both, doubtful | (counts % 2 == 1) | (counts != other.counts())

    def nearest(self, targets: FloatArray) -> FloatArray:
        """Return row motions (m, 6), rad and metres, that bring the tool as near as they can."""
        scaled = np.ascontiguousarray(self.screws.scaled(targets))
        return in_metres(self.screws, nearest_motions(self.screws, scaled))


def two_slides_of(screws: Screws) -> TwoSlides | None:
    """Return the solver for an arm of six rows of which two slide; None for any other arm.

    And for one whose slides are parallel, or whose turns cannot turn the tool, in every posture.

    Examples
    --------
    >>> axes, points = np.eye(3)[[0, 2, 1, 1, 0, 1]], np.zeros((6, 3))
    >>> points[2:, 2], points[4:, 0] = [0.2, 0.3, 0.3, 0.4], 0.1
    >>> slides = np.array([True, False, False, True, False, False])
    >>> tool = np.eye(4)
    >>> tool[:3, 3] = 0.2, 0.1, 0.5
    >>> solver = two_slides_of(Screws(axes, points, slides, tool, 1.0))
    >>> solver.geometry.say
    'rows 1 and 4 slide: one equation in one turn has all solutions for roots'
    >>> found = solver.solve(tool[None])
    >>> bool((np.abs(found.motions).max(axis=1) < 1e-9).any())
    True
    """
    if screws.rows != ROWS or np.count_nonzero(screws.prismatic) != 2:
        return None
    motions, targets = _probes(screws)
    tried = [
        _probed(ring, scan_last, screws, motions, targets)
        for ring in rings_of(screws.prismatic)
        for scan_last in (False, True)
    ]
    sound = sorted((one for one in tried if one.worst <= _MISSED), key=lambda one: one.worst)
    if not sound:
        return None
    # Another way round meets other targets that it cannot tell apart.
    others = [one for one in sound if one.ring.turning_rows != sound[0].ring.turning_rows]
    return TwoSlides(screws, tuple([sound[0], *others, *sound[1:]][:2]))


def _probes(screws: Screws) -> tuple[FloatArray, FloatArray]:
    """Return motions (p, 6) all around, and where they bring the tool, lengths over L."""
    share = 2.0 * scrambled_halton(_PROBES, ROWS, _SEED) - 1.0
    motions = share * np.where(screws.prismatic, 1.0, np.pi)
    targets = np.empty((_PROBES, 4, 4))
    lines = screws.axis, screws.point, screws.prismatic
    land_all(*lines, screws.tool_at_zero, motions, targets)
    return motions, targets


def _probed(
    ring: Ring, scan_last: bool, screws: Screws, motions: FloatArray, targets: FloatArray
) -> Reading:
    """Return an equation with by how much it misses known postures.

    The worst of them does not count: it may be beside a fold.
    """
    candidates = _candidates(Reading(ring, scan_last), screws, targets)
    apart = np.abs(candidates.motions - motions[candidates.of])
    turning = ~screws.prismatic
    apart[:, turning] = np.abs(
        apart[:, turning] - 2.0 * np.pi * np.round(apart[:, turning] / (2.0 * np.pi))
    )
    missed = np.full(_PROBES, np.inf)
    np.minimum.at(missed, candidates.of, apart.max(axis=1))
    return Reading(ring, scan_last, float(np.median(candidates.size)), float(np.sort(missed)[-2]))


class _Candidates(NamedTuple):
    """Two candidates for each nearly real root, one after the other, for m targets.

    Attributes
    ----------
    motions : (2 r, 6); of : (2 r,), ascending. away : (2 r,), how far from real its root is.
    tried, likely : (2 r,), whether its triangle nearly closes with the slides at all, and at hand.
    size : (m,), of the polynomial; across : (m,), sine squared of axis d, at the target, to axis a.
    """

    motions: FloatArray
    of: NDArray[np.intp]
    away: FloatArray
    tried: NDArray[np.bool_]
    likely: NDArray[np.bool_]
    size: FloatArray
    across: FloatArray


def _ask(reading: Reading, screws: Screws, targets: FloatArray) -> tuple[Landed, NDArray[np.bool_]]:
    """Return the solutions of one equation for targets (m, 4, 4), and which are doubtful, (m,)."""
    parts = [
        _candidates(reading, screws, targets[begin : begin + _CHUNK])
        for begin in range(0, max(len(targets), 1), _CHUNK)
    ]
    of = np.concatenate([part.of + _CHUNK * place for place, part in enumerate(parts)])
    motions, _, away, tried, likely, size, across = (
        np.concatenate(same) for same in zip(*parts, strict=True)
    )
    landed = land_candidates(screws, targets, motions[tried], of[tried])
    doubtful = (across < IN_LINE) | (size < VANISHES * reading.size)
    there, lost = np.zeros(len(of), np.bool_), away < DOUBTFUL_ROOT
    there[tried] = landed.gaps.max(axis=1) <= ACCEPTED
    lost &= likely & ~there.reshape(-1, 2).any(axis=1).repeat(2)
    doubtful[of[lost]] = True
    return landed, doubtful | (landed.counts() % 2 == 1)


def _candidates(reading: Reading, screws: Screws, targets: FloatArray) -> _Candidates:
    """Return candidates for targets (m, 4, 4), lengths over L."""
    ring, scan_last = reading.ring, reading.scan_last
    lines = lines_around(ring, screws, targets @ inverse(screws.tool_at_zero))
    closure = closure_of(ring, lines)
    roots, size = roots_of(ring, closure, scan_last)
    of, turns, away = near_turns(roots)
    own, lines = closure.only(of), Lines(*(one[of] for one in lines))
    scanned = np.cos(turns)[:, None, None], np.sin(turns)[:, None, None]
    a, b, c = other_turn(own, scan_last, *scanned)
    size_of_turn = a * a + b * b
    passed = size_of_turn - c * c
    other = answers_of(a, b, c, np.sqrt(np.maximum(passed, 0.0)))
    turns_of = (other, scanned) if scan_last else (scanned, other)
    stands = placed(ring, own, *turns_of)
    closes = (passed[..., 0] > -NEARLY_CLOSES).repeat(2)
    motions = _motions(ring, lines, own, turns_of, stands)
    tried, likely = (flags.ravel() & closes for flags in _within_bounds(stands))
    # Where the other turn is hardly determined, several roots lie in a heap, each far from its own.
    away[size_of_turn[:, 0, 0] < HARDLY_TURNS] = 0.0
    across = closure.across[:, 0, 0]
    return _Candidates(motions, of.repeat(2), away.repeat(2), tried, likely, size, across)


def _within_bounds(stands: Placed) -> tuple[NDArray[np.bool_], NDArray[np.bool_]]:
    """Tell where the slides need not go to where nobody is, (r, 2), and where they are at hand.

    Where they are parallel, nothing is missing across both, whatever is missing: a root, but none
    that can be moved to. What is missing across the first, over the sine between both, is how far
    the second must go.
    """
    one, other = stands.slides
    lacking = np.linalg.norm(np.cross(one, stands.gap), axis=-1)[:, 0]
    sine = np.linalg.norm(np.cross(one, other), axis=-1)[:, 0]
    return lacking <= FURTHEST_SLIDE * sine, lacking <= SLIDE_AT_HAND * (sine + DOUBTFUL_ROOT)


def _motions(
    ring: Ring,
    lines: Lines,
    closure: Closure,
    turns: tuple[tuple[FloatArray, FloatArray], ...],
    stands: Placed,
) -> FloatArray:
    """Return motions (2 r, 6) for turns of b and c, each with its own lines and closure."""
    # The last turn: a direction across axis d, as the target has it, turned back by the others.
    axis = closure.axes[3]
    mark = np.cross(axis, np.eye(3)[np.argmin(np.abs(axis), axis=-1)])
    back = (lines.closing[:, None, None, :3, :3] @ mark[..., None])[..., 0]
    back = turned(closure.axes[0], stands.cosine, stands.sine, back)
    values = [np.arctan2(-stands.sine, stands.cosine)]
    for line, (cosine, sine) in zip(closure.axes[1:3], turns, strict=True):
        back = turned(line, cosine, -sine, back)
        values.append(np.arctan2(sine, cosine))
    sine, cosine = (axis * np.cross(mark, back)).sum(axis=-1), (mark * back).sum(axis=-1)
    values.append(np.arctan2(sine, cosine))
    motions = np.empty((len(axis), 2, ROWS))
    for place, value in zip((*ring.turning, *ring.sliding), (*values, *_slid(stands)), strict=True):
        motions[:, :, ring.rows[place]] = value[:, 0]
    return ring.sign * motions.reshape(-1, ROWS)


def _slid(stands: Placed) -> tuple[FloatArray, FloatArray]:
    """Return by how much the slides make up for what is missing, by least squares."""
    one, other = stands.slides
    across = np.cross(one, other)
    size = np.maximum((across * across).sum(axis=-1), NOTHING)
    first = (np.cross(stands.gap, other) * across).sum(axis=-1) / size
    second = (np.cross(one, stands.gap) * across).sum(axis=-1) / size
    return first, second
