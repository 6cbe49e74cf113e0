"""Reasons and families as they are answered, in the user's units and frame.

Left out: solutions and verdicts (reach_told.py), and why a way breaks (courses_told.py).
"""

import numpy as np

from kinematics.reach.targets import Family, Reason
from kinematics.table import FloatArray
from kinematics.transforms import in_frame
from service.convert import Units, joint_values_out, number_said
from service.operations.questions import Question
from service.wire.poses import pose_answer


def reason_say(units: Units, reason: Reason) -> str:
    """Return the sentence of a reason in the user's units."""
    return reason.say.format(
        **{
            name: f"{number_said(units.value_out(value, reason.unit))} "
            + units.unit_out(reason.unit)
            for name, value in (
                ("shortfall", reason.shortfall),
                ("measure", reason.measure),
                ("threshold", reason.threshold),
            )
        }
    )


def reason_out(question: Question, reason: Reason | None, form: str) -> dict[str, object] | None:
    """Return a reason as answered; the nearest pose in the frame asked for."""
    if reason is None:
        return None
    units, nearest = question.units, reason.nearest
    return {
        "code": reason.code,
        "say": reason_say(units, reason),
        "stage": reason.stage,
        "shortfall": units.value_out(reason.shortfall, reason.unit),
        "unit": units.unit_out(reason.unit),
        "nearest": None
        if nearest is None
        else pose_answer(in_frame(question.base_in_frame, nearest), form, units),
    }


def family_out(question: Question, family: Family) -> dict[str, object]:
    """Return a family as answered."""
    units = question.units
    answer: dict[str, object] = {
        "free_joints": list(family.free_joints),
        "interval": [
            [units.value_out(bound, family.unit) for bound in bounds] for bounds in family.interval
        ],
        "unit": units.unit_out(family.unit),
        "witness": {"joints": _joints_out(question, family.witness)},
    }
    if family.relation is not None:
        constant = number_said(units.value_out(family.measure, family.unit))
        answer["relation"] = family.relation.format(
            measure=f"{constant} {units.unit_out(family.unit)}"
        )
    return answer


def _joints_out(question: Question, witness: FloatArray) -> list[float]:
    values: list[float] = joint_values_out(
        question.arm, question.units, np.asarray(witness)
    ).tolist()
    return values
