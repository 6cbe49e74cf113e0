"""What of an arm can stand on one side or the other, read off its axes at zero motion.

A feature is a sign that vanishes where two ways to a target meet, and the two words for it:

- ahead: the arm reaches over its first turning axis or not. The part of the wrist's place along
  the next axis cannot be changed by it, so the two ways differ in the part across both axes.
- elbow: two parallel axes and the place they reach for make a triangle that folds either way;
  above or below where it stands upright, left or right where it lies flat.
- slide, swing: the last of three rows reaches forwards or backwards.
- wrist: axis 5 stands on one side or the other of the plane of axes 4 and 6.

Source: none, plain geometry. Not covered: arms whose first rows are askew, where four ways to a
place are no two choices; they are given the same words, and numbers (branches.py).
"""

from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.screws import Screws
from kinematics.kernels.branch_signs import ABOVE, AHEAD, SIDE, SPREAD
from kinematics.table import FloatArray
from kinematics.tolerances import AXES_MEET, AXES_PARALLEL

BY_OFFSET, BY_TRAVEL = -1, -2
"""What settles which side is which: where the next axis is offset to, else the arm in mid travel;
or that alone."""


@dataclass
class Parts:
    """Features of an arm, as kernels/branch_signs.py takes them, and their words.

    Attributes
    ----------
    places : each x, y, z, 1 or 0, and how many rows move it.
    features : each the kind, and five indices of places.
    words : of each feature, for its positive and its negative sign.
    by_posture : of each feature, the row that at +90 deg makes it positive, or BY_OFFSET or
        BY_TRAVEL; None where geometry alone says which side is which.
    """

    places: list[list[float]] = field(default_factory=list)
    features: list[list[int]] = field(default_factory=list)
    words: list[tuple[str, str]] = field(default_factory=list)
    by_posture: list[int | None] = field(default_factory=list)

    def point(self, place: FloatArray, after: int) -> int:
        """Note a point fixed after so many rows; return its index."""
        self.places.append([*place.tolist(), 1.0, after])
        return len(self.places) - 1

    def direction(self, along: FloatArray, after: int) -> int:
        """Note a direction fixed after so many rows; return its index."""
        self.places.append([*(along / np.linalg.norm(along)).tolist(), 0.0, after])
        return len(self.places) - 1

    def for_kernel(self) -> tuple[FloatArray, NDArray[np.int64]]:
        """Return places (p, 5), those after fewer rows first, and features (f, 6)."""
        places = np.array(self.places).reshape(-1, 5)
        order = np.argsort(places[:, 4], kind="stable")
        now_at = np.argsort(order)
        features = np.array(self.features, dtype=np.int64).reshape(-1, 6)
        if len(features):
            features[:, 1:] = now_at[features[:, 1:]]
        return places[order], features

    def feature(
        self, kind: int, places: list[int], words: tuple[str, str], quarter: int | None = None
    ) -> None:
        """Note a feature; ``quarter`` as an item of ``by_posture``."""
        self.features.append([kind, *places, *[0] * (5 - len(places))])
        self.words.append(words)
        self.by_posture.append(quarter)


def parts_of(screws: Screws, up: FloatArray) -> Parts:
    """Return the features of an arm; ``up`` (3,), the world's up in the base.

    Examples
    --------
    >>> lines = np.array([[0.0, 0, 1]] * 2), np.array([[0.0, 0, 0], [0.5, 0, 0]])
    >>> tool = np.eye(4)
    >>> tool[0, 3] = 1.0
    >>> parts_of(Screws(*lines, np.array([False, False]), tool, 1.0), np.eye(3)[2]).words[0]
    ('elbow to the left, seen from above', 'elbow to the right, seen from above')
    """
    parts = Parts()
    turning = [row for row in range(screws.rows) if not screws.prismatic[row]]
    if len(turning) >= 2 and all(_parallel(screws, turning[0], row) for row in turning[1:]):
        _flat_elbow(parts, screws, up, turning[0], turning[1], _third_place(parts, screws, turning))
        return parts
    reach = _what_is_reached_for(parts, screws, turning)
    outer = [row for row in turning if row < reach.rows]
    if outer:
        _shoulder(parts, screws, outer, reach)
        _elbow(parts, screws, up, outer, reach)
        _last_row(parts, screws, outer, reach)
    _wrist(parts, screws, turning)
    return parts


@dataclass(frozen=True)
class _Reached:
    """The place the first rows bring to its target: its name, its indices, and those rows."""

    name: str
    shoulder: int
    elbow: int
    rows: int


