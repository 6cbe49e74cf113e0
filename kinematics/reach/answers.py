"""What one method's solutions make of targets: postures, verdicts, and what proves them.

Solutions become ranked postures; a target with one within travel is reachable, and they are its
witnesses. A no is proved where the links are too short for anybody, or where a closed form found
nothing and met no free joint. Where it met one, families are followed and a search looks once
more; what is then still missing is cut into boxes (last_proof.py), or "not found".

Source: none. Not covered: targets that leave a turn open (spins.py).
"""

from dataclasses import replace
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.drive import drive_of
from kinematics.inverse.found import Found, none_found
from kinematics.inverse.four_axes import FourAxes
from kinematics.inverse.lost_rank import LostRank
from kinematics.inverse.measured import POSE, POSITION
from kinematics.inverse.several import joined, picked
from kinematics.inverse.solve import method_of
from kinematics.kernels.best_postures import preferred
from kinematics.reach.at_limits import with_ends_of_travel
from kinematics.reach.bounds import FREE, Bounds
from kinematics.reach.durations import seconds_of
from kinematics.reach.family_members import FamiliesOf, with_witnesses
from kinematics.reach.last_proof import LastProof, Proofs
from kinematics.reach.listing import how_many, listed
from kinematics.reach.near_enough import NearEnough
from kinematics.reach.one_target import one_target_of
from kinematics.reach.reasons import Told
from kinematics.reach.targets import (
    BOUND,
    BRANCH_AND_BOUND,
    NOT_FOUND,
    OUTSIDE_TRAVEL,
    PROOFS,
    SEARCH,
    UNREACHABLE,
    Checks,
    Targets,
)
from kinematics.reach.tolerances import MOST_LISTED
from kinematics.reach.verdicts import Ranked, Ranking
from kinematics.reach.ways import Asked, Basis
from kinematics.table import FloatArray


