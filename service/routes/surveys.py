"""Surveys over HTTP: taken in, listed, looked at, cancelled, removed; progress and result.

Left out: what they do (service/surveys).
"""

from functools import partial

from fastapi import APIRouter
from starlette.concurrency import run_in_threadpool
from starlette.requests import Request
from starlette.responses import Response

from service.bulk.answering import Bulk
from service.bulk.streaming import StreamedAnswer
from service.bulk.survey_progress import watch
from service.bulk.survey_targets import survey_of_request
from service.event_streams import EventStream
from service.problems import Problem
from service.routes.direct import DirectRoute, ReachRoute
from service.sorted_ids import ID
from service.storage.ports import Survey
from service.surveys.desk import Surveys
from service.surveys.registry import SURVEY_KINDS
from service.web import survey_report as survey_report_page
from service.web.document import documented, parameter
from service.web.schemas import BYTES
from service.wire import csv_rows, npy, paging
from service.wire.answers import json_answer, json_problem
from service.wire.formats import JSON, SVG, answer_format
from service.wire.query import known_parameters
from service.wire.question_parameters import one_of
from service.wire.surveys import (
    CSV_PARAMETERS,
    SurveyAnswer,
    SurveyDetails,
    SurveyListAnswer,
    SurveyRequest,
    SurveyResult,
    survey_answer,
    survey_list_answer,
)

router = APIRouter(route_class=DirectRoute)
# What is asked is looked at with the kernels that will work on it.
taking_in = APIRouter(route_class=ReachRoute)

_NO_STORE = {"cache-control": "no-store"}
_READ = ["GET", "HEAD"]
_BESIDE_TABLE = tuple(
    parameter(name, f"{says} Beside a table.") for name, says in CSV_PARAMETERS.items()
)
_FORMATS = one_of(*{name: True for kind in SURVEY_KINDS.values() for name in kind.formats})
_ONE = (
    parameter(
        "survey",
        "Id of the survey.",
        {"type": "string", "pattern": "^[0-9a-f]{20}$"},
        where="path",
    ),
)
_SENDERS_KEY = parameter("Idempotency-Key", "What the sender calls this request.", where="header")
_PAGES = (
    parameter("page_size", "Entries of a page.", {"type": "integer", "minimum": 1, "maximum": 200}),
    parameter("page_token", "Asks for the page that follows another."),
)


@taking_in.post(
    "/v1/surveys",
    openapi_extra=documented(
        "Take in long work",
        "A question of another address, with more in it than one answer holds. It is checked "
        "at once and worked on one after the other, the oldest first, in processes that give way "
        "to everybody else. The answer is 202 with the survey and its `Location`. What is finished "
        "is kept: after a restart the survey goes on where it was, and its result is the same to "
        "the last bit. The arm is that of the moment, whatever becomes of it. Of more than 10 000 "
        "targets the first 10 000 are looked at before the answer; what is wrong with others is "
        "told in the result. Targets may also come as NPY, rows of `x y z` or `x y z` and the "
        "quaternion `w x y z`, or as CSV (the part locations of `/v1/reach/checks`), with all else "
        "in the query. The same `Idempotency-Key` with the "
        "same body gives the survey that was taken in first.",
        request=SurveyRequest,
        answer=SurveyAnswer,
        parameters=(_SENDERS_KEY, *_BESIDE_TABLE),
        other_requests={npy.MEDIA_TYPE: BYTES, csv_rows.MEDIA_TYPE: {"type": "string"}},
        statuses=(409, 503),
        success=202,
        headers={"Location": "Address of the survey."},
        examples="surveys-create",
    ),
)
async def create_survey(request: Request) -> Response:
    """Take a survey in."""
    survey = await survey_of_request(request)
    if isinstance(survey, Problem):
        return json_problem(survey, request.state.request_id)
    headers = _NO_STORE | {"location": f"/v1/surveys/{survey.id}"}
    return json_answer(_answer(_surveys(request), survey), 202, headers)


