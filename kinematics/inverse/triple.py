"""Three neighbouring joints whose axes meet, or run parallel, told from the motion they must make.

Idea: both are triangles. Axes that meet: the angle between the first axis and where the third must
point is one side of a spherical triangle whose other sides are the fixed angles between
neighbouring axes; the angle at the middle axis is the middle joint. Parallel axes: the same in the
plane across them, with lengths for sides. The half-angle formulas give that angle to the last digit
even where the triangle is flat, where the cosine rule loses half of them: a lined-up wrist, a
stretched elbow. First and last joint then follow from where they must turn what is left.

Source: half angles of a spherical triangle, Todhunter, Spherical Trigonometry, 1886, article 45;
of a flat one, Kahan, Miscalculating Area and Angles of a Needle-like Triangle, 1986. The split
itself: Paden, Kinematics and control of robot manipulators, 1986, subproblems 1 to 3.

Not covered: whether the motion is one that the triple can make at all (its fixed point or plane is
the business of the outer joints), triples with a sliding joint, neighbours that lie in one line.
"""

import math

import numpy as np

from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray

TRIPLE_ROWS = 8
"""Rows of three numbers that a triple is described by.

Meeting: directions of the three axes; a direction across the third; the angles between neighbours
and the angle at the middle axis at zero motion. Parallel: two directions across the axes and one
along them; a point of the first and of the third axis; lengths of both links and the angle between
them at zero motion; +1 or -1 for each axis as it points along the third direction or against it;
angle of the first link at zero motion in the directions across."""


def meeting_triple(axis: FloatArray) -> FloatArray:
    """Return the description of three axes that meet, directions (3, 3).

    Examples
    --------
    >>> wrist = meeting_triple(np.array([[0.0, 0, 1], [0, 1, 0], [0, 0, 1]]))
    >>> (wrist[4] * 2 / np.pi).round(12) + 0.0
    array([1., 1., 0.])
    """
    triple = np.zeros((TRIPLE_ROWS, 3))
    first, middle, last = axis
    triple[:3] = axis
    across = np.cross(last, np.eye(3)[np.argmin(np.abs(last))])
    triple[3] = across / np.linalg.norm(across)
    # Seen along the middle axis, from the plane of the first to that of the third.
    first_aside, last_aside = np.cross(middle, first), np.cross(middle, last)
    turned = np.arctan2(middle @ np.cross(first_aside, last_aside), first_aside @ last_aside)
    triple[4] = _angle(first, middle), _angle(middle, last), turned
    return triple


def _angle(one: FloatArray, other: FloatArray) -> float:
    return float(np.arctan2(np.linalg.norm(np.cross(one, other)), one @ other))


def parallel_triple(axis: FloatArray, point: FloatArray) -> FloatArray:
    """Return the description of three parallel axes, directions and points (3, 3).

    Examples
    --------
    >>> points = np.array([[0.0, 0, 0], [2, 0, 0], [2, 1, 0]])
    >>> parallel_triple(np.array([[0.0, 0, 1], [0, 0, -1], [0, 0, 1]]), points)[5:7]
    array([[ 2.        ,  1.        ,  1.57079633],
           [ 1.        , -1.        ,  1.        ]])
    """
    triple = np.zeros((TRIPLE_ROWS, 3))
    along = axis[0]
    one = np.cross(along, np.eye(3)[np.argmin(np.abs(along))])
    one /= np.linalg.norm(one)
    triple[:3] = one, np.cross(along, one), along
    triple[3], triple[4] = point[0], point[2]
    inner, outer = (point[1] - point[0]) @ triple[:2].T, (point[2] - point[1]) @ triple[:2].T
    corner = np.arctan2(inner[0] * outer[1] - inner[1] * outer[0], inner @ outer)
    triple[5] = np.hypot(*inner), np.hypot(*outer), corner
    triple[6] = np.sign(axis @ along)
    triple[7, 0] = np.arctan2(inner[1], inner[0])
    return triple


