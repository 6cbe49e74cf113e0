"""Every posture of arms that turn about one direction, target after target: the compiled part.

Idea: a target's turn is split into the part about the arm's direction, which the joints make, and
the tilt, which they cannot. The plane mechanism or the level palletiser then gives the postures,
the same ones for every target that differs by its tilt alone.

Source: swing and twist of a rotation by its trace; the mechanisms have theirs in planar.py and
level_wrist.py. Not covered: which arms these are (kinematics/inverse/four_axes.py), and what the
postures are worth (kinematics/inverse/settling.py).
"""

import math
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.descent_arrays import Lines
from kinematics.inverse.level_wrist import MOST_LEVEL, level_postures
from kinematics.inverse.planar import MOST, ComplexArray, three_joints
from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray


class Across(NamedTuple):
    """A slide along the turning axes and three joints across them, lengths as shares.

    Attributes
    ----------
    frame : (3, 3), rows: two directions across the axes, and theirs.
    lift : row of the slide along the axes; rise : 1, or -1 where it counts against them.
    rows : (3,), the other rows; slides, places : (3,), as ``planar.three_joints`` takes them.
    signs : (3,), whether a row turns about the axes' direction or against it.
    """

    frame: FloatArray
    lift: int
    rise: float
    rows: NDArray[np.int64]
    slides: NDArray[np.bool_]
    places: ComplexArray
    signs: FloatArray


class Level(NamedTuple):
    """A waist, three axes across it whose turns cancel, and a last axis along it.

    Attributes
    ----------
    frame : (3, 3), rows: ahead, aside and up, at zero turn of the waist.
    waist : (3,), a point on its axis; tip : (3,), the point of the last axis, at zero motion.
    shoulder, near, far, aside : as ``level_wrist.level_postures`` takes them.
    signs : (5,), whether a row turns about its direction in ``frame`` or against it.
    """

    frame: FloatArray
    waist: FloatArray
    tip: FloatArray
    shoulder: complex
    near: complex
    far: complex
    aside: float
    signs: FloatArray


class Asked(NamedTuple):
    """What is asked of each posture beside the target.

    Attributes
    ----------
    slack, samples : as ``planar.three_joints`` takes them.
    """

    slack: float
    samples: FloatArray


class Written(NamedTuple):
    """What is written: postures one under the other, and what is said of each target.

    ``motions`` (k, rows), ``target`` (k,); of the m targets ``shortfall`` (m, 2) reach and tilt,
    ``free`` (m,).
    """

    motions: FloatArray
    target: NDArray[np.int64]
    shortfall: FloatArray
    free: NDArray[np.bool_]


@compiled
def parallel(
    lines: Lines,
    across: Across,
    asked: Asked,
    goals: FloatArray,
    begin: int,
    written: Written,
) -> tuple[int, int]:
    """Write postures for targets from ``begin`` on while there is room for another target's.

    Returns
    -------
    next, count : the first target not answered, and how many postures were written.
    """
    found, count = np.zeros((MOST, 3)), int(np.int64(0))
    for at in range(begin, goals.shape[0]):
        if count + MOST > written.motions.shape[0]:
            return at, count
        goal = goals[at]
        turn, tilt = twist_and_tilt(lines.tool_at_zero, goal, lines.turn)
        start, end = _in_frame(across.frame, lines.tool_at_zero), _in_frame(across.frame, goal)
        raised = (_along(lines, goal) - _along(lines, lines.tool_at_zero)) / across.rise
        rotation = complex(math.cos(turn), math.sin(turn))
        shift = end - rotation * start
        ways, short, free = three_joints(
            across.slides, across.places, turn, shift, asked.slack, asked.samples, found
        )
        for way in range(ways):
            written.target[count], posture = at, written.motions[count]
            posture[across.lift] = raised
            for k in range(3):
                posture[across.rows[k]] = across.signs[k] * found[way, k]
            count += 1
        written.shortfall[at, 0], written.shortfall[at, 1] = short, tilt
        written.free[at] = free
    return goals.shape[0], count


