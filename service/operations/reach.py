"""A question about many targets of one arm, answered a piece at a time.

Items are for JSON, columns for CSV. Left out: reading targets and printing answers (wire), what is
told of each (reach_told.py), and in which thread a piece is worked on (bulk).
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from kinematics.findings import Finding
from kinematics.reach.targets import Targets
from kinematics.table import FloatArray
from kinematics.transforms import in_frame
from service.details import Detail, Location
from service.errors import MissingField, TooLarge
from service.operations.approached import approach_seconds, approached_checks
from service.operations.arms import Arms
from service.operations.joint_rows import read_joint_row_at
from service.operations.questions import Question, question_of
from service.operations.reach_judged import told_together
from service.operations.reach_told import ToldChecks
from service.operations.reachers import about_the_arm, method_of
from service.problems import KINDS
from service.wire.arms import ReadArm
from service.wire.models import PosesRequest
from service.wire.reach_gathered import FIELD, USUAL_FORM, ReadTargets
from service.wire.reach_request import ReachRequest

LONGEST_S = 5.0
"""Of estimated work for one answer; more is long work, and nobody should wait for it."""

_PIECE_S = 0.02
_LARGEST_PIECE = 32
"""Targets in a piece: some milliseconds, so that requests take turns."""

BEST = "best"
SOLUTIONS = (BEST, "all")
ORDERS = MARGIN, NEARNESS, SINGULARITY = "margin", "nearness", "singularity"


@dataclass(frozen=True)
class Wanted:
    """Which solutions, and in which order; ``near`` (joints,) in SI."""

    best_only: bool = True
    order: str | None = None
    near: FloatArray | None = None


@dataclass(frozen=True, eq=False)
class ManyTargets:
    """A question with its targets."""

    question: Question
    read: ReadTargets
    wanted: Wanted

    @cached_property
    def targets(self) -> Targets:
        """The usable targets, in the base."""
        read = self.read
        return Targets(
            in_frame(self.question.frame_in_base, read.tool_in_frame),
            read.freedom,
            read.cone,
            read.position_tolerance,
            read.angle_tolerance,
        )

    @cached_property
    def head(self) -> Mapping[str, object]:
        """What stands at the head of the answer."""
        return {**self.question.head, "method": method_of(self.question.reacher, self.targets)}

    @cached_property
    def seconds(self) -> float:
        """About how long all answers take."""
        with about_the_arm():
            seconds = self.question.reacher.estimated_seconds(self.targets)
        approaches = len(self.read.approaches)
        return seconds + approaches * approach_seconds(self.question) if approaches else seconds

    @property
    def size(self) -> int:
        """Targets in a piece."""
        each = self.seconds / max(len(self.targets), 1)
        return int(min(max(_PIECE_S / max(each, 1e-6), 1), _LARGEST_PIECE))

    def told(self, begin: int, end: int, *, families: bool = True) -> tuple[range, ToldChecks]:
        """Return which of the usable targets are among ``begin`` ... ``end``, and what they are.

        ``families`` : whether those of postures that are not told are wanted.
        """
        first, last = np.searchsorted(self.read.places, (begin, end)).tolist()
        targets = self.targets.only(np.arange(first, last))
        approaches = {
            number - first: approach
            for number, approach in self.read.approaches.items()
            if first <= number < last
        }
        by_singularity = self.wanted.order == SINGULARITY
        every_way = by_singularity or not self.wanted.best_only
        # Ranking the best alone takes less, where no other is looked at.
        best_only = not (every_way or approaches or families)
        checks = self.question.reacher.check(targets, best_only=best_only, near=self.wanted.near)
        approached = approached_checks(
            self.question, checks, targets, approaches, every_way=every_way
        )
        return range(first, last), told_together(
            self.question,
            checks if approached is None else approached.checks,
            best_only=self.wanted.best_only,
            by_singularity=by_singularity,
            approached=approached,
        )

    def items(self, begin: int, end: int) -> list[dict[str, object]]:
        """Return targets ``begin`` ... ``end`` as answered."""
        span, told = self.told(begin, end)
        read, items = self.read, list[dict[str, object]]()
        usable = iter(zip(span, range(len(span)), strict=True))
        for place in range(begin, end):
            if place in read.refused:
                items.append({"name": read.names[place], **_refused(read.refused[place])})
                continue
            number, index = next(usable)
            item = told.item(
                index,
                form=read.forms[number],
                repaired=self.repaired(number),
            )
            items.append({"name": read.names[place], **item})
        return items

    def repaired(self, number: int) -> tuple[Finding, ...]:
        """Return what was mended in the request for one of the usable targets."""
        return (*self.question.repaired, *self.read.repaired.get(number, ()))

    def refuse_long_work(self) -> None:
        """Refuse what would take longer than one answer may.

        Raises
        ------
        TooLarge
        """
        seconds = self.seconds
        if seconds <= LONGEST_S:
            return
        most = max(int(len(self.targets) * LONGEST_S / seconds), 1)
        raise TooLarge(
            f"this would take about {seconds:.0f} s, and one answer at most {LONGEST_S:.0f} s",
            where=(FIELD,),
            value=self.read.count,
            way_out=f"send at most {most} of these targets at a time",
            status=422,
        )


def reach_question(arms: Arms[ReadArm], asked: ReachRequest) -> Question:
    """Return what a body asks, all but the targets.

    Raises
    ------
    ServiceError, KinematicsError : arm, tool, frame or units cannot be used.
    """
    # The same question as one about postures, so that what follows from it is kept there.
    about = PosesRequest.model_construct(
        arm=asked.arm, joints=[], tool=asked.tool, frame=asked.frame, units=asked.units
    )
    return question_of(arms, about, USUAL_FORM)


def wanted_solutions(
    question: Question,
    solutions: str,
    order: str | None,
    near: Sequence[object] | None,
    *,
    location: Location = "body",
) -> Wanted:
    """Return which solutions are wanted, in which order.

    Raises
    ------
    MissingField : the order of nearness to nothing.
    ServiceError : ``near`` is no joint vector of the arm.
    """
    if near is None and order == NEARNESS:
        raise MissingField(
            '"near" is missing',
            where=("near",),
            location=location,
            way_out="give the joint values to be near to, or another order",
        )
    if near is None:
        return Wanted(solutions == BEST, order)
    joint_values = read_joint_row_at(question.arm, question.units, near, ("near",), location)
    is_near = order in (None, NEARNESS)
    return Wanted(solutions == BEST, order, joint_values if is_near else None)


def _refused(detail: Detail) -> dict[str, object]:
    return {
        "ok": False,
        "code": KINDS[detail.code].number,
        "verdict": None,
        "proof": None,
        "reason": None,
        "solutions": [],
        "families": [],
        "found": 0,
        "findings": [],
        "problem": detail.problem_of_item(),
    }
