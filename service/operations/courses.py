"""Travels as they are given, made into courses of an arm: SI, in the base.

Left out: reading the body (wire/travel_reading.py), following a course (the core), and telling
what came of it (courses_told.py).
"""

from dataclasses import dataclass

from kinematics.errors import KinematicsError
from kinematics.findings import Finding
from kinematics.reach.targets import NONE, ORIENTATION, Target
from kinematics.transforms import in_frame
from kinematics.travel import moves
from kinematics.travel.moves import IN_JOINTS, STRAIGHT, Course, Leg, Place
from kinematics.travel.to_targets import approached, in_base
from service.errors import MissingField, ServiceError, UnusableValue
from service.operations.joint_rows import read_joint_row_at
from service.operations.questions import Question
from service.wire import travel_request
from service.wire.approaches import read_approach, speed_in
from service.wire.poses import Where
from service.wire.reach_gathered import Left, OneTarget
from service.wire.reach_request import ReachTarget
from service.wire.reach_targets import one_target, with_tolerance
from service.wire.travel_request import Travel, TravelPlace

APPROACH, RETRACT, LEG = "approach", "retract", "leg"
"""What the legs of a travel are called."""


@dataclass(frozen=True, eq=False)
class AskedCourse:
    """One travel of a request, with what each leg is called and what was mended in it."""

    course: Course
    parts: tuple[str, ...]
    repaired: tuple[Finding, ...]


def course_of(question: Question, travel: Travel, points: int) -> AskedCourse:
    """Return what one travel asks.

    Raises
    ------
    ServiceError, KinematicsError : it cannot be used; ``where`` leads into the travel.
    """
    reading = _Reading(question, travel)
    if travel.target is not None:
        return reading.to_target(travel.target, points)
    assert travel.start is not None
    assert travel.legs is not None
    start = reading.place(travel.start, ("start",))
    legs = tuple(reading.leg(leg, ("legs", index)) for index, leg in enumerate(travel.legs))
    course = Course(start, legs, *reading.tolerances, points)
    return AskedCourse(course, (LEG,) * len(legs), tuple(reading.repaired))


class _Reading:
    """Reads the parts of one travel, and notes what was mended."""

    def __init__(self, question: Question, travel: Travel) -> None:
        self._question, self._travel = question, travel
        self.repaired: list[Finding] = []
        left, said = Left(NONE), travel.tolerance
        if said is not None:
            left = with_tolerance(left, said.position, said.angle, question.units)
        self.tolerances = left.position_tolerance, left.angle_tolerance

    def to_target(self, place: TravelPlace, points: int) -> AskedCourse:
        """Return the course to a target by its approach, and away from it by its retract."""
        travel = self._travel
        if place.joints is not None:
            raise UnusableValue(
                "a target is a pose or a position, not joint values",
                where=("target", "joints"),
                way_out='give a pose, or say where to go with "start" and "legs"',
            )
        one = self._target(place, ("target",))
        approach = retract = None
        parts = []
        if travel.approach is not None:
            approach = read_approach(travel.approach, self._question.units, (APPROACH,))
            self._refuse_tool_z(one, approach, APPROACH)
            parts.append(APPROACH)
        if travel.retract is not None:
            retract = read_approach(travel.retract, self._question.units, (RETRACT,), approach)
            self._refuse_tool_z(one, retract, RETRACT)
            parts.append(RETRACT)
        target, frame = self._in_the_base(one), self._question.frame_in_base
        course = approached(
            target,
            None if approach is None else in_base(approach, frame),
            None if retract is None else in_base(retract, frame),
            points,
        )
        return AskedCourse(course, tuple(parts), tuple(self.repaired))

    def leg(self, leg: travel_request.Leg, where: Where) -> Leg:
        """Return one leg."""
        units = self._question.units
        end = self.place(leg.end, (*where, "end"))
        kind = STRAIGHT if leg.move == "straight" else IN_JOINTS
        if leg.turn_speed is not None and kind == IN_JOINTS:
            raise UnusableValue(
                "a move in joint values does not turn evenly",
                where=(*where, "turn_speed"),
                way_out='leave it out, or say "move": "straight"',
            )
        speed = speed_in(leg.speed, "m", units, (*where, "speed"))
        turn_speed = speed_in(leg.turn_speed, "rad", units, (*where, "turn_speed"))
        return Leg(end, kind, speed, turn_speed)

    def place(self, place: TravelPlace, where: Where) -> Place:
        """Return where a leg begins or ends."""
        if place.joints is None:
            return Place(target=self._in_the_base(self._target(place, where)))
        for name in ("pose", "position", "freedom"):
            if getattr(place, name) is not None:
                raise UnusableValue(
                    f"joint values leave no {name} to be said",
                    where=(*where, name),
                    way_out="give joints, or a pose, or a position",
                )
        question = self._question
        at = (*where, "joints")
        return Place(read_joint_row_at(question.arm, question.units, place.joints, at))

    def _target(self, place: TravelPlace, where: Where) -> OneTarget:
        if place.pose is None and place.position is None:
            raise MissingField(
                "neither joints, nor pose, nor position is said",
                where=(*where, "pose"),
                way_out="give one of them",
            )
        asked = ReachTarget(pose=place.pose, position=place.position, freedom=place.freedom)
        try:
            one = one_target(asked, self._question.units)
        except ServiceError as error:
            error.where = (*where, *error.where)
            raise
        except KinematicsError as error:
            raise error.below(*where) from None
        self.repaired += one.repaired
        return one

    def _in_the_base(self, one: OneTarget) -> Target:
        tool_in_base = in_frame(self._question.frame_in_base, one.tool_in_frame)
        return Target(tool_in_base, one.left.freedom, one.left.cone, *self.tolerances)

    def _refuse_tool_z(self, one: OneTarget, approach: moves.Approach, name: str) -> None:
        if approach.along is None and one.left.freedom == ORIENTATION:
            raise UnusableValue(
                f"a target whose orientation is free says no tool z for the {name}",
                where=(name, "along"),
                way_out="give a pose, or the direction as three numbers",
            )
