"""On which side postures stand of what tells an arm's solutions apart, many at once.

Each feature of an arm is a sign: of a point's distance ahead of a plane, of a point above a line,
of a triangle seen from one side, of three directions. Points and directions are fixed in the link
after so many rows, and moved with it by the product of exponentials.

Left out: which features an arm has and what they are called (kinematics/reach/branches.py).
"""

import math

import numpy as np
from numpy.typing import NDArray

from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray

IntArray = NDArray[np.int64]

AHEAD, ABOVE, SIDE, SPREAD = range(4)
"""Features of places a, b, c and d: how far point c is ahead of a along direction d; how far point
b is above the line from a to c, up being d (upright lines: as SIDE, seen against e); whether b is
left of the way from a to c, seen against d; the triple product of directions a, b, c."""

UPRIGHT = 1e-3
"""Sine of the angle to the upright below which a line has no upper side."""

AFTER = 4
"""Column of ``places``: how many rows move it; before it x, y, z, and 1 of points, 0 of
directions."""


@compiled
def branch_signs(
    motions: FloatArray,
    axis: FloatArray,
    point: FloatArray,
    prismatic: NDArray[np.bool_],
    places: FloatArray,
    features: IntArray,
    signs: FloatArray,
) -> None:
    """Write the value of each feature of each posture; its sign tells the branch.

    Parameters
    ----------
    motions : (k, rows), rad and shares of the arm's length; axis, point : (rows, 3), at zero
        motion; prismatic : (rows,).
    places : (p, 5), points and directions at zero motion, and after how many rows they are fixed,
        those after fewer rows first.
    features : (f, 6), the kind and places a, b, c, d, e.
    signs : (k, f).

    Examples
    --------
    >>> places = np.array([[0.0, 0, 0, 1, 0], [1, 0, 0, 0, 0], [1, 0, 0, 1, 1]])
    >>> lines = np.array([[0.0, 0, 1]]), np.zeros((1, 3)), np.array([False])
    >>> signs, turned = np.empty((2, 1)), np.array([[0.1], [3.0]])
    >>> branch_signs(turned, *lines, places, np.array([[AHEAD, 0, 0, 2, 1, 1]]), signs)
    >>> signs.ravel().round(3)
    array([ 0.995, -0.99 ])
    """
    rows, count = len(axis), len(places)
    frame, moved = np.zeros((3, 4)), np.empty((count, 3))
    for b in range(len(motions)):
        for i in range(3):
            for j in range(4):
                frame[i, j] = 1.0 if i == j else 0.0
        at = 0
        for row in range(rows + 1):
            while at < count and places[at, AFTER] == row:
                for i in range(3):
                    moved[at, i] = (
                        frame[i, 0] * places[at, 0]
                        + frame[i, 1] * places[at, 1]
                        + frame[i, 2] * places[at, 2]
                        + frame[i, 3] * places[at, 3]
                    )
                at += 1
            if at == count:
                break
            _follow(frame, axis, point, row, prismatic[row], motions[b, row])
        for f in range(len(features)):
            signs[b, f] = _value(features, f, moved)


@compiled
def _follow(
    frame: FloatArray, axis: FloatArray, point: FloatArray, row: int, slides: bool, motion: float
) -> None:
    """Move a frame on by a turn about, or a slide along, the line of a row: frame times E."""
    hx, hy, hz = axis[row, 0], axis[row, 1], axis[row, 2]
    if slides:
        for i in range(3):
            frame[i, 3] += motion * (frame[i, 0] * hx + frame[i, 1] * hy + frame[i, 2] * hz)
        return
    px, py, pz = point[row, 0], point[row, 1], point[row, 2]
    c, s = math.cos(motion), math.sin(motion)
    for i in range(3):
        x, y, z = frame[i, 0], frame[i, 1], frame[i, 2]
        along = (1.0 - c) * (x * hx + y * hy + z * hz)
        # A row times the turn about h: Rodrigues' formula, transposed.
        to_x = c * x + s * (y * hz - z * hy) + along * hx
        to_y = c * y + s * (z * hx - x * hz) + along * hy
        to_z = c * z + s * (x * hy - y * hx) + along * hz
        # The point stays where it is: what the turn moves it by is taken back.
        frame[i, 3] += (x - to_x) * px + (y - to_y) * py + (z - to_z) * pz
        frame[i, 0], frame[i, 1], frame[i, 2] = to_x, to_y, to_z


@compiled
def _value(features: IntArray, f: int, moved: FloatArray) -> float:
    kind, a, b, c, d = (
        features[f, 0],
        features[f, 1],
        features[f, 2],
        features[f, 3],
        features[f, 4],
    )
    if kind == SPREAD:
        return _triple(
            moved[a, 0], moved[a, 1], moved[a, 2], moved[b, 0], moved[b, 1], moved[b, 2], moved, c
        )
    wx, wy, wz = moved[c, 0] - moved[a, 0], moved[c, 1] - moved[a, 1], moved[c, 2] - moved[a, 2]
    along = wx * moved[d, 0] + wy * moved[d, 1] + wz * moved[d, 2]
    if kind == AHEAD:
        return float(along)
    ex, ey, ez = moved[b, 0] - moved[a, 0], moved[b, 1] - moved[a, 1], moved[b, 2] - moved[a, 2]
    if kind == SIDE:
        return _triple(wx, wy, wz, ex, ey, ez, moved, d)
    # What is left is ABOVE.
    square = wx * wx + wy * wy + wz * wz
    if square - along * along < UPRIGHT * UPRIGHT * square:
        return _triple(wx, wy, wz, ex, ey, ez, moved, features[f, 5])
    rise = ex * moved[d, 0] + ey * moved[d, 1] + ez * moved[d, 2]
    return float(square * rise - along * (ex * wx + ey * wy + ez * wz))


@compiled
def _triple(
    ax: float,
    ay: float,
    az: float,
    bx: float,
    by: float,
    bz: float,
    moved: FloatArray,
    c: int,
) -> float:
    x, y, z = ay * bz - az * by, az * bx - ax * bz, ax * by - ay * bx
    return float(x * moved[c, 0] + y * moved[c, 1] + z * moved[c, 2])


@compiled
def branch_codes(
    signs: FloatArray,
    turned: FloatArray,
    level: float,
    target: NDArray[np.intp],
    most: int,
    codes: IntArray,
) -> None:
    """Write a number for the words of each posture: its signs as bits, and which of the same.

    Parameters
    ----------
    signs : (k, f); turned : (f,), 1 or -1, what they are multiplied by. A sign not below ``-level``
        is told as the first of its two words.
    target : (k,), ascending; most : postures of one target with the same signs told apart.
    codes : (k,), bits + 2^f times how many before it share them.

    Examples
    --------
    >>> codes = np.empty(3, np.int64)
    >>> branch_codes(np.array([[1.0], [-1], [1]]), np.ones(1), 0.0, np.zeros(3, int), 9, codes)
    >>> codes
    array([0, 1, 2])
    """
    width = 1 << signs.shape[1]
    first = 0
    for b in range(len(signs)):
        if target[b] != target[first]:
            first = b
        code = 0
        for f in range(signs.shape[1]):
            if turned[f] * signs[b, f] < -level:
                code += 1 << f
        alike = 0
        for other in range(first, b):
            if codes[other] % width == code:
                alike += 1
        codes[b] = code + width * min(alike, most - 1)
