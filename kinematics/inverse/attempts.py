"""Start after start for many targets at once, until enough different solutions were met.

Idea: descend from the starts nearest to the target, then from the others in their even order. Most
go downhill as if there were no travel, are brought back into it by whole turns, and go on from
there: the ends of travel bar ways to solutions within it, and so twice as many starts arrive. What
ends on the target is kept if it is new but for whole turns; of all else the nearest is remembered.

Source: none; bookkeeping around kinematics/inverse/descent.py. Not covered: whether the solutions
found are all there are.
"""

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.descent import descend_all
from kinematics.inverse.descent_arrays import Lines, Room, desk_for, widened
from kinematics.inverse.starts import nearest_starts
from kinematics.number_checks import FloatArray

IndexArray = NDArray[np.intp]

NEAR_FIRST = 8
"""Starts taken in the order of their distance from the target, before the others."""
PATIENCE, PATIENT_STARTS = 10, 10
"""Times the steps that the first starts may take when they are nearly there: enough for a target
beside a singular posture; with all starts, one a hair beyond reach would cost a quarter second."""
WITHIN_FIRST = 4
"""Every fourth start, the first among them, keeps within travel all the way."""
SAME_SOLUTION = 1e-6
"""Radians, or shares of the length, of a row's motion within which two solutions are one: beyond
it they part by more than the digits a start leaves, except at folds, where they are one."""


class Starts(NamedTuple):
    """Where to move, (count, joints) postures in it, and the poses (count, 4, 4) they lead to."""

    room: Room
    postures: FloatArray
    poses: FloatArray


class Effort(NamedTuple):
    """What a search may spend and what it accepts.

    Attributes
    ----------
    starts : most starts a target; steps : most steps a start; wanted : solutions a target.
    accepted : gap, a share of the length or rad, within which the tool is on the target.
    share : weight of turns in the last steps: 1, or small so that positions are met first.
    """

    starts: int
    steps: int
    wanted: int
    accepted: float
    share: float


class Met(NamedTuple):
    """What a search met, of m targets and ``wanted`` solutions each.

    Attributes
    ----------
    joint_values : (m, wanted, joints); many : (m,), how many of them are solutions.
    nearest : (m, joints), where the tool came nearest; gap : (m,), how near, squared.
    used : (m,), starts made.
    """

    joint_values: FloatArray
    many: IndexArray
    nearest: FloatArray
    gap: FloatArray
    used: IndexArray


def search(lines: Lines, starts: Starts, task: int, effort: Effort, targets: FloatArray) -> Met:
    """Search for targets (m, 4, 4), lengths as shares of the arm's, from start after start."""
    count, joints = len(targets), starts.postures.shape[1]
    met = Met(
        np.zeros((count, effort.wanted, joints)),
        np.zeros(count, np.intp),
        np.zeros((count, joints)),
        np.full(count, np.inf),
        np.zeros(count, np.intp),
    )
    downhill = _Downhill(lines, task, effort, targets)
    near = nearest_starts(starts.poses, targets, task, min(NEAR_FIRST, len(starts.poses)))
    ordered = np.sort(near, axis=1) - np.arange(near.shape[1])
    room, anywhere = starts.room, widened(starts.room)
    bounded = bool((room.lower > anywhere.lower).any() or len(room.least))
    waiting = np.arange(count)
    for attempt in range(min(effort.starts, len(starts.postures))):
        if not len(waiting):
            break
        if attempt < near.shape[1]:
            which = near[waiting, attempt]
        else:
            # The next of the even order, over those of the nearest that come before it.
            place = attempt - near.shape[1]
            which = place + (ordered[waiting] <= place).sum(axis=1)
        q = starts.postures[which]
        patience = PATIENCE if attempt < PATIENT_STARTS else 1
        if bounded and attempt % WITHIN_FIRST:
            downhill(anywhere, 1.0, waiting, q, patience)
            q = brought_home(room, q)
        squared = downhill(room, 1.0, waiting, q, patience)
        _keep(met, downhill, room, waiting, q, squared)
        waiting = waiting[met.many[waiting] < effort.wanted]
    return met


class _Downhill:
    """Descents for one arm, task and list of targets, with the arrays they work on."""

    def __init__(self, lines: Lines, task: int, effort: Effort, targets: FloatArray) -> None:
        self.lines, self.effort = lines, effort
        self._task, self._targets = task, targets

    def __call__(
        self, room: Room, share: float, of: IndexArray, q: FloatArray, patience: int
    ) -> FloatArray:
        """Bring postures (k, joints) downhill to the targets ``of`` (k,); return squared gaps."""
        rows, joints = self.lines.drive.shape
        squared, desk = np.empty(len(q)), desk_for(rows, joints, len(room.least))
        limits = (self.effort.steps, patience)
        arguments = (self._task, share, self._targets, of, q, *limits, squared)
        descend_all(self.lines, room, desk, *arguments)
        return squared


def _keep(
    met: Met,
    downhill: _Downhill,
    room: Room,
    waiting: IndexArray,
    q: FloatArray,
    squared: FloatArray,
) -> None:
    """Enter where descents for the targets ``waiting`` (k,) ended, q (k, joints), into ``met``."""
    lines, effort = downhill.lines, downhill.effort
    met.used[waiting] += 1
    nearer = squared < met.gap[waiting]
    met.gap[waiting[nearer]], met.nearest[waiting[nearer]] = squared[nearer], q[nearer]
    landed = squared <= effort.accepted**2
    of, values = waiting[landed], q[landed]
    if effort.share < 1.0:
        downhill(room, effort.share, of, values, 1)
    apart = (values[:, None, :] - met.joint_values[of]) @ lines.drive.T
    whole = 2.0 * np.pi * np.rint(apart / (2.0 * np.pi))
    apart -= np.where(lines.prismatic, 0.0, whole)
    same = np.abs(apart).max(axis=2, initial=0.0) <= SAME_SOLUTION
    known = np.arange(effort.wanted) < met.many[of][:, None]
    new = ~(same & known).any(axis=1)
    met.joint_values[of[new], met.many[of[new]]] = values[new]
    met.many[of[new]] += 1


def brought_home(room: Room, q: FloatArray) -> FloatArray:
    """Return joint values in their travel: moved by whole turns where these do, else to its end.

    Examples
    --------
    A turn of 4 rad within 3 either side, and a slide of 4 within as much:

    >>> three, none = np.full(2, 3.0), np.empty(0)
    >>> room = Room(-three, three, np.empty((0, 2)), none, none, np.array([True, False]))
    >>> brought_home(room, np.array([4.0, 4.0])).round(3)
    array([-2.283,  3.   ])
    """
    off = q - 0.5 * (room.lower + room.upper)
    whole = 2.0 * np.pi * np.rint(off / (2.0 * np.pi))
    moved = q - np.where(room.turning, whole, 0.0)
    home: FloatArray = np.clip(moved, room.lower, room.upper)
    return home
