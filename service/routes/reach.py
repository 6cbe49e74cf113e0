"""Can the arm get there, and how: one target by query string, many in JSON or CSV; travels.

Left out: what the answers say (operations) and who works on them (bulk).
"""

from contextlib import suppress
from functools import partial

from fastapi import APIRouter
from starlette.concurrency import run_in_threadpool
from starlette.requests import Request
from starlette.responses import Response

from kinematics.reach.targets import TakesLonger
from service.bulk.answering import Bulk
from service.bulk.reach_checks import answer_checks
from service.bulk.travels import answer_travels
from service.errors import ServiceError
from service.operations.arms import Arms
from service.operations.reach_single import answers_at_once, reach_question_asked, single_reach
from service.operations.single import joint_count
from service.problems import Problem
from service.routes.direct import ReachRoute
from service.routes.in_format import MEDIA_TYPES, Asked, answered_in_format
from service.web.document import documented
from service.web.schemas import TEXT
from service.wire import csv_rows
from service.wire.arms import ReadArm
from service.wire.formats import JSON
from service.wire.one_answer import Content
from service.wire.reach_answers import FlatReach, ReachAnswers, ReachReply
from service.wire.reach_flat import ReachAnswer, flat_reach, nested_reach, refused_reach
from service.wire.reach_query import (
    PARAMETERS,
    REACH_PARAMETERS,
    TABLE_QUERY_PARAMETERS,
    TRAVEL_PARAMETERS,
    ReachAsked,
    reach_asked,
)
from service.wire.reach_request import ReachRequest
from service.wire.travel_answers import TravelsAnswer
from service.wire.travel_request import TravelsRequest

router = APIRouter(route_class=ReachRoute)


@router.post(
    "/v1/reach/checks",
    openapi_extra=documented(
        "Can it get there, and how",
        "Every target is answered with joint values whose forward kinematics lands on it, within "
        "travel, or with the reason why not and what that rests on: a bound, a closed form that "
        "finds all solutions, or an honest search. Geometry only: no collision, cable, payload or "
        "dynamics check. One target that cannot be used does not fail the others. Solutions are "
        "ranked by `margin`, or by nearness to `near`; what can be passed through without the "
        "tool leaving the target is a family. Where only travel is in the way, all that geometry "
        "allows is listed with joint and excess. With an `approach` a posture counts that the tool "
        "can also come straight to, on one branch and within travel: the first such is the best, "
        "with what it takes on the way; where there is none, the reason says how far before the "
        "target the way breaks, and why.\n\n"
        "Part locations may also come as `text/csv`, with all else in the query: columns `x,y,z`, "
        "and if wanted `name`, `r1,r2,r3` (angles of `form`, xyz-fixed if not said; empty for a "
        "mere position), `freedom` (`none`, `spin`, `orientation`, `cone:30`) and `approach` (how "
        "far back along tool z the tool is to come straight from). The answer has "
        "the format of the body, that of `Accept`, or that of `format`, which wins; as CSV one "
        "line for each target, or with `solutions=all` one for each solution: the keys of a flat "
        "answer, then `solution` (which of them), `proof`, `branch`, `position_error`, "
        "`angle_error`, `reason`, `name`, and `x`, `y`, `z` as asked. At most 10 000 targets, and "
        "5 s of estimated work.",
        request=ReachRequest,
        answer=ReachAnswers,
        parameters=TABLE_QUERY_PARAMETERS,
        statuses=(409, 503),
        other_requests={csv_rows.MEDIA_TYPE: TEXT},
        answer_media=(JSON, csv_rows.MEDIA_TYPE),
        headers={"X-Bad-Rows": "Targets that cannot be used, in a CSV answer."},
        examples="reach-checks",
    ),
)
async def reach_checks(request: Request) -> Response:
    """Answer many targets."""
    return await answer_checks(request)


