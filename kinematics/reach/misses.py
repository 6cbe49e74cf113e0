"""By how much an arm of few joints misses a target, within its travel, the place first.

Idea: whoever asks for a pose that few joints do not have wants to know what they do have: the same
place with tool z where it should point and the spin about it off, or with the tool turned a little.
So postures are led downhill within travel, lengths weighing so much that the turn gives way; what
is left is the number to tell.

Source: none; the descent has its own (inverse/descent.py). Not covered: postures in other valleys
than those that a solver found or calls nearest, and that meet the place alone.
"""

from functools import cached_property
from typing import NamedTuple

import numpy as np

from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.inverse.compromises import descend_each
from kinematics.inverse.descent_arms import lines_of, room_of
from kinematics.inverse.descent_arrays import desk_for
from kinematics.inverse.drive import drive_of
from kinematics.inverse.iterative import TASKS, Search
from kinematics.inverse.measured import DIRECTION, POSE, POSITION, errors_of
from kinematics.kernels.compiler import for_kernel
from kinematics.reach.targets import Reason, Targets
from kinematics.reach.tolerances import MOST_FOLLOWED
from kinematics.reach.verdicts import Ranking
from kinematics.table import FloatArray

_STEPS = 40
_PLACE_KEPT = 0.005
"""Share of a place's tolerance that is given up to turn the tool less by a radian, for a lever as
long as the arm."""
_NOTHING = 1e-5
"""Share of the length by which a place may be off for each radian that the turn is, to be nothing
beside it: where a target states no tolerance."""
_WORTH_AIMING = 3.0
"""Times the least turn that the spin about tool z may be off to be told, as most tools care more
for where they point."""
_ALL_OF = 0.999
"""Share of a turn from which on it is told as a tilt of tool z, or a spin about it, alone."""


_NEAR = 0.1
"""Radians of turn within which nobody looks for a posture with less."""
_SEVERAL, _SHORT = 8, 16
"""Postures that meet a place alone that are looked for, and starts for them."""


class Miss(NamedTuple):
    """The posture (joints,) that misses a target least, and by what: metres, rad.

    ``place_met``: the place is within tolerance, or off by nothing beside the turn.
    """

    joint_values: FloatArray
    position: float
    angle: float
    tilt: float
    place_met: bool


class Misses:
    """Tells by how much one arm of few joints misses targets of one task."""

    def __init__(self, ranking: Ranking, targets: Targets, task: str) -> None:
        self._ranking, self._targets, self._task = ranking, targets, task

    def of(self, index: int, motions: FloatArray) -> Miss:
        """Return the least miss of target ``index`` from motions (k, rows), k at least 1.

        Where they lead nowhere near, also from postures that meet the place alone; of the first
        targets only, as that takes half a millisecond.
        """
        miss = least_miss(self._ranking, self._targets, index, motions, self._task)
        near = miss.place_met and miss.angle < _NEAR
        if near or self._task == POSITION or index >= MOST_FOLLOWED:
            return miss
        target = self._targets.tool_in_base[index : index + 1]
        places = self._places.solve(target).motions
        if not len(places):
            return miss
        other = least_miss(self._ranking, self._targets, index, places, self._task)
        both = (miss, other)
        return min(both, key=lambda one: one.angle if one.place_met else np.pi + one.position)

    def reason(self, miss: Miss, index: int) -> Reason:
        """Return it in words, with the pose there."""
        arm, tool_in_flange = self._ranking.arm, self._ranking.tool_in_flange
        nearest = tool_in_base(arm, miss.joint_values, tool_in_flange)
        return miss_told(miss, self._ranking.allowed(self._targets)[index], self._task, nearest)

    @cached_property
    def _places(self) -> Search:
        arm, tool_in_flange = self._ranking.arm, self._ranking.tool_in_flange
        return Search(arm, tool_in_flange, POSITION, _SEVERAL, _SHORT)


def least_miss(
    ranking: Ranking, targets: Targets, index: int, motions: FloatArray, task: str
) -> Miss:
    """Return the posture within travel that misses target ``index`` least, from motions (k, rows).

    The place comes first, then the least turn; of a pose, with tool z where it should point if that
    costs no more than ``_WORTH_AIMING`` times that turn.

    Examples
    --------
    Two links turned by 1.3 and -1 rad are to have the tool there, but not turned:

    >>> from kinematics.reach.targets import Target
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> arm = Arm("two", Table(Convention.STANDARD, (Row(JointKind.REVOLUTE, 1.0, 0, 0, 0),) * 2))
    >>> turned = np.array([1.3, -1.0])
    >>> pose = tool_in_base(arm, turned, np.eye(4))
    >>> pose[:3, :3] = np.eye(3)
    >>> targets = Targets.of([Target(pose)])
    >>> miss = least_miss(Ranking(arm, np.eye(4)), targets, 0, turned[None], POSE)
    >>> miss.place_met, round(miss.angle, 3)
    (True, 0.3)
    """
    least = _least(ranking, targets, index, motions, task, task)
    if task == POSE and least.place_met:
        aimed = _least(ranking, targets, index, motions, task, DIRECTION)
        allowed = float(ranking.allowed(targets)[index, 1])
        cheap = aimed.angle <= _WORTH_AIMING * least.angle
        if aimed.place_met and aimed.tilt <= allowed and cheap:
            return aimed
    return least


