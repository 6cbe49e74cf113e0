"""Targets that leave tool z within a cone, and the turn about it open.

Where there is a closed form, directions are spread evenly over the cone, the asked one first, as a
golden spiral on the cap, and each is a target of its own, with a few turns about it. What that
leaves, and arms without a closed form for poses, are searched for: each start is led to the
direction in the cone that is nearest to where it points (inverse/cone_search.py), and all postures
at the pose met are the answer. What carries the tool's point alone gets there in some
postures only, and those that point within the cone are picked. A no is "not found", unless every
posture was held against the cone or the links are too short.

Source: the golden spiral: Gonzalez, Measurement of areas on a sphere using Fibonacci and
latitude-longitude lattices, 2010, recalled; the search has its own.
Not covered: the shape of what is open within the cone.
"""

from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from kinematics.findings import FINE, Finding
from kinematics.inverse.cone_search import ConeSearch
from kinematics.inverse.iterative import Search
from kinematics.inverse.measured import POSITION
from kinematics.reach.answers import Answerer
from kinematics.reach.bounds import FREE, Bounds
from kinematics.reach.spins import smallest_first, spun
from kinematics.reach.targets import (
    BOUND,
    NOT_FOUND,
    REACHABLE,
    SEARCH,
    UNREACHABLE,
    Checks,
    Family,
    Reason,
    Targets,
    Words,
)
from kinematics.reach.ways import Asked, Basis, Way
from kinematics.table import FloatArray

DIRECTIONS, TURNS = 60, 12
"""Directions within a cone, and turns about each of them, that are tried."""

_TOGETHER = 8

_TRIED_SECONDS, _SEARCHED_SECONDS = 1.5e-5, 6e-3
"""About what a pose that is tried takes, and a search where one target in ten is not found."""


_NONE = np.empty(0, np.intp)
_CLOSED = "closed-form"


def directions_in(cone: float, count: int = DIRECTIONS) -> FloatArray:
    """Return rotations (count, 3, 3) that lead z to directions spread over a cone, z itself first.

    Parameters
    ----------
    cone : half-angle, 0 to pi.

    Examples
    --------
    >>> turned = directions_in(np.pi / 2, 5)[:, :, 2]
    >>> turned[0].round(9), bool((turned[:, 2] >= 0).all())
    (array([0., 0., 1.]), True)
    """
    rank = np.arange(count) / max(count - 1, 1)
    height = 1.0 - (1.0 - np.cos(cone)) * rank
    around = np.arange(count) * np.pi * (3.0 - np.sqrt(5.0))
    aside = np.sqrt(np.maximum(0.0, 1.0 - height * height))
    # A turn by the angle from z about the axis across: x sin, y -sin of the way round.
    x, y = -np.sin(around), np.cos(around)
    turns = np.empty((count, 3, 3))
    less = 1.0 - height
    turns[:, 0] = np.stack([height + less * x * x, less * x * y, aside * y], axis=1)
    turns[:, 1] = np.stack([less * x * y, height + less * y * y, -aside * x], axis=1)
    turns[:, 2] = np.stack([-aside * y, aside * x, height], axis=1)
    return turns


