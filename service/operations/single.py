"""One posture of a stored arm, as a controller asks for it.

Left out: query strings and flat answers (wire).
"""

from collections.abc import Container, Sequence
from dataclasses import replace
from functools import lru_cache

from kinematics.arm import BASE, FLANGE, Arm
from kinematics.errors import KinematicsError
from kinematics.task_space import rows_of
from service.convert import Units
from service.errors import DigestDiffers, ServiceError, UnknownRevision
from service.operations import nearest_told, outlines
from service.operations.arms import Arms, StoredArm
from service.operations.jacobians import Wanted, jacobian_items
from service.operations.joint_rows import JointRows, read_joint_row
from service.operations.meant_arms import MeantArm
from service.operations.poses import Answered, pose_item
from service.operations.questions import (
    PREPARED_KEPT,
    MeantTool,
    Question,
    meant_frame,
    meant_tool,
    meant_units,
)
from service.wire.arms import ReadArm
from service.wire.single import TOOL_PARAMETERS, JointsAsked, SingleAnswer, SingleQuestion

_LONGEST_NUMBER = 3
"""Digits of the numbers that controllers know tools and frames by."""


def single_pose(arms: Arms[ReadArm], asked: SingleQuestion, joints: JointsAsked) -> SingleAnswer:
    """Return the tool pose of one posture."""
    question = question_asked(arms, asked, moving=False)
    return posture_answer(question, joint_row(question, joints), asked)


def posture_answer(
    question: Question, joint_values: Sequence[float], asked: SingleQuestion
) -> SingleAnswer:
    """Return the tool pose at joint values in SI, with what else of it is ``asked``.

    That is what a drawing needs, and the named frame nearest to the tool.
    """
    answered = pose_item(question, joint_values)
    item = answered.items[0]
    if asked.outline:
        item[outlines.KEY] = outlines.outline_told(question, joint_values)
    if asked.nearest:
        item[nearest_told.KEY] = nearest_told.nearest_told(question, item)
    return _answer(question, answered)


def single_jacobian(
    arms: Arms[ReadArm], asked: SingleQuestion, joints: JointsAsked
) -> SingleAnswer:
    """Return the Jacobian of one posture."""
    question = question_asked(arms, asked, moving=True)
    rows = JointRows.of_one(joint_row(question, joints))
    return _answer(question, jacobian_items(question, rows, Wanted(), singularity=True))


def joint_count(arms: Arms[ReadArm], name: str) -> int:
    """Return how many joint values an arm takes, 0 where it cannot be told."""
    try:
        return arms.get(name).read.arm.joint_count
    except ServiceError:
        return 0


def question_asked(arms: Arms[ReadArm], asked: SingleQuestion, *, moving: bool) -> Question:
    """Return the question of a query string, all but the joint values.

    Raises
    ------
    ServiceError, KinematicsError : what ``asked`` says cannot be used.
    """
    try:
        stored = arms.get(asked.arm, asked.revision)
    except UnknownRevision as error:
        error.where, error.location = ("revision",), "query"
        raise
    return question_about(stored, asked, moving=moving)


def question_about(
    stored: StoredArm[ReadArm], asked: SingleQuestion, *, moving: bool = False
) -> Question:
    """Return what is asked of a stored arm that is looked up already.

    Raises
    ------
    ServiceError, KinematicsError : what ``asked`` says cannot be used.
    """
    about = _question_kept if asked.is_kept else _question_about
    return about(stored, asked, moving)


def _question_about(stored: StoredArm[ReadArm], asked: SingleQuestion, moving: bool) -> Question:
    meant = MeantArm(stored.read, stored.record.revision)
    check_expected(meant.read.digests.digest, asked.expect)
    _check_task(asked)
    arm, units = meant.arm, meant_units(meant, asked.units)
    tool = _meant_tool(arm, units, asked)
    return Question(
        meant=meant,
        units=units,
        tool=tool,
        frame=meant_frame(arm, _name_or_number(asked.frame, arm.frames, BASE), moving=moving),
        form=asked.form,
        task=tuple(asked.task) if isinstance(asked.task, list) else asked.task,
        repaired=tool.repaired,
    )


_question_kept = lru_cache(maxsize=PREPARED_KEPT)(_question_about)


def joint_row(question: Question, joints: JointsAsked) -> list[float]:
    """Return the joint values in SI; what is wrong with one leads to its parameter."""
    try:
        return read_joint_row(question.arm, question.units, joints.values)
    except ServiceError as error:
        error.errors = tuple(
            replace(detail, where=(_parameter(joints, detail.where),), location="query")
            for detail in error.errors
        )
        raise


def _answer(question: Question, answered: Answered) -> SingleAnswer:
    frame = question.arm.frames.get(question.frame)
    item = answered.items[0]
    findings = item["findings"]
    assert isinstance(findings, list)
    return SingleAnswer(
        head=question.head,
        item=item,
        margin=answered.margins[0],
        tool_number=question.tool.number or 0,
        frame_number=(frame.number or 0) if frame is not None else 0,
        codes=frozenset([finding["code"] for finding in findings]),
    )


def _meant_tool(arm: Arm, units: Units, asked: SingleQuestion) -> MeantTool:
    if asked.tool_pose is None:
        return meant_tool(arm, units, _name_or_number(asked.tool, arm.tools, FLANGE))
    try:
        return meant_tool(arm, units, asked.tool_pose)
    except KinematicsError as error:
        pose = asked.tool_pose
        assert pose.position is not None
        assert pose.orientation is not None
        given = dict(zip(TOOL_PARAMETERS, [*pose.position, *pose.orientation.values], strict=True))
        turning = 3 if "orientation" in error.where else 0
        axis = error.where[-1]
        name = TOOL_PARAMETERS[turning + axis if isinstance(axis, int) else turning]
        error.where, error.value = (name,), given[name]
        raise


def _check_task(asked: SingleQuestion) -> None:
    if asked.task is None:
        return
    try:
        rows_of(asked.task)
    except KinematicsError as error:
        error.where = ("task",)
        raise


def check_expected(digest: str, expected: str | None) -> None:
    """Refuse an arm that is not the one a question expects.

    Raises
    ------
    DigestDiffers : it has another digest.
    """
    if expected is not None and expected != digest:
        raise DigestDiffers(
            f"the arm's digest is {digest}, not {expected}",
            where=("expect",),
            location="query",
            value=expected,
            way_out="read the arm anew and check what was changed",
        )


def number_said(text: str) -> int | None:
    """Return the number of a tool or a frame that digits say, None for any other text.

    Beyond three digits there are no such numbers: left as text it is an unknown name.

    Examples
    --------
    >>> number_said("007"), number_said("0"), number_said("1000"), number_said("pen")
    (7, 0, None, None)
    """
    digits = text.lstrip("0")
    if not (text.isascii() and text.isdigit()) or len(digits) > _LONGEST_NUMBER:
        return None
    return int(digits or "0")


def _name_or_number(asked: str | None, known: Container[str], own: str) -> str | int | None:
    """Return a number where digits are asked that are no name: names may be digits too.

    0 is the arm's ``own``, flange or base, as answers number them.
    """
    number = None if asked is None or asked in known else number_said(asked)
    return asked if number is None else number or own


def _parameter(joints: JointsAsked, where: Sequence[str | int]) -> str:
    """Return the query parameter that holds the joint value at ``("joints", 0, index)``."""
    index = where[2] if len(where) > 2 else 0
    if isinstance(index, int) and index < len(joints.names) and len(where) > 2:
        return joints.names[index]
    return "q"