def _parallel(screws: Screws, row: int, other: int) -> bool:
    across = np.linalg.norm(np.cross(screws.axis[row], screws.axis[other]))
    return bool(across < AXES_PARALLEL)


def meeting_point(screws: Screws, last: int) -> FloatArray | None:
    """Return the point, over the length, in which the last axes meet, (3,); None where none is.

    All of them must turn, and there must be at least three rows before them.

    Examples
    --------
    >>> axes, points = np.eye(3)[[2, 0, 2, 0, 1, 0]], np.zeros((6, 3))
    >>> meeting_point(Screws(axes, points + 0.5, np.zeros(6, bool), np.eye(4), 1.0), 3)
    array([0.5, 0.5, 0.5])
    """
    if screws.rows < last + 3 or screws.prismatic[-last:].any():
        return None
    rows = list(range(screws.rows - last, screws.rows))
    if any(_parallel(screws, row, row + 1) for row in rows[:-1]):
        return None
    projections = [np.eye(3) - np.outer(h, h) for h in screws.axis[rows]]
    matrix = np.sum(projections, axis=0)
    sides = [across @ p for across, p in zip(projections, screws.point[rows], strict=True)]
    point: FloatArray = np.linalg.solve(matrix, np.sum(sides, axis=0))
    away = np.cross(point - screws.point[rows], screws.axis[rows])
    return point if np.linalg.norm(away, axis=1).max() < AXES_MEET else None


def _what_is_reached_for(parts: Parts, screws: Screws, turning: list[int]) -> _Reached:
    rows, after = screws.rows, _parallel_run(screws, turning)
    for wrist in (3, 2):
        centre = meeting_point(screws, wrist)
        if centre is not None and (wrist == 3 or after is None):
            index = parts.point(centre, rows - wrist)
            return _Reached("wrist centre", index, index, rows - wrist)
    tool = parts.point(screws.tool_at_zero[:3, 3], rows)
    if after is None:
        return _Reached("tool", tool, tool, rows)
    elbow, last = parts.point(screws.point[after], after), rows - 1
    if rows - after >= 3 and {last, last - 1} <= set(turning):
        place = _foot(screws, last, last - 1)
    elif last > after and last in turning and not _parallel(screws, last, after):
        # Any point of the last axis keeps its place in the tool, whatever the last joint does.
        along = screws.axis[last] @ (screws.tool_at_zero[:3, 3] - screws.point[last])
        place = screws.point[last] + along * screws.axis[last]
    else:
        return _Reached("tool", tool, elbow, after)
    return _Reached("wrist", parts.point(place, last), elbow, after)


def _parallel_run(screws: Screws, turning: list[int]) -> int | None:
    """Return the last of three neighbouring parallel rows after the first row; None for none."""
    for row in turning:
        run = [row, row + 1, row + 2]
        if row and set(run) <= set(turning) and all(_parallel(screws, row, r) for r in run[1:]):
            return row + 2
    return None


def _foot(screws: Screws, row: int, other: int) -> FloatArray:
    """Return the point of one row's axis that is nearest to another's."""
    h, across = screws.axis[row], np.cross(screws.axis[row], screws.axis[other])
    away = screws.point[other] - screws.point[row]
    square = float(across @ across)
    along = float(np.cross(away, screws.axis[other]) @ across) / square if square else 0.0
    foot: FloatArray = screws.point[row] + along * h
    return foot


def _third_place(parts: Parts, screws: Screws, turning: list[int]) -> int:
    if len(turning) > 2:
        return parts.point(screws.point[turning[2]], turning[2])
    return parts.point(screws.tool_at_zero[:3, 3], screws.rows)


def _flat_elbow(
    parts: Parts, screws: Screws, up: FloatArray, first: int, second: int, reached: int
) -> None:
    rise = float(screws.axis[first] @ up)
    upright = abs(rise) > 0.5
    seen = "seen from above" if upright else f"seen against axis {first + 1}"
    from_tip = parts.direction(screws.axis[first] * (-1.0 if upright and rise < 0 else 1.0), first)
    places = [
        parts.point(screws.point[first], first),
        parts.point(screws.point[second], second),
        reached,
        from_tip,
    ]
    words = f"elbow to the left, {seen}", f"elbow to the right, {seen}"
    parts.feature(SIDE, places, words)


