"""Arms of up to three joints, asked for a place alone: all their motions in closed form.

Three joints for three coordinates are the regional problem as it stands, read from the base or from
the tool, whichever is easier. Two joints reach a surface, so they are lent a slide; along each of
the three directions of the base, so that one of them leads well through the surface wherever the
place is. One joint reaches a circle or a line, where the nearest place is soon found.

Source: Pieper 1968, and regional.py for the kinds he left out.
Not covered: three joints that reach a surface only (a search finds some of their motions); where
the tool points.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from kinematics.arm import Arm
from kinematics.inverse.found import HEIGHT, NO_STAGE, POSITION, Found
from kinematics.inverse.regional_nearest import nearest_regional
from kinematics.inverse.regional_pairs import PAIR, QA, QB, write_pair
from kinematics.inverse.regional_places import Ways, solve_places
from kinematics.inverse.regional_rows import MOST_ROWS_FOUND
from kinematics.inverse.screws import Screws, screws_of
from kinematics.inverse.tolerances import EXACT_AXES, SEARCH_ACCEPTS, SEARCH_RELAXED
from kinematics.table import FloatArray
from kinematics.tolerances import GENERIC_RANK

_USUAL = 5
"""Rows of a table for each place: most have up to four motions."""


@dataclass(frozen=True)
class RegionalGeometry:
    """What a regional arm's answers rest on, in words."""

    say: str