@router.post(
    "/v1/reach/travels",
    openapi_extra=documented(
        "Does the arm get along a way, and how",
        "Straight moves of the tool and moves in joint values, each on one continuous branch of "
        "postures: from `start` along `legs`, or to a `target` straight along its `approach` and "
        "away along its `retract`, which may be another direction. Of every posture at the start "
        "it is told whether it gets to the end, and if not, where the way breaks first and why: a "
        "joint at its limit, a singular posture, a branch that ends, arms with few joints off the "
        "line. Along the way: the smallest margin and singular value and where they are, whether "
        "a move in joint values keeps its branch, the largest speed of each joint for a stated "
        "`speed` of the tool point, and the speed that the joints' `top_speed` allows. `points` "
        "gives joint values at even shares of each leg. Along a straight leg the tool turns evenly "
        "about one axis. Geometry only: no collision, no dynamics. A way that breaks has `ok` "
        "false and code 201 (a joint's travel), 200 (no posture) or 202 (not decided: singular). "
        "One travel that cannot be used does not fail the others. As CSV one line for each leg of "
        "each way that is told: the keys of a flat answer, joint values where the leg ends or "
        "breaks, then numbers, `branch`, `reason`, `name`. At most 1000 travels of 100 legs, "
        "20 000 points, and 5 s of estimated work.",
        request=TravelsRequest,
        answer=TravelsAnswer,
        parameters=TRAVEL_PARAMETERS,
        statuses=(503,),
        answer_media=(JSON, csv_rows.MEDIA_TYPE),
        headers={"X-Bad-Rows": "Travels that cannot be used, in a CSV answer."},
        examples="reach-travels",
    ),
)
async def reach_travels(request: Request) -> Response:
    """Answer many travels."""
    return await answer_travels(request)


@router.api_route(
    "/v1/arms/{arm}/reach",
    methods=["GET", "HEAD"],
    openapi_extra=documented(
        "Can a stored arm get to one target",
        "One target by query string: `x,y,z`, and `r1,r2,r3` unless its orientation is free. The "
        "answer has the best solution and how many there are: `format=flat` on one level in fixed "
        "order, `csv` the same with a head line, `txt` one line with each field at its place. A "
        "target that cannot be reached is answered with status 200, `ok` 0 and code 200 "
        "(unreachable), 201 (outside travel) or 202 (not found), without numbers. With `approach` "
        "only what the tool can also come straight to counts.",
        answer=ReachReply,
        answer_media=MEDIA_TYPES,
        flat_refusal=FlatReach,
        parameters=REACH_PARAMETERS,
        statuses=(404, 409, 503),
        controller=True,
        examples="reach",
    ),
)
async def reach(request: Request) -> Response:
    """Answer one target."""
    return await answered_in_format(request, PARAMETERS, _reach, _refused)


async def _reach(asked: Asked) -> Content:
    name = asked.request.path_params["arm"]
    try:
        target = reach_asked(name, asked.said)
    except ServiceError:
        # Of an arm that is not there nothing else need be right.
        await run_in_threadpool(asked.request.app.state.arms.get, name)
        raise
    answer = await _one_target(asked.request, target, nested=asked.wanted == "json")
    scale = target.single.scale
    if asked.wanted == "json":
        return nested_reach(answer, asked.stamp, scale)
    return flat_reach(answer, asked.wanted, asked.stamp, scale)


async def _one_target(request: Request, target: ReachAsked, *, nested: bool) -> ReachAnswer:
    arms: Arms[ReadArm] = request.app.state.arms
    bulk: Bulk = request.app.state.bulk
    if not arms.answers_at_once:
        return await bulk.threads.run(
            lambda: single_reach(reach_question_asked(arms, target), target, nested=nested)
        )
    question = reach_question_asked(arms, target)
    if answers_at_once(question, target):
        with suppress(TakesLonger):
            return single_reach(question, target, nested=nested, at_once=True)
    return await bulk.threads.run(partial(single_reach, question, target, nested=nested))


async def _refused(asked: Asked, problem: Problem) -> Content:
    arms, name = asked.request.app.state.arms, asked.request.path_params["arm"]
    joints = await run_in_threadpool(joint_count, arms, name)
    return refused_reach(problem, asked.wanted, asked.stamp, joints)
