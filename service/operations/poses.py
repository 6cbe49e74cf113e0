"""Tool poses for the joint vectors of one arm.

Left out: how the question arrives and how the answer is printed.
"""

from collections.abc import Iterable, Mapping
from typing import Any

import numpy as np

from kinematics.arm import BASE
from kinematics.chain import Walk, tool_in_base
from kinematics.findings import Finding
from kinematics.jacobian import Motion, motion_of
from kinematics.orientation_forms import distance_from_lock
from kinematics.table import FloatArray
from kinematics.tolerances import LOCK_NOTICE
from kinematics.travel_limits import beyond_travel, travel_findings
from service.convert import Units, finding_out, orientation_out
from service.details import Detail, pointer, shown
from service.operations.joint_rows import JointRows
from service.operations.questions import Question
from service.operations.singularities import judged
from service.problems import KINDS
from service.wire.poses import lock_findings, pose_answer


def head_of(question: Question) -> dict[str, object]:
    """Return what stands at the head of every answer about postures."""
    return {
        "arm": question.meant.identity(),
        "units": question.units.name,
        "frame": question.frame,
        "tool": question.tool.shown,
    }


def pose_items(
    question: Question, rows: JointRows, *, singularity: bool, links: bool
) -> list[dict[str, object]]:
    """Return one item for each joint vector of the request, in its order."""
    arm, tool_in_flange = question.arm, question.tool.tool_in_flange
    motion = motion_of(arm, rows.values, tool_in_flange) if singularity or links else None
    base_in_frame = arm.base_in_frame(question.frame)
    tool_in_frame = placed(question, rows.values, motion)
    positions = question.units.length_out(tool_in_frame[..., :3, 3]).tolist()
    orientations = orientation_out(
        question.units, question.form, tool_in_frame[..., :3, :3]
    ).tolist()
    near_lock = distance_from_lock(question.form, tool_in_frame[..., :3, :3]) <= LOCK_NOTICE
    told = judged(question, rows.values, motion) if singularity and motion is not None else None
    outside = beyond_travel(arm, rows.values)
    if motion is None and not (question.repaired or outside.any() or near_lock.any()):
        return with_refused(
            _plain_items(positions, orientations, question.form), rows, ("position", "orientation")
        )
    items: list[dict[str, object]] = []
    for index in range(len(rows.values)):
        findings = list(question.repaired)
        if outside[index]:
            findings.extend(travel_findings(arm, rows.values[index]))
        if near_lock[index]:
            findings.extend(lock_findings(tool_in_frame[index], question.form))
        parts: dict[str, object] = {
            "position": positions[index],
            "orientation": {"form": question.form, "values": orientations[index]},
        }
        if singularity:
            parts["singularity"] = None
        if told is not None:
            parts["singularity"], more = told.told(index, base_in_frame[:3, :3])
            findings.extend(more)
        if links and motion is not None:
            parts["links"] = _links(question, motion.walk, index, base_in_frame)
        items.append(answered(question.units, findings, parts))
    return with_refused(items, rows, ("position", "orientation"))


def placed(question: Question, joint_values: FloatArray, motion: Motion | None) -> FloatArray:
    """Return the tool in the frame asked for, (count, 4, 4); from the motion if there is one."""
    arm = question.arm
    in_base = (
        tool_in_base(arm, joint_values, question.tool.tool_in_flange)
        if motion is None
        else motion.tool_in_base
    )
    if question.frame == BASE:
        return in_base
    in_frame: FloatArray = arm.base_in_frame(question.frame) @ in_base
    return in_frame


def _plain_items(
    positions: list[list[float]], orientations: list[list[float]], form: str
) -> list[dict[str, object]]:
    """Return items of which there is nothing to tell; most of a long answer's time goes here."""
    return [
        {
            "ok": True,
            "code": 0,
            "position": position,
            "orientation": {"form": form, "values": values},
            "findings": [],
        }
        for position, values in zip(positions, orientations, strict=True)
    ]


def answered(
    units: Units, findings: Iterable[Finding], parts: Mapping[str, object]
) -> dict[str, object]:
    """Return an item that could be answered; of several codes the highest stands at its head."""
    findings = list(findings)
    if not findings:
        return {"ok": True, "code": 0, **parts, "findings": []}
    return {
        "ok": True,
        "code": max((finding.code for finding in findings), default=0),
        **parts,
        "findings": [finding_out(units, finding) for finding in findings],
    }


def with_refused(
    items: list[dict[str, object]], rows: JointRows, empty: Iterable[str]
) -> list[dict[str, object]]:
    """Return answered items in the request's order, with the refused ones between them."""
    if not rows.refused:
        return items
    by_place: dict[int, dict[str, object]] = dict(zip(rows.places.tolist(), items, strict=True))
    for place, detail in rows.refused.items():
        by_place[place] = _refused(detail, empty)
    return [by_place[place] for place in range(rows.count)]


def _refused(detail: Detail, empty: Iterable[str]) -> dict[str, object]:
    problem: dict[str, Any] = {
        "code": detail.code,
        "pointer": pointer(detail.where),
        "say": detail.say,
        "value": shown(detail.value),
        "way_out": detail.way_out,
    }
    return {
        "ok": False,
        "code": KINDS[detail.code].number,
        **dict.fromkeys(empty),
        "findings": [],
        "problem": problem,
    }


def _links(
    question: Question, walked: Walk, index: int, base_in_frame: FloatArray
) -> list[dict[str, object]]:
    """Return the poses of link frames 0 ... n, in the frame and form asked for."""
    link_in_frame: FloatArray = np.asarray(base_in_frame @ walked.link_in_base[index])
    return [pose_answer(link, question.form, question.units) for link in link_in_frame]
