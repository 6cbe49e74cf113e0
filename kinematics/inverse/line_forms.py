"""A pointed line as fifteen numbers on which every rigid motion acts as a matrix.

Idea: of a line with direction l, pointed at p, take 1, p, p.p, l, p.l, p x l and p.p l - 2 (p.l) p.
Turning and shifting the line mixes these fifteen numbers linearly, with coefficients that know the
motion alone. A joint's matrix is then B0 + Bc cos v + Bs sin v, or B0 + B1 v + B2 v^2 where it
slides, so a chain of joints is a product of such sums: polynomial equations without any frames of
the table and without symbolic algebra. A joint leaves its own line alone, and so drops out.

Source: the equations of Raghavan and Roth, Inverse kinematics of the general 6R manipulator and
related linkages, 1993, whose two sides are those fourteen numbers; that they are a representation
of the rigid motions, and so need no frames: derived here.

Not covered: solving (elimination.py), units (lengths here are over L).
"""

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.screws import Screws
from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray

FORM = 15
"""Numbers of a line form: 1, p, p.p, l, p.l, p x l, p.p l - 2 (p.l) p, in this order."""

ONE, POINT, SQUARE, LINE, ALONG, MOMENT, MIRROR = 0, 1, 4, 5, 8, 9, 12
"""Where each of them begins."""

TERMS = 3
"""Terms of a joint's matrix: 1, cos v, sin v where it turns; 1, v, v^2 where it slides."""


def line_forms(directions: FloatArray, points: FloatArray) -> FloatArray:
    """Return the forms (..., 15) of lines with directions (..., 3), pointed at points (..., 3).

    Lengths of any one unit. A direction need not be a unit vector: all but 1, p and p.p are
    linear in it.

    Examples
    --------
    >>> line_forms(np.array([0.0, 0, 1]), np.array([2.0, 0, 3])).astype(int).tolist()
    [1, 2, 0, 3, 13, 0, 0, 1, 3, 0, -2, 0, -12, 0, -5]
    """
    square = (points * points).sum(axis=-1, keepdims=True)
    along = (points * directions).sum(axis=-1, keepdims=True)
    return np.concatenate(
        [
            np.ones_like(square),
            points,
            square,
            directions,
            along,
            np.cross(points, directions),
            square * directions - 2.0 * along * points,
        ],
        axis=-1,
    )


@compiled
def write_motion_matrix(pose: FloatArray, matrix: FloatArray) -> None:
    """Write the matrix by which a rigid motion acts on line forms.

    Parameters
    ----------
    pose : (4, 4), or its first three rows, R and t: a point x goes to R x + t.
    matrix : (15, 15), written.

    Examples
    --------
    A shift by 1 along x, of the line through the origin along z:

    >>> shift, matrix = np.eye(4), np.empty((15, 15))
    >>> shift[0, 3] = 1.0
    >>> write_motion_matrix(shift, matrix)
    >>> line, place = np.array([0.0, 0, 1]), np.zeros(3)
    >>> moved = line_forms(line, place + shift[:3, 3])
    >>> bool((matrix @ line_forms(line, place) == moved).all())
    True
    """
    for row in range(FORM):
        for column in range(FORM):
            matrix[row, column] = 0.0
    matrix[ONE, ONE], matrix[SQUARE, SQUARE], matrix[ALONG, ALONG] = 1.0, 1.0, 1.0
    x, y, z = pose[0, 3], pose[1, 3], pose[2, 3]
    square = x * x + y * y + z * z
    matrix[SQUARE, ONE] = square
    for row in range(3):
        matrix[POINT + row, ONE] = pose[row, 3]
        matrix[MIRROR + row, ALONG] = -2.0 * pose[row, 3]
    for column in range(3):
        rx, ry, rz = pose[0, column], pose[1, column], pose[2, column]
        toward = x * rx + y * ry + z * rz
        cross = y * rz - z * ry, z * rx - x * rz, x * ry - y * rx
        matrix[SQUARE, POINT + column] = 2.0 * toward
        matrix[ALONG, LINE + column] = toward
        for row in range(3):
            turned = pose[row, column]
            matrix[POINT + row, POINT + column] = turned
            matrix[LINE + row, LINE + column] = turned
            matrix[MOMENT + row, MOMENT + column] = turned
            matrix[MIRROR + row, MIRROR + column] = turned
            matrix[MOMENT + row, LINE + column] = cross[row]
            matrix[MIRROR + row, MOMENT + column] = -2.0 * cross[row]
            matrix[MIRROR + row, LINE + column] = square * turned - 2.0 * pose[row, 3] * toward


