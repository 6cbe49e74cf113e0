"""Whether an arm can follow a course, from which of its postures, and how.

``Courses`` is made once for an arm with a tool. A way begins in each posture at the start, and each
leg goes on where the one before ended, on the same branch. Ways that get to the end come first, the
one with most travel left before all; else the one that gets furthest says why none does.

Source: none; an order. Not covered: how a leg is followed (straight.py, in_joints.py).
"""

from functools import cached_property
from typing import NamedTuple

import numpy as np

from kinematics.chain import tool_in_base
from kinematics.findings import FINE, Finding
from kinematics.reach.branches import Branches
from kinematics.reach.checks import Reacher
from kinematics.reach.targets import CONE, NONE, REACHABLE, SPIN, Checks, Target, Targets
from kinematics.table import FloatArray
from kinematics.travel.above_zero import check_above_zero
from kinematics.travel.breaks import Breaks, out_of_reach
from kinematics.travel.in_joints import joint_trail
from kinematics.travel.lines import end_of_line, line_between
from kinematics.travel.moves import (
    BEYOND_TRAVEL,
    BRANCH_ENDS,
    OFF_LINE,
    SINGULAR,
    STRAIGHT,
    Break,
    Course,
    Followed,
    Gone,
    Leg,
    Place,
    Way,
)
from kinematics.travel.straight import OnLines
from kinematics.travel.told_legs import Teller
from kinematics.travel.tolerances import MOST_WAYS
from kinematics.travel.trails import STALLS, WHOLE, Trail

_LEG_SECONDS, _USUAL_WAYS = 1.2e-3, 4
"""About what a leg of one way takes, and how many postures a pose has."""


class _At(NamedTuple):
    """Where a way is: joint values (joints,), and the pose that the tool is meant to have there."""

    posture: FloatArray
    tool_in_base: FloatArray


