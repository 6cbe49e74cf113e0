"""What a drawing of an arm needs, in the frame and the units asked for.

Left out: the drawing, and how thick an arm is: no table says.
"""

from collections.abc import Sequence

import numpy as np

from kinematics.outline import outline
from kinematics.table import FloatArray, JointKind, Travel
from kinematics.travel_used import TravelUsed, travel_used
from service.convert import Units
from service.operations.questions import Question

KEY = "outline"


def outline_told(question: Question, joint_values: Sequence[float]) -> dict[str, object]:
    """Return the lines of an arm and its travel at joint values in SI."""
    arm, units = question.arm, question.units
    found = outline(
        arm, np.asarray(joint_values), question.tool.tool_in_flange, question.base_in_frame
    )
    joints = {index: joint for joint, index in enumerate(arm.drive_map.driven, start=1)}
    places_from, places_to = units.length_out(found.axis_from), units.length_out(found.axis_to)
    return {
        "axes": [
            {
                "row": index + 1,
                "joint": joints.get(index),
                "slides": row.joint is JointKind.PRISMATIC,
                "from": places_from[index].tolist(),
                "to": places_to[index].tolist(),
                "direction": found.axis_direction[index].tolist(),
            }
            for index, row in enumerate(arm.table.rows)
        ],
        "line": units.length_out(found.line).tolist(),
        "base": _matrix(units, found.base),
        "flange": _matrix(units, found.flange),
        "tool": _matrix(units, found.tool),
        "travel": [_travel(units, used) for used in travel_used(arm, joint_values)],
    }


def _matrix(units: Units, x_in_frame: FloatArray) -> list[list[float]]:
    told = x_in_frame.copy()
    told[:3, 3] = units.length_out(told[:3, 3])
    return [[float(entry) for entry in row] for row in told.tolist()]


def _travel(units: Units, used: TravelUsed) -> dict[str, object]:
    return {
        "of": used.subject,
        "joint": used.joint,
        "row": used.row,
        "value": units.shortest_out(used.value, used.unit),
        "unit": units.unit_out(used.unit),
        "travel": _bounds(units, used.travel, used.unit),
        "working_travel": _bounds(units, used.working_travel, used.unit),
        "share": used.share,
    }


def _bounds(units: Units, travel: Travel | None, unit: str) -> list[float] | None:
    if travel is None:
        return None
    return [units.shortest_out(end, unit) for end in (travel.lower, travel.upper)]
