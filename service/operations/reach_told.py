"""Verdicts, reasons and solutions as they are answered, in the user's units and frame.

Words are made one target at a time. Left out: asking for solutions (reach.py), and judging them
(reach_judged.py).
"""

from collections.abc import Sequence
from functools import cached_property
from itertools import chain, pairwise
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from kinematics.findings import FINE, OUTSIDE_TRAVEL, Finding
from kinematics.kernels.judgement import SMALLEST
from kinematics.reach.targets import (
    CODES,
    PROOFS,
    VERDICTS,
    Checks,
)
from kinematics.reach.targets import (
    OUTSIDE_TRAVEL as OUTSIDE,
)
from kinematics.singularity import STATES
from kinematics.table import FloatArray
from kinematics.travel.moves import Way
from kinematics.travel_limits import each_travel_findings
from service.convert import (
    Units,
    computed_finding_out,
    finding_out,
    joint_row_out,
    joint_values_out,
)
from service.operations.courses_told import approach_out, approach_reason_out, approach_say
from service.operations.questions import Question
from service.operations.reasons_told import family_out, reason_out, reason_say
from service.operations.singularities import Judged
from service.operations.solution_told import solution_out

if TYPE_CHECKING:
    # Its kernels are loaded with all others for reach, when first wanted.
    from kinematics.travel.approaches import Approached

Exceeded = tuple[NDArray[np.bool_], NDArray[np.bool_]]
"""As ``limits_exceeded`` tells it, (solutions,) each."""

NO_STATE = "none"
_MORE_POSTURES = "more-postures"
"""The finding that some postures are not listed."""


