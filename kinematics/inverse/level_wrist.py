"""The palletiser: two links in an upright plane, a linkage that keeps the wrist level, a last turn.

Idea: three parallel axes whose motions cancel turn nothing, they only shift what they carry: the
first and the last axis alone make the turn. With the wrist's offset moved to the shoulder, a waist
and two links are left that must bring one point of the last axis to its place. Its distance from
the waist's axis gives the place in the plane of the links, ahead or behind, and the triangle of the
links gives the elbow, up or down: four ways.

Source: law of cosines, as in kinematics/inverse/planar.py; waist branches as in Craig, chapter 4.

Not covered: links whose axes are not at right angles to the waist, linkages with another sum.
"""

import cmath
import math

from kinematics.inverse.planar import MOST, ROUNDING, nearly_free, two_links
from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray

MOST_LEVEL = 4 * MOST
"""Solutions written at most: two waists with what two links give, and samples of the waist."""


@compiled
def level_postures(
    shoulder: complex,
    upper: complex,
    fore: complex,
    aside: float,
    goal: FloatArray,
    slack: float,
    samples: FloatArray,
    links: FloatArray,
    found: FloatArray,
) -> tuple[int, float, bool]:
    """Write turns of waist, first and second link that bring the wrist to ``goal``.

    Lengths as shares of the arm's. The plane of the links: real part up, imaginary part ahead, so
    that a turn about ``aside`` is a turn of complex numbers.

    Parameters
    ----------
    shoulder, upper, fore : where the links begin, and the links, at zero motion.
    aside : how far the plane stands off the waist's axis, along the links' axes.
    goal : (3,), ahead, aside, up, at zero turn of the waist.
    slack, samples : as ``planar.three_joints`` takes them.
    links : (26, 3), to work on; found : (104, 3), written.

    Returns
    -------
    count, shortfall, free : as of ``planar.three_joints``.

    Examples
    --------
    >>> import numpy as np
    >>> links, found = np.zeros((MOST, 3)), np.zeros((MOST_LEVEL, 3))
    >>> goal = np.array([1.0, 0.0, 1.0])
    >>> level_postures(0, 1, 1j, 0.0, goal, 0.0, np.zeros(0), links, found)
    (4, 0.0, False)
    >>> (found[:4] * 2 / np.pi).round(12) + 0.0
    array([[ 0.,  0.,  0.],
           [ 0.,  1., -2.],
           [-2., -1.,  0.],
           [-2.,  0., -2.]])
    """
    out = math.hypot(goal[0], goal[1])
    # Inside the circle that the plane sweeps around nothing is reached; the rim is nearest.
    lacking = max(abs(aside) - out, 0.0)
    ahead = math.sqrt(max(out - abs(aside), slack) * (out + abs(aside)))
    near = nearly_free(slack)
    free_waist = out < near and abs(aside) < near
    heading = cmath.phase(complex(goal[0], goal[1])) if out > 0.0 else 0.0
    count, short, free, edge = 0, 1e300, free_waist, max(slack, ROUNDING)
    for behind in range(2):
        reach = -ahead if behind == 1 else ahead
        wrist = complex(goal[2], reach) - shoulder
        ways, beyond, free_link = two_links(upper, fore, wrist, slack, samples, links)
        missed = math.hypot(beyond, lacking)
        # Of waists that both miss, the nearer alone; what the table leaves open decides nothing.
        if missed > max(short, edge):
            continue
        if short > max(missed, edge):
            count = 0
        short = min(short, missed)
        free = free or free_link
        waist = heading - math.atan2(aside, reach)
        for way in range(ways):
            found[count, 0] = waist
            found[count, 1], found[count, 2] = links[way, 0], links[way, 1]
            count += 1
        if free_waist and behind == 0:
            for sample in samples:
                for way in range(2):
                    found[count, 0] = sample
                    found[count, 1], found[count, 2] = links[way, 0], links[way, 1]
                    count += 1
    return count, short, free