def _shoulder(parts: Parts, screws: Screws, outer: list[int], reached: _Reached) -> None:
    first = outer[0]
    kept = [screws.axis[row] for row in outer[1:] if not _parallel(screws, first, row)]
    if not kept:
        # Slides leave a place's part across axis 1 and themselves as it is.
        later = range(first + 1, reached.rows)
        slides = [r for r in later if screws.prismatic[r] and not _parallel(screws, first, r)]
        if len(slides) != 1:
            return
        kept = [np.cross(screws.axis[first], screws.axis[slides[0]])]
    ahead = np.cross(kept[0], screws.axis[first])
    places = [
        parts.point(screws.point[first], first),
        0,
        reached.shoulder,
        parts.direction(ahead, first + 1),
    ]
    words = f"ahead of axis {first + 1}", f"behind axis {first + 1}"
    words = f"{reached.name} {words[0]}", f"{reached.name} {words[1]}"
    parts.feature(AHEAD, places, words, BY_OFFSET)


def _elbow(
    parts: Parts, screws: Screws, up: FloatArray, outer: list[int], reached: _Reached
) -> None:
    folds = [*outer, reached.rows] if reached.elbow != reached.shoulder else outer
    if len(folds) < 2 or (len(folds) == 2 and not _parallel(screws, *folds)):
        return
    if _parallel(screws, folds[0], folds[1]):
        _flat_elbow(parts, screws, up, folds[0], folds[1], reached.elbow)
        return
    second, third = folds[1], folds[2]
    rise = float(screws.axis[folds[0]] @ up)
    words = ("elbow above", "elbow below")
    if abs(rise) <= 0.5:
        axis = f"along axis {folds[0] + 1}"
        words = f"elbow out {axis}", f"elbow back {axis}"
    # In the plane of the triangle: what lies along the axes neither folds nor unfolds.
    along = screws.axis[second]
    level = parts.places[reached.elbow][:3] @ along
    places = [
        parts.point(screws.point[row] + (level - screws.point[row] @ along) * along, row)
        for row in (second, third)
    ]
    places += [
        reached.elbow,
        parts.direction(screws.axis[folds[0]] * (-1.0 if rise < -0.5 else 1.0), 0),
        parts.direction(screws.axis[second], second),
    ]
    parts.feature(ABOVE, places, words)


def _last_row(parts: Parts, screws: Screws, outer: list[int], reached: _Reached) -> None:
    """Note how the last of the rows that reach for a place reaches: run out, or swung."""
    last = reached.rows - 1
    if reached.elbow != reached.shoulder or last < 2:
        return
    if screws.prismatic[last]:
        if len(outer) == 2 and not _parallel(screws, *outer):
            places = [
                parts.point(screws.point[outer[1]], outer[1]),
                0,
                reached.elbow,
                parts.direction(screws.axis[last], last),
            ]
            words = f"slide {last + 1} run out forwards", f"slide {last + 1} run out backwards"
            parts.feature(AHEAD, places, words)
        return
    before = screws.axis[last - 1]
    if screws.prismatic[last - 1] and screws.prismatic[last - 2]:
        before = np.cross(screws.axis[last - 2], before)
    if len(outer) >= 2 and not _parallel(screws, outer[0], outer[1]) and len(outer) == last + 1:
        return  # the elbow has told it
    across = np.cross(before, screws.axis[last])
    if np.linalg.norm(across) > AXES_PARALLEL:
        places = [
            parts.point(screws.point[last], last),
            0,
            reached.elbow,
            parts.direction(across, last),
        ]
        words = f"swung out about axis {last + 1}", f"swung back about axis {last + 1}"
        parts.feature(AHEAD, places, words, BY_TRAVEL)


def _wrist(parts: Parts, screws: Screws, turning: list[int]) -> None:
    rows = screws.rows
    if rows < 5 or not {rows - 1, rows - 2} <= set(turning):
        return
    if rows == 5 and _parallel_run(screws, turning) is not None:
        return  # no axis is left that the wrist could turn over about
    middle = rows - 2 if rows > 5 and rows - 3 in turning else rows - 1
    last = screws.axis[rows - 1] if middle < rows - 1 else screws.tool_at_zero[:3, 2]
    if np.linalg.norm(np.cross(screws.axis[middle], last)) < AXES_PARALLEL or (
        _parallel(screws, middle - 1, middle)
    ):
        return
    places = [
        parts.direction(screws.axis[middle], middle),
        parts.direction(screws.axis[middle - 1], middle - 1),
        parts.direction(last, middle + 1),
    ]
    words = "wrist not turned over", "wrist turned over"
    parts.feature(SPREAD, places, words, middle)
