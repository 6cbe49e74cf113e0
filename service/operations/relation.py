"""One relation of a stored arm at one posture, as a controller asks for it.

Left out: query strings and flat answers (wire).
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Protocol

import numpy as np

from kinematics.arm import BASE, FLANGE, Arm
from kinematics.arm_relations import ArmAtJoints
from kinematics.errors import KinematicsError
from kinematics.findings import Finding
from kinematics.table import FloatArray
from kinematics.travel_limits import travel_findings, travel_margin
from service.convert import finding_out
from service.errors import ServiceError
from service.operations.arms import Arms
from service.operations.cells import Cells
from service.operations.frame_network import NO_RELATIONS, Missing, network_of
from service.operations.frames import cell_identity, way_answers
from service.operations.questions import Question
from service.operations.single import joint_row, number_said, question_asked
from service.wire.arms import ReadArm
from service.wire.relation_query import RelationQuestion
from service.wire.single import JointsAsked, SingleAnswer

TOOL = "tool"


def single_relation(
    arms: Arms[ReadArm], cells: Cells, asked: RelationQuestion
) -> tuple[SingleAnswer, dict[str, object]]:
    """Return the relation, as a flat line takes it and as the nested answer has it.

    Raises
    ------
    ServiceError, KinematicsError : with ``where`` a parameter of the query.
    """
    question = question_asked(arms, asked.single, moving=False)
    arm, units = question.arm, question.units
    joint_values = _joint_values(question, asked)
    at = ArmAtJoints(arm, joint_values)
    stored = None if arm.cell is None else cells.get(arm.cell.name, arm.cell.revision)
    cell = None if stored is None else stored.read.cell
    known = _Numbered(arm.tools, {**({} if cell is None else cell.frames), **arm.frames})
    of, within = known.name(arm, asked.of, "of"), known.name(arm, asked.within, "in")
    nodes = [_node(at, of, "of"), _node(at, within, "in")]
    try:
        network = network_of(
            NO_RELATIONS,
            {arm.name: (at, Missing(("q",), "add q=..., the joint values of {arm}"))},
            cell,
            nodes,
            Missing(("q",), "ask POST /v1/frames, which takes joint values of several arms"),
        )
        ways = network.ways(nodes[:1], nodes[1:])
    except (KinematicsError, ServiceError) as error:
        error.where = tuple(step for step in error.where if isinstance(step, str))[-1:] or ("of",)
        if isinstance(error, ServiceError):
            error.location = "query"
        raise
    (answer,) = way_answers(ways, [of], [within], question.form, units)
    beyond: Sequence[Finding] = () if joint_values is None else travel_findings(arm, joint_values)
    findings = [finding_out(units, finding) for finding in beyond]
    answer["findings"] = [*findings, *answer["findings"]]  # type: ignore[misc]
    numbers = known.number("tools", of), known.number("frames", within)
    told_cell = {} if stored is None else {"cell": cell_identity(stored)}
    return _told(question, answer, at, numbers, told_cell)


def _told(
    question: Question,
    answer: dict[str, object],
    at: ArmAtJoints,
    numbers: tuple[int, int],
    cell: Mapping[str, object],
) -> tuple[SingleAnswer, dict[str, object]]:
    findings, pose = answer["findings"], answer["pose"]
    assert isinstance(findings, list)
    assert isinstance(pose, dict)
    codes = frozenset(finding["code"] for finding in findings)
    code = max(codes, default=0)
    head = {"arm": question.meant.identity(), **cell, "units": question.units.name}
    values = at.joint_values
    told = SingleAnswer(
        head=head,
        item={"code": code, **pose, "singularity": None, "findings": findings},
        margin=float("inf") if values is None else float(travel_margin(at.arm, values[None])[0]),
        tool_number=numbers[0],
        frame_number=numbers[1],
        codes=codes,
    )
    return told, {"code": code, **head, "answers": [answer]}


def _node(at: ArmAtJoints, name: str, side: str) -> str:
    """Return the whole name of a frame: of the arm, of its cell, or of another arm in the cell."""
    try:
        return name if "." in name else at.node(name)
    except KinematicsError as error:
        error.where = (side,)
        raise


class _Named(Protocol):
    """A tool or a frame: what a controller knows it by."""

    @property
    def number(self) -> int | None: ...


@dataclass(frozen=True)
class _Numbered:
    """Tools and frames, the cell's among them, by name."""

    tools: Mapping[str, _Named]
    frames: Mapping[str, _Named]

    def name(self, arm: Arm, asked: str, side: str) -> str:
        """Return the name of a frame that is asked for by name or number, or as the arm's tool.

        What is ``of`` something is a tool first, what something is ``in`` a frame first.
        """
        if asked == TOOL:
            return arm.tool_name(None, (side,))
        number = None if asked in {**self.tools, **self.frames} else number_said(asked)
        if number is None:
            return asked
        if number == 0:
            return FLANGE if side == "of" else BASE
        for things in (self.tools, self.frames) if side == "of" else (self.frames, self.tools):
            for name, thing in things.items():
                if thing.number == number:
                    return name
        return asked

    def number(self, kind: str, name: str) -> int:
        """Return the number of a tool or a frame, 0 where it has none."""
        known = (self.tools if kind == "tools" else self.frames).get(name)
        return 0 if known is None else known.number or 0


def _joint_values(question: Question, asked: RelationQuestion) -> FloatArray | None:
    if asked.joints is None and question.arm.joint_count:
        return None
    return np.array(joint_row(question, asked.joints or JointsAsked([], [])))
