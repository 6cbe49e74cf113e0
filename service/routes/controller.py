"""What a controller asks with one GET: the pose or the Jacobian of a stored arm.

Left out: what the query means (wire/controller.py) and what the answer says (operations).
"""

from collections.abc import Callable

from fastapi import APIRouter
from starlette.concurrency import run_in_threadpool
from starlette.requests import Request
from starlette.responses import Response

from service.operations.arms import Arms
from service.operations.single import joint_count, single_jacobian, single_pose
from service.problems import Problem
from service.routes.direct import PostureRoute
from service.routes.in_format import MEDIA_TYPES, Asked, answered_in_format, refused_pose
from service.web.document import documented
from service.wire import one_answer
from service.wire.arms import ReadArm
from service.wire.controller import (
    JACOBIAN_PARAMETERS,
    POSE_PARAMETERS,
    joints_asked,
    single_question,
    wanted_row,
)
from service.wire.controller_answers import FlatJacobian, FlatPose, JacobianReply, PoseReply
from service.wire.one_answer import Content
from service.wire.question_parameters import (
    JACOBIAN_QUESTION_PARAMETERS,
    NEAREST,
    OUTLINE,
    QUESTION_PARAMETERS,
)
from service.wire.single import JointsAsked, SingleAnswer, SingleQuestion

router = APIRouter(route_class=PostureRoute)
Ask = Callable[[Arms[ReadArm], SingleQuestion, JointsAsked], SingleAnswer]


@router.api_route(
    "/v1/arms/{arm}/pose",
    methods=["GET", "HEAD"],
    openapi_extra=documented(
        "Tool pose of a stored arm",
        "One posture by query string. `format=flat` answers one level in fixed order, `csv` the "
        "same with a head line, `txt` one line with each field at its place; there the "
        "orientation is one of the 24 angle triples. Places, codes and a client: "
        "/docs/controllers.",
        answer=PoseReply,
        answer_media=MEDIA_TYPES,
        flat_refusal=FlatPose,
        parameters=(*QUESTION_PARAMETERS, OUTLINE, NEAREST),
        statuses=(404, 409, 503),
        controller=True,
        examples="pose",
    ),
)
async def pose(request: Request) -> Response:
    """Answer the tool pose of one posture."""
    return await answered_in_format(request, POSE_PARAMETERS, _pose, refused_pose)


@router.api_route(
    "/v1/arms/{arm}/jacobian",
    methods=["GET", "HEAD"],
    openapi_extra=documented(
        "Jacobian of a stored arm",
        "One posture by query string; `frame` may also be `flange` or `tool`. `format=flat` "
        "answers j11 ... j6n by rows vx vy vz wx wy wz, `csv` the same with a head line, and "
        "`txt` with `row` one of these rows.",
        answer=JacobianReply,
        answer_media=MEDIA_TYPES,
        flat_refusal=FlatJacobian,
        parameters=JACOBIAN_QUESTION_PARAMETERS,
        statuses=(404, 409, 503),
        controller=True,
        examples="jacobian",
    ),
)
async def jacobian(request: Request) -> Response:
    """Answer the Jacobian of one posture."""
    return await answered_in_format(request, JACOBIAN_PARAMETERS, _jacobian, _refused_jacobian)


async def _pose(asked: Asked) -> Content:
    question = single_question(asked.request.path_params["arm"], asked.said, asked.wanted)
    answer = await _one_posture(asked, question, single_pose)
    if asked.wanted == "json":
        return one_answer.nested(answer, "poses", asked.stamp, question.scale)
    return one_answer.pose(answer, question, asked.wanted, asked.stamp)


async def _jacobian(asked: Asked) -> Content:
    row = wanted_row(asked.said, asked.wanted)
    question = single_question(asked.request.path_params["arm"], asked.said, asked.wanted)
    answer = await _one_posture(asked, question, single_jacobian)
    if asked.wanted == "json":
        return one_answer.nested(answer, "jacobians", asked.stamp, question.scale)
    return one_answer.jacobian(answer, question, asked.wanted, asked.stamp, row)


async def _one_posture(asked: Asked, question: SingleQuestion, ask: Ask) -> SingleAnswer:
    joints = joints_asked(asked.said, question.scale)
    arms: Arms[ReadArm] = asked.request.app.state.arms
    # One posture takes some tenths of a millisecond, handing it to a thread as long again.
    if arms.answers_at_once:
        return ask(arms, question, joints)
    return await run_in_threadpool(ask, arms, question, joints)


async def _refused_jacobian(asked: Asked, problem: Problem) -> Content:
    arms, name = asked.request.app.state.arms, asked.request.path_params["arm"]
    joints = await run_in_threadpool(joint_count, arms, name)
    return one_answer.refused_jacobian(problem, asked.wanted, asked.stamp, joints)