@compiled
def palletiser(
    lines: Lines,
    level: Level,
    asked: Asked,
    goals: FloatArray,
    begin: int,
    written: Written,
) -> tuple[int, int]:
    """Do for arms with a level wrist what ``parallel`` does."""
    place, count = np.empty(3), int(np.int64(0))
    links, found = np.zeros((MOST, 3)), np.zeros((MOST_LEVEL, 3))
    signs = level.signs
    for at in range(begin, goals.shape[0]):
        if count + MOST_LEVEL > written.motions.shape[0]:
            return at, count
        goal = goals[at]
        turn, tilt = twist_and_tilt(lines.tool_at_zero, goal, lines.turn)
        _tip_at(lines, level, goal, turn, place)
        ways, short, free = level_postures(
            level.shoulder,
            level.near,
            level.far,
            level.aside,
            place,
            asked.slack,
            asked.samples,
            links,
            found,
        )
        for way in range(ways):
            waist, first, second = found[way, 0], found[way, 1], found[way, 2]
            written.target[count], posture = at, written.motions[count]
            posture[0] = signs[0] * waist
            posture[1] = signs[1] * first
            posture[2] = signs[2] * second
            posture[3] = -signs[3] * (first + second)
            posture[4] = signs[4] * (turn - waist)
            count += 1
        written.shortfall[at, 0], written.shortfall[at, 1] = short, tilt
        written.free[at] = free
    return goals.shape[0], count


@compiled
def twist_and_tilt(
    tool_at_zero: FloatArray, target: FloatArray, line: FloatArray
) -> tuple[float, float]:
    """Return the turn about a line that comes nearest to a target's, and the angle it leaves.

    Examples
    --------
    >>> quarter = np.eye(4)
    >>> quarter[:2, :2] = [[0, -1], [1, 0]]
    >>> twist_and_tilt(np.eye(4), quarter, np.array([0.0, 0.0, 1.0]))
    (1.5707963267948966, 0.0)
    """
    trace, about, kept = 0.0, 0.0, 0.0
    x, y, z = 0.0, 0.0, 0.0
    for row in range(3):
        moved = 0.0
        for column in range(3):
            entry = 0.0
            for k in range(3):
                entry += target[row, k] * tool_at_zero[column, k]
            moved += entry * line[column]
            if row == column:
                trace += entry
            else:
                third = 3 - row - column
                about += line[third] * (entry if (row - column) % 3 == 1 else -entry)
        kept += line[row] * moved
        x, y, z = (moved, y, z) if row == 0 else ((x, moved, z) if row == 1 else (x, y, moved))
    across_x, across_y = line[1] * z - line[2] * y, line[2] * x - line[0] * z
    across_z = line[0] * y - line[1] * x
    across = math.sqrt(across_x * across_x + across_y * across_y + across_z * across_z)
    return math.atan2(about, trace - kept), math.atan2(across, kept)


@compiled
def _in_frame(frame: FloatArray, pose: FloatArray) -> complex:
    """Return the point of a pose across the axes."""
    x, y = 0.0, 0.0
    for k in range(3):
        x += frame[0, k] * pose[k, 3]
        y += frame[1, k] * pose[k, 3]
    return complex(x, y)


@compiled
def _along(lines: Lines, pose: FloatArray) -> float:
    """Return the point of a pose along the axes."""
    along = 0.0
    for k in range(3):
        along += lines.turn[k] * pose[k, 3]
    return along


@compiled
def _tip_at(lines: Lines, level: Level, goal: FloatArray, turn: float, place: FloatArray) -> None:
    """Write where the point of the last axis must go, from the waist, in the level's frame."""
    off, at = np.empty(3), np.empty(3)
    for k in range(3):
        off[k] = level.tip[k] - lines.tool_at_zero[k, 3]
        at[k] = goal[k, 3] - level.waist[k]
    cosine, sine = math.cos(turn), math.sin(turn)
    for row in range(3):
        place[row] = 0.0
        for k in range(3):
            place[row] += level.frame[row, k] * at[k]
    ahead, aside = 0.0, 0.0
    for k in range(3):
        ahead += level.frame[0, k] * off[k]
        aside += level.frame[1, k] * off[k]
        place[2] += level.frame[2, k] * off[k]
    place[0] += cosine * ahead - sine * aside
    place[1] += sine * ahead + cosine * aside
