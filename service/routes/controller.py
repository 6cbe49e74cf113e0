"""What a controller asks with one GET: the pose or the Jacobian of a stored arm.

Left out: what the query means (wire/controller.py) and what the answer says (operations).
"""

from collections.abc import Callable, Mapping
from time import time_ns

from fastapi import APIRouter
from pydantic import ValidationError
from starlette.concurrency import run_in_threadpool
from starlette.requests import Request
from starlette.responses import Response

from kinematics.errors import KinematicsError
from service.errors import ServiceError
from service.operations.arms import Arms
from service.operations.single import joint_count, single_jacobian, single_pose
from service.problems import Problem
from service.refusals import problem_at
from service.routes.direct import PostureRoute
from service.web.document import documented
from service.wire import one_answer
from service.wire.answers import FreshAnswer
from service.wire.arms import ReadArm
from service.wire.controller import (
    FORMATS,
    JACOBIAN_PARAMETERS,
    PARAMETERS,
    Format,
    errors_inline,
    joints_asked,
    single_question,
    wanted_format,
    wanted_row,
    wanted_tag,
)
from service.wire.controller_answers import FlatJacobian, FlatPose, JacobianReply, PoseReply
from service.wire.one_answer import Stamp
from service.wire.query import known_ones, query_pairs
from service.wire.question_parameters import JACOBIAN_QUESTION_PARAMETERS, QUESTION_PARAMETERS
from service.wire.single import JointsAsked, SingleAnswer, SingleQuestion

router = APIRouter(route_class=PostureRoute)
_MEDIA = ("application/json", "text/plain", "text/csv")
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
        answer_media=_MEDIA,
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
        "answers j11 ... j6n by rows vx vy vz wx wy wz, `csv` the same with a head line, and "
        "`txt` with `row` one of these rows.",
        answer=JacobianReply,
        answer_media=_MEDIA,
        flat_refusal=FlatJacobian,
        parameters=JACOBIAN_QUESTION_PARAMETERS,
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
    pairs = query_pairs(request)
    said = dict(pairs)
    given = said.get("format")
    wanted: Format = given if given in FORMATS else "json"
    inline = said.get("errors") == "inline"
    stamp: Stamp = {
        "seq": next(request.app.state.sequence),
        "tag": _readable_tag(said),
        "t_ms": time_ns() // 1_000_000,
    }
    try:
        content = await _content(request, ask, key, pairs, wanted, stamp)
    except (ServiceError, KinematicsError, ValidationError) as error:
        if wanted == "json" and not inline:
            raise
        problem = problem_at(request, error)
        content = await _refused(request, problem, wanted, key, stamp)
        return _response(content, 200 if inline else problem.status, problem.headers)
    return FreshAnswer(*content)


async def _content(
    request: Request,
    ask: Ask,
    key: str,
    pairs: list[tuple[str, str]],
    wanted: Format,
    stamp: Stamp,
) -> one_answer.Content:
    of_poses = key == "poses"
    parameters = known_ones(pairs, PARAMETERS if of_poses else JACOBIAN_PARAMETERS)
    wanted_tag(parameters)
    errors_inline(parameters)
    wanted_format(parameters)
    row = None if of_poses else wanted_row(parameters, wanted)
    asked = single_question(request.path_params["arm"], parameters, wanted)
    joints = joints_asked(parameters, asked.scale)
    arms: Arms[ReadArm] = request.app.state.arms
    # One posture takes some tenths of a millisecond, handing it to a thread as long again.
    if arms.answers_at_once:
        answer = ask(arms, asked, joints)
    else:
        answer = await run_in_threadpool(ask, arms, asked, joints)
    if wanted == "json":
        return one_answer.nested(answer, key, stamp, asked.scale)
    if of_poses:
        return one_answer.pose(answer, asked, wanted, stamp)
    return one_answer.jacobian(answer, asked, wanted, stamp, row)


def _response(
    content: one_answer.Content, status: int, headers: Mapping[str, str] | None
) -> Response:
    kept = {"Cache-Control": "no-store", **(headers or {})}
    return Response(content.body, status, headers=kept, media_type=content.media_type)


def _readable_tag(said: Mapping[str, str]) -> int:
    try:
        return wanted_tag(said)
    except ServiceError:
        return 0


async def _refused(
    request: Request, problem: Problem, wanted: Format, key: str, stamp: Stamp
) -> one_answer.Content:
    if wanted == "json":
        return one_answer.refused_inline(problem, request.state.request_id, stamp)
    if key == "poses":
        return one_answer.refused_pose(problem, wanted, stamp)
    arms, name = request.app.state.arms, request.path_params["arm"]
    joints = await run_in_threadpool(joint_count, arms, name)
    return one_answer.refused_jacobian(problem, wanted, stamp, joints)