@dataclass(frozen=True, eq=False)
class RegionalArm:
    """A solver for the place of the tool's point, for an arm of one to three rows.

    Attributes
    ----------
    screws : the arm. ways : how to ask. geometry : in words.
    normal : (3,), of the plane that the point stays in; zeros where it leaves every plane.
    slack : share of the length by which motions may miss a place and still be told.
    """

    screws: Screws
    ways: Ways
    geometry: RegionalGeometry
    normal: FloatArray
    proof: str = "closed-form"
    slack: float = SEARCH_ACCEPTS

    def solve(self, targets: FloatArray) -> Found:
        """Return all motions for targets (m, 4, 4), of which the last column alone is read.

        Where no motion meets a place exactly, those are returned that come within a thousandth of
        the length, with their errors.
        """
        places = self._places(targets)
        motions, of, errors, flags = self._all(places, self.slack)
        left = np.flatnonzero(np.bincount(of, minlength=len(places)) == 0)
        if len(left):
            more, more_of, more_errors, _ = self._all(places[left], SEARCH_RELAXED)
            of = np.concatenate([of, left[more_of]])
            order = np.argsort(of, kind="stable")
            of = of[order]
            motions = np.concatenate([motions, more])[order]
            errors = np.concatenate([errors, more_errors])[order]
        none = np.bincount(of, minlength=len(places)) == 0
        stage, shortfall, nearest = self._of_a_no(places, none)
        return Found(
            motions=self._in_metres(motions),
            target=of,
            position_error=errors * self.screws.length,
            angle_error=np.zeros(len(of)),
            open=flags != 0,
            stage=stage,
            shortfall=shortfall,
            nearest=nearest,
        )

    def nearest(self, targets: FloatArray) -> FloatArray:
        """Return row motions (m, rows), rad and metres, that bring the point nearest to targets."""
        return self._in_metres(self._nearest(self._places(targets))[0])

    def _places(self, targets: FloatArray) -> FloatArray:
        places: FloatArray = self.screws.scaled(targets)[:, :, 3].copy()
        return places

    def _in_metres(self, motions: FloatArray) -> FloatArray:
        rows = self.screws.rows
        return motions[:, :rows] * np.where(self.screws.prismatic, self.screws.length, 1.0)

    def _all(
        self, places: FloatArray, slack: float
    ) -> tuple[FloatArray, NDArray[np.intp], FloatArray, NDArray[np.int64]]:
        if not len(self.ways.rows):
            motions, misses = self._nearest(places)
            of = np.flatnonzero(misses <= slack)
            return motions[of], of, misses[of], np.zeros(len(places), np.int64)
        flags, begin = np.zeros(len(places), np.int64), 0
        parts: list[tuple[FloatArray, NDArray[np.intp], FloatArray]] = []
        while begin < len(places) or not parts:
            room = _USUAL * (len(places) - begin) + MOST_ROWS_FOUND * len(self.ways.rows)
            motions, errors, of = np.empty((room, 3)), np.empty(room), np.empty(room, np.int64)
            begin, rows = solve_places(
                self.ways, places, begin, slack, slack, motions, of, errors, flags
            )
            parts.append((motions[:rows], of[:rows], errors[:rows]))
        motions, of, errors = (np.concatenate(part) for part in zip(*parts, strict=True))
        return motions, of, errors, flags

    def _nearest(self, places: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return motions (m, 3) and the miss they leave (m,), over the length."""
        if self.screws.rows == 1:
            return self._nearest_of_one(places[:, :3])
        ways = self.ways
        motions, misses = np.zeros((len(places), 3)), np.zeros(len(places))
        for index, place in enumerate(places):
            misses[index] = nearest_regional(
                ways.slides, ways.axes, ways.points, False, ways.tip, place, motions[index]
            )
        return motions, misses

    def _nearest_of_one(self, places: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return the same of a single joint, however far its slide has to go."""
        axis, point, tip = self.screws.axis[0], self.screws.point[0], self.ways.tip[:3]
        motions = np.zeros((len(places), 3))
        if self.screws.prismatic[0]:
            motions[:, 0] = (places - tip) @ axis
            at = tip + motions[:, :1] * axis
        else:
            own, asked = tip - point, places - point
            across = np.cross(axis, own)
            motions[:, 0] = np.arctan2(asked @ across, -(asked @ np.cross(axis, across)))
            sine, less = np.sin(motions[:, :1]), 1.0 - np.cos(motions[:, :1])
            at = tip + sine * across + less * np.cross(axis, across)
        return motions, np.linalg.norm(places - at, axis=1)

    def _of_a_no(
        self, places: FloatArray, none: NDArray[np.bool_]
    ) -> tuple[NDArray[np.int64], FloatArray, FloatArray]:
        """Return stage, shortfall (m) and nearest motions of places without any."""
        stage, shortfall = np.full(len(places), NO_STAGE), np.zeros(len(places))
        nearest = np.zeros((len(places), self.screws.rows))
        left = np.flatnonzero(none)
        if len(left):
            motions, misses = self._nearest(places[left])
            nearest[left] = self._in_metres(motions)
            height = np.abs((places[left] - self.ways.tip)[:, :3] @ self.normal)
            lifted = height > SEARCH_RELAXED
            stage[left] = np.where(lifted, HEIGHT, POSITION)
            shortfall[left] = np.where(lifted, height, misses) * self.screws.length
        return stage, shortfall, nearest


def regional_arm_of(arm: Arm, tool_in_flange: FloatArray) -> RegionalArm | None:
    """Return the solver for the place of an arm's tool, or None where the joints do not suit it.

    They suit it where there are one to three, and each moves the point its own way.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = (Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0),) * 2
    >>> solver = regional_arm_of(Arm("planar", Table(Convention.STANDARD, rows)), np.eye(4))
    >>> target = np.eye(4)[None]
    >>> target[0, :2, 3] = 0.4, 0.4
    >>> np.degrees(solver.solve(target).motions).round(9) + 0.0
    array([[ 90., -90.],
           [  0.,  90.]])
    """
    screws = screws_of(arm, tool_in_flange)
    return None if arm.joint_count < screws.rows else regional_of(screws)


def regional_of(screws: Screws) -> RegionalArm | None:
    """Return the solver for the place of the tool's point of rows that move on their own.

    None where there are not one to three, or not each moves the point its own way.
    """
    if not 1 <= screws.rows <= 3:
        return None
    slides, axes, points, tip = _with_idle_joints(screws)
    columns = _columns(slides, axes, points, tip)
    values = np.linalg.svd(columns, compute_uv=False)
    if (values > GENERIC_RANK).sum(axis=1).max() < screws.rows:
        return None
    normal = np.zeros(3)
    left, spread, _ = np.linalg.svd(np.hstack(list(columns)))
    if spread[2] < EXACT_AXES:
        normal = left[:, 2]
    if screws.rows == 3:
        ways = [_easier(slides, axes, points, np.arange(3))]
    elif screws.rows == 2:
        ways = _with_a_slide(slides, axes, points, tip)
    else:
        ways = []
    kinds = ["sliding" if slide else "turning" for slide in screws.prismatic]
    numbers = ["joint 1", "joints 1 and 2", "joints 1, 2 and 3"][screws.rows - 1]
    say = f"{numbers} ({', '.join(kinds)}) bring the tool's point to its place in closed form"
    return RegionalArm(
        screws, _stacked(slides, axes, points, tip, ways), RegionalGeometry(say), normal
    )


_Way = tuple[NDArray[np.bool_], FloatArray, FloatArray, FloatArray, NDArray[np.int64], bool]


def _with_idle_joints(
    screws: Screws,
) -> tuple[NDArray[np.bool_], FloatArray, FloatArray, FloatArray]:
    """Return an arm's joints, made three by such as turn about the tip and move nothing."""
    missing = 3 - screws.rows
    tip = np.append(screws.tool_at_zero[:3, 3], 1.0)
    slides = np.append(screws.prismatic, np.zeros(missing, dtype=bool))
    axes = np.vstack([screws.axis, np.tile([0.0, 0.0, 1.0], (missing, 1))])
    points = np.vstack([screws.point, np.tile(tip[:3], (missing, 1))])
    return slides, axes, points, tip


def _columns(
    slides: NDArray[np.bool_], axes: FloatArray, points: FloatArray, tip: FloatArray
) -> FloatArray:
    """Return how three joints move the tip in some postures of the last two, (postures, 3, 3)."""
    found = []
    for posture in range(6):
        motions = np.sin(np.arange(1.0, 4.0) * (1.0 + 0.7 * posture)) * 2.0
        at, columns = tip[:3].copy(), np.zeros((3, 3))
        for joint in (2, 1, 0):
            axis, point = axes[joint], points[joint]
            columns[joint] = axis if slides[joint] else np.cross(axis, at - point)
            if slides[joint]:
                at = at + motions[joint] * axis
                continue
            for column in columns[joint + 1 :]:
                column[:] = _turned(axis, motions[joint], column)
            columns[joint] = _turned(axis, motions[joint], columns[joint])
            at = point + _turned(axis, motions[joint], at - point)
        found.append(columns.T)
    return np.array(found)


def _turned(axis: FloatArray, angle: float, vector: FloatArray) -> FloatArray:
    across = np.cross(axis, vector)
    turned: FloatArray = (
        vector + np.sin(angle) * across + (1.0 - np.cos(angle)) * np.cross(axis, across)
    )
    return turned


def _easier(
    slides: NDArray[np.bool_], axes: FloatArray, points: FloatArray, rows: NDArray[np.int64]
) -> _Way:
    """Return the easier of both ways to ask: from the base, or from the tool."""
    ways = []
    for backwards in (False, True):
        order = slice(None, None, -1 if backwards else 1)
        pair = np.zeros(PAIR)
        of_way = slides[order].copy(), axes[order].copy(), points[order].copy()
        write_pair(*of_way, pair)
        special = min(abs(pair[QA]), abs(pair[QB])) <= EXACT_AXES
        # A slide as joint c next to two turns would be turned round for every place.
        cost = (1 if special else 2) + (2 if of_way[0][2] else 0)
        ways.append((cost, (*of_way, pair, rows[order].copy(), backwards)))
    return min(ways, key=lambda way: way[0])[1]


def _with_a_slide(
    slides: NDArray[np.bool_], axes: FloatArray, points: FloatArray, tip: FloatArray
) -> list[_Way]:
    """Return ways to ask about two joints behind a slide, along directions that add to them."""
    ways = []
    for direction in np.eye(3):
        with_slide = (
            np.append(True, slides[:2]),
            np.vstack([direction, axes[:2]]),
            np.vstack([tip[:3], points[:2]]),
        )
        values = np.linalg.svd(_columns(*with_slide, tip), compute_uv=False)
        if values[:, 2].max() > GENERIC_RANK:
            ways.append(_easier(*with_slide, np.array([-1, 0, 1])))
    return ways


def _stacked(
    slides: NDArray[np.bool_],
    axes: FloatArray,
    points: FloatArray,
    tip: FloatArray,
    ways: list[_Way],
) -> Ways:
    """Return an arm and its ways as the kernel takes them."""
    count = len(ways)
    columns = list(zip(*ways, strict=True)) or [()] * 6
    return Ways(
        slides,
        axes,
        points,
        tip,
        np.array(columns[0], dtype=bool).reshape(count, 3),
        np.array(columns[1], dtype=float).reshape(count, 3, 3),
        np.array(columns[2], dtype=float).reshape(count, 3, 3),
        np.array(columns[3], dtype=float).reshape(count, PAIR),
        np.array(columns[4], dtype=np.int64).reshape(count, 3),
        np.array(columns[5], dtype=bool),
    )