@compiled
def split_meeting(
    triple: FloatArray, pose: FloatArray, slack: float, split: FloatArray
) -> tuple[int, float]:
    """Write the motions of three meeting axes that together turn as a pose (4, 4) does.

    Parameters
    ----------
    triple : (TRIPLE_ROWS, 3), of ``meeting_triple``.
    slack : rad by which the triangle may fail to close; then it is taken as that much off a flat
        one, to both sides, since the target may be as much off.
    split : (2, 3), written: one solution each row, rad, not wrapped.

    Returns
    -------
    count : 0 or 2. excess : rad by which the triangle does not close; 0 where it does.

    Examples
    --------
    >>> wrist = meeting_triple(np.array([[0.0, 0, 1], [0, 1, 0], [0, 0, 1]]))
    >>> split, pose = np.empty((2, 3)), np.eye(4)
    >>> pose[:3, :3] = [[0, 0, 1], [0, 1, 0], [-1, 0, 0]]
    >>> split_meeting(wrist, pose, 0.0, split), np.sin(split[:, 1]).round(9)
    ((2, 0.0), array([ 1., -1.]))
    """
    gx, gy, gz = _turned(pose, triple[2, 0], triple[2, 1], triple[2, 2])
    hx, hy, hz = triple[0, 0], triple[0, 1], triple[0, 2]
    bx, by, bz = hy * gz - hz * gy, hz * gx - hx * gz, hx * gy - hy * gx
    side = math.atan2(math.sqrt(bx * bx + by * by + bz * bz), hx * gx + hy * gy + hz * gz)
    one, other = triple[4, 0], triple[4, 1]
    reach = min(one + other, 2.0 * math.pi - one - other)
    excess = max(0.0, max(abs(one - other) - side, side - reach))
    if excess > slack:
        return 0, excess
    flat = math.sin(0.5 * (side + one - other)) * math.sin(0.5 * (side - one + other))
    full = math.sin(0.5 * (one + other + side)) * math.sin(0.5 * (one + other - side))
    corner = 2.0 * math.atan2(math.sqrt(abs(flat)), math.sqrt(abs(full)))
    for k in range(2):
        middle = (corner if k == 0 else -corner) - triple[4, 2]
        px, py, pz = _about(triple, 1, middle, triple[2, 0], triple[2, 1], triple[2, 2])
        # Only what lies across the first axis turns; near a lined-up wrist it is small, and must
        # be known to its own digits.
        ax, ay, az = hy * pz - hz * py, hz * px - hx * pz, hx * py - hy * px
        sine = hx * (ay * bz - az * by) + hy * (az * bx - ax * bz) + hz * (ax * by - ay * bx)
        first = math.atan2(sine, ax * bx + ay * by + az * bz)
        ux, uy, uz = _turned(pose, triple[3, 0], triple[3, 1], triple[3, 2])
        ux, uy, uz = _about(triple, 0, -first, ux, uy, uz)
        ux, uy, uz = _about(triple, 1, -middle, ux, uy, uz)
        wx, wy, wz = triple[3, 0], triple[3, 1], triple[3, 2]
        sine = triple[2, 0] * (wy * uz - wz * uy) + triple[2, 1] * (wz * ux - wx * uz)
        sine += triple[2, 2] * (wx * uy - wy * ux)
        split[k, 0], split[k, 1] = first, middle
        split[k, 2] = math.atan2(sine, wx * ux + wy * uy + wz * uz)
    return 2, excess


@compiled
def _turned(pose: FloatArray, x: float, y: float, z: float) -> tuple[float, float, float]:
    """Return a direction turned as the pose is."""
    return (
        pose[0, 0] * x + pose[0, 1] * y + pose[0, 2] * z,
        pose[1, 0] * x + pose[1, 1] * y + pose[1, 2] * z,
        pose[2, 0] * x + pose[2, 1] * y + pose[2, 2] * z,
    )


