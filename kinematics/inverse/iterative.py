"""Solutions by search: damped least squares from many starts, for whatever has no closed form.

Idea: descend from postures spread evenly over travel, the ones that already come near the target
first, until a start ends on it. It works for any arm, with couplings, travel and combined travel
built in, because all it asks of an arm is where a posture brings the tool and how that changes.
What it finds is checked; what it does not find is *not found*, and nothing is proved.

Source: multiple starts with damped least squares: Wampler 1986, Nakamura and Hanafusa 1986; the
descent and the starts have theirs in descent.py and starts.py.

Not covered: completeness. A solution with a small basin may be missed, and so may a short piece of
travel. Arms that cannot meet a target exactly (fewer than six joints) are brought to the target's
point, the orientation as near as that leaves.
"""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from kinematics.arm import Arm
from kinematics.inverse.attempts import Effort, Starts, search
from kinematics.inverse.descent import DIRECTION, POSE, POSITION
from kinematics.inverse.descent_arms import lines_of, no_bounds, room_of, slopes_of, start_box
from kinematics.inverse.descent_arrays import Room
from kinematics.inverse.found import SEARCH, TRAVEL, Found
from kinematics.inverse.landing import land_all
from kinematics.inverse.measured import errors_of, wrapped
from kinematics.inverse.screws import screws_of
from kinematics.inverse.starts import scrambled_halton
from kinematics.inverse.tolerances import (
    SEARCH_ACCEPTS,
    SEARCH_ACCEPTS_FEW,
    SEARCH_STARTS,
    SEARCH_STEPS,
    SEARCH_TURN_SHARE,
)
from kinematics.kernels.compiler import for_kernel
from kinematics.table import FloatArray
from kinematics.tolerances import GENERIC_RANK
from kinematics.travel_limits import limits_of, travel_margin

TASKS = {"pose": POSE, "position": POSITION, "position+direction": DIRECTION}
"""What of a target counts: all of it; its point; its point and where tool z points."""

_POSTURES = 512
"""Starts laid out for an arm: so many that one in a dozen has the target's orientation to some
60 deg, and few enough that looking through them costs less than a step."""
_WITHOUT_TRAVEL = 20
"""Starts for a target not found within travel, to tell whether travel is what keeps it."""
_RANK_POSTURES = 4
_SEED = 1960


@dataclass(frozen=True)
class SearchGeometry:
    """The structure a search rests on: none."""

    say: str = "no structure of the arm is used: damped least squares from many starts"


