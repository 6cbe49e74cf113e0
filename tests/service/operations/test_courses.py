"""Travels made into courses: SI, in the base, whatever frame they were given in.

Left out: the shape of a travel (wire/test_travel_reading), following a course (kinematics/travel).
"""

from typing import Any

import numpy as np
import pytest

from kinematics.errors import KinematicsError
from kinematics.reach.targets import ORIENTATION, SPIN
from kinematics.travel.moves import IN_JOINTS, STRAIGHT
from service.errors import ServiceError
from service.operations.arms import Arms
from service.operations.courses import AskedCourse, course_of
from service.operations.questions import Question, question_of
from service.wire.arms import ReadArm
from service.wire.models import PosesRequest
from service.wire.travel_request import Travel

TURN = {"form": "xyz-fixed", "values": [0, 0, 90]}
POSE: dict[str, Any] = {"pose": {"position": [300, 200, 0], "orientation": TURN}}
AT: dict[str, Any] = {"joints": [10, 90]}


def question(arms: Arms[ReadArm], frame: str = "base") -> Question:
    asked = PosesRequest.model_validate({"arm": "two-turns", "joints": [], "frame": frame})
    return question_of(arms, asked, "xyz-fixed")


def course(arms: Arms[ReadArm], frame: str = "base", points: int = 0, **said: Any) -> AskedCourse:
    return course_of(question(arms, frame), Travel.model_validate(said), points)


def test_legs_in_the_base(arms: Arms[ReadArm]) -> None:
    legs = [
        {"end": POSE, "speed": 250, "turn_speed": 180},
        {"end": {"joints": [0, -90]}, "move": "joints", "speed": 100},
        {"end": {"position": [300, 200, 0]}},
        {"end": {**POSE, "freedom": "spin"}},
    ]
    asked = course(arms, "tray", 7, start=AT, legs=legs, tolerance={"position": 2})
    made = asked.course
    assert (asked.parts, asked.repaired, made.samples) == (("leg",) * 4, (), 7)
    assert made.position_tolerance == 0.002
    assert made.angle_tolerance == pytest.approx(np.deg2rad(0.01))
    np.testing.assert_allclose(made.start.joint_values, np.deg2rad([10, 90]))
    first, second, third, fourth = made.legs
    assert (first.kind, first.speed) == (STRAIGHT, 0.25)
    assert first.turn_speed == pytest.approx(np.pi)
    assert first.end.target is not None
    # The tray stands 100 mm along x of the base.
    turned = [[0, -1, 0, 0.4], [1, 0, 0, 0.2], [0, 0, 1, 0], [0, 0, 0, 1]]
    np.testing.assert_allclose(first.end.target.tool_in_base, turned, atol=1e-15)
    assert (second.kind, second.speed, second.end.target) == (IN_JOINTS, 0.1, None)
    np.testing.assert_allclose(second.end.joint_values, [0, -np.pi / 2])
    assert third.end.target is not None
    assert third.end.target.freedom == ORIENTATION
    assert fourth.end.target is not None
    assert (fourth.end.target.freedom, fourth.speed) == (SPIN, None)


def test_a_target_is_come_to_and_left(arms: Arms[ReadArm]) -> None:
    asked = course(
        arms,
        "tray",
        target=POSE,
        approach={"distance": 50, "along": [0, 2, 0], "speed": 20},
        retract={"distance": 80},
    )
    assert asked.parts == ("approach", "retract")
    assert asked.course.start.target is not None
    np.testing.assert_allclose(asked.course.start.target.tool_in_base[:3, 3], [0.4, 0.15, 0])
    to, back = asked.course.legs
    assert (to.speed, back.speed) == (0.02, None)
    for leg, position in ((to, [0.4, 0.2, 0]), (back, [0.4, 0.12, 0])):
        assert leg.end.target is not None
        np.testing.assert_allclose(leg.end.target.tool_in_base[:3, 3], position)


def test_a_retract_alone_begins_at_the_target(arms: Arms[ReadArm]) -> None:
    asked = course(arms, target=POSE, retract={"distance": 80, "along": [1, 0, 0]})
    assert asked.parts == ("retract",)
    assert asked.course.start.target is not None
    np.testing.assert_allclose(asked.course.start.target.tool_in_base[:3, 3], [0.3, 0.2, 0])


def test_what_was_mended_is_told(arms: Arms[ReadArm]) -> None:
    loose = {"form": "quaternion-wxyz", "values": [0.7, 0, 0, 0.7]}
    asked = course(arms, start=AT, legs=[{"end": {"pose": {**POSE["pose"], "orientation": loose}}}])
    assert [finding.code for finding in asked.repaired] == [6]


PLACE = {"position": [1, 2, 3]}


@pytest.mark.parametrize(
    ("said", "code", "where"),
    [
        ({"start": {"joints": [1]}}, "wrong-joint-count", ("start", "joints")),
        ({"start": {"joints": [1, "x"]}}, "unusable-value", ("start", "joints", 1)),
        ({"start": {"joints": [1, float("nan")]}}, "not-finite", ("start", "joints", 1)),
        ({"start": {**AT, **POSE}}, "unusable-value", ("start", "pose")),
        ({"start": {**AT, "freedom": "spin"}}, "unusable-value", ("start", "freedom")),
        ({"start": {}}, "missing-field", ("start", "pose")),
        ({"start": {**PLACE, **POSE}}, "unusable-value", ("start", "position")),
        ({"start": {"position": [1e14, 0, 0]}}, "out-of-range", ("start", "position", 0)),
        ({"legs": [{"end": PLACE}, {"end": {**PLACE, "freedom": "spin"}}]},
         "unusable-value", ("legs", 1, "end", "freedom")),
        ({"legs": [{"end": PLACE}, {"end": {"joints": [1, 1e14]}}]},
         "out-of-range", ("legs", 1, "end", "joints", 1)),
        ({"legs": [{"end": PLACE, "move": "joints", "turn_speed": 3}]},
         "unusable-value", ("legs", 0, "turn_speed")),
        ({"legs": [{"end": PLACE, "speed": 1e20}]}, "unusable-value", ("legs", 0, "speed")),
        ({"tolerance": {"position": 1e20}}, "unusable-value", ("tolerance",)),
    ],
)  # fmt: skip
def test_what_is_refused(
    arms: Arms[ReadArm], said: dict[str, Any], code: str, where: tuple[str | int, ...]
) -> None:
    with pytest.raises((ServiceError, KinematicsError)) as caught:
        course(arms, **{"start": AT, "legs": [{"end": POSE}], **said})
    error = caught.value
    found = error.details()[0] if isinstance(error, ServiceError) else error
    assert (found.code, found.where) == (code, where)
    assert found.way_out


@pytest.mark.parametrize(
    ("said", "where"),
    [
        ({"target": AT}, ("target", "joints")),
        ({"target": PLACE}, ("approach", "along")),
        ({"target": {**POSE, "freedom": "orientation"}}, ("approach", "along")),
        ({"target": PLACE, "approach": {"distance": 5, "along": [0, 0, 1]},
          "retract": {"distance": 5, "along": "tool-z"}}, ("retract", "along")),
    ],
)  # fmt: skip
def test_what_is_refused_of_a_target(
    arms: Arms[ReadArm], said: dict[str, Any], where: tuple[str | int, ...]
) -> None:
    with pytest.raises(ServiceError) as caught:
        course(arms, **{"approach": {"distance": 5}, **said})
    assert caught.value.details()[0].where == where