class ToldChecks:
    """What was found for some targets, to be told.

    Attributes
    ----------
    judged : the solutions' singularity; None where there are none.
    exceeded : which solutions are beyond a working travel, and which beyond a travel limit.

    With ``best_only`` one solution is told of each target, but all that exceed travel; with
    ``first_alone`` the first of one target, which takes less.
    """

    def __init__(
        self,
        question: Question,
        checks: Checks,
        judged: Judged | None,
        exceeded: Exceeded,
        *,
        best_only: bool = False,
        by_singularity: bool = False,
        first_alone: bool = False,
        approached: "Approached | None" = None,
    ) -> None:
        self.question, self.checks = question, checks
        self.judged, self.exceeded = judged, exceeded
        self._approached = approached
        self._best_only, self._first_alone = best_only, first_alone
        self._by_singularity = by_singularity

    @cached_property
    def ranks(self) -> Sequence[Sequence[int]]:
        """For each target, indices into all solutions, the best first."""
        spans = [range(*span) for span in pairwise(self.checks.offsets.tolist())]
        return [self._ranked(span) for span in spans] if self._by_singularity else spans

    @property
    def in_order(self) -> NDArray[np.intp]:
        """All that ``ranks`` says in a row; solutions stand in their order unless sorted anew."""
        count = len(self.checks.margin)
        if not self._by_singularity:
            return np.arange(count)
        return np.fromiter(chain.from_iterable(self.ranks), np.intp, count)

    def _ranked(self, solutions: range) -> Sequence[int]:
        """Return solutions, those with a whole approach first, the farthest from singular first."""
        if self.judged is None:
            return solutions
        readings = self.judged.plain.readings

        def worse(solution: int) -> tuple[bool, float]:
            way = self._way(solution)
            return (way is not None and not way.done, -float(readings[solution][SMALLEST]))

        return sorted(solutions, key=worse)

    def _way(self, solution: int) -> Way | None:
        """Return the way back along the approach to a solution, where it was followed."""
        return None if self._approached is None else self._approached.ways[solution]

    def broken(self, index: int) -> Way | None:
        """Return the longest way back from a target that the tool cannot come to as asked."""
        return None if self._approached is None else self._approached.broken.get(index)

    def told_ranks(self, index: int) -> Sequence[int]:
        """Return the solutions of one target that are to be told."""
        ranks = self.ranks[index]
        best_only = self._best_only and self.checks.verdict[index] != OUTSIDE
        return ranks[:1] if best_only or self._first_alone else ranks

    def told_counts(self) -> NDArray[np.intp]:
        """Return how many solutions ``told_ranks`` tells of each target."""
        counts = np.diff(self.checks.offsets)
        if not (self._best_only or self._first_alone):
            return counts
        alone = self._first_alone | (self.checks.verdict != OUTSIDE)
        return np.where(alone, np.minimum(counts, 1), counts)

    def joints_out(self) -> FloatArray:
        """Return joint values of all solutions, in the user's units, (solutions, joints)."""
        question = self.question
        return joint_values_out(question.arm, question.units, self.checks.joint_values)

    def errors_out(self) -> FloatArray:
        """Return position and angle errors of all solutions, in the user's units."""
        units, checks = self.question.units, self.checks
        both = units.length_out(checks.position_error), units.angle_out(checks.angle_error)
        return np.column_stack(both)

    @cached_property
    def joints(self) -> list[list[float]]:
        """Joint values of all solutions, in the user's units."""
        question, checks = self.question, self.checks
        if self._first_alone:
            return [joint_row_out(question.arm, question.units, checks.joint_values[0].tolist())]
        values: list[list[float]] = self.joints_out().tolist()
        return values

    @cached_property
    def errors(self) -> tuple[list[float], list[float]]:
        """Position and angle errors of all solutions, in the user's units."""
        units, checks = self.question.units, self.checks
        if self._first_alone:
            return (
                [units.value_out(float(checks.position_error[0]), "m")],
                [units.value_out(float(checks.angle_error[0]), "rad")],
            )
        return (
            units.length_out(checks.position_error).tolist(),
            units.angle_out(checks.angle_error).tolist(),
        )

    @cached_property
    def _beyond(self) -> list[bool]:
        """Which solutions exceed a limit of either kind."""
        working, travel = self.exceeded
        beyond: list[bool] = (working | travel).tolist()
        return beyond

    @cached_property
    def _limits(self) -> Sequence[tuple[Finding, ...]]:
        """The findings about limits that each solution exceeds."""
        return each_travel_findings(self.question.arm, self.checks.joint_values)

    def found(self, index: int) -> int:
        """Return how many solutions were found for a target, told or not."""
        return int(self.checks.found[index])

    def state(self, solution: int) -> str:
        """Return whether a solution is regular, near or singular."""
        return NO_STATE if self.judged is None else STATES[self.judged.plain.states[solution]]

    def branch(self, solution: int) -> str:
        """Return a solution's branch in words; empty where the arm is of no class with names."""
        place = int(self.checks.branch[solution])
        return "" if place < 0 else self.checks.branches[place]

    def solution(self, solution: int) -> dict[str, object]:
        """Return one solution as answered."""
        margin = float(self.checks.margin[solution])
        singularity: dict[str, object] | None = None
        said: tuple[Finding, ...] = ()
        if self.judged is not None:
            turned = self.question.base_in_frame[:3, :3]
            singularity, said = self.judged.told(solution, turned)
        findings: list[dict[str, object]] = []
        if self._beyond[solution]:
            beyond = self._limits[solution]
            findings = [beyond_out(self.question.units, finding) for finding in beyond]
        findings += [computed_finding_out(self.question.units, finding) for finding in said]
        way = self._way(solution)
        told = solution_out(
            self.joints[solution],
            margin,
            self.branch(solution),
            singularity,
            (self.errors[0][solution], self.errors[1][solution]),
            findings,
        )
        return told if way is None else {**told, "approach": approach_out(self.question, way)}

    def with_more_codes(self) -> Sequence[int]:
        """Return the solutions that may have codes beside those of their states and limits."""
        count = len(self.checks.margin)
        if self.judged is not None and self.judged.space.watched_position_rank:
            return range(count)
        return [] if self._approached is None else [n for n in range(count) if self._way(n)]

    def codes(self, solution: int) -> frozenset[int]:
        """Return the codes of what is to be known of one solution, without the words."""
        found: set[int] = set()
        if self.judged is not None:
            found.add(self.judged.plain.states[solution])
            if self.judged.space.watched_position_rank:
                said = self.judged.told(solution, self.question.base_in_frame[:3, :3])[1]
                found |= {finding.code for finding in said}
        if self._beyond[solution]:
            found |= {finding.code for finding in self._limits[solution]}
        return frozenset(found.union(self._codes_on_the_way(solution)) - {FINE})

    def _codes_on_the_way(self, solution: int) -> list[int]:
        way = self._way(solution)
        return [] if way is None else [one.code for leg in way.legs for one in leg.findings]

    def item(self, index: int, *, form: str, repaired: Sequence[Finding]) -> dict[str, object]:
        """Return what is answered to one target, all but its name."""
        checks, units = self.checks, self.question.units
        told = [self.solution(rank) for rank in self.told_ranks(index)]
        found, findings = self.found(index), list(repaired)
        # Of the best alone nobody expects that there are no others.
        untold = _MORE_POSTURES if self._best_only or self._first_alone else None
        findings += [each for each in checks.findings_of(index) if each.name != untold]
        verdict = int(checks.verdict[index])
        code = CODES[verdict]
        if not code:
            of_best = told[0]["findings"] if told else []
            assert isinstance(of_best, list)
            codes = [finding.code for finding in findings]
            codes += self._codes_on_the_way(self.ranks[index][0]) if told else []
            code = max([*codes, *(finding["code"] for finding in of_best)], default=0)
        return {
            "ok": not CODES[verdict],
            "code": code,
            "verdict": VERDICTS[verdict],
            "proof": PROOFS[int(checks.proof[index])],
            "reason": self.reason(index, form),
            "solutions": told,
            "families": [family_out(self.question, family) for family in checks.families_of(index)],
            "found": found,
            "findings": [finding_out(units, finding) for finding in findings],
        }

    def reason(self, index: int, form: str) -> dict[str, object] | None:
        """Return why a target cannot be reached as asked, as answered; None where it can."""
        broken = self.broken(index)
        if broken is not None:
            verdict = int(self.checks.verdict[index])
            return approach_reason_out(self.question, broken, verdict, form)
        return reason_out(self.question, self.checks.reason_of(index), form)

    def reason_say(self, index: int) -> str:
        """Return the same in one sentence, empty where it can."""
        broken = self.broken(index)
        if broken is not None:
            return approach_say(self.question.units, broken, int(self.checks.verdict[index]))
        reason = self.checks.reason_of(index)
        return "" if reason is None else reason_say(self.question.units, reason)


def beyond_out(units: Units, finding: Finding) -> dict[str, object]:
    """Return a finding about a limit as answered, and by how much travel is exceeded."""
    told = computed_finding_out(units, finding)
    if finding.code == OUTSIDE_TRAVEL:
        told["excess"] = units.value_out(abs(finding.measure - finding.threshold), finding.unit)
    return told
