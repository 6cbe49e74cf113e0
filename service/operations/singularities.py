"""Singularity of the postures of a question, as answered."""

from dataclasses import dataclass

import numpy as np

from kinematics.findings import Finding
from kinematics.jacobian import Motion
from kinematics.lost_motion import PostureSingularity, describe
from kinematics.singular_kinds import Anatomy
from kinematics.singularity import Judgement, judge
from kinematics.table import FloatArray
from kinematics.task_space import TaskSpace
from service.convert import Units
from service.operations.questions import Question


@dataclass(frozen=True)
class Judged:
    """A batch of postures judged once, told one at a time."""

    question: Question
    space: TaskSpace
    anatomy: Anatomy
    joint_values: FloatArray
    motion: Motion
    judgement: Judgement

    def told(
        self, index: int, base_in_frame: FloatArray
    ) -> tuple[dict[str, object], tuple[Finding, ...]]:
        """Return one posture's singularity as answered, and its findings."""
        judgement = self.judgement.of_posture(index)
        described = describe(
            self.question.arm,
            self.space,
            self.anatomy,
            self.joint_values[index],
            self.question.tool.tool_in_flange,
            self.motion.of_posture(index),
            judgement,
            base_in_frame,
            self.question.frame,
        )
        answer = _answer(self.question.units, self.space, judgement, described)
        return answer, described.findings


def judged(question: Question, joint_values: FloatArray, motion: Motion) -> Judged | None:
    """Return a batch of postures (count, joints) judged; None for an arm without joints."""
    prepared = question.prepared()
    if prepared is None:
        return None
    space, anatomy = prepared
    judgement = judge(question.arm, space, motion)
    return Judged(question, space, anatomy, joint_values, motion, judgement)


def _answer(
    units: Units, space: TaskSpace, judgement: Judgement, described: PostureSingularity
) -> dict[str, object]:
    condition = float(judgement.condition)
    answer: dict[str, object] = {
        "state": described.state,
        "kinds": list(described.kinds),
        "joints": list(described.joints),
        "task": space.task,
        "smallest_singular_value": float(judgement.smallest),
        "condition_number": condition if np.isfinite(condition) else None,
        "manipulability": float(judgement.manipulability),
        "characteristic_length": float(units.length_out(space.length)),
        "lost_motion": [
            {"linear": lost.linear.tolist(), "angular": lost.angular.tolist(), "say": lost.say}
            for lost in described.lost_motion
        ],
        "travel_to": None,
        "tool_speed": None,
    }
    if described.travel_to is not None:
        joint, value, unit = described.travel_to
        answer["travel_to"] = {
            "joint": joint,
            "value": units.value_out(value, unit),
            "unit": units.unit_out(unit),
        }
    if described.tool_speed is not None:
        linear, angular = described.tool_speed
        answer["tool_speed"] = {
            "linear": units.value_out(linear, "m"),
            "angular": units.value_out(angular, "rad"),
        }
    return answer
