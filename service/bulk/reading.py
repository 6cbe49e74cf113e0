"""What a request about many postures asks: from a JSON body, or from a table and its query.

Left out: answering.
"""

from collections.abc import Callable, Mapping
from functools import partial
from typing import Any, Literal, NamedTuple

import numpy as np
from pydantic import ValidationError

from kinematics.errors import KinematicsError, WrongJointCount
from kinematics.table import FloatArray
from service.convert import joint_values_in, twists_in
from service.errors import UnknownArm, UnknownRevision, UnusableValue
from service.operations.arms import Arms
from service.operations.jacobians import Wanted
from service.operations.joint_rows import (
    MOST_VECTORS,
    MOST_VECTORS_WITH_SINGULARITY,
    read_joint_rows,
    read_vectors,
    refuse_too_many,
    told_joints,
)
from service.operations.joint_table import JointTable
from service.operations.many import Many, ManyJacobians, ManyPoses, Rows
from service.operations.questions import Question, question_of
from service.operations.refused_query import in_query
from service.operations.single import question_asked
from service.wire.arms import ReadArm
from service.wire.csv_rows import CsvRows, WrongColumnCount, read_csv
from service.wire.formats import (
    Format,
    form_for,
    singularity_for,
    table_question,
    table_singularity,
)
from service.wire.large_json import cut_apart
from service.wire.models import JacobiansRequest, PosesRequest
from service.wire.npy import read_npy
from service.wire.poses import checked_form

Key = Literal["poses", "jacobians"]
# Fields whose answers only JSON has a place for.
_NESTED = ("links", "speeds", "twists", "loads")


def model_of(key: Key, body: object) -> PosesRequest:
    """Return a JSON body as its model.

    Raises
    ------
    pydantic.ValidationError
    """
    return (PosesRequest if key == "poses" else JacobiansRequest).model_validate(body)


class BarePoses(NamedTuple):
    """A JSON body that asks for poses and no more: itself without its joint vectors, and these."""

    document: dict[str, Any]
    asked: PosesRequest
    table: FloatArray


def bare_poses_of(raw: bytes, key: Key, wanted: Format) -> BarePoses | None:
    """Return a long body whose answer is made of arrays; None if it is odd, or asks for more.

    Reading the table is the long part. It is read in pieces of less than a millisecond, each
    forgotten before the next, so it need not leave the process: to be sent to another one and back
    would take longer.
    """
    cut = cut_apart(raw) if key == "poses" else None
    if cut is None:
        return None
    try:
        asked = PosesRequest.model_validate(cut.document)
    except ValidationError:  # to be told where the whole is read
        return None
    if asked.links or (asked.singularity and wanted != "npy"):
        return None
    table = cut.table()
    return None if table is None else BarePoses(cut.document, asked, table)


def many_of_body(
    arms: Arms[ReadArm],
    key: Key,
    asked: PosesRequest,
    wanted: Format,
    table: FloatArray | None = None,
) -> Many:
    """Return the question of a JSON body.

    Parameters
    ----------
    table : the joint vectors (count, joints), if they have been read already.

    Raises
    ------
    ServiceError, KinematicsError : what it says cannot be used, or no vector of it can.
    """
    said = asked.singularity if "singularity" in asked.model_fields_set else None
    singularity = singularity_for(wanted, said, location="body")
    form = checked_form(form_for(wanted, asked.form, key=key, location="body"))
    if wanted != "json":
        _refuse_nested(asked, wanted)
    question = question_of(arms, asked, form, moving=key == "jacobians")
    if table is not None:
        refuse_too_many(len(table), singularity=singularity)
        if table.shape[1] == question.arm.joint_count:
            at = JointTable(question.arm, question.units, table, _body_place)
            if at.any_usable():
                return _many(key, question, at, singularity, links=asked.links)
        asked.joints = table.tolist()
    arm, units = question.arm, question.units
    rows = read_joint_rows(arm, units, asked.joints, singularity=singularity)
    carried = Wanted()
    if isinstance(asked, JacobiansRequest):
        joints_in, tool_in = partial(joint_values_in, arm, units), partial(twists_in, units)
        carried = Wanted(
            speeds=read_vectors("speeds", asked.speeds, arm.joint_count, rows, joints_in),
            twists=read_vectors("twists", asked.twists, 6, rows, tool_in),
            # Forces and moments are N and Nm in every unit system.
            loads=read_vectors("loads", asked.loads, 6, rows, np.asarray),
        )
    return _many(key, question, rows, singularity, links=asked.links, carried=carried)


def many_of_table(
    arms: Arms[ReadArm],
    key: Key,
    raw: bytes,
    is_csv: bool,
    parameters: Mapping[str, str],
    wanted: Format,
    between: Callable[[], None] = lambda: None,
) -> Many:
    """Return the question of a table of joint vectors and the query beside it.

    Parameters
    ----------
    between : called now and then; may raise to give up.

    Raises
    ------
    ServiceError, KinematicsError : what it says cannot be used; single vectors are not refused.
    """
    try:
        asked = table_question(parameters, wanted, key=key)
        singularity = singularity_for(wanted, table_singularity(parameters), location="query")
        question = question_asked(arms, asked, moving=key == "jacobians")
    except KinematicsError as error:
        raise in_query(error) from None
    except (UnknownArm, UnknownRevision) as error:
        error.status, error.location = 422, "query"
        raise
    joints = question.arm.joint_count
    if is_csv:
        most = MOST_VECTORS_WITH_SINGULARITY if singularity else MOST_VECTORS
        lines = _read_lines(question, raw, most, between)
        refuse_too_many(len(lines.values), singularity=singularity)

        def line_place(row: int, joint: int) -> tuple[str | int, ...]:
            return lines.lines[row], f"q{joint + 1}"

        table = JointTable(question.arm, question.units, lines.values, line_place, lines.unreadable)
        return _many(key, question, table, singularity, names=lines.names)
    values = read_npy(raw)
    if values.shape[1] != joints:
        raise WrongJointCount(
            f"{values.shape[1]} columns for an arm of {joints} joints",
            value=values.shape[1],
            way_out=f"in each row send {told_joints(question.arm, question.units)}",
        )
    refuse_too_many(len(values), singularity=singularity)
    table = JointTable(question.arm, question.units, values, lambda row, joint: (row, joint))
    return _many(key, question, table, singularity)


def _read_lines(question: Question, raw: bytes, most: int, between: Callable[[], None]) -> CsvRows:
    try:
        return read_csv(raw, question.arm.joint_count, most, between)
    except WrongColumnCount as error:
        error.way_out += f"; the arm takes {told_joints(question.arm, question.units)}"
        raise


def _many(
    key: Key,
    question: Question,
    rows: Rows,
    singularity: bool,
    *,
    names: list[str] | None = None,
    links: bool = False,
    carried: Wanted | None = None,
) -> Many:
    if key == "poses":
        return ManyPoses(question, rows, singularity, names, links)
    return ManyJacobians(question, rows, singularity, names, carried or Wanted())


def _body_place(row: int, joint: int) -> tuple[str | int, ...]:
    return "joints", row, joint


def _refuse_nested(asked: PosesRequest, wanted: Format) -> None:
    for field in _NESTED:
        if getattr(asked, field, None):
            raise UnusableValue(
                f"a {wanted.upper()} answer has no place for {field}",
                where=(field,),
                way_out="ask for format=json",
            )