def _least(
    ranking: Ranking, targets: Targets, index: int, motions: FloatArray, task: str, led_by: str
) -> Miss:
    """Return the same of postures led downhill by one task, what they miss told by another."""
    arm, screws, target = ranking.arm, ranking.screws, targets.tool_in_base[index : index + 1]
    scale = np.where(arm.revolute_joints, 1.0, screws.length)
    room, lines = room_of(arm, scale), lines_of(screws, arm)
    q = for_kernel(np.clip(postures_of(arm, motions) / scale, room.lower, room.upper))
    allowed = ranking.allowed(targets)[index]
    share = float(np.sqrt(_PLACE_KEPT * allowed[0] / screws.length))
    goals = for_kernel(np.repeat(screws.scaled(target), len(q), axis=0))
    desk = desk_for(screws.rows, arm.joint_count, len(room.least))
    descend_each(lines, room, desk, TASKS[led_by], np.full(len(q), share), goals, q, _STEPS)
    there, of = arm.drive_map.motions(q * scale), np.zeros(len(q), np.intp)
    position, angle = errors_of(screws, there, target, of, task)
    tilt = angle if task == POSITION else errors_of(screws, there, target, of, DIRECTION)[1]
    met = (position <= allowed[0]) | (position < _NOTHING * screws.length * angle)
    missed = np.where(met, angle, np.pi + position / screws.length)
    if led_by != task:
        missed = np.where(tilt <= allowed[1], missed, np.inf)
    best = int(np.argmin(missed))
    off = float(position[best]), float(angle[best]), float(tilt[best])
    return Miss(q[best] * scale, *off, bool(met[best]))


def postures_of(arm: Arm, motions: FloatArray) -> FloatArray:
    """Return joint values (p, joints) of row motions (k, rows), at least one for all of them.

    Rows without a joint value need not move as wanted where no posture has them so.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table, Travel
    >>> row = Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0, direction=-1, travel=Travel(-4.0, 4.0))
    >>> arm = Arm("one", Table(Convention.STANDARD, (row,)))
    >>> postures_of(arm, np.array([[3.0]])).round(3).ravel()
    array([ 3.283, -3.   ])
    """
    values: FloatArray = drive_of(arm).postures(motions).joint_values
    if len(values):
        return values
    driven = list(arm.drive_map.driven)
    square, wanted = arm.drive_map.matrix[driven], motions[:, driven]
    return np.array(np.linalg.solve(square, wanted.T).T, dtype=np.float64)


def miss_told(miss: Miss, allowed: FloatArray, task: str, nearest: FloatArray) -> Reason:
    """Return the reason that a miss is; ``allowed`` (2,), metres and rad; ``nearest`` its pose.

    Examples
    --------
    >>> miss = Miss(np.zeros(5), 1e-7, 0.2, 1e-5, True)
    >>> miss_told(miss, np.array([1e-5, 1e-4]), "pose", np.eye(4)).text()
    'reachable with the spin about tool z off by 0.2 rad, more than the tolerance of 0.0001 rad'
    """
    if not miss.place_met:
        off, threshold, unit = miss.position, float(allowed[0]), "m"
        said = "the tool gets within {shortfall} of the place"
    else:
        off, threshold, unit = miss.angle, float(allowed[1]), "rad"
        said = "reachable with " + _turn(miss, threshold, task) + " {shortfall}"
    return Reason(
        "orientation-off" if miss.place_met else "position-off",
        f"{said}, more than the tolerance of {{threshold}}",
        "orientation" if miss.place_met else "position",
        off,
        unit,
        off,
        threshold,
        nearest,
    )


def _turn(miss: Miss, threshold: float, task: str) -> str:
    """Return what of the turn is off, in words."""
    if task == POSE and miss.tilt <= threshold:
        return "the spin about tool z off by"
    return "tool z tilted by" if miss.tilt >= _ALL_OF * miss.angle else "the tool turned off by"
