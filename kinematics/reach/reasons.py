"""Why a target cannot be reached as asked, in a sentence with its number and the nearest pose.

A no is worth what can be done about it: move the part 31 mm, turn it 12 deg, free joint 5 of its
stop. So each rests on one number, by how much the target is missed at the stage where it fails, and
comes with the pose that is nearest to it. All of it is worked out for whoever reads it.

Source: none. Not covered: the verdict itself (checks.py) and other languages than English.
"""

from dataclasses import dataclass, field, replace
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from kinematics.chain import tool_in_base
from kinematics.findings import FINE, Finding
from kinematics.inverse.found import (
    HEIGHT,
    MEETING_POINT,
    MEETING_TURN,
    PLANE,
    REACH_ACROSS,
    STAGE_UNITS,
    STAGES,
    TILT,
    TRAVEL,
    WRIST_CENTRE,
    WRIST_ORIENTATION,
    Found,
)
from kinematics.inverse.found import POSITION as PLACE
from kinematics.inverse.measured import POSITION as PLACE_ALONE
from kinematics.inverse.measured import errors_of
from kinematics.inverse.redundant import Redundant
from kinematics.inverse.solve import Method
from kinematics.reach.bounds import BEYOND, Bounds
from kinematics.reach.family_members import families_told, spare_joints, turned_freely
from kinematics.reach.last_proof import Proofs
from kinematics.reach.misses import Misses, postures_of
from kinematics.reach.redundant_families import resolution_of, spare_families
from kinematics.reach.targets import (
    BOUND,
    BRANCH_AND_BOUND,
    NOT_FOUND,
    OUTSIDE_TRAVEL,
    REACHABLE,
    UNREACHABLE,
    Family,
    Reason,
    Targets,
)
from kinematics.reach.tolerances import MOST_SPANNED, MOST_SPARE_FOLLOWED
from kinematics.reach.verdicts import Ranked, Ranking
from kinematics.table import FloatArray
from kinematics.travel_limits import limits_of

_SAID = {
    WRIST_CENTRE: "the wrist centre would have to be {shortfall} away from where it can be brought",
    WRIST_ORIENTATION: "the wrist centre can be brought there, but the wrist lacks {shortfall} of "
    "the turn that is left",
    MEETING_POINT: "the point where the axes meet would have to be {shortfall} away from where it "
    "can be brought",
    MEETING_TURN: "the axes that meet can be brought there, but lack {shortfall} of the turn that "
    "is left",
    PLANE: "the parallel axes would have to be {shortfall} away from where they can be brought",
    REACH_ACROSS: "the links across the parallel axes are {shortfall} too short or too long",
    PLACE: "the tool's point is {shortfall} away from what the links reach",
    HEIGHT: "the tool cannot be brought to that height: {shortfall} are missing",
    TILT: "the place can be reached with the tool tilted {shortfall} off",
}

_BY_BOXES = (
    "numerically proved: travel was cut into boxes of joint values, and none of {} meets the target"
)
_TOO_FEW_BOXES = (
    "nothing is proved: {} boxes of joint values were looked at, which did not settle it"
)

_NOT_FOLLOWED = Finding(
    FINE,
    "families-not-followed",
    "some postures are points of a family, which was not followed, as that takes long for many "
    "targets: ask for this one alone",
    0.0,
    0.0,
)


