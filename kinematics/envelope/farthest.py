"""How far a point gets in each measure, and a posture that brings it there.

Idea: from the best of many postures the point is sent to values beyond what any reaches: where a
search ends short is as far as it gets from there. The value asked for comes nearer to the best one
each time, 32 times nearer, until the two are one but for rounding; a search that ends close to
its goal ends more exactly.

Source: as ``Descents``. Not covered: proof that nothing gets farther; but each value is reached.
"""

from collections.abc import Sequence
from typing import NamedTuple

import numpy as np

from kinematics.envelope.descents import InView
from kinematics.envelope.point_views import PointView, only
from kinematics.envelope.shapes import Extreme
from kinematics.envelope.tolerances import (
    EXTREME_BEYOND,
    EXTREME_ROUNDS,
    EXTREME_STARTS,
    EXTREME_STEPS,
    NEAR_EXTREME,
)
from kinematics.number_checks import FloatArray
from kinematics.reach.travel_region import TravelRegion


class Measured(NamedTuple):
    """What extremes are told of: names of the coordinates of a view, and the view."""

    names: Sequence[str]
    view: PointView


def extremes_of(
    measured: Measured,
    position_of: PointView,
    limits: TravelRegion,
    scales: FloatArray,
    joint_values: FloatArray,
    length: float,
) -> tuple[Extreme, ...]:
    """Return the least and the greatest of each measure.

    Parameters
    ----------
    position_of : the point in the base.
    joint_values : (count, joints), postures to start from, spread over travel.
    length : m, of the arm: a twentieth of it is looked beyond the best of the postures.

    Examples
    --------
    Two slides of 1 m.

    >>> from kinematics.envelope.descents import InView
    >>> from kinematics.reach.travel_region import TravelRegion
    >>> one = np.ones((1, 2, 2)) * np.eye(2)
    >>> box = TravelRegion(np.zeros(2), np.ones(2), np.empty((0, 2)), np.empty(0), np.empty(0))
    >>> slides = InView(lambda q: (q, np.repeat(one, len(q), 0)), box, np.ones(2), 0.0)
    >>> space = lambda q: (np.pad(q, ((0, 0), (0, 1))), np.repeat(one, len(q), 0))
    >>> found = extremes_of(
    ...     Measured(("x", "y"), slides.view), space, box, np.ones(2), np.full((1, 2), 0.5), 1.0
    ... )
    >>> [(one.measure, one.greatest, round(one.value, 9)) for one in found]
    [('x', False, 0.0), ('x', True, 1.0), ('y', False, 0.0), ('y', True, 1.0)]
    """
    places = measured.view(joint_values)[0]
    count = min(EXTREME_STARTS, len(joint_values))
    signs = np.repeat([-1.0, 1.0], count)
    extremes = []
    for row, name in enumerate(measured.names):
        order = np.argsort(places[:, row], kind="stable")
        starts = joint_values[np.concatenate([order[:count], order[::-1][:count]])]
        alone = InView(only(measured.view, row), limits, scales, 0.0, EXTREME_STEPS)
        found = _farthest(alone, starts, signs, EXTREME_BEYOND * length)
        values = measured.view(found)[0][:, row]
        for best in (int(values[:count].argmin()), count + int(values[count:].argmax())):
            posture = found[best]
            position = position_of(posture[None])[0][0]
            extremes.append(Extreme(name, best >= count, float(values[best]), posture, position))
    return tuple(extremes)


def _farthest(seeker: InView, starts: FloatArray, signs: FloatArray, beyond: float) -> FloatArray:
    """Return postures (count, joints) that get as far as they do from each start.

    Parameters
    ----------
    signs : (count,), 1 for the greatest, -1 for the least.
    beyond : how far ahead the first goals are.
    """
    joint_values, ahead = starts.copy(), np.full(len(starts), beyond)
    here = signs * seeker.view(joint_values)[0][:, 0]
    for _ in range(EXTREME_ROUNDS):
        (going,) = np.nonzero(ahead >= NEAR_EXTREME * beyond)
        if not len(going):
            break
        goals = (signs * (here + ahead))[going, None]
        found = seeker.to(goals, joint_values[going]).joint_values
        there = signs[going] * seeker.view(found)[0][:, 0]
        gained = there - here[going]
        better = going[gained > 0.0]
        joint_values[better], here[better] = found[gained > 0.0], there[gained > 0.0]
        # A goal that is reached is no end.
        ahead[going] *= np.where(gained >= 0.5 * ahead[going], 4.0, 1.0 / 32.0)
    return joint_values
