"""Jacobians for the joint vectors of one arm; speeds, twists and loads through them.

Left out: how the question arrives and how the answer is printed.
"""

from dataclasses import dataclass

import numpy as np

from kinematics.arm import BASE, FLANGE
from kinematics.findings import Finding
from kinematics.jacobian import (
    Motion,
    in_axes,
    joint_efforts,
    motion_of,
    singular_values_of,
    tool_twist,
)
from kinematics.joint_speeds import joint_speeds
from kinematics.table import FloatArray
from kinematics.travel_limits import margin_and_outside, travel_findings
from service.convert import jacobians_out, joint_values_out, twists_out
from service.operations.joint_rows import JointRows
from service.operations.poses import Answered, answered, with_refused
from service.operations.questions import TOOL_AXES, Question
from service.operations.singularities import judged


@dataclass(frozen=True)
class Wanted:
    """Speeds, twists and loads to be carried through the Jacobians; SI, one row per vector."""

    speeds: FloatArray | None = None
    twists: FloatArray | None = None
    loads: FloatArray | None = None

    def piece(self, first: int, last: int) -> "Wanted":
        """Return what is wanted at vectors ``first`` ... ``last``."""
        each = (self.speeds, self.twists, self.loads)
        return Wanted(*(None if rows is None else rows[first:last] for rows in each))


def jacobian_items(
    question: Question, rows: JointRows, wanted: Wanted, *, singularity: bool
) -> Answered:
    """Return one item for each joint vector of the request."""
    arm = question.arm
    motion = motion_of(arm, rows.values, question.tool.tool_in_flange)
    base_in_axes = base_in_axes_of(question, motion)
    of_joints = in_axes(motion.of_joints, base_in_axes)
    matrices = jacobians_out(arm, question.units, of_joints).tolist()
    values = singular_values_of(of_joints).tolist()
    told = judged(question, rows.values, motion) if singularity else None
    margins, outside = (found.tolist() for found in margin_and_outside(arm, rows.values))
    items: list[dict[str, object]] = []
    for index, is_outside in enumerate(outside):
        findings = list(question.repaired)
        if is_outside:
            findings.extend(travel_findings(arm, rows.values[index]))
        parts: dict[str, object] = {"matrix": matrices[index], "singular_values": values[index]}
        if singularity:
            parts["singularity"] = None
            if told is not None:
                parts["singularity"], more = told.told(index, base_in_axes[index])
                findings.extend(more)
        carried, more = _carried(question, of_joints[index], wanted, index)
        findings.extend(more)
        items.append(answered(question.units, findings, parts | carried))
    return Answered(with_refused(items, rows, ("matrix", "singular_values")), margins)


def base_in_axes_of(question: Question, motion: Motion) -> FloatArray:
    """Return the rotation of the base in the axes asked for, (count, 3, 3)."""
    count = motion.tool_in_base.shape[0]
    if question.frame == FLANGE:
        axes_in_base = motion.flange_in_base[..., :3, :3]
    elif question.frame == TOOL_AXES:
        axes_in_base = motion.tool_in_base[..., :3, :3]
    elif question.frame == BASE:
        return np.broadcast_to(np.eye(3), (count, 3, 3))
    else:
        fixed = question.base_in_frame[:3, :3]
        return np.broadcast_to(fixed, (count, 3, 3))
    return np.swapaxes(axes_in_base, -1, -2)


def _carried(
    question: Question,
    of_joints: FloatArray,
    wanted: Wanted,
    index: int,
) -> tuple[dict[str, object], tuple[Finding, ...]]:
    """Return what speeds, twists and loads become at one posture, and what there is to say."""
    parts: dict[str, object] = {}
    findings: tuple[Finding, ...] = ()
    units = question.units
    if wanted.speeds is not None:
        twist = tool_twist(of_joints, wanted.speeds[index])
        parts["twists"] = twists_out(units, twist).tolist()
    if wanted.twists is not None:
        parts["speeds"] = []
        if question.prepared is not None:
            found = joint_speeds(
                question.arm, question.prepared[0], of_joints, wanted.twists[index]
            )
            findings = found.findings
            parts["speeds"] = joint_values_out(question.arm, units, found.speeds).tolist()
    if wanted.loads is not None:
        parts["efforts"] = joint_efforts(of_joints, wanted.loads[index]).tolist()
    return parts, findings