class Answerer:
    """Answers targets of one task (inverse/measured.py) for one arm with one tool.

    Attributes
    ----------
    ranking, method : what ranks, and what solves.
    one_target : what answers for one pose at once, None where nothing does.
    """

    def __init__(self, ranking: Ranking, task: str) -> None:
        self.ranking = ranking
        self.method = method_of(ranking.arm, ranking.tool_in_flange, task)
        self._proof = PROOFS.index(self.method.solver.proof)
        self._near_enough = NearEnough(ranking, self.method)
        six = ranking.screws.rows == 6 == ranking.arm.joint_count and task != POSITION
        self.one_target = None if task == POSITION else one_target_of(ranking, self.method.solver)
        self._lost_rank = LostRank(ranking.screws) if six else None
        self._last_proof = LastProof(ranking, self.method)

    @cached_property
    def bounds(self) -> Bounds:
        """What proves a no without solving."""
        return Bounds(self.ranking.screws, self.method.task == POSE)

    @property
    def basis(self) -> Basis:
        """What answers rest on."""
        return Basis(self._proof if self.method.complete else SEARCH, self.method.say)

    @property
    def seconds(self) -> float:
        """About how long a target takes."""
        return seconds_of(self._proof, self.method.complete, self._near_enough.searches)

    def answer(self, targets: Targets, asked: Asked) -> Checks:
        """Return verdicts and solutions of targets (m)."""
        rest = self._rest(asked.near)
        everything = self._solved(targets, rest, asked.near)
        found = self._near_enough.of(everything, targets, rest)
        everything = replace(everything, open=found.open)
        families: FamiliesOf = {}
        is_open = found.open if self.method.complete else np.ones(len(targets), np.bool_)
        if self.method.closed:
            suspects = self._suspects(found)
            if suspects is not None:
                asked.go_on()
                is_open = is_open.copy()
                is_open[found.target[suspects]] = True
                poses = targets.tool_in_base
                found, families = with_witnesses(self.method, found, poses, suspects)
        ranked = self._ranked(found, targets, asked)
        if not ranked.all_inside:
            at_ends = with_ends_of_travel(self.ranking, self.method, found, targets, ranked)
            if at_ends is not None:
                found = at_ends
                ranked = self._ranked(found, targets, asked)
        if self._near_enough.searches and not ranked.all_inside:
            asked.go_on()
            wanted = ~ranked.inside & (self._held(targets) == FREE)
            found = self._near_enough.elsewhere(found, targets, wanted)
            ranked = self._ranked(found, targets, asked)
        if self.method.closed and not ranked.all_inside:
            left = np.flatnonzero(~ranked.inside & is_open)
            if len(left):
                asked.go_on()
                more = self.method.search.solve(targets.tool_in_base[left])
                accepted = picked(more, self.ranking.accepted(more, targets.only(left)))
                found, everything = joined(found, accepted, left), joined(everything, more, left)
                ranked = self._ranked(found, targets, asked)
        proofs = self._by_boxes(targets, everything, ranked, is_open, asked)
        if proofs is not None and len(proofs.met.target):
            found, everything = proofs.added_to(found), proofs.added_to(everything)
            ranked = self._ranked(found, targets, asked)
        return self._told(targets, everything, found, ranked, rest, families, proofs)

    def _by_boxes(
        self,
        targets: Targets,
        known: Found,
        ranked: Ranked,
        is_open: NDArray[np.bool_],
        asked: Asked,
    ) -> Proofs | None:
        """Cut travel into boxes for targets of which nothing within travel is known, nor a proof.

        Few joints are held to a tolerance in place and turn, which a closed form knows nothing of:
        they are asked about whatever it says.
        """
        if ranked.all_inside:
            return None
        tolerated = not self.ranking.exact and self.method.task != POSITION
        tolerated = tolerated and not isinstance(self.method.solver, FourAxes)
        refused = ~is_open
        refused[ranked.target[ranked.seen < 0]] = False  # not every whole turn was looked at
        doubted = ~ranked.inside & (tolerated | ~refused)
        left = np.flatnonzero(doubted & (self._held(targets) == FREE))
        if not len(left):
            return None
        asked.go_on()
        return self._last_proof.of(targets, left, known, refused)

    def scores(self, targets: Targets, asked: Asked) -> FloatArray:
        """Return how good the best posture of each target is, (m,).

        Not negative within travel: the margin (1 without travel), or the nearness to joint values
        asked for, 0 to 1, as ``preferred`` counts. Negative beyond travel; minus infinity where
        there is no posture.
        """
        rest = self._rest(asked.near)
        found = self._near_enough.of(self._solved(targets, rest, asked.near), targets, rest)
        ranked = self._ranked(found, targets, asked._replace(best_only=True), beyond=1)
        scores = np.full(len(targets), -np.inf)
        some = ranked.offsets[1:] > ranked.offsets[:-1]
        # One posture of each such target, in their order.
        good = ranked.margin
        if asked.near is not None:
            far = self.ranking.distance(ranked.joint_values, asked.near)
            good = np.where(ranked.inside[some], 1.0 / (1.0 + far), good)
        scores[some] = preferred(good, ranked.outside_working)
        return scores

    def _solved(self, targets: Targets, rest: FloatArray, near: FloatArray | None) -> Found:
        """Return all solutions; a search is spared targets that no links reach."""
        poses = targets.tool_in_base
        if self.method.closed:
            return self.method.solve(poses, rest)
        free = np.flatnonzero(self._held(targets) == FREE)
        none = none_found(len(targets), self.ranking.screws.rows)
        return joined(none, self.method.solve(poses[free], rest, near), free)

    def _held(self, targets: Targets) -> NDArray[np.int64]:
        """Hold targets against the bounds, with the tolerance that few joints are given, (m,)."""
        tolerance: FloatArray | float = 0.0
        if not self.ranking.exact:
            aside = float(np.linalg.norm(self.bounds.aim))
            tolerance = targets.position_tolerance + targets.angle_tolerance * aside
        return self.bounds.hold(targets.tool_in_base, tolerance).outcome

    def _ranked(
        self, found: Found, targets: Targets, asked: Asked, beyond: int = MOST_LISTED
    ) -> Ranked:
        idle = self.method.idle
        return self.ranking.rank(
            found,
            targets,
            asked.near,
            1 if asked.best_only else MOST_LISTED,
            beyond,
            idle if idle.any() else None,
            self.method.task == POSE,
        )

    def _rest(self, near: FloatArray | None) -> FloatArray:
        """Return values for joints that do not matter: in the middle of travel, or near."""
        drive = drive_of(self.ranking.arm)
        return drive.middle_of_travel if near is None else np.clip(near, *drive.box)

    def _suspects(self, found: Found) -> NDArray[np.bool_] | None:
        """Return which solutions may be points of a continuum, (k,), or None where none may.

        With six joints those whose Jacobian lacks rank; with fewer those of targets that are open.
        """
        if self._lost_rank is not None:
            return self._lost_rank.of(found.motions)
        of_open: NDArray[np.bool_] = found.open[found.target]
        return of_open if of_open.any() else None

    def _told(
        self,
        targets: Targets,
        everything: Found,
        found: Found,
        ranked: Ranked,
        rest: FloatArray,
        families: FamiliesOf,
        proofs: Proofs | None,
    ) -> Checks:
        some = ranked.offsets[1:] > ranked.offsets[:-1]
        verdict, proof = self._verdicts(targets, everything, ranked, some, proofs)
        told = Told(
            self.ranking, self.method, self.bounds, targets, everything, ranked, verdict, proof,
            rest, families, proofs,
        )  # fmt: skip
        offsets = ranked.offsets
        kept: slice | NDArray[np.bool_] = slice(None)
        if not ranked.all_inside:
            offsets, kept = listed(ranked.offsets, some & (verdict <= OUTSIDE_TRAVEL))
        solution = ranked.solution[kept]
        branch = self.ranking.branches.of(found.motions, found.target)
        position_error, angle_error = found.position_error[solution], found.angle_error[solution]
        if ranked.errors is not None:
            position_error, angle_error = ranked.errors[kept].T
        return Checks(
            verdict,
            proof,
            offsets,
            how_many(ranked, verdict),
            ranked.joint_values[kept],
            ranked.margin[kept],
            ranked.outside_working[kept],
            position_error,
            angle_error,
            branch[solution],
            self.ranking.branches.sentences,
            told,
        )

    def _verdicts(
        self,
        targets: Targets,
        found: Found,
        ranked: Ranked,
        some: NDArray[np.bool_],
        proofs: Proofs | None,
    ) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
        """Return verdict and proof of each target, (m,)."""
        count = len(some)
        verdict, proof = np.zeros(count, np.int64), np.zeros(count, np.int64)
        if ranked.all_inside:
            return verdict, proof
        closed = ~found.open if self.method.complete else np.zeros(count, np.bool_)
        missing = ~ranked.inside
        # Where not every whole turn was looked at, one that was not may be within bounds of sums.
        closed[ranked.target[ranked.seen < 0]] = False
        verdict[missing] = np.where(some, OUTSIDE_TRAVEL, UNREACHABLE)[missing]
        proof[missing] = self._proof
        verdict[missing & ~closed], proof[missing & ~closed] = NOT_FOUND, SEARCH
        if proofs is not None:
            by_boxes = proofs.proved & (verdict == NOT_FOUND)
            verdict[by_boxes] = np.where(some, OUTSIDE_TRAVEL, UNREACHABLE)[by_boxes]
            proof[by_boxes] = BRANCH_AND_BOUND
        none = np.flatnonzero(missing & ~some)
        if len(none):
            bound = none[self._held(targets.only(none)) != FREE]
            verdict[bound], proof[bound] = UNREACHABLE, BOUND
        return verdict, proof