@compiled
def _about(
    triple: FloatArray, row: int, angle: float, x: float, y: float, z: float
) -> tuple[float, float, float]:
    """Return a direction turned about one of the three axes."""
    kx, ky, kz = triple[row, 0], triple[row, 1], triple[row, 2]
    cosine, sine = math.cos(angle), math.sin(angle)
    along = (kx * x + ky * y + kz * z) * (1.0 - cosine)
    return (
        x * cosine + (ky * z - kz * y) * sine + kx * along,
        y * cosine + (kz * x - kx * z) * sine + ky * along,
        z * cosine + (kx * y - ky * x) * sine + kz * along,
    )


@compiled
def span_across(triple: FloatArray, pose: FloatArray) -> tuple[float, float]:
    """Return, across parallel axes, the way (2,) from the first axis to where the third must be.

    Examples
    --------
    >>> axes = np.array([[0.0, 0, 1]] * 3)
    >>> elbow = parallel_triple(axes, np.array([[0.0, 0, 0], [2, 0, 0], [3, 0, 0]]))
    >>> float(np.hypot(*span_across(elbow, np.eye(4))))
    3.0
    """
    x, y, z = _turned(pose, triple[4, 0], triple[4, 1], triple[4, 2])
    x, y = x + pose[0, 3] - triple[3, 0], y + pose[1, 3] - triple[3, 1]
    z += pose[2, 3] - triple[3, 2]
    return (
        triple[0, 0] * x + triple[0, 1] * y + triple[0, 2] * z,
        triple[1, 0] * x + triple[1, 1] * y + triple[1, 2] * z,
    )


@compiled
def split_parallel(
    triple: FloatArray, pose: FloatArray, slack: float, split: FloatArray
) -> tuple[int, float]:
    """Write the motions of three parallel axes that together move as a pose (4, 4) does.

    As ``split_meeting``, ``triple`` of ``parallel_triple``, ``slack`` and ``excess`` as lengths.

    Examples
    --------
    >>> axes = np.array([[0.0, 0, 1]] * 3)
    >>> elbow = parallel_triple(axes, np.array([[0.0, 0, 0], [1, 0, 0], [2, 0, 0]]))
    >>> split, pose = np.empty((2, 3)), np.eye(4)
    >>> pose[:2, 3] = [-1, 1]
    >>> split_parallel(elbow, pose, 0.0, split), (split * 2 / np.pi).round(9) + 0.0
    ((2, 0.0), array([[ 0.,  1., -1.],
           [ 1., -1.,  0.]]))
    """
    x, y = span_across(triple, pose)
    span = math.sqrt(x * x + y * y)
    inner, outer, at_zero = triple[5, 0], triple[5, 1], triple[5, 2]
    excess = max(0.0, max(abs(inner - outer) - span, span - inner - outer))
    if excess > slack:
        return 0, excess
    flat = (inner + outer - span) * (inner + outer + span)
    full = (span - (inner - outer)) * (span + (inner - outer))
    corner = 2.0 * math.atan2(math.sqrt(abs(flat)), math.sqrt(abs(full)))
    ax, ay, az = _turned(pose, triple[0, 0], triple[0, 1], triple[0, 2])
    total = math.atan2(
        triple[1, 0] * ax + triple[1, 1] * ay + triple[1, 2] * az,
        triple[0, 0] * ax + triple[0, 1] * ay + triple[0, 2] * az,
    )
    for k in range(2):
        bent = corner if k == 0 else -corner
        own_x, own_y = inner + outer * math.cos(bent), outer * math.sin(bent)
        first = math.atan2(own_x * y - own_y * x, own_x * x + own_y * y) - triple[7, 0]
        middle = bent - at_zero
        split[k, 0] = triple[6, 0] * first
        split[k, 1] = triple[6, 1] * middle
        split[k, 2] = triple[6, 2] * (total - first - middle)
    return 2, excess