class Search:
    """A solver for any arm and task that finds what it can within travel.

    Parameters
    ----------
    tool_in_flange : (4, 4), metres.
    task : a name of ``TASKS``.
    wanted : solutions a target at most; 1 stops each target at its first.
    starts : most starts a target.

    Attributes
    ----------
    rank : how many of the task's rows the arm can move at once, as a rule.
    relaxed : whether these are too few to meet the task exactly.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = (Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0),) * 2
    >>> solver = Search(Arm("planar", Table(Convention.STANDARD, rows)), np.eye(4), "position", 2)
    >>> target = np.eye(4)[None]
    >>> target[0, :2, 3] = 0.4
    >>> np.abs(solver.solve(target).motions[:, 1].round(9) + 0.0)
    array([1.57079633, 1.57079633])
    """

    proof = "search"
    geometry = SearchGeometry()

    def __init__(
        self,
        arm: Arm,
        tool_in_flange: FloatArray,
        task: str = "pose",
        wanted: int = 1,
        starts: int = SEARCH_STARTS,
    ) -> None:
        self.arm, self.task, self._asked = arm, TASKS[task], task
        self.screws = screws_of(arm, tool_in_flange)
        self.lines = lines_of(self.screws, arm)
        self.rank = self._rank()
        self.relaxed = self.rank < {POSE: 6, POSITION: 3, DIRECTION: 5}[self.task]
        self._effort = Effort(
            starts=starts,
            steps=SEARCH_STEPS,
            wanted=wanted,
            accepted=SEARCH_ACCEPTS_FEW if self.relaxed else SEARCH_ACCEPTS,
            share=SEARCH_TURN_SHARE if self.relaxed else 1.0,
        )

    @cached_property
    def scale(self) -> FloatArray:
        """What joint values are divided by, (joints,): 1 for angles, the arm's length else."""
        return np.where(self.arm.revolute_joints, 1.0, self.screws.length)

    def _rank(self) -> int:
        """Return how many of the task's rows the arm can move at once, as a rule."""
        room, rank = no_bounds(self.arm), 0
        postures = scrambled_halton(_RANK_POSTURES, self.arm.joint_count, _SEED)
        for q in 2.0 * np.pi * postures:
            values = np.linalg.svd(slopes_of(self.lines, room, self.task, q), compute_uv=False)
            rank = max(rank, int((values > GENERIC_RANK * values.max(initial=0.0)).sum()))
        return rank

    @cached_property
    def within(self) -> Starts:
        """Where starts within travel are, and what they lead to."""
        return self._started(room_of(self.arm, self.scale))

    @cached_property
    def _anywhere(self) -> Starts:
        return self._started(no_bounds(self.arm))

    def solve(self, targets: FloatArray) -> Found:
        """Return what is found for targets (m, 4, 4), the tool in base, metres.

        Solutions are within travel. For a target without one the stage is ``travel`` where it was
        met beyond travel, at ``nearest``, and the shortfall is the share of travel lacking there;
        else ``search``, and the shortfall is the gap left, a share of the length or rad.
        """
        scaled = for_kernel(self.screws.scaled(targets))
        met = search(self.lines, self.within, self.task, self._effort, scaled)
        stage = np.where(met.many > 0, 0, SEARCH)
        shortfall = np.where(met.many > 0, 0.0, np.sqrt(met.gap))
        nearest = np.where(met.many[:, None] > 0, 0.0, met.nearest)
        missing = np.flatnonzero(met.many == 0)
        if len(missing) and self._bounded:
            effort = self._effort._replace(wanted=1, starts=_WITHOUT_TRAVEL)
            beyond = search(self.lines, self._anywhere, self.task, effort, scaled[missing])
            outside = beyond.many > 0
            reached = missing[outside]
            nearest[reached] = beyond.joint_values[outside, 0]
            stage[reached] = TRAVEL
            lacking = travel_margin(self.arm, nearest[reached] * self.scale)
            shortfall[reached] = np.maximum(-lacking, 0.0)
        place = np.arange(self._effort.wanted)[None, :] < met.many[:, None]
        target = np.nonzero(place)[0]
        motions = self._motions(met.joint_values[place])
        position_error, angle_error = errors_of(self.screws, motions, targets, target, self._asked)
        return Found(
            motions=motions,
            target=target,
            position_error=position_error,
            angle_error=angle_error,
            open=np.ones(len(scaled), np.bool_),
            stage=stage.astype(np.int64),
            shortfall=shortfall,
            nearest=self._motions(nearest),
        )

    def nearest(self, targets: FloatArray) -> FloatArray:
        """Return row motions (m, rows) within travel that bring the tool nearest to targets."""
        scaled = for_kernel(self.screws.scaled(targets))
        met = search(self.lines, self.within, self.task, self._effort, scaled)
        return self._motions(met.nearest)

    def starts_used(self, targets: FloatArray) -> FloatArray:
        """Return how many starts within travel each target took, (m,)."""
        scaled = for_kernel(self.screws.scaled(targets))
        met = search(self.lines, self.within, self.task, self._effort, scaled)
        return met.used.astype(np.float64)

    @cached_property
    def _bounded(self) -> bool:
        return bool((~limits_of(self.arm).working).any())

    def _started(self, room: Room) -> Starts:
        """Return where to move, the starts in it and the poses they bring the tool to."""
        lower, upper = start_box(self.arm, room)
        count = max(_POSTURES, self._effort.starts)
        cube = scrambled_halton(4 * count, self.arm.joint_count, _SEED)
        starts = lower + cube * (upper - lower)
        sums = starts @ room.weights.T
        fits = ((sums >= room.least) & (sums <= room.most)).all(axis=1)
        # Those within the bounds of sums first; where these are narrow, others fill up.
        order = np.argsort(~fits, kind="stable")[:count]
        starts = np.ascontiguousarray(starts[order])
        poses = np.empty((count, 4, 4))
        lines = self.lines
        motions = np.ascontiguousarray(starts @ lines.drive.T)
        land_all(lines.axis, lines.point, lines.prismatic, lines.tool_at_zero, motions, poses)
        return Starts(room, starts, poses)

    def _motions(self, values: FloatArray) -> FloatArray:
        """Return scaled joint values (k, joints) as row motions, rad in (-pi, pi] and metres."""
        moved = values @ self.lines.drive.T
        prismatic = self.screws.prismatic
        return wrapped(np.where(prismatic, moved * self.screws.length, moved), prismatic)
