"""Tool poses for the joint vectors of one arm.

Left out: how the question arrives and how the answer is printed.
"""

from collections.abc import Iterable, Mapping, Sequence
from typing import NamedTuple

import numpy as np

from kinematics.arm import BASE
from kinematics.chain import tool_in_base, walk
from kinematics.findings import Finding
from kinematics.jacobian import Motion, motion_of
from kinematics.table import FloatArray
from kinematics.tolerances import LOCK_NOTICE
from kinematics.transforms import in_frame
from kinematics.travel_limits import margin_and_outside, travel_findings
from service.convert import Units, finding_out, orientation_values_out, pose_orientations_out
from service.details import Detail
from service.operations.joint_rows import JointRows
from service.operations.questions import Question
from service.operations.singularities import Judged, judged, judged_reading
from service.problems import KINDS
from service.wire.poses import lock_findings, pose_answer


class Answered(NamedTuple):
    """Items in the order of the request, and the travel left at each usable vector."""

    items: list[dict[str, object]]
    margins: list[float]


class _Placed(NamedTuple):
    """One posture's pose as told, and what there may be to say of it."""

    position: list[float]
    orientation: object
    is_near_lock: bool
    is_outside: bool


def pose_items(question: Question, rows: JointRows, *, singularity: bool, links: bool) -> Answered:
    """Return one item for each joint vector of the request."""
    arm, tool_in_flange = question.arm, question.tool.tool_in_flange
    motion = motion_of(arm, rows.values, tool_in_flange) if singularity else None
    tool_in_frame = placed(question, rows.values, motion)
    positions = question.units.length_out(tool_in_frame[:, :3, 3]).tolist()
    values, from_lock = pose_orientations_out(question.units, question.form, tool_in_frame)
    orientations, locked = values.tolist(), (from_lock <= LOCK_NOTICE).tolist()
    told = judged(question, rows.values, motion) if motion is not None else None
    margins, outside = (found.tolist() for found in margin_and_outside(arm, rows.values))
    listed = _links(question, rows.values) if links else None
    items: list[dict[str, object]] = []
    each = zip(positions, orientations, locked, outside, strict=True)
    for index, found in enumerate(map(_Placed._make, each)):
        more: dict[str, object] = {"singularity": None} if singularity else {}
        if listed is not None:
            more["links"] = listed[index]
        items.append(_item(question, rows.values, index, found, told, more))
    return Answered(with_refused(items, rows, ("position", "orientation")), margins)


def pose_item(question: Question, joint_values: Sequence[float]) -> Answered:
    """Return the item of one joint vector, with singularity: what controllers ask all the time."""
    read, units = question.reader.read(joint_values), question.units
    found = _Placed(
        [units.value_out(length, "m") for length in read.position],
        orientation_values_out(units, question.form, read.orientation),
        read.from_lock <= LOCK_NOTICE,
        read.outside,
    )
    told = judged_reading(question, joint_values, read)
    item = _item(question, [joint_values], 0, found, told, {"singularity": None})
    return Answered([item], [read.margin])


def _item(
    question: Question,
    joint_values: Sequence[Sequence[float]] | FloatArray,
    index: int,
    found: _Placed,
    told: Judged | None,
    more: dict[str, object],
) -> dict[str, object]:
    """Return the item of one of the postures (count, joints); ``more`` goes into it."""
    findings = list(question.repaired)
    if found.is_outside:
        findings.extend(travel_findings(question.arm, np.asarray(joint_values[index])))
    if found.is_near_lock:
        tool_in_frame = placed(question, np.array([joint_values[index]]), None)[0]
        findings.extend(lock_findings(tool_in_frame, question.form))
    if told is not None:
        more["singularity"], said = told.told(index, question.base_in_frame[:3, :3])
        findings.extend(said)
    orientation = {"form": question.form, "values": found.orientation}
    parts = {"position": found.position, "orientation": orientation, **more}
    return answered(question.units, findings, parts)


def placed(question: Question, joint_values: FloatArray, motion: Motion | None) -> FloatArray:
    """Return the tool in the frame asked for, (count, 4, 4); from the motion if there is one."""
    in_base = (
        tool_in_base(question.arm, joint_values, question.tool.tool_in_flange)
        if motion is None
        else motion.tool_in_base
    )
    if question.frame == BASE:
        return in_base
    return in_frame(question.base_in_frame, in_base)


def plain_poses(question: Question, rows: JointRows) -> tuple[FloatArray, FloatArray] | None:
    """Return positions (count, 3) and orientations (count, ...) in the user's units, unjudged.

    None where there is more to tell of one of the vectors than its pose.
    """
    _, outside = margin_and_outside(question.arm, rows.values)
    if question.repaired or rows.refused or outside.any():
        return None
    tool_in_frame = placed(question, rows.values, None)
    values, from_lock = pose_orientations_out(question.units, question.form, tool_in_frame)
    if (from_lock <= LOCK_NOTICE).any():
        return None
    return question.units.length_out(tool_in_frame[:, :3, 3]), values


def answered(
    units: Units, findings: Sequence[Finding], parts: Mapping[str, object]
) -> dict[str, object]:
    """Return an item that could be answered; of several codes the highest stands at its head."""
    if not findings:
        return {"ok": True, "code": 0, **parts, "findings": []}
    return {
        "ok": True,
        "code": max(finding.code for finding in findings),
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
    return {
        "ok": False,
        "code": KINDS[detail.code].number,
        **dict.fromkeys(empty),
        "findings": [],
        "problem": detail.problem_of_item(),
    }


def _links(question: Question, joint_values: FloatArray) -> list[list[dict[str, object]]]:
    """Return the poses of link frames 0 ... n, in the frame and form asked for."""
    link_in_base = walk(question.arm, joint_values).link_in_base
    link_in_frame = in_frame(question.base_in_frame, link_in_base)
    return [
        [pose_answer(link, question.form, question.units) for link in links]
        for links in link_in_frame
    ]