def motion_matrix(pose: FloatArray) -> FloatArray:
    """Return the matrix (15, 15) by which a rigid motion (4, 4) acts on line forms.

    Examples
    --------
    >>> bool((motion_matrix(np.eye(4)) == np.eye(15)).all())
    True
    """
    matrix = np.empty((FORM, FORM))
    write_motion_matrix(np.ascontiguousarray(pose, np.float64), matrix)
    return matrix


def joint_matrices(axis: FloatArray, point: FloatArray, prismatic: NDArray[np.bool_]) -> FloatArray:
    """Return what the motions v of joints multiply line forms by, (n, 3, 15, 15), lengths over L.

    The matrix of a joint at v is the sum of its three matrices times 1, cos v, sin v where it
    turns, and times 1, v, v^2 where it slides. The inverse motion is the one at -v.

    Parameters
    ----------
    axis, point : (n, 3), unit directions and a point of each joint's line.
    prismatic : (n,), which joints slide along their line.

    Examples
    --------
    >>> turn = joint_matrices(np.eye(3)[2:], np.zeros((1, 3)), np.zeros(1, bool))[0]
    >>> half = turn[0] - turn[1]
    >>> (half @ line_forms(np.array([1.0, 0, 0]), np.array([0.0, 2, 0])))[:8].astype(int).tolist()
    [1, 0, -2, 0, 4, -1, 0, 0]
    """
    matrices = np.empty((len(prismatic), TERMS, FORM, FORM))
    for each, line, place, slides in zip(matrices, axis, point, prismatic, strict=True):
        if slides:
            still, ahead, back = (motion_matrix(_shifted(line * v)) for v in (0.0, 1.0, -1.0))
            each[0], each[1], each[2] = still, 0.5 * (ahead - back), 0.5 * (ahead + back) - still
            continue
        still, quarter, half = (
            motion_matrix(_turned(line, place, cosine, sine))
            for cosine, sine in ((1.0, 0.0), (0.0, 1.0), (-1.0, 0.0))
        )
        each[0], each[1] = 0.5 * (still + half), 0.5 * (still - half)
        each[2] = quarter - each[0]
    return matrices


def matrices_of(screws: Screws) -> FloatArray:
    """Return the three matrices of each row of an arm, (rows, 3, 15, 15); see joint_matrices.

    Examples
    --------
    >>> screws = Screws(np.eye(3)[:2], np.zeros((2, 3)), np.zeros(2, bool), np.eye(4), 1.0)
    >>> matrices_of(screws).shape
    (2, 3, 15, 15)
    """
    return joint_matrices(screws.axis, screws.point, screws.prismatic)


def _shifted(shift: FloatArray) -> FloatArray:
    pose = np.eye(4)
    pose[:3, 3] = shift
    return pose


def _turned(line: FloatArray, place: FloatArray, cosine: float, sine: float) -> FloatArray:
    """Return the turn about a line, with a cosine and a sine that are exact."""
    x, y, z = line
    along = np.outer(line, line)
    across = np.array([[0.0, -z, y], [z, 0.0, -x], [-y, x, 0.0]])
    pose = np.eye(4)
    pose[:3, :3] = along + cosine * (np.eye(3) - along) + sine * across
    pose[:3, 3] = place - pose[:3, :3] @ place
    return pose