class ConeScan:
    """Answers targets with tool z in a cone by trying directions, and by a search for the others.

    Parameters
    ----------
    ways : answers targets of one direction, or of one pose.
    scans : whether directions, and turns about them, are tried before the search.
    """

    def __init__(self, ways: Answerer, scans: bool) -> None:
        self._ways, self._scans = ways, scans
        self._bounds = Bounds(ways.ranking.screws)

    @property
    def basis(self) -> Basis:
        """What answers rest on."""
        tried = (
            f"{DIRECTIONS} directions and {TURNS} turns about each, then " if self._scans else ""
        )
        say = f"{tried}a search led to the nearest direction in the cone; at the best of them: "
        return Basis(SEARCH, say + self._ways.method.say)

    @property
    def seconds(self) -> float:
        """About how long a target takes."""
        tried = DIRECTIONS * TURNS * _TRIED_SECONDS if self._scans else 0.0
        return tried + _SEARCHED_SECONDS + self._ways.seconds

    @cached_property
    def _search(self) -> ConeSearch:
        ranking = self._ways.ranking
        return ConeSearch(ranking.arm, ranking.tool_in_flange)

    def answer(self, targets: Targets, asked: Asked) -> Checks:
        """Return verdicts and solutions of targets (m): all postures at the best pose tried."""
        held = self._bounds.hold(targets.tool_in_base).outcome != FREE
        poses, left = targets.tool_in_base.copy(), targets.cone.copy()
        missing = ~held
        scanned = np.flatnonzero(missing) if self._scans else _NONE
        for begin in range(0, len(scanned), _TOGETHER):
            some = scanned[begin : begin + _TOGETHER]
            poses[some], left[some], score = self._best(targets.only(some), asked)
            missing[some] = score < 0.0
        searched = np.flatnonzero(missing)
        if len(searched):
            asked.go_on()
            met = self._search.solve(targets.tool_in_base[searched], targets.cone[searched])
            found = searched[met.met]
            poses[found] = met.tool_in_base[met.met]
            off = _angle_from_z(_turns_between(targets.tool_in_base[found], poses[found]))
            left[found] = np.maximum(targets.cone[found] - off, 0.0)
        wide = targets.angle_tolerance + left
        checks = self._ways.answer(
            replace(targets, tool_in_base=poses, angle_tolerance=wide), asked
        )
        checks = _beyond_the_cone(checks, left)
        verdict, proof = checks.verdict.copy(), checks.proof.copy()
        no = verdict != REACHABLE
        verdict[no], proof[no] = NOT_FOUND, SEARCH
        verdict[no & held], proof[no & held] = UNREACHABLE, BOUND
        words = _ConeWords(checks.words, verdict, held, targets, poses, self._scans)
        return checks.with_verdicts(verdict, proof, words)

    def _best(self, targets: Targets, asked: Asked) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Return the best of the poses tried for each target (m, 4, 4), and its score (m,).

        In between what is left of the cone beside it, (m,): an arm of few joints may miss a
        direction by that. Of equals the first direction stays, and the smallest turn.
        """
        count, each = len(targets), DIRECTIONS * TURNS
        around = (2.0 * np.pi / TURNS * smallest_first(TURNS)).astype(np.float64)
        tried = np.empty((count, DIRECTIONS, TURNS, 4, 4))
        left = np.empty((count, DIRECTIONS, TURNS))
        for index in range(count):
            cone, pose = float(targets.cone[index]), targets.tool_in_base[index]
            turns = directions_in(cone)
            tilted = np.tile(pose, (DIRECTIONS, 1, 1))
            tilted[:, :3, :3] = pose[:3, :3] @ turns
            tried[index] = spun(tilted[:, None], around[None, :])
            left[index] = np.maximum(cone - _angle_from_z(turns), 0.0)[:, None]
        many = targets.only(np.repeat(np.arange(count), each))
        wide = many.angle_tolerance + left.ravel()
        many = replace(many, tool_in_base=tried.reshape(-1, 4, 4), angle_tolerance=wide)
        scores = self._ways.scores(many, asked).reshape(count, each)
        best = np.arange(count), np.argmax(scores, axis=1)
        return tried.reshape(count, each, 4, 4)[best], left.reshape(count, each)[best], scores[best]


def _turns_between(one: FloatArray, other: FloatArray) -> FloatArray:
    """Return the turns (k, 3, 3) from poses (k, 4, 4) to others, in the axes of the first."""
    turns: FloatArray = np.swapaxes(one[:, :3, :3], 1, 2) @ other[:, :3, :3]
    return turns


def _angle_from_z(turns: FloatArray) -> FloatArray:
    """Return how far turns (k, 3, 3) lead z from itself, (k,)."""
    angles: FloatArray = np.arctan2(np.hypot(turns[:, 0, 2], turns[:, 1, 2]), turns[:, 2, 2])
    return angles


def _beyond_the_cone(checks: Checks, left: FloatArray) -> Checks:
    """Return answers whose errors of the angle are what is beyond ``left`` (m,) of a cone."""
    allowed = np.repeat(left, np.diff(checks.offsets))
    return replace(checks, angle_error=np.maximum(checks.angle_error - allowed, 0.0))


class WithinCone:
    """Answers targets with tool z in a cone by postures that differ in direction.

    Parameters
    ----------
    way : answers targets of one direction, and takes a cone for tolerance of its angle.
    """

    def __init__(self, way: Way) -> None:
        self._way = way

    @property
    def basis(self) -> Basis:
        """What answers rest on."""
        return self._way.basis

    @property
    def seconds(self) -> float:
        """About how long a target takes."""
        return self._way.seconds

    def answer(self, targets: Targets, asked: Asked) -> Checks:
        """Return verdicts and solutions of targets (m); errors of the angle are beyond the cone."""
        wide = replace(targets, angle_tolerance=targets.angle_tolerance + targets.cone)
        return _beyond_the_cone(self._way.answer(wide, asked), targets.cone)


def _few_ways_to_a_place(free: Answerer) -> bool:
    """Tell whether the tool's point gets to a place in so many postures only, none beside them."""
    method = free.method
    moving = method.arm.joint_count - np.count_nonzero(method.idle)
    return Search(method.arm, method.tool_in_flange, POSITION).rank == int(moving)


def cone_of(poses: Answerer, free: Answerer, spins: Way) -> Way:
    """Return what answers targets with a cone, for an arm that answers poses and directions so."""
    joints = poses.ranking.arm.joint_count
    if free.method.complete and _few_ways_to_a_place(free):
        return WithinCone(spins)
    if joints > 5 and poses.method.solver.proof == _CLOSED:
        return ConeScan(poses, True)
    exact = poses.method.complete and (joints > 5 or not free.method.complete)
    return ConeScan(poses if exact else free, False)


@dataclass(frozen=True, eq=False)
class _ConeWords:
    """What is said of targets with a cone, beside what is said at the best pose tried."""

    at_best: Words
    verdict: NDArray[np.int64]
    held: NDArray[np.bool_]
    targets: Targets
    poses: FloatArray
    scanned: bool

    def reason(self, index: int) -> Reason | None:
        reason = self.at_best.reason(index)
        if reason is None or self.held[index]:
            return reason
        tried = f"of {DIRECTIONS} tried and by search" if self.scanned else "by search"
        say = f"no direction within the cone was found, {tried}; at the best of them "
        return replace(reason, code="not-found", say=say + reason.say)

    def families(self, index: int) -> tuple[Family, ...]:
        return self.at_best.families(index)

    def findings(self, index: int) -> tuple[Finding, ...]:
        findings = self.at_best.findings(index)
        if self.verdict[index] != REACHABLE:
            return findings
        asked, met = self.targets.tool_in_base[index, :3, 2], self.poses[index, :3, 2]
        off = float(np.arctan2(np.linalg.norm(np.cross(asked, met)), asked @ met))
        say = "the posture told first has tool z {measure} off the direction asked for, of a cone "
        cone = Finding(
            FINE, "cone-open", say + "of {threshold}", off, float(self.targets.cone[index]), "rad"
        )
        return (*findings, cone)
