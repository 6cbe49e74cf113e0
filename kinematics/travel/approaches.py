"""Targets that the tool is to come to straight: which postures there can be come to so.

Whether a straight way exists does not depend on which end one looks from. So each posture that
gets to a target is followed backwards, from the target to where the approach starts: one way for
each posture, and no question which of the postures at the far end belongs to it. Postures with a
whole way come first; a target where no posture has one cannot be reached as asked. That is proved
where the start is out of reach, or all postures are known and it is known why each way breaks.

Source: none. Not covered: following a way (courses.py), how postures are found (reach).
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from kinematics.chain import tool_in_base
from kinematics.reach.targets import (
    NONE,
    NOT_FOUND,
    OUTSIDE_TRAVEL,
    REACHABLE,
    SEARCH,
    SPIN,
    UNREACHABLE,
    Checks,
    Target,
    Targets,
)
from kinematics.table import FloatArray
from kinematics.travel.courses import Courses
from kinematics.travel.moves import (
    Approach,
    Course,
    Leg,
    Place,
    Way,
)
from kinematics.travel.to_targets import back_along


@dataclass(frozen=True, eq=False)
class Approached:
    """Checks in which an approach counts.

    Attributes
    ----------
    checks : verdicts with approaches; postures with a whole approach stand before others.
    ways : for each solution of ``checks`` the way back from the target; None where none was asked
        for, or nobody needed to look.
    broken : for each target that the tool gets to, but not so, the way that breaks last.
    """

    checks: Checks
    ways: tuple[Way | None, ...]
    broken: Mapping[int, Way]


def with_approaches(
    courses: Courses,
    checks: Checks,
    targets: Targets,
    approaches: Mapping[int, Approach],
    *,
    every_way: bool = False,
) -> Approached:
    """Return what was answered for targets, with approaches to some of them.

    Parameters
    ----------
    checks : with all postures of each target. approaches : by index of the target, in the base.
    every_way : follow the way of every posture, and not only until one is whole.
    """
    order = np.arange(len(checks.joint_values))
    ways: list[Way | None] = [None] * len(order)
    verdict, proof = checks.verdict.copy(), checks.proof.copy()
    broken = dict[int, Way]()
    for index, approach in approaches.items():
        if checks.verdict[index] != REACHABLE:
            continue
        span = checks.solutions_of(index)
        found = _ways_back(courses, checks.joint_values[span], targets, index, approach, every_way)
        rank = sorted(range(len(found)), key=lambda place: not _is_whole(found[place]))
        order[span] = span.start + np.array(rank, dtype=np.intp)
        ways[span] = [found[place] for place in rank]
        if not _is_whole(found[rank[0]]):
            followed = [way for way in found if way is not None]
            no = _no(courses, checks, targets, index, approach, followed)
            verdict[index], proof[index] = no
            broken[index] = _longest(followed, no[0])
    return _put_together(checks, order, tuple(ways), verdict, proof, broken)


def _ways_back(
    courses: Courses,
    joint_values: FloatArray,
    targets: Targets,
    index: int,
    approach: Approach,
    every_way: bool,
) -> list[Way | None]:
    """Return the ways of postures (k, joints) back from a target, until one is whole."""
    poses = tool_in_base(courses.arm, joint_values, courses.tool_in_flange)
    # What the target leaves open, arms with few joints may need on the way too.
    left = int(targets.freedom[index]), float(targets.cone[index])
    tolerance = float(targets.position_tolerance[index]), float(targets.angle_tolerance[index])
    ways = list[Way | None]()
    for posture, tool in zip(joint_values, poses, strict=True):
        back = back_along(Target(tool, *left), approach, "approach")
        leg = Leg(Place(target=back), speed=approach.speed)
        followed = courses.follow(Course(Place(posture), (leg,), *tolerance))
        # None where the posture itself is beyond travel, by the tolerance of a target.
        way = followed.ways[0] if followed.ways else Way(posture, (), followed.broken)
        ways.append(way)
        if way.done and not every_way:
            break
    return [*ways, *[None] * (len(joint_values) - len(ways))]


def _is_whole(way: Way | None) -> bool:
    return way is not None and way.done


def _longest(ways: Sequence[Way], verdict: int) -> Way:
    """Return the way that breaks last, of those that break as the verdict says if there are any."""
    breaks = [(way, way.broken) for way in ways if way.broken is not None]
    return max(breaks, key=lambda one: (one[1].verdict == verdict, one[1].share))[0]


def _no(
    courses: Courses,
    checks: Checks,
    targets: Targets,
    index: int,
    approach: Approach,
    ways: Sequence[Way],
) -> tuple[int, int]:
    """Return verdict and proof of a target whose every approach breaks."""
    one = targets.only(np.array([index]))
    at_start = _checked_start(courses, one, approach)
    if at_start is not None and OUTSIDE_TRAVEL <= at_start.verdict[0] <= UNREACHABLE:
        return int(at_start.verdict[0]), int(at_start.proof[0])
    verdicts = {way.broken.verdict for way in ways if way.broken is not None}
    (method,) = courses.reacher.methods(one)
    listed = checks.offsets[index + 1] - checks.offsets[index]
    all_known = method.proof != SEARCH and listed == checks.found[index]
    if not all_known or checks.families_of(index) or NOT_FOUND in verdicts:
        # Another posture, or another way through a singular one, may still lead there.
        return NOT_FOUND, SEARCH
    return (OUTSIDE_TRAVEL if OUTSIDE_TRAVEL in verdicts else UNREACHABLE), method.proof


def _checked_start(courses: Courses, one: Targets, approach: Approach) -> Checks | None:
    """Return whether the start of an approach can be reached; None where postures decide where."""
    if approach.along is None and int(one.freedom[0]) not in (NONE, SPIN):
        return None
    start = back_along(Target(one.tool_in_base[0]), approach, "approach").tool_in_base
    return courses.reacher.check(replace(one, tool_in_base=start[None]))


def _put_together(
    checks: Checks,
    order: NDArray[np.intp],
    ways: tuple[Way | None, ...],
    verdict: NDArray[np.int64],
    proof: NDArray[np.int64],
    broken: Mapping[int, Way],
) -> Approached:
    """Return the checks with solutions in another order, those of refused targets left out."""
    moved = replace(checks, **{name: getattr(checks, name)[order] for name in _OF_SOLUTIONS})
    counts = np.diff(checks.offsets)
    told = np.repeat(verdict <= OUTSIDE_TRAVEL, counts)
    kept = tuple(way for way, stays in zip(ways, told, strict=True) if stays)
    return Approached(moved.with_verdicts(verdict, proof, checks.words), kept, broken)


_OF_SOLUTIONS = (
    *("joint_values", "margin", "outside_working", "position_error", "angle_error", "branch"),
)
