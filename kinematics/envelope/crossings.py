"""Where the boundary of a reach crosses lines between places reached and places not reached.

Idea: halving. The middle is searched with the posture of the end that is reached, then with that
which came nearest to the other end, since another branch may go farther; what is reached takes the
place of the one end, what is not of the other. The place told is one that is reached.

Source: bisection. Not covered: lines that cross the boundary more than once; one of the crossings
is found.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from kinematics.envelope.descents import Seeker
from kinematics.envelope.tolerances import CROSSING_HALVINGS
from kinematics.number_checks import FloatArray


@dataclass(frozen=True)
class Crossings:
    """Places on the boundary, (count, 2), and postures that reach them, (count, joints)."""

    places: FloatArray
    joint_values: FloatArray


def crossings_of(
    seeker: Seeker,
    inside: FloatArray,
    outside: FloatArray,
    of_inside: FloatArray,
    toward_outside: FloatArray,
) -> Crossings:
    """Return the last place reached on the way from places reached to places not reached.

    Parameters
    ----------
    inside, outside : (count, 2), places.
    of_inside : (count, joints), postures that reach the ones; toward_outside : that came near the
        others.

    Examples
    --------
    Two slides of 1 m, on the way from within to beyond.

    >>> from kinematics.envelope.descents import InView
    >>> from kinematics.reach.travel_region import TravelRegion
    >>> one = np.ones((1, 2, 2)) * np.eye(2)
    >>> box = TravelRegion(np.zeros(2), np.ones(2), np.empty((0, 2)), np.empty(0), np.empty(0))
    >>> slides = InView(lambda q: (q, np.repeat(one, len(q), 0)), box, np.ones(2), 1e-9)
    >>> start = np.array([[0.5, 0.5]])
    >>> crossings_of(slides, start, start + [[1.0, 0.0]], start, start).places.round(2)
    array([[1. , 0.5]])
    """
    low, high, joint_values = inside.copy(), outside.copy(), of_inside.copy()
    for _ in range(CROSSING_HALVINGS):
        middle = 0.5 * (low + high)
        found, reached = reach_either(seeker, middle, joint_values, toward_outside)
        low = np.where(reached[:, None], middle, low)
        high = np.where(reached[:, None], high, middle)
        joint_values = np.where(reached[:, None], found, joint_values)
    return Crossings(low, joint_values)


def reach_either(
    seeker: Seeker, places: FloatArray, starts: FloatArray, others: FloatArray
) -> tuple[FloatArray, NDArray[np.bool_]]:
    """Return postures (count, joints) found from either start, and whether they reach places.

    Examples
    --------
    A table of two slides of 1 m.

    >>> from kinematics.envelope.descents import InView
    >>> from kinematics.reach.travel_region import TravelRegion
    >>> one = np.ones((1, 2, 2)) * np.eye(2)
    >>> box = TravelRegion(np.zeros(2), np.ones(2), np.empty((0, 2)), np.empty(0), np.empty(0))
    >>> slides = InView(lambda q: (q, np.repeat(one, len(q), 0)), box, np.ones(2), 1e-9)
    >>> start = np.array([[0.5, 0.5]])
    >>> reach_either(slides, np.array([[0.2, 1.0]]), start, start)[1]
    array([ True])
    """
    found = seeker.to(places, starts)
    reached = np.asarray(found.off <= seeker.near)
    joint_values = found.joint_values
    left = np.nonzero(~reached)[0]
    if len(left):
        again = seeker.to(places[left], others[left])
        arrived = again.off <= seeker.near
        joint_values[left[arrived]] = again.joint_values[arrived]
        reached[left[arrived]] = True
    return joint_values, reached
