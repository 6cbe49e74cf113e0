"""A chain that must close on itself, cut where the cut is shortest to reach.

Idea: E_1 ... E_n = D says that arm and target make a ring, and a ring may be cut anywhere: E_k+1
... E_n (D^-1 E_1 D) ... (D^-1 E_k D) D^-1 = I, the lines of the first k rows moved by D^-1. What
bounds say of a chain is the better, the shorter the distances from its axes to the point where it
must close, and they are shortest when the cut is somewhere in the middle of the arm.

Source: cyclic permutation, as of every product that is the identity; none for its use here.
Not covered: targets that leave something open, which are no rings.
"""

from typing import NamedTuple

import numpy as np

from kinematics.inverse.descent_arrays import Lines
from kinematics.inverse.screws import Screws
from kinematics.kernels.compiler import for_kernel
from kinematics.table import FloatArray
from kinematics.tolerances import AXES_PARALLEL
from kinematics.transforms import inverse


class Chain(NamedTuple):
    """An arm, or a ring of arm and target, as a chain that must bring its end to a goal.

    Attributes
    ----------
    lines : the chain, its end as its tool. goal : (4, 4). furthest : (rows,), the end's distance
        from each axis at most. aside : how far the tool is from the end at most. All over the
        arm's length.
    """

    lines: Lines
    goal: FloatArray
    furthest: FloatArray
    aside: float


def open_chain(lines: Lines, goal: FloatArray, ways: FloatArray) -> Chain:
    """Return the arm as it stands.

    Parameters
    ----------
    ways : (rows,), how far each row turns to either side, or slides from zero, at most; rad and
        shares of the length.

    Examples
    --------
    >>> tool = np.eye(4)
    >>> tool[0, 3] = 1.0
    >>> axes, points = np.eye(3)[[2, 2]], np.array([[0.0, 0, 0], [0.4, 0, 0]])
    >>> lines = Lines(axes, points, np.zeros(2, bool), tool, np.eye(2), axes[0])
    >>> open_chain(lines, np.eye(4), np.ones(2)).furthest
    array([1. , 0.6])
    """
    return Chain(lines, for_kernel(goal), _furthest(lines, ways), 0.0)


def best_cut(screws: Screws, lines: Lines, goal: FloatArray, ways: FloatArray) -> Chain:
    """Return the ring of an arm of two rows or more and its target, cut where it is best cut.

    Parameters
    ----------
    goal : (4, 4), the target over the length; ways : as above.
    """
    cuts = [_cut_before(row, screws, lines, goal, ways) for row in range(1, screws.rows)]
    of_ring = [np.where(cut.lines.prismatic, 1.0, cut.furthest) for cut in cuts]
    moved = [far @ np.roll(ways, -row) for row, far in enumerate(of_ring, start=1)]
    return cuts[int(np.argmin(moved))]


def _cut_before(
    row: int, screws: Screws, lines: Lines, goal: FloatArray, ways: FloatArray
) -> Chain:
    """Return the ring cut between a row and the one before it, where their axes are nearest."""
    back = inverse(goal @ inverse(screws.tool_at_zero))
    axis, point = screws.axis.copy(), screws.point.copy()
    axis[:row] = axis[:row] @ back[:3, :3].T
    point[:row] = point[:row] @ back[:3, :3].T + back[:3, 3]
    end = np.eye(4)
    end[:3, 3] = _between(screws, row)
    chain = lines._replace(
        axis=np.roll(axis, -row, axis=0),
        point=np.roll(point, -row, axis=0),
        prismatic=np.roll(screws.prismatic, -row),
        tool_at_zero=for_kernel(back @ end),
        drive=np.roll(lines.drive, -row, axis=0),
    )
    on_the_way = np.vstack([end[:3, 3], screws.point[row:], screws.tool_at_zero[:3, 3]])
    aside = float(np.linalg.norm(np.diff(on_the_way, axis=0), axis=1).sum())
    aside += float(ways[row:][screws.prismatic[row:]].sum())
    return Chain(chain, end, _furthest(chain, np.roll(ways, -row)), aside)


def _between(screws: Screws, row: int) -> FloatArray:
    """Return the point of the axis before a row that is nearest to the row's own."""
    before, axis = screws.axis[row - 1], screws.axis[row]
    away = screws.point[row] - screws.point[row - 1]
    across = np.cross(before, axis)
    square, along = float(across @ across), float(away @ before)
    if square > AXES_PARALLEL**2:
        along = float(np.cross(away, axis) @ across) / square
    nearest: FloatArray = screws.point[row - 1] + along * before
    return nearest


def _furthest(lines: Lines, ways: FloatArray) -> FloatArray:
    """Return the largest distance of a chain's end from each of its axes, (rows,).

    By way of points on the axes, each the foot of the one after it; slides add their way.
    """
    furthest = np.zeros(len(lines.axis))
    place, far = lines.tool_at_zero[:3, 3], 0.0
    for row in range(len(furthest) - 1, -1, -1):
        if lines.prismatic[row]:
            far += float(ways[row])
        else:
            beside = place - lines.point[row]
            foot = lines.point[row] + (beside @ lines.axis[row]) * lines.axis[row]
            far += float(np.linalg.norm(place - foot))
            place = foot
        furthest[row] = far
    return furthest