@router.api_route(
    "/v1/surveys",
    methods=_READ,
    openapi_extra=documented(
        "List surveys",
        "The newest first, a page at a time.",
        answer=SurveyListAnswer,
        parameters=_PAGES,
        examples="surveys",
    ),
)
async def surveys(request: Request) -> Response:
    """Answer a page of surveys."""
    parameters = known_parameters(request, paging.PAGE_PARAMETERS)
    size, before = paging.page_size(parameters), paging.after_token(parameters, ID)
    taken_in = _surveys(request)
    found, more = await run_in_threadpool(taken_in.page, before, size)
    token = paging.token_of(found[-1].id) if more else None
    headers = _NO_STORE | paging.next_link(request, parameters, token)
    listed = [_answer(taken_in, survey) for survey in found]
    return json_answer(survey_list_answer(listed, token), headers=headers)


@router.api_route(
    "/v1/surveys/{survey}",
    methods=_READ,
    openapi_extra=documented(
        "A survey",
        "How far it is, and what was asked, without targets.",
        answer=SurveyDetails,
        parameters=_ONE,
        statuses=(404,),
    ),
)
async def survey(request: Request) -> Response:
    """Answer one survey."""
    known_parameters(request, ())
    taken_in = _surveys(request)
    found = await run_in_threadpool(taken_in.get, request.path_params["survey"])
    return json_answer({**_answer(taken_in, found), "request": found.request}, headers=_NO_STORE)


@router.delete(
    "/v1/surveys/{survey}",
    openapi_extra=documented(
        "Remove a survey",
        "With its result. One that is queued or running is to be cancelled first (409).",
        parameters=_ONE,
        statuses=(404, 409),
        success=204,
    ),
)
async def delete_survey(request: Request) -> Response:
    """Remove a survey."""
    known_parameters(request, ())
    await run_in_threadpool(_surveys(request).remove, request.path_params["survey"])
    return Response(status_code=204)


@router.post(
    "/v1/surveys/{survey}/cancel",
    openapi_extra=documented(
        "Cancel a survey",
        "Work on it ends within a second. One that is over already stays as it is, so that asking "
        "twice does no harm.",
        answer=SurveyAnswer,
        parameters=_ONE,
        statuses=(404,),
    ),
)
async def cancel_survey(request: Request) -> Response:
    """Cancel a survey."""
    known_parameters(request, ())
    taken_in = _surveys(request)
    found = await run_in_threadpool(taken_in.cancel, request.path_params["survey"])
    return json_answer(_answer(taken_in, found), headers=_NO_STORE)


@router.get(
    "/v1/surveys/{survey}/progress",
    openapi_extra=documented(
        "Watch a survey",
        "Server-sent events named `progress`, one whenever something has changed: `state`, "
        "`done`, `total`, `remaining_s`, `reason`. The stream ends with the survey.",
        answer={"type": "string"},
        parameters=_ONE,
        statuses=(404, 503),
        answer_media=("text/event-stream",),
    ),
)
async def survey_progress(request: Request) -> Response:
    """Answer events until the survey is over."""
    known_parameters(request, ())
    taken_in, name = _surveys(request), request.path_params["survey"]
    await run_in_threadpool(taken_in.get, name)
    return EventStream(request.app.state.streams, partial(watch, taken_in, name))


