"""Targets that leave the turn about tool z open: the turn is tried all around.

Each target becomes a ring of poses, one every five degrees, and each of these has a complete
answer. Turns beside the best of the ring are then tried more finely, and where answers change from
yes to no the turn is halved down to the edge, so that the stretch around the best turn is told from
end to end. Where the whole ring is out of reach, the turns beside the least bad one are tried more
closely, and a search with the turn left free comes last. A stretch narrower than the ring's step
may still be missed: a no is "not found", unless the links are too short for any turn.

Source: scanning a redundant parameter is common; derived here.
Not covered: proof of a no within travel.
"""

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from kinematics.chain import tool_in_base
from kinematics.findings import FINE, Finding
from kinematics.inverse.drive import drive_of
from kinematics.inverse.four_axes import FourAxes
from kinematics.reach.answers import Answerer
from kinematics.reach.bounds import FREE, Bounds
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
from kinematics.reach.tolerances import EXACT_REACH
from kinematics.reach.ways import Asked, Basis, Way
from kinematics.table import FloatArray

RING = 72
"""Turns about tool z that are tried: every 5 deg."""

_STEP = 2.0 * np.pi / RING
_FINER, _ROUNDS, _HALVINGS = 4, 3, 20
"""Turns tried to each side of the best between its neighbours, and how often that is repeated;
halvings of an edge, which leave 5e-6 deg."""

_TOGETHER = 64
"""Targets scanned together: some thousand poses, whose arrays stay in the cache."""


def smallest_first(count: int) -> NDArray[np.intp]:
    """Return the places in a ring of so many turns, the turn by nothing first, then to both sides.

    Examples
    --------
    >>> smallest_first(5).tolist()
    [0, 1, 4, 2, 3]
    """
    places = np.arange(count)
    return np.argsort(np.minimum(places, count - places), kind="stable")


def spun(tool_in_base: FloatArray, angle: FloatArray) -> FloatArray:
    """Return poses (..., 4, 4) with the tool turned about its z axis by angles (...).

    Examples
    --------
    >>> spun(np.eye(4), np.array(np.pi / 2))[:2, :2].round(9) + 0.0
    array([[ 0., -1.],
           [ 1.,  0.]])
    """
    turn = np.zeros((*np.shape(angle), 4, 4))
    turn[..., 0, 0] = turn[..., 1, 1] = np.cos(angle)
    turn[..., 1, 0] = np.sin(angle)
    turn[..., 0, 1] = -turn[..., 1, 0]
    turn[..., 2, 2] = turn[..., 3, 3] = 1.0
    turned: FloatArray = tool_in_base @ turn
    return turned


class SpinScan:
    """Answers targets with the turn about tool z open, for an arm with complete poses.

    Parameters
    ----------
    poses : answers for poses. free : searches with the turn left free.
    """

    def __init__(self, poses: Answerer, free: Answerer) -> None:
        self._poses, self._free = poses, free
        screws = poses.ranking.screws
        off_axis = float(np.hypot(*poses.bounds.aim[:2]))
        on_axis = off_axis <= EXACT_REACH * screws.length
        self._bounds = poses.bounds if on_axis else Bounds(screws)

    @property
    def basis(self) -> Basis:
        """What answers rest on."""
        say = f"{RING} turns about tool z, each: {self._poses.method.say}"
        return Basis(SEARCH, say)

    @property
    def seconds(self) -> float:
        """About how long a target takes."""
        tried = RING + _ROUNDS * (2 * _FINER + 1) + 2 * _HALVINGS
        return tried * self._poses.seconds + self._free.seconds

    def answer(self, targets: Targets, asked: Asked) -> Checks:
        """Return verdicts and solutions of targets (m): all postures at the best turn of each."""
        held = self._bounds.hold(targets.tool_in_base).outcome != FREE
        best, edges = np.zeros(len(targets)), np.zeros((len(targets), 2))
        score = np.full(len(targets), -np.inf)
        scanned = np.flatnonzero(~held)
        for begin in range(0, len(scanned), _TOGETHER):
            some = scanned[begin : begin + _TOGETHER]
            scan = _Scan(self._poses, targets.only(some), asked)
            best[some], score[some], edges[some] = scan.run()
        missing = np.flatnonzero(~held & (score < 0.0))
        if len(missing):
            best[missing] = self._searched(targets.only(missing), best[missing])
        turned = replace(targets, tool_in_base=spun(targets.tool_in_base, best))
        checks = self._poses.answer(turned, asked)
        verdict, proof = checks.verdict.copy(), checks.proof.copy()
        no = verdict != REACHABLE
        verdict[no], proof[no] = NOT_FOUND, SEARCH
        verdict[no & held], proof[no & held] = UNREACHABLE, BOUND
        words = _SpinWords(checks.words, verdict, edges, held)
        return checks.with_verdicts(verdict, proof, words)

    def _searched(self, targets: Targets, best: FloatArray) -> FloatArray:
        """Return the turns (m,) that a search met, or those that missed least."""
        found = self._free.method.search.solve(targets.tool_in_base)
        arm = self._poses.ranking.arm
        met, first = np.unique(found.target, return_index=True)
        values = drive_of(arm).postures(found.motions[first])
        shown = tool_in_base(arm, values.joint_values, self._poses.ranking.tool_in_flange)
        at = met[values.source]
        wanted = targets.tool_in_base[at, :3, :3]
        across = np.swapaxes(wanted, 1, 2) @ shown[:, :3, :3]
        turns = best.copy()
        turns[at] = np.arctan2(across[:, 1, 0], across[:, 0, 0])
        return turns


