"""The last ten minutes of an arm over HTTP: joint values and the path of its tool.

Left out: which samples are kept (service/live/history.py).
"""

from fastapi import APIRouter
from starlette.requests import Request
from starlette.responses import Response

from kinematics.table import FloatArray
from service.live.live_arms import LiveArms
from service.operations.live import live_arm
from service.operations.live_history import kept_samples, track
from service.operations.questions import Question
from service.operations.single import question_about
from service.routes.direct import PostureRoute
from service.routes.joints import stored_arm
from service.web.document import documented
from service.wire import csv_text
from service.wire.answers import FreshAnswer
from service.wire.formats import JSON
from service.wire.live_history import (
    HISTORY_SHOWN,
    PARAMETERS_OF_HISTORY,
    HistoryAnswer,
    HistoryQuestion,
    columns,
    history_question,
    lines,
)
from service.wire.query import known_parameters

router = APIRouter(route_class=PostureRoute)

_SHORT = 500
"""Samples that are answered at once, in some milliseconds; more are worked on in a thread."""


@router.api_route(
    "/v1/arms/{arm}/live/history",
    methods=["GET", "HEAD"],
    openapi_extra=documented(
        "Last ten minutes of an arm",
        "The samples that could be relied on, at most fifty a second, with the pose of the tool at "
        "each as the arm is now: `positions` are the tool's path. Times are those of measuring, by "
        "our clock. In JSON a list for each column, as CSV a line for each sample "
        "(`t_ms,sequence,simulated,q1..qn,x,y,z,r1,r2,r3`).",
        answer=HistoryAnswer,
        answer_media=(JSON, csv_text.MEDIA_TYPE),
        parameters=HISTORY_SHOWN,
        statuses=(404, 409, 503),
        examples="live-history",
    ),
)
async def live_history(request: Request) -> Response:
    """Answer what is kept of an arm."""
    name = request.path_params["arm"]
    said = known_parameters(request, PARAMETERS_OF_HISTORY)
    stored = await stored_arm(request.app.state.arms, name)
    asked = history_question(name, said)
    arms: LiveArms = request.app.state.live
    question = question_about(arms.newer(stored), asked.pose)
    live = live_arm(arms, name)
    arms.of(stored)
    kept = kept_samples(live, arms.clock, asked.from_ms, asked.to_ms, asked.every_ms, asked.limit)

    def told() -> bytes:
        return _told(question, asked, kept)

    body = told() if len(kept) <= _SHORT else await request.app.state.bulk.threads.run(told)
    return FreshAnswer(body, JSON if asked.wanted == "json" else csv_text.MEDIA_TYPE)


def _told(question: Question, asked: HistoryQuestion, kept: FloatArray) -> bytes:
    found = track(question, kept)
    if asked.wanted == "csv":
        return lines(*found)
    return columns(question.head, question.form, *found)
