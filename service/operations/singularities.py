"""Singularity of the postures of a question, as answered."""

from collections.abc import Sequence
from math import isfinite
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.findings import Finding
from kinematics.jacobian import Motion, motion_of
from kinematics.kernels.judgement import CONDITION, MANIPULABILITY, SMALLEST
from kinematics.lost_motion import describe, travel_and_speed
from kinematics.posture_reader import PostureReading
from kinematics.singular_kinds import Anatomy
from kinematics.singularity import REGULAR, STATES, Judgement, judge
from kinematics.table import FloatArray
from kinematics.task_space import TaskSpace
from service.operations.questions import Question


class _Plain(NamedTuple):
    """States, readings and steps as in ``Judgement``, as plain numbers, one for each posture."""

    states: list[int]
    readings: list[list[float]]
    steps: list[list[float]]


class Judged:
    """Postures judged together, told one at a time.

    Parameters
    ----------
    joint_values : (count, joints).
    plain, known : what was found, of which one may be left to be worked out from the other.
    """

    def __init__(
        self,
        question: Question,
        space: TaskSpace,
        anatomy: Anatomy,
        joint_values: Sequence[Sequence[float]] | FloatArray,
        plain: _Plain | None,
        known: tuple[Motion, Judgement] | None = None,
    ) -> None:
        self.question, self.space, self.anatomy = question, space, anatomy
        self.joint_values = joint_values
        self._plain, self._known = plain, known

    @property
    def plain(self) -> _Plain:
        """States, readings and steps; of a column of states nobody needs the others so."""
        if self._plain is None:
            found = self.whole()[1]
            lists = found.state.tolist(), found.readings.tolist(), found.step.tolist()
            self._plain = _Plain(*lists)
        return self._plain

    def column_of_states(self) -> NDArray[np.int64]:
        """Return 0 regular, 1 near, 2 singular of each posture, (count,)."""
        if self._known is not None:
            return self._known[1].state
        return np.array(self.plain.states)

    def whole(self) -> tuple[Motion, Judgement]:
        """Return motion and judgement of all postures."""
        if self._known is not None:
            return self._known
        question = self.question
        values = np.asarray(self.joint_values)
        motion = motion_of(question.arm, values, question.tool.tool_in_flange)
        return motion, judge(question.arm, self.space, motion)

    def told(
        self, index: int, base_in_frame: FloatArray
    ) -> tuple[dict[str, object], tuple[Finding, ...]]:
        """Return one posture's singularity as answered, and its findings."""
        states, every_reading, steps = self.plain
        readings, step = every_reading[index], steps[index]
        # Of a regular posture there is nothing to say in words, unless it is watched for more.
        if states[index] == REGULAR and not self.space.watched_position_rank:
            travel, speed = travel_and_speed(self.question.arm, readings, step)
            return self._answer(readings, travel, speed), ()
        motion, judgement = self.whole()
        described = describe(
            self.question.arm,
            self.space,
            self.anatomy,
            np.asarray(self.joint_values[index]),
            self.question.tool.tool_in_flange,
            motion.of_posture(index),
            judgement.of_posture(index),
            base_in_frame,
            self.question.frame,
        )
        answer = self._answer(readings, described.travel_to, described.tool_speed)
        answer |= {
            "state": described.state,
            "kinds": list(described.kinds),
            "joints": list(described.joints),
            "lost_motion": [
                {"linear": lost.linear.tolist(), "angular": lost.angular.tolist(), "say": lost.say}
                for lost in described.lost_motion
            ],
        }
        return answer, described.findings

    def _answer(
        self,
        readings: list[float],
        travel_to: tuple[int, float, str] | None,
        tool_speed: tuple[float, float] | None,
    ) -> dict[str, object]:
        """Return a regular posture's singularity as answered."""
        units, condition = self.question.units, readings[CONDITION]
        answer: dict[str, object] = {
            "state": STATES[REGULAR],
            "kinds": [],
            "joints": [],
            "task": self.space.task,
            "smallest_singular_value": readings[SMALLEST],
            "condition_number": condition if isfinite(condition) else None,
            "manipulability": readings[MANIPULABILITY],
            "characteristic_length": units.value_out(self.space.length, "m"),
            "lost_motion": [],
            "travel_to": None,
            "tool_speed": None,
        }
        if travel_to is not None:
            joint, value, unit = travel_to
            answer["travel_to"] = {
                "joint": joint,
                "value": units.value_out(value, unit),
                "unit": units.unit_out(unit),
            }
        if tool_speed is not None:
            linear, angular = tool_speed
            answer["tool_speed"] = {
                "linear": units.value_out(linear, "m"),
                "angular": units.value_out(angular, "rad"),
            }
        return answer


def judged(question: Question, joint_values: FloatArray, motion: Motion) -> Judged | None:
    """Return a batch of postures (count, joints) judged; None for an arm without joints."""
    if question.prepared is None:
        return None
    judgement = judge(question.arm, question.prepared[0], motion)
    return Judged(question, *question.prepared, joint_values, None, (motion, judgement))


def judged_reading(
    question: Question, joint_values: Sequence[float], reading: PostureReading
) -> Judged | None:
    """Return one posture (joints,) as it was read; None for an arm without joints."""
    if question.prepared is None or reading.state is None:
        return None
    space, anatomy = question.prepared
    plain = _Plain([reading.state], [reading.readings], [reading.step])
    return Judged(question, space, anatomy, [joint_values], plain)