@router.get(
    "/v1/surveys/{survey}/result",
    openapi_extra=documented(
        "Result of a survey",
        "Of targets as JSON, as CSV (the lines of `/v1/reach/checks`), or as NPY: a row of doubles "
        "for each line of the CSV, `code`, `verdict` (0 reachable, 1 outside travel, 2 "
        "unreachable, 3 not found, -1 refused), `solutions`, `solution`, `q1..qn`, `margin`, "
        "`position_error`, `angle_error`, and `x`, `y`, `z` as asked (in JSON `position`); its "
        "columns are in `X-Columns`. Of samples in the same formats, as `/v1/reach/samples` tells "
        "them. Of an envelope as JSON or as a drawing "
        "(`format=svg`), as `/v1/reach/envelope` tells them, to the last bit; and its boundaries "
        "as CSV, a line for each point of a curve: `within` (travel, working-travel), `view` "
        "(section, side, plan), `curve` (counted from 1 in its view, as in JSON), `boundary` "
        "(outer, inner), and two coordinates, whose unit is in the head line (`radius_or_x_mm`, "
        "`height_or_y_mm`): radius and height of a section, x and z of a side view, x and y of a "
        "plan. As NPY the same columns, a row of doubles for each line: `within` 0 travel, 1 "
        "working travel; `view` 0 section, 1 side, 2 plan; `boundary` 1 outer, 0 inner. Areas and "
        "volume with their bounds are in the JSON, on the drawing and in the report. Before the "
        "survey has succeeded: 409, with `Retry-After` where that will help.",
        answer=SurveyResult,
        parameters=(
            *_ONE,
            parameter("format", "Format of the result, if not as Accept says.", _FORMATS),
        ),
        statuses=(404, 409),
        answer_media=(JSON, csv_rows.MEDIA_TYPE, npy.MEDIA_TYPE, SVG),
        headers={"X-Columns": "Names of the columns of an NPY answer."},
        examples="survey-result",
    ),
)
async def survey_result(request: Request) -> Response:
    """Answer what a survey found."""
    parameters = known_parameters(request, {"format"})
    taken_in, name = _surveys(request), request.path_params["survey"]
    found = await run_in_threadpool(taken_in.finished, name)
    kind = SURVEY_KINDS[found.kind]
    wanted = answer_format(parameters, request.headers.get("accept", ""), "json", kind.formats)
    told = await run_in_threadpool(kind.told, found, wanted, taken_in.store)
    headers = {**_NO_STORE, **told.headers}
    tell = told.part
    if tell is None:
        return Response(told.head + told.tail, headers=headers, media_type=told.media_type)
    pieces = len(await run_in_threadpool(taken_in.store.sizes, name))

    def part(number: int, _end: int) -> bytes:
        made = tell(number, taken_in.store.made(name, number))
        return made + told.tail if number == pieces - 1 else made

    threads = _bulk(request).threads
    return StreamedAnswer(
        threads, told.head, part, pieces, 1, media_type=told.media_type, headers=headers
    )


@router.get(
    "/v1/surveys/{survey}/report",
    openapi_extra=documented(
        "Report of a survey",
        "One page of HTML for people and printers (A4, Letter), with nothing outside of it: what "
        "was asked, arm, table, revision and digests, drawings, verdicts, margins, cautions. "
        "Before the survey has succeeded: 409.",
        parameters=_ONE,
        statuses=(404, 409),
        answer_media=("text/html",),
    ),
)
async def survey_report(request: Request) -> Response:
    """Answer the page of a survey."""
    known_parameters(request, ())
    taken_in, name = _surveys(request), request.path_params["survey"]
    page = await _bulk(request).threads.run(partial(_page, taken_in, name))
    policy = {"content-security-policy": survey_report_page.POLICY}
    return Response(page, headers=_NO_STORE | policy, media_type=survey_report_page.MEDIA_TYPE)


def _page(surveys: Surveys, name: str) -> bytes:
    found = surveys.finished(name)
    report = SURVEY_KINDS[found.kind].reported(found, surveys.store)
    points = [(point.position, point.verdict) for point in report.points]
    shown = {**_answer(surveys, found), "about": found.about}
    arm = surveys.arm_of(found)
    told = (report.asked, report.tables, points, report.drawings, report.said)
    return survey_report_page.report_html(shown, arm, *told)


def _answer(surveys: Surveys, survey: Survey) -> dict[str, object]:
    return survey_answer(survey, surveys.runner.remaining_s(survey))


def _surveys(request: Request) -> Surveys:
    found: Surveys = request.app.state.surveys
    return found


def _bulk(request: Request) -> Bulk:
    found: Bulk = request.app.state.bulk
    return found


router.routes.extend(taking_in.routes)
