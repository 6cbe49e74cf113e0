"""The live pose of an arm over HTTP: one answer, also of the past or when something changes.

Left out: what comes in (joints.py), streams (live_streams.py), what it means (service/live).
"""

from fastapi import APIRouter
from starlette.requests import Request
from starlette.responses import Response

from service.live.live_arms import LiveArms
from service.operations.live import live_answer, live_arm, past_answer
from service.problems import Problem
from service.routes.direct import PostureRoute
from service.routes.in_format import MEDIA_TYPES, Asked, answered_in_format
from service.routes.joints import stored_arm
from service.routes.live_changes import NOT_STORED, Known, tag_of, wait_for_change
from service.web.document import documented, parameter
from service.wire import live_told
from service.wire.live_models import FlatLive, LiveReply
from service.wire.live_query import LIVE_SHOWN, PARAMETERS_OF_LIVE, LiveQuestion, live_question
from service.wire.one_answer import Content

router = APIRouter(route_class=PostureRoute)

KNOWN = parameter(
    "If-None-Match", "ETag of an answer that is known: 304 while nothing changed.", where="header"
)
TAG_MEANS = {"ETag": "Weak: what changed last; the age is another each time."}


@router.api_route(
    "/v1/arms/{arm}/live",
    methods=["GET", "HEAD"],
    openapi_extra=documented(
        "Live pose of an arm",
        "Where the tool is by the newest joint values that can be relied on, with `quality` "
        "(`good`, `uncertain`, `bad`), its `reason` and `age_ms`; speeds of joints and tool by the "
        "last samples. `at` asks about the last ten minutes, `wait` waits for something newer. "
        "Before any values came: 409. Formats as for a pose, with `age_ms` and `quality` before "
        "`revision`.",
        answer=LiveReply,
        answer_media=MEDIA_TYPES,
        flat_refusal=FlatLive,
        parameters=(*LIVE_SHOWN, KNOWN),
        statuses=(304, 404, 409, 503),
        controller=True,
        headers=TAG_MEANS,
        examples="live",
    ),
)
async def live(request: Request) -> Response:
    """Answer where a tool is."""
    answering = _Answering(request)
    answer = await answered_in_format(request, PARAMETERS_OF_LIVE, answering, _refused)
    if answering.change is None or answer.status_code != 200:
        return answer
    if answering.is_known:
        return Response(status_code=304, headers=NOT_STORED | tag_of(answering.change))
    answer.headers.update(tag_of(answering.change))
    return answer


class _Answering:
    """Answers one question about a live pose.

    Attributes
    ----------
    change : of what was told; None for the past. is_known : whether the asker has it already.
    """

    def __init__(self, request: Request) -> None:
        self.change: int | None = None
        self.is_known = False

    async def __call__(self, asked: Asked) -> Content:
        """Answer."""
        request, name = asked.request, asked.request.path_params["arm"]
        arms: LiveArms = request.app.state.live
        stored = await stored_arm(request.app.state.arms, name)
        question = live_question(name, asked.said, asked.wanted)
        if arms.get(name) is not None:
            arms.of(stored)
            arms.look_at(name)
        if question.at_ms is not None:
            answer = past_answer(live_arm(arms, name), question.pose, question.at_ms, arms.clock)
        else:
            known = await self._waited(request, question, name)
            answer = live_answer(live_arm(arms, name), question.pose, arms.clock)
            self.change = answer.seen.change
            # Who asked for status 200 in any case cannot do anything with a 304.
            self.is_known = known.covers(self.change) and "errors" not in asked.said
        return live_told.content(answer, question.pose, asked.wanted, asked.stamp)

    async def _waited(self, request: Request, question: LiveQuestion, name: str) -> Known:
        known = Known(request, question.after)
        if question.wait_s is not None:
            found = request.app.state.live.get(name)
            change = None if found is None else found.standing.change
            await wait_for_change(request, name, known, change, question.wait_s)
        return known


async def _refused(asked: Asked, problem: Problem) -> Content:
    return live_told.refused(problem, asked.wanted, asked.stamp)
