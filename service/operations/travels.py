"""A question about many travels of one arm, answered a few at a time.

Left out: reading a travel (courses.py), what is told of it (courses_told.py), and in which thread
it is worked on (bulk).
"""

import math
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property

from kinematics.table import FloatArray
from service.errors import TooLarge
from service.operations.arms import Arms
from service.operations.courses import AskedCourse, course_of
from service.operations.courses_told import refused_course, told_course
from service.operations.joint_rows import read_joint_row_at
from service.operations.questions import Question, question_of
from service.operations.reach import BEST, LONGEST_S
from service.operations.reachers import about_the_arm
from service.problems import KINDS
from service.wire.arms import ReadArm
from service.wire.models import PosesRequest
from service.wire.poses import checked_form
from service.wire.reach_gathered import USUAL_FORM
from service.wire.travel_reading import FIELD, ReadTravels, read_travels
from service.wire.travel_request import TravelsRequest

_PIECE_S = 0.02
_LARGEST_PIECE = 16
"""Travels in a piece: some milliseconds, so that requests take turns."""


@dataclass(frozen=True, eq=False)
class ManyTravels:
    """A question with its travels; ``near`` (joints,) in SI."""

    question: Question
    read: ReadTravels[AskedCourse]
    best_only: bool
    near: FloatArray | None

    @property
    def count(self) -> int:
        """Travels in all."""
        return self.read.count

    @cached_property
    def head(self) -> Mapping[str, object]:
        """What stands at the head of the answer."""
        return self.question.head

    @cached_property
    def _seconds(self) -> float:
        courses = self.question.courses
        with about_the_arm():
            each = [courses.estimated_seconds(asked.course) for asked in self.read.asked.values()]
        return math.fsum(each)

    @property
    def size(self) -> int:
        """Travels in a piece."""
        each = self._seconds / max(len(self.read.asked), 1)
        return int(min(max(_PIECE_S / max(each, 1e-6), 1), _LARGEST_PIECE))

    def items(self, begin: int, end: int) -> list[dict[str, object]]:
        """Return travels ``begin`` ... ``end`` as answered."""
        return [
            {"name": self.read.names[place], **self._item(place)} for place in range(begin, end)
        ]

    def _item(self, place: int) -> dict[str, object]:
        refused = self.read.refused.get(place)
        if refused is not None:
            return refused_course(refused.problem_of_item(), KINDS[refused.code].number)
        asked = self.read.asked[place]
        followed = self.question.courses.follow(asked.course, near=self.near)
        return told_course(self.question, asked, followed, best_only=self.best_only)

    def refuse_long_work(self) -> None:
        """Refuse what would take longer than one answer may.

        Raises
        ------
        TooLarge
        """
        if self._seconds <= LONGEST_S:
            return
        most = max(int(len(self.read.asked) * LONGEST_S / self._seconds), 1)
        raise TooLarge(
            f"this would take about {self._seconds:.0f} s, and one answer at most "
            f"{LONGEST_S:.0f} s",
            where=(FIELD,),
            value=self.count,
            way_out=f"send at most {most} of these travels at a time",
            status=422,
        )


def travels_of_body(arms: Arms[ReadArm], body: object) -> ManyTravels:
    """Return the question of a JSON body.

    Raises
    ------
    pydantic.ValidationError, ServiceError, KinematicsError : what it says cannot be used, or no
        travel of it can.
    """
    asked = TravelsRequest.model_validate(body)
    # The same question as one about postures, so that what follows from it is kept there.
    about = PosesRequest.model_construct(
        arm=asked.arm, joints=[], tool=asked.tool, frame=asked.frame, units=asked.units
    )
    question = question_of(arms, about, checked_form(asked.form or USUAL_FORM))
    near = None
    if asked.near is not None:
        near = read_joint_row_at(question.arm, question.units, asked.near, ("near",))
    best_only = asked.solutions == BEST
    read = read_travels(
        asked.travels,
        asked.points,
        lambda travel: course_of(question, travel, asked.points),
        every_way=not best_only,
    )
    return ManyTravels(question, read, best_only, near)
