"""Approaches and retracts as they are given: how far, along what, how fast; in SI.

Left out: where in a request they stand (reach_targets.py, travel_reading.py, reach_query.py), and
where they lead (the core).
"""

from math import isfinite

import numpy as np

from kinematics.errors import KinematicsError
from kinematics.readouts import checked_direction
from kinematics.tolerances import LARGEST_MAGNITUDE, SHORTEST_LENGTH, SLOWEST_SPEED
from kinematics.travel.moves import Approach
from service.convert import Units
from service.errors import UnusableValue
from service.wire import reach_request
from service.wire.poses import Where

TOOL_Z = "tool-z"


def read_approach(
    given: reach_request.Approach | reach_request.Retract,
    units: Units,
    where: Where,
    usual: Approach | None = None,
) -> Approach:
    """Return an approach or a retract in SI, its direction in the frame asked for.

    Parameters
    ----------
    usual : whose direction is meant where none is said.

    Raises
    ------
    KinematicsError : a direction of length zero, or beyond 1e9.
    UnusableValue : a distance or speed that no arm has.

    Examples
    --------
    >>> from service.convert import UNITS
    >>> given = reach_request.Approach(distance=150, along=[0, 0, -2], speed=50)
    >>> read = read_approach(given, UNITS["mm-deg"], ("approach",))
    >>> read.distance, read.along, read.speed
    (0.15, array([ 0.,  0., -1.]), 0.05)
    """
    distance = _within(
        units.value_in(given.distance, "m"),
        *(given.distance, SHORTEST_LENGTH, "m", (*where, "distance")),
    )
    speed = speed_in(given.speed, "m", units, (*where, "speed"))
    if given.along is None:
        return Approach(distance, None if usual is None else usual.along, speed)
    if given.along == TOOL_Z:
        return Approach(distance, None, speed)
    try:
        along = checked_direction(given.along)
    except KinematicsError as error:
        raise error.below(*where, "along") from None
    return Approach(distance, np.asarray(along), speed)


def speed_in(given: float | None, unit: str, units: Units, where: Where) -> float | None:
    """Return a speed in SI, None where none is said.

    Raises
    ------
    UnusableValue : beyond 1e9, or so slow that it is no motion.
    """
    if given is None:
        return None
    return _within(units.value_in(given, unit), given, SLOWEST_SPEED, f"{unit}/s", where)


def _within(value: float, given: float, least: float, unit: str, where: Where) -> float:
    if isfinite(value) and least <= value <= LARGEST_MAGNITUDE:
        return value
    side = f"below {least:.0e}" if value < least else f"beyond {LARGEST_MAGNITUDE:.0e}"
    raise UnusableValue(
        f"{where[-1]} is {side} {unit}", where=where, value=given, way_out="check the units"
    )
