"""One target of a stored arm, as a controller asks for it: can the tool get there, and how.

Built on what answers for a pose: the question is kept by its words, and the best solution is read
as a posture is. Left out: query strings and flat answers (wire).
"""

from dataclasses import replace

import numpy as np

from kinematics.errors import OutOfRange
from kinematics.pose_batches import poses_as_given
from kinematics.reach.targets import (
    CODES,
    CONE,
    FREEDOMS,
    NONE,
    VERDICTS,
    TakesLonger,
    Target,
    Targets,
)
from kinematics.table import FloatArray
from kinematics.tolerances import TARGET_ANGLE, TARGET_POSITION
from kinematics.transforms import in_frame
from service.convert import orientation_in
from service.errors import ServiceError
from service.operations.approached import approach_asked, approached_checks
from service.operations.arms import Arms
from service.operations.joint_rows import read_joint_row
from service.operations.questions import Question
from service.operations.reach_judged import told_best
from service.operations.reach_plain import plain_answer
from service.operations.reach_told import NO_STATE
from service.operations.reachers import is_quick, method_of
from service.operations.single import question_asked
from service.wire.arms import ReadArm
from service.wire.reach_flat import ReachAnswer
from service.wire.reach_query import ANGLES, POSITION, ReachAsked
from service.wire.reach_targets import cone_in

_USUAL_POSITION, _USUAL_ANGLE = np.array([TARGET_POSITION]), np.array([TARGET_ANGLE])
_FREEDOM = [np.array([freedom]) for freedom in range(len(FREEDOMS))]
_NO_CONE = np.zeros(1)
_POSE = Targets.of([Target(np.eye(4))])
_NO_CODES: frozenset[int] = frozenset()
_NO_TURN = [0.0, 0.0, 0.0]


def reach_question_asked(arms: Arms[ReadArm], asked: ReachAsked) -> Question:
    """Return the question of a query string, all but the target.

    Raises
    ------
    ServiceError, KinematicsError : what ``asked`` says cannot be used.
    """
    return question_asked(arms, asked.single, moving=False)


def answers_at_once(question: Question, asked: ReachAsked) -> bool:
    """Return whether the answer takes so little time that nobody is held up by it."""
    if asked.approach is not None:
        return False
    # The first question looks at the arm's geometry, which takes longer than any target.
    return "reacher" in vars(question) and is_quick(question.reacher, asked.freedom)


def single_reach(
    question: Question, asked: ReachAsked, *, nested: bool, at_once: bool = False
) -> ReachAnswer:
    """Return whether the tool gets to one target, with the best joint values.

    Parameters
    ----------
    nested : whether the item of a nested answer is wanted: a flat one has no place for its words.
    at_once : give up rather than hold up others for milliseconds.

    Raises
    ------
    ServiceError, KinematicsError : the target cannot be used, or the arm cannot be asked so.
    TakesLonger : it was given up.
    """
    reacher, tool_in_frame = question.reacher, _tool_in_frame(question, asked)
    near = None if asked.near is None else _near(question, asked.near.values)
    plain = _plainly(question, asked, tool_in_frame, near, nested=nested)
    if plain is not None:
        return plain
    targets = Targets(
        in_frame(question.frame_in_base, tool_in_frame),
        _FREEDOM[asked.freedom],
        _cone(question, asked),
        _USUAL_POSITION,
        _USUAL_ANGLE,
    )
    method = method_of(reacher, targets)
    checks = reacher.check(targets, near=near, at_once=at_once)
    approached = None
    if asked.approach is not None:
        approaches = {0: approach_asked(question, asked.approach)}
        approached = approached_checks(question, checks, targets, approaches, every_way=False)
        checks = checks if approached is None else approached.checks
    told, verdict = told_best(question, checks, approached), int(checks.verdict[0])
    if nested and at_once and CODES[verdict]:
        raise TakesLonger  # to find the nearest pose there is
    item = told.item(0, form=question.form, repaired=question.repaired) if nested else None
    if CODES[verdict]:
        code, codes, joints, margin, state = CODES[verdict], _NO_CODES, None, 0.0, NO_STATE
    else:
        codes = told.codes(0).union([finding.code for finding in question.repaired])
        code, joints, state = max(codes, default=0), told.joints[0], told.state(0)
        margin = float(checks.margin[0])
    return ReachAnswer(
        head={**question.head, "method": method} if nested else question.head,
        item=None if item is None else {"name": None, **item},
        code=code,
        verdict=VERDICTS[verdict],
        found=told.found(0),
        joints=joints,
        joint_count=question.arm.joint_count,
        margin=margin,
        state=state,
        codes=codes,
    )


def _plainly(
    question: Question,
    asked: ReachAsked,
    tool_in_frame: FloatArray,
    near: FloatArray | None,
    *,
    nested: bool,
) -> ReachAnswer | None:
    """Return the answer where nothing is to be said but the best posture, else None."""
    reacher = question.reacher
    if asked.freedom != NONE or asked.approach is not None or reacher.one_target is None:
        return None
    best = reacher.one_target.best(question.frame_in_base, tool_in_frame, near, named=nested)
    return best and plain_answer(question, best, method_of(reacher, _POSE), nested=nested)


def _tool_in_frame(question: Question, asked: ReachAsked) -> FloatArray:
    """Return the target as it was given, (1, 4, 4)."""
    units, form = question.units, question.form
    angles = np.array([asked.angles or _NO_TURN])
    tool_in_frame = poses_as_given(
        form, orientation_in(units, form, angles), units.length_in(np.array([asked.position]))
    )
    if tool_in_frame is None:
        name, value = _largest(asked)
        raise OutOfRange(
            f"{name} is beyond 1e9 m or rad", where=(name,), value=value, way_out="check the units"
        )
    return tool_in_frame


def _cone(question: Question, asked: ReachAsked) -> FloatArray:
    if asked.freedom != CONE:
        return _NO_CONE
    try:
        return np.array([cone_in(asked.cone, question.units, ("cone",))])
    except ServiceError as error:
        error.location = "query"
        raise


def _largest(asked: ReachAsked) -> tuple[str, float]:
    """Return which of the numbers of a target is the largest, and the number."""
    given = dict(zip((*POSITION, *ANGLES), (*asked.position, *(asked.angles or ())), strict=False))
    name = max(given, key=lambda name: abs(given[name]))
    return name, given[name]


def _near(question: Question, values: list[float]) -> FloatArray:
    """Return joint values to be near to, in SI; what is wrong with one leads to ``near``."""
    try:
        return np.array(read_joint_row(question.arm, question.units, values))
    except ServiceError as error:
        error.errors = tuple(
            replace(detail, where=("near",), location="query") for detail in error.errors
        )
        raise