def spin_of(poses: Answerer, free: Answerer) -> Way:
    """Return what answers targets with the turn about tool z open, for an arm that answers so.

    A ring is tried where it costs little and where turns can be had: few joints without a closed
    form for the turn left free have one turn at most, which no ring meets.
    """
    method = poses.method
    cheap = method.complete and method.solver.proof == "closed-form"
    turns = method.arm.joint_count >= 6 or isinstance(method.solver, FourAxes)
    if free.method.complete or not (cheap and turns):
        return free
    return SpinScan(poses, free)


class _Scan:
    """Scores of turns of some targets."""

    def __init__(self, poses: Answerer, targets: Targets, asked: Asked) -> None:
        self._poses, self._targets, self._asked = poses, targets, asked

    def run(self) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Return the best turn of each target, its score, and the stretch around it (m, 2)."""
        count = len(self._targets)
        ring = np.arange(RING) * _STEP
        scores = self._scores(np.broadcast_to(ring, (count, RING)))
        # The smallest turn wins where nothing tells turns apart.
        order = smallest_first(RING)
        at = order[np.argmax(scores[:, order], axis=1)]
        best, score = ring[at], scores[np.arange(count), at]
        width = _STEP
        for _ in range(_ROUNDS):
            aside = np.arange(-_FINER, _FINER + 1) / (_FINER + 1) * width
            turns = best[:, None] + aside
            near = self._scores(turns)
            better = near.max(axis=1) > score
            place = np.argmax(near, axis=1)
            best = np.where(better, turns[np.arange(count), place], best)
            score = np.maximum(score, near.max(axis=1))
            width /= _FINER + 1
        edges = np.stack([self._edge(best, scores, -1), self._edge(best, scores, 1)], axis=1)
        # Told within half a turn of the pose asked for.
        around = 2.0 * np.pi * np.round(best / (2.0 * np.pi))
        return best - around, score, edges - around[:, None]

    def _scores(self, turns: FloatArray) -> FloatArray:
        """Return the scores of turns (m, t)."""
        count, each = turns.shape
        many = self._targets.only(np.repeat(np.arange(count), each))
        poses = spun(many.tool_in_base, turns.ravel())
        many = replace(many, tool_in_base=poses)
        return self._poses.scores(many, self._asked).reshape(count, each)

    def _edge(self, best: FloatArray, scores: FloatArray, way: int) -> FloatArray:
        """Return how far the tool can be turned one way from the best turn, (m,), by halving.

        A whole turn beyond it where the ring is within reach all around.
        """
        count = len(best)
        inside = scores >= 0.0
        # From the next of the ring that way, as far as all are within reach.
        first = (np.ceil if way > 0 else np.floor)(best / _STEP).astype(np.intp)
        steps = first[:, None] + way * np.arange(RING)
        along = inside[np.arange(count)[:, None], steps % RING]
        whole = along.all(axis=1)
        ends = np.where(whole, RING, np.argmin(along, axis=1))
        low = np.where(ends > 0, (first + way * (ends - 1)) * _STEP, best)
        high = (first + way * ends) * _STEP
        for _ in range(_HALVINGS):
            middle = 0.5 * (low + high)
            reached = self._scores(middle[:, None])[:, 0] >= 0.0
            low, high = np.where(reached, middle, low), np.where(reached, high, middle)
        edge: FloatArray = np.where(whole, best + way * np.pi, low)
        return edge


@dataclass(frozen=True, eq=False)
class _SpinWords:
    """What is said of targets with the turn open, beside what is said at their best turn."""

    at_best: Words
    verdict: NDArray[np.int64]
    edges: FloatArray
    held: NDArray[np.bool_]

    def reason(self, index: int) -> Reason | None:
        reason = self.at_best.reason(index)
        if reason is None or self.held[index]:
            return reason
        step = f"{360 // RING} deg apart"
        return replace(
            reason,
            code="not-found",
            say=f"no turn about tool z was found, of {RING} tried {step}; at the best of them "
            + reason.say,
        )

    def families(self, index: int) -> tuple[Family, ...]:
        return self.at_best.families(index)

    def findings(self, index: int) -> tuple[Finding, ...]:
        findings = self.at_best.findings(index)
        if self.verdict[index] != REACHABLE:
            return findings
        least, most = self.edges[index]
        say = "the tool can be turned about its z axis from {measure} to {threshold} of the pose"
        if most - least > 2.0 * np.pi - _STEP:
            say = "the tool can be turned about its z axis all around"
        return (*findings, Finding(FINE, "spin-open", say, float(least), float(most), "rad"))