@dataclass(frozen=True, eq=False)
class Told:
    """What is said of targets that were checked together by one method.

    Attributes
    ----------
    found : all solutions, near enough or not. ranked : postures of those that are, before those of
        targets that are not answered by them were left out; ``kept`` : of which solutions.
    verdict, proof : (m,), as in ``Checks``. rest : (joints,), values for joints that do not matter.
    """

    ranking: Ranking
    method: Method
    bounds: Bounds
    targets: Targets
    found: Found
    ranked: Ranked
    verdict: NDArray[np.int64]
    proof: NDArray[np.int64]
    rest: FloatArray
    families_found: dict[int, tuple[Family, ...]] = field(default_factory=dict)
    proofs: Proofs | None = None

    def reason(self, index: int) -> Reason | None:
        """Return why a target cannot be reached as asked; None where it can."""
        if self.verdict[index] == REACHABLE:
            return None
        reason, boxes = self._why(index), 0 if self.proofs is None else self.proofs.boxes[index]
        if self.proof[index] == BRANCH_AND_BOUND:
            return replace(reason, say=f"{reason.say}; {_BY_BOXES.format(boxes)}")
        if boxes and self.verdict[index] == NOT_FOUND:
            return replace(reason, say=f"{reason.say}; {_TOO_FEW_BOXES.format(boxes)}")
        return reason

    def _why(self, index: int) -> Reason:
        if self.proof[index] == BOUND:
            return self._beyond_bounds(index)
        first, last = self.ranked.offsets[index : index + 2]
        if first < last:
            return self._beyond_travel(index, self.ranked.joint_values[first])
        missed = np.flatnonzero(self.found.target == index)
        if len(missed):
            return self._misses.reason(self._misses.of(index, self.found.motions[missed]), index)
        return self._at_stage(index)

    def families(self, index: int) -> tuple[Family, ...]:
        """Return the families of a target's solutions.

        Where an arm has joints to spare for the task, that of the best posture.
        """
        first, last = self.ranked.offsets[index : index + 2]
        if self.verdict[index] != REACHABLE:
            return ()
        if self.method.idle.any():
            values = self.ranked.joint_values[first:last]
            return tuple(turned_freely(self.ranking.arm, self.method.idle, one) for one in values)
        if isinstance(self.method.solver, Redundant):
            target, best = self.targets.tool_in_base[index], self.ranked.joint_values[first]
            if index >= MOST_SPANNED:
                return ()
            return spare_families(self.method, self.method.solver, target, best)
        if self._has_spare_joints:
            if index >= MOST_SPARE_FOLLOWED:
                return ()
            best = self.ranked.joint_values[first : first + 1]
            return families_told(self.method, self.targets.tool_in_base[index], best)
        return self.families_found.get(index, ())

    def findings(self, index: int) -> tuple[Finding, ...]:
        """Return what else is to be known: postures that are not listed."""
        if self.verdict[index] != REACHABLE:
            return ()
        told = (_NOT_FOLLOWED,) if self._not_followed(index) else ()
        if isinstance(self.method.solver, Redundant):
            told = (resolution_of(self.method.solver), *told)
        first, last = self.ranked.offsets[index : index + 2]
        seen = self.ranked.seen[self.ranked.target == index]
        count, listed = float(np.where(seen < 0, -seen - 1, seen).sum()), float(last - first)
        if count <= listed and (seen >= 0).all():
            return told
        more = "" if (seen >= 0).all() else "at least "
        say = f"{more}{{measure}} postures within travel get there, the best {{threshold}} are told"
        return (*told, Finding(FINE, "more-postures", say, count, listed))

    def _not_followed(self, index: int) -> bool:
        """Whether a target's families are left out, as following them takes long."""
        if isinstance(self.method.solver, Redundant):
            return index >= MOST_SPANNED
        if self._has_spare_joints:
            return index >= MOST_SPARE_FOLLOWED
        return self.families_found.get(index) == ()

    @property
    def _has_spare_joints(self) -> bool:
        """Whether every posture is a point of families."""
        method = self.method
        return not method.complete and not method.idle.any() and spare_joints(method) > 0

    # --- reasons -----------------------------------------------------------------------------

    def _beyond_bounds(self, index: int) -> Reason:
        bounds, target = self.bounds, self.targets.tool_in_base[index : index + 1]
        held = bounds.hold(target)
        distance = float(held.distance[0])
        what = f"the {bounds.place} would be {{measure}} from axis {bounds.axis}'s centre"
        beyond = held.outcome[0] == BEYOND
        threshold = bounds.furthest if beyond else bounds.nearest
        limit = "the links reach {threshold}" if beyond else "they get no nearer than {threshold}"
        return Reason(
            "beyond-the-links" if beyond else "inside-the-void",
            f"{what}, and {limit}: {{shortfall}} {'too far' if beyond else 'too near'}",
            "reach of the links",
            abs(distance - threshold),
            "m",
            distance,
            threshold,
            self._nearest(index),
        )

    def _beyond_travel(self, index: int, values: FloatArray) -> Reason:
        """Tell the excess of the posture (joints,) that exceeds travel least."""
        arm = self.ranking.arm
        limits = limits_of(arm)
        room = np.where(limits.working, np.inf, limits.room(values))
        worst = int(np.argmin(room))
        limit = limits.each[worst]
        value = float(values @ limit.weights + limit.constant)
        lower = value < limit.travel.lower
        bound = limit.travel.lower if lower else limit.travel.upper
        proved = self.verdict[index] == OUTSIDE_TRAVEL
        every = "every posture that gets there" if proved else "every posture that was found"
        return Reason(
            "outside-travel" if proved else "found-outside-travel",
            f"{every} exceeds travel; the one that does so least has {limit.subject} at "
            "{measure}, {shortfall} beyond {threshold}",
            "travel",
            abs(value - bound),
            limit.unit,
            value,
            bound,
            self._pose_of(self._within_travel(values)),
        )

    @cached_property
    def _misses(self) -> Misses:
        return Misses(self.ranking, self.targets, self.method.task)

    def _at_stage(self, index: int) -> Reason:
        stage, nearest = int(self.found.stage[index]), self._nearest_motions(index)
        few = not self.ranking.exact and self.method.task != PLACE_ALONE
        if few and stage != TRAVEL:
            miss = self._misses.of(index, nearest[None])
            # What cannot be met at some stage says more, unless the place can be met for itself.
            if miss.place_met or stage not in _SAID:
                return self._misses.reason(miss, index)
        if stage in _SAID:
            return self._short(index, stage)
        if stage == TRAVEL:
            beyond = postures_of(self.ranking.arm, nearest[None])
            return self._beyond_travel(index, beyond[0])
        target = self.targets.tool_in_base[index : index + 1]
        one = np.zeros(1, np.intp)
        gaps = errors_of(self.ranking.screws, nearest[None], target, one, self.method.task)
        position, angle = float(gaps[0][0]), float(gaps[1][0])
        turned = angle * self.ranking.screws.length > position
        proved = self.verdict[index] == UNREACHABLE
        return Reason(
            "unreachable" if proved else "not-found",
            ("the nearest pose is" if proved else "nothing was found; the nearest pose met is")
            + f" {{shortfall}} {'turned ' if turned else ''}off",
            STAGES[stage] if stage else "",
            angle if turned else position,
            "rad" if turned else "m",
            nearest=self._pose_of_motions(nearest),
        )

    def _short(self, index: int, stage: int) -> Reason:
        unit, shortfall = STAGE_UNITS[stage], float(self.found.shortfall[index])
        nearest = self._nearest(index)
        if shortfall == 0.0 and nearest is not None and unit == "m":
            shortfall = self.bounds.apart(self.targets.tool_in_base[index], nearest)
        return Reason(
            STAGES[stage].replace(" ", "-"),
            _SAID[stage],
            STAGES[stage],
            shortfall,
            unit,
            nearest=nearest,
        )

    # --- nearest poses -----------------------------------------------------------------------

    def _nearest_motions(self, index: int) -> FloatArray:
        nearest: FloatArray = self.found.nearest[index]
        if nearest.any():
            return nearest
        target = self.targets.tool_in_base[index : index + 1]
        motions: FloatArray = self.method.nearest(target, self.rest)[0]
        return motions

    def _nearest(self, index: int) -> FloatArray | None:
        return self._pose_of_motions(self._nearest_motions(index))

    def _pose_of_motions(self, motions: FloatArray) -> FloatArray:
        rows = self.ranking.arm.drive_map
        driven = list(rows.driven)
        return self._pose_of(np.asarray(np.linalg.solve(rows.matrix[driven], motions[driven])))

    def _pose_of(self, values: FloatArray) -> FloatArray:
        return tool_in_base(self.ranking.arm, values, self.ranking.tool_in_flange)

    def _within_travel(self, values: FloatArray) -> FloatArray:
        rows = [self.ranking.arm.table.rows[row] for row in self.ranking.arm.drive_map.driven]
        lower = [-np.inf if row.travel is None else row.travel.lower for row in rows]
        upper = [np.inf if row.travel is None else row.travel.upper for row in rows]
        return np.clip(values, lower, upper)
