"""All motions of six joints of which three slide, wherever they stand.

Idea: slides do not turn the tool, so the three turning joints alone must turn it as the target has
it: a spherical triangle of their axes' directions, which closes in two ways or none. With the turns
known, each slide moves the tool along a known direction: three linear equations for three slides.
So there are two solutions at most, unless two axes line up or the directions lie in one plane.

Source: the triangle as in triple.py; the rest is linear algebra.
Not covered: slides that lie in one plane in every posture; they reach no volume.
"""

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.candidates import (
    found_of,
    in_metres,
    land_candidates,
    nearest_motions,
)
from kinematics.inverse.found import TILT, Found
from kinematics.inverse.screws import Screws
from kinematics.inverse.slide_equation import turned
from kinematics.inverse.tolerances import CLOSES, EDGE, MAYBE_FREE, NEIGHBOURS_PARALLEL
from kinematics.inverse.triple import meeting_triple, split_meeting
from kinematics.number_checks import FloatArray
from kinematics.transforms import inverse

ROWS = 6

_FLAT = 1e-12
"""Determinant of the directions of slides below which the equations are left unsolved: rounding of
directions alone makes as much of three that lie in one plane."""


@dataclass(frozen=True)
class ThreeSlidesGeometry:
    """What the solver rests on, for people."""

    rows: tuple[int, ...]

    @property
    def say(self) -> str:
        """'rows 1, 2 and 3 slide: the other axes turn the tool, closed form'."""
        one, two, three = self.rows
        return f"rows {one}, {two} and {three} slide: the other axes turn the tool, closed form"


@dataclass(frozen=True, eq=False)
class ThreeSlides:
    """A solver for six rows of which three slide; ``triple`` : of the turning axes' directions."""

    screws: Screws
    triple: FloatArray
    proof: str = "closed-form"

    @cached_property
    def geometry(self) -> ThreeSlidesGeometry:
        """Which rows slide."""
        return ThreeSlidesGeometry(tuple((np.flatnonzero(self.screws.prismatic) + 1).tolist()))

    def solve(self, targets: FloatArray) -> Found:
        """Return all motions for targets (m, 4, 4), the tool in base, metres; travel ignored."""
        scaled = np.ascontiguousarray(self.screws.scaled(targets))
        moved = scaled @ inverse(self.screws.tool_at_zero)
        turns, of, excess = self._turns(moved)
        motions, flatness = self._with_slides(turns, moved[of])
        landed = land_candidates(self.screws, scaled, motions, of.astype(np.int64))
        is_open = (excess > 0.0) & (excess <= EDGE) | self._in_line(moved)
        is_open[of[flatness < MAYBE_FREE]] = True
        found = found_of(self.screws, landed, is_open)
        short = (landed.counts() == 0) & (excess > 0.0)
        found.stage[short], found.shortfall[short] = TILT, excess[short]
        return found

    def nearest(self, targets: FloatArray) -> FloatArray:
        """Return row motions (m, 6), rad and metres, that bring the tool as near as they can."""
        scaled = np.ascontiguousarray(self.screws.scaled(targets))
        return in_metres(self.screws, nearest_motions(self.screws, scaled))

    def _turns(self, moved: FloatArray) -> tuple[FloatArray, NDArray[np.intp], FloatArray]:
        """Return both turns (k, 3) of each target, of which it is (k,), and what lacks, (m,)."""
        split, excess = np.zeros((len(moved), 2, 3)), np.empty(len(moved))
        ways = np.zeros(len(moved), np.int64)
        for index, pose in enumerate(np.ascontiguousarray(moved)):
            ways[index], excess[index] = split_meeting(self.triple, pose, CLOSES, split[index])
        return split[ways > 0].reshape(-1, 3), np.flatnonzero(ways).repeat(2), excess

    def _in_line(self, moved: FloatArray) -> NDArray[np.bool_]:
        """Tell of which targets (m, 4, 4) the first and the third turning axis line up, (m,)."""
        third = moved[:, :3, :3] @ self.triple[2]
        near: NDArray[np.bool_] = (
            np.linalg.norm(np.cross(self.triple[0], third), axis=1) < MAYBE_FREE
        )
        return near

    def _with_slides(self, turns: FloatArray, moved: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return motions (k, 6) of turns, for their poses, and how far slides are from flat."""
        screws, motions = self.screws, np.zeros((len(turns), ROWS))
        motions[:, ~screws.prismatic] = turns
        turn = np.tile(np.eye(3), (len(turns), 1, 1))
        place, along = np.zeros((len(turns), 3)), []
        # From the base outwards: how a direction is turned so far, and where the origin goes.
        for row in range(ROWS):
            if screws.prismatic[row]:
                along.append(turn @ screws.axis[row])
                continue
            angle, line = motions[:, row], turn @ screws.axis[row]
            fixed = turn @ screws.point[row] + place
            cosine, sine = np.cos(angle), np.sin(angle)
            place = fixed + turned(line, cosine, sine, place - fixed)
            columns = np.swapaxes(turn, 1, 2)
            columns = turned(line[:, None], cosine[:, None], sine[:, None], columns)
            turn = np.swapaxes(columns, 1, 2)
        directions = np.stack(along, axis=-1)
        flatness: FloatArray = np.abs(np.linalg.det(directions))
        sound = flatness > _FLAT
        lacking = (moved[:, :3, 3] - place)[sound, :, None]
        slid = np.zeros((len(turns), 3))
        slid[sound] = np.linalg.solve(directions[sound], lacking)[..., 0]
        motions[:, screws.prismatic] = slid
        return motions, flatness


def three_slides_of(screws: Screws) -> ThreeSlides | None:
    """Return the solver for an arm of six rows of which three slide; None for any other arm.

    And for one whose neighbouring turning axes point one way, which cannot turn the tool at will.

    Examples
    --------
    >>> axes = np.eye(3)[[0, 2, 1, 1, 2, 0]]
    >>> slides = np.array([True, False, True, False, True, False])
    >>> solver = three_slides_of(Screws(axes, np.zeros((6, 3)), slides, np.eye(4), 1.0))
    >>> solver.geometry.say
    'rows 1, 3 and 5 slide: the other axes turn the tool, closed form'
    >>> target = np.eye(4)[None].copy()
    >>> target[0, :3, 3] = 0.3, 0.2, 0.1
    >>> solver.solve(target).motions[0].round(9) + 0.0
    array([0.3, 0. , 0.2, 0. , 0.1, 0. ])
    """
    if screws.rows != ROWS or np.count_nonzero(screws.prismatic) != 3:
        return None
    axes = screws.axis[~screws.prismatic]
    if np.linalg.norm(np.cross(axes[:-1], axes[1:]), axis=1).min() < NEIGHBOURS_PARALLEL:
        return None
    solver = ThreeSlides(screws, meeting_triple(axes))
    probes = 2.0 * np.pi * np.linspace(0.1, 0.9, 7)[:, None] * np.array([1.0, 2.7, 5.3])
    _, flatness = solver._with_slides(probes, np.tile(np.eye(4), (len(probes), 1, 1)))
    return solver if flatness.max() > MAYBE_FREE else None