class Courses:
    """Follows courses of one arm with one tool.

    Safe to be used by several threads.

    Parameters
    ----------
    reacher : answers for postures at places given as targets, and knows arm and tool.

    Examples
    --------
    >>> from kinematics.arm import Arm
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> turning, sliding = (Row(kind, 0.3, 0.0, 0.0, 0.0) for kind in JointKind)
    >>> arm = Arm("four", Table(Convention.STANDARD, (turning, turning, sliding, turning)))
    >>> end = np.eye(4)
    >>> end[:3, 3] = [0.9, 0.3, 0.1]
    >>> straight = Leg(Place(target=Target(end)))
    >>> start = np.array([0.5, -1.0, 0.0, 0.5])
    >>> followed = Courses(Reacher(arm, np.eye(4))).follow(Course(Place(start), (straight,)))
    >>> followed.done, followed.ways[0].legs[0].branch_at_end
    (True, 'elbow to the left, seen from above')
    """

    def __init__(self, reacher: Reacher) -> None:
        self.reacher = reacher
        self.arm, self.tool_in_flange = reacher.arm, reacher.tool_in_flange
        self._on_lines: dict[int, OnLines] = {}
        self._tellers: dict[int, Teller] = {}
        self._breaks: dict[int, Breaks] = {}

    @property
    def say(self) -> str:
        """How ways are followed, for people."""
        followed = (
            "straight legs are followed step by step on one branch of postures, up to where two "
            "branches meet"
        )
        if self._lines_of(NONE).few:
            joints = f"with {self.arm.joint_count} joints by least squares"
            return f"{followed}; {joints}, held to the target's tolerance"
        spare = self._lines_of(NONE).spare
        if spare:
            joints = "a spare joint" if spare == 1 else f"{spare} spare joints"
            return (
                f"{followed}; with {joints} by the least motion of all joints (pseudo-inverse), "
                "held back near their limits: another share of the work may get further"
            )
        return followed

    def follow(self, course: Course, near: FloatArray | None = None) -> Followed:
        """Return the ways of a course, and why none gets to the end if so.

        Parameters
        ----------
        near : (joints,), of more postures at the start than are followed those nearest to it.

        Raises
        ------
        KinematicsError : a speed that is not above 0, ``where`` in the course.
        """
        for index, leg in enumerate(course.legs):
            for value, name in ((leg.speed, "speed"), (leg.turn_speed, "turn_speed")):
                if value is not None:
                    what = f"the {name.replace('_', ' ')} of leg {index + 1}"
                    check_above_zero(value, what, ("legs", index, name))
        starts, checks = self._starts(course.start, near)
        if checks is not None and checks.verdict[0] != REACHABLE:
            broken = out_of_reach(checks, 0, at_start=True)
            return Followed((), broken, 0, self.say)
        ways = [self._way(course, at) for at in starts[:MOST_WAYS]]
        ways.sort(key=_rank)
        started = len(starts) if checks is None else int(checks.found[0])
        broken_first = ways[0].broken if ways else None
        return Followed(tuple(ways), broken_first, started, self.say, self._spare())

    def estimated_seconds(self, course: Course) -> float:
        """Return about how long ``follow`` takes."""
        targets = [course.start.target, *(leg.end.target for leg in course.legs if leg.kind)]
        asked = Targets.of([target for target in targets if target is not None])
        seconds = self.reacher.estimated_seconds(asked) if len(asked) else 0.0
        ways = _USUAL_WAYS if course.start.target is not None else 1
        return seconds + ways * len(course.legs) * _LEG_SECONDS

    def _starts(self, place: Place, near: FloatArray | None) -> tuple[list[_At], Checks | None]:
        """Return the postures at the start, the best first, and what was asked for them."""
        if place.joint_values is not None:
            tool = tool_in_base(self.arm, place.joint_values, self.tool_in_flange)
            return [_At(place.joint_values, tool)], None
        target = _target_of(place)
        checks = self.reacher.check(Targets.of([target]), near=near)
        postures = checks.joint_values[checks.solutions_of(0)]
        tools = tool_in_base(self.arm, postures, self.tool_in_flange)
        exact = target.freedom == NONE
        meant = [target.tool_in_base if exact else tool for tool in tools]
        return [_At(*pair) for pair in zip(postures, meant, strict=True)], checks

    def _way(self, course: Course, start: _At) -> Way:
        at, legs, broken = start, list[Gone](), None
        allowed = course.position_tolerance, course.angle_tolerance
        for index, leg in enumerate(course.legs):
            if leg.kind == STRAIGHT:
                gone, broken, at = self._straight(index, leg, at, allowed, course.samples)
            else:
                gone, broken, at = self._in_joints(index, leg, at, course.samples)
            if gone is not None:
                legs.append(gone)
            if broken is not None:
                break
        return Way(start.posture, tuple(legs), broken)

    def _straight(
        self, index: int, leg: Leg, at: _At, allowed: tuple[float, float], samples: int
    ) -> tuple[Gone | None, Break | None, _At]:
        left = NONE if leg.end.target is None else leg.end.target.freedom
        lines = self._lines_of(left)
        end = self._end_pose(leg.end, at)
        run = lines.run(line_between(at.tool_in_base, end), at.posture, allowed)
        trail, teller = lines.as_trail(run), self._teller_of(left)
        weakest = teller.weakest(trail)
        if weakest[0] <= self.arm.thresholds.singular and self._stops(trail, weakest[1], left):
            trail = lines.as_trail(lines.cut(run, weakest[1], SINGULAR))
        gone = teller.told(trail, leg, weakest, samples)
        broken = self._broken(trail, index, left, allowed)
        if lines.left != NONE:
            # What the leg left open is as the posture has it.
            end = tool_in_base(self.arm, trail.last, self.tool_in_flange)
        return gone, broken, _At(trail.last, end)

    def _stops(self, trail: Trail, share: float, left: int) -> bool:
        """Tell whether a leg that is singular at a share of it stops there.

        It may begin and end at a fold.
        """
        if trail.kind == SINGULAR:
            return False
        if trail.kind == WHOLE and share in (0.0, trail.share):
            return not self._breaks_of(left).ends(trail.at(np.array([share]))[0] * trail.scale)
        return True

    def _end_pose(self, end: Place, at: _At) -> FloatArray:
        """Return the pose that a straight leg ends in."""
        if end.joint_values is not None:
            return tool_in_base(self.arm, end.joint_values, self.tool_in_flange)
        target = _target_of(end)
        return end_of_line(at.tool_in_base, target)

    def _in_joints(
        self, index: int, leg: Leg, at: _At, samples: int
    ) -> tuple[Gone | None, Break | None, _At]:
        end = leg.end.joint_values
        if end is None:
            checks = self.reacher.check(Targets.of([_target_of(leg.end)]), near=at.posture)
            if checks.verdict[0] != REACHABLE:
                return None, out_of_reach(checks, index, at_start=False), at
            end = self._like(at.posture, checks)
        lines, teller = self._lines_of(NONE), self._teller_of(NONE)
        trail = joint_trail(self.arm, self.tool_in_flange, lines.scale, at.posture, end)
        gone = teller.told(trail, leg, teller.weakest(trail), samples)
        tool = tool_in_base(self.arm, trail.last, self.tool_in_flange)
        return gone, self._broken(trail, index, NONE, (0.0, 0.0)), _At(trail.last, tool)

    def _like(self, posture: FloatArray, checks: Checks) -> FloatArray:
        """Return the nearest posture on the branch that the arm is on, else the nearest of all."""
        branches = self._branches
        motions = self.arm.drive_map.motions(posture[None])
        said = branches.sentences[branches.of(motions, np.zeros(1, np.intp))[0]]
        told = [branches.sentences[code] for code in checks.branch]
        like: FloatArray = checks.joint_values[told.index(said) if said in told else 0]
        return like

    def _broken(
        self, trail: Trail, index: int, left: int, allowed: tuple[float, float]
    ) -> Break | None:
        """Return the break of a leg, None where there is none."""
        if trail.kind == WHOLE:
            return None
        breaks, kind = self._breaks_of(left), trail.kind
        share, distance, posture = trail.share, float(trail.places[-1]), trail.last
        if kind == BEYOND_TRAVEL:
            return breaks.of_limit(index, share, distance, posture, trail.limit)
        if kind == OFF_LINE:
            gaps = trail.track.gaps[trail.count - 1]
            gap = float(gaps[0]) * self._lines_of(left).screws.length, float(gaps[1])
            return breaks.of_line(index, share, distance, posture, gap, allowed)
        if kind == STALLS:
            kind = BRANCH_ENDS if breaks.ends(posture) else SINGULAR
        return breaks.of_branch(kind, index, share, distance, posture)

    def _spare(self) -> tuple[Finding, ...]:
        spare = self._lines_of(NONE).spare
        if not spare:
            return ()
        say = (
            "the arm has {measure} joint motions to spare: straight legs are followed with the "
            "least motion of all joints; where such a way breaks another may not"
        )
        return (Finding(FINE, "spare-joints", say, float(spare), 0.0),)

    @cached_property
    def _branches(self) -> Branches:
        return Branches(self.arm, self._lines_of(NONE).screws)

    def _lines_of(self, left: int) -> OnLines:
        """Return what follows lines of which so much is left open."""
        left = self._held(left)
        known = self._on_lines.get(left)
        if known is None:
            lines = OnLines(self.arm, self.tool_in_flange, left)
            known = self._on_lines.setdefault(left, lines)
        return known

    def _held(self, left: int) -> int:
        """Return what is left open to an arm: with six joints and more nothing."""
        return NONE if self.arm.joint_count >= 6 else SPIN if left == CONE else left

    def _teller_of(self, left: int) -> Teller:
        left = self._held(left)
        known = self._tellers.get(left)
        if known is None:
            lines = self._lines_of(left)
            teller = Teller(
                self.arm, self.tool_in_flange, lines.space, lines.bounds, self._branches,
                lines.screws.length,
            )  # fmt: skip
            known = self._tellers.setdefault(left, teller)
        return known

    def _breaks_of(self, left: int) -> Breaks:
        left = self._held(left)
        known = self._breaks.get(left)
        if known is None:
            breaks = Breaks(self.arm, self.tool_in_flange, self._lines_of(left).space)
            known = self._breaks.setdefault(left, breaks)
        return known


def _target_of(place: Place) -> Target:
    assert place.target is not None
    return place.target


def _rank(way: Way) -> tuple[float, ...]:
    """Return what ways are sorted by: whole ones by margin, others by how far they get."""
    if way.broken is None:
        return (0.0, -way.margin)
    return (1.0, -float(way.broken.leg), -way.broken.share, -way.margin)
