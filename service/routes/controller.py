"""What a controller asks with one GET: the pose or the Jacobian of a stored arm.

Left out: what the query means (wire/controller.py) and what the answer says (operations).
"""

from collections.abc import Callable
from time import time_ns

from fastapi import APIRouter
from pydantic import ValidationError
from starlette.concurrency import run_in_threadpool
from starlette.requests import Request
from starlette.responses import Response

from kinematics.errors import KinematicsError
from service.operations.arms import Arms
from service.operations.single import joint_count, single_jacobian, single_pose
from service.problems import ServiceError
from service.refusals import problem_at
from service.web.document import documented
from service.wire.answers import json_answer
from service.wire.arms import ReadArm
from service.wire.controller import (
    PARAMETERS,
    Format,
    errors_inline,
    single_question,
    wanted_format,
    wanted_tag,
)
from service.wire.controller_answers import FlatJacobian, FlatPose, JacobianReply, PoseReply
from service.wire.flat import (
    flat_jacobian,
    flat_jacobian_refusal,
    flat_pose,
    flat_pose_refusal,
)
from service.wire.query import known_parameters
from service.wire.question_parameters import QUESTION_PARAMETERS
from service.wire.single import SingleAnswer, SingleQuestion

router = APIRouter()
Ask = Callable[[Arms[ReadArm], SingleQuestion], SingleAnswer]


@router.api_route(
    "/v1/arms/{arm}/pose",
    methods=["GET", "HEAD"],
    openapi_extra=documented(
        "Tool pose of a stored arm",
        "One posture by query string. `format=flat` answers one level in fixed order; there the "
        "orientation is one of the 24 angle triples.",
        answer=PoseReply,
        flat_refusal=FlatPose,
        parameters=QUESTION_PARAMETERS,
        statuses=(404, 409, 503),
        controller=True,
        examples="pose",
    ),
)
async def pose(request: Request) -> Response:
    """Answer the tool pose of one posture."""
    return await _answered(request, single_pose, "poses")


@router.api_route(
    "/v1/arms/{arm}/jacobian",
    methods=["GET", "HEAD"],
    openapi_extra=documented(
        "Jacobian of a stored arm",
        "One posture by query string; `frame` may also be `flange` or `tool`. `format=flat` "
        "answers j11 ... j6n by rows vx vy vz wx wy wz.",
        answer=JacobianReply,
        flat_refusal=FlatJacobian,
        parameters=QUESTION_PARAMETERS,
        statuses=(404, 409, 503),
        controller=True,
        examples="jacobian",
    ),
)
async def jacobian(request: Request) -> Response:
    """Answer the Jacobian of one posture."""
    return await _answered(request, single_jacobian, "jacobians")


async def _answered(request: Request, ask: Ask, key: str) -> Response:
    # Read by hand before anything is refused, so that a refusal comes in the format asked for.
    answer_format: Format = "flat" if request.query_params.get("format") == "flat" else "json"
    inline = request.query_params.get("errors") == "inline"
    stamp = {
        "seq": next(request.app.state.sequence),
        "tag": _readable_tag(request),
        "t_ms": time_ns() // 1_000_000,
    }
    try:
        parameters = known_parameters(request, PARAMETERS)
        wanted_tag(parameters)
        errors_inline(parameters)
        wanted_format(parameters)
        asked = single_question(request.path_params["arm"], parameters, answer_format)
        arms: Arms[ReadArm] = request.app.state.arms
        # One posture takes some tenths of a millisecond, handing it to a thread as long again.
        answer = (
            ask(arms, asked) if arms.answers_at_once else await run_in_threadpool(ask, arms, asked)
        )
    except (ServiceError, KinematicsError, ValidationError) as error:
        if answer_format == "json" and not inline:
            raise
        return await _refused(request, error, answer_format, inline, key, stamp)
    if answer_format == "flat":
        content = (
            flat_pose(answer, form=asked.form, **stamp)
            if key == "poses"
            else flat_jacobian(answer, **stamp)
        )
    else:
        head = {"ok": True, "code": answer.item["code"], **stamp}
        content = head | answer.head | {key: [answer.item]}
    return json_answer(content, headers={"Cache-Control": "no-store"})


def _readable_tag(request: Request) -> int:
    try:
        return wanted_tag(request.query_params)
    except ServiceError:
        return 0


async def _refused(
    request: Request,
    error: Exception,
    answer_format: Format,
    inline: bool,
    key: str,
    stamp: dict[str, int],
) -> Response:
    problem = problem_at(request, error)
    content: dict[str, object]
    if answer_format == "flat":
        if key == "poses":
            content = flat_pose_refusal(problem.number, **stamp)
        else:
            arms, name = request.app.state.arms, request.path_params["arm"]
            joints = await run_in_threadpool(joint_count, arms, name)
            content = flat_jacobian_refusal(problem.number, joints, **stamp)
    else:
        document = problem.document(request.state.request_id)
        content = document | {"ok": False, "code": problem.number, **stamp}
    headers = {"Cache-Control": "no-store", **problem.headers}
    return json_answer(content, 200 if inline else problem.status, headers)
