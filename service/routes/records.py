"""Records over HTTP: kept, listed, exported, looked at.

Left out: what is in a record (service/records), and its live value.
"""

from collections.abc import Mapping, Sequence
from functools import partial
from typing import Any

from fastapi import APIRouter
from starlette.concurrency import run_in_threadpool
from starlette.requests import Request
from starlette.responses import Response

from service.bulk.paged import PagedAnswer, Part
from service.details import Location
from service.errors import NoLivePose
from service.live.live_arms import LiveArms
from service.operations.meant_arms import check_was_stored
from service.records.desk import Live, Records
from service.records.measured import measured_live
from service.records.ports import Filter, Record, Widths
from service.routes.direct import DirectRoute, PostureRoute
from service.sorted_ids import ID
from service.web.document import documented, parameter
from service.wire import paging
from service.wire.answers import json_answer
from service.wire.body import parse_json, read_bytes
from service.wire.formats import JSON, Format, answer_format
from service.wire.origins import refuse_foreign
from service.wire.query import known_parameters
from service.wire.question_parameters import one_of
from service.wire.record_lines import MEDIA_TYPE, lines_head, lines_of
from service.wire.records import (
    FILTER_PARAMETERS,
    RecordAnswer,
    RecordListAnswer,
    RecordRequest,
    filter_of,
    record_list_answer,
)
from service.wire.senders_key import senders_key

router = APIRouter(route_class=DirectRoute)
keeping = APIRouter(route_class=PostureRoute)

_READ = ["GET", "HEAD"]
_FORMATS: tuple[Format, ...] = ("json", "csv")
_NO_CACHE = {"cache-control": "no-cache"}
_FOR_EVER = {"cache-control": "max-age=31536000, immutable"}
_MOST_BYTES = 128 * 1024
"""All fields at their longest take 20 kB; escaped, six times that."""

_PAGE_OF_LINES = 500
_SENDERS_KEY = parameter(
    "Idempotency-Key",
    "What the sender calls this request: once more with the same body it makes no second record.",
    where="header",
)
_RECORD = parameter(
    "record", "Id of the record.", {"type": "string", "pattern": "^[0-9a-f]{20}$"}, where="path"
)
_SIZE = {"type": "integer", "minimum": 1, "maximum": paging.LARGEST_SIZE}
_LISTING = (
    parameter("page_size", "How many to list at most.", _SIZE),
    parameter("page_token", "The next_page_token of the page before."),
    parameter("format", "csv: all of them as a table, the oldest first.", one_of(*_FORMATS)),
)
_FILTERS = tuple(parameter(name, meaning) for name, meaning in FILTER_PARAMETERS.items())
_LINKED = {"Link": "The next page, if there is one."}
_LIST = (
    "The newest first, a page at a time. With `format=csv` all that fit the filters, the oldest "
    "first, one line each, sent as they are read; a text that a spreadsheet would take for a "
    "formula (it begins with = + - @) has an apostrophe before it there, and in JSON has none."
)


@keeping.post(
    "/v1/arms/{arm}/records",
    openapi_extra=documented(
        "Keep a pose",
        "For the plant's books: the pose with tool, frame, joint values, quality, revision, "
        "digests and three times, beside a part's serial number and fields of the sender's own. "
        "Without `joints` it is the live value of now; its quality says whether to trust it. Once "
        "this is answered the record survives the process and the power; it is never changed. "
        "The same `Idempotency-Key` with the same body gives the record that was made first.",
        request=RecordRequest,
        answer=RecordAnswer,
        parameters=(_SENDERS_KEY,),
        statuses=(404, 409, 503),
        success=201,
        headers={"Location": "Address of the record."},
        request_required=False,
        examples="records-create",
    ),
)
async def create_record(request: Request) -> Response:
    """Keep a pose."""
    known_parameters(request, ())
    key = senders_key(request)
    raw = await read_bytes(request, JSON, most=_MOST_BYTES)
    if not raw:
        # Without a body nothing says that this is no page of somebody else's.
        refuse_foreign(request.headers)
    body = parse_json(raw) if raw else {}
    request.state.json_body = body
    asked = RecordRequest.model_validate(body)
    arm = request.path_params["arm"]
    live = _live(request, arm)
    record = await run_in_threadpool(_records(request).create, arm, asked, live, key, raw)
    headers = {"cache-control": "no-store", "location": f"/v1/arms/{arm}/records/{record.id}"}
    return json_answer(record.document, 201, headers)


@router.api_route(
    "/v1/records",
    methods=_READ,
    openapi_extra=documented(
        "List records",
        _LIST,
        answer=RecordListAnswer,
        parameters=(*_FILTERS, *_LISTING),
        statuses=(503,),
        answer_media=(JSON, "text/csv"),
        headers=_LINKED,
        examples="records",
    ),
)
async def records(request: Request) -> Response:
    """Answer records of all arms."""
    return await _listed(request, None)


@router.api_route(
    "/v1/arms/{arm}/records",
    methods=_READ,
    openapi_extra=documented(
        "List records of an arm",
        f"{_LIST} Also of an arm that has been removed.",
        answer=RecordListAnswer,
        parameters=(*_FILTERS[1:], *_LISTING),
        statuses=(404, 503),
        answer_media=(JSON, "text/csv"),
        headers=_LINKED,
        examples="arm-records",
    ),
)
async def arm_records(request: Request) -> Response:
    """Answer records of one arm."""
    return await _listed(request, request.path_params["arm"])


@router.api_route(
    "/v1/records/{record}",
    methods=_READ,
    openapi_extra=documented(
        "A record", "As it was kept.", answer=RecordAnswer, parameters=(_RECORD,), statuses=(404,)
    ),
)
async def record(request: Request) -> Response:
    """Answer one record."""
    return await _one(request, None)


@router.api_route(
    "/v1/arms/{arm}/records/{record}",
    methods=_READ,
    openapi_extra=documented(
        "A record of an arm",
        "As it was kept.",
        answer=RecordAnswer,
        parameters=(_RECORD,),
        statuses=(404,),
    ),
)
async def arm_record(request: Request) -> Response:
    """Answer one record of an arm."""
    return await _one(request, request.path_params["arm"])


async def _one(request: Request, arm: str | None) -> Response:
    known_parameters(request, ())
    if arm is not None:
        await run_in_threadpool(check_was_stored, request.app.state.arms, arm, "path")
    found = await run_in_threadpool(_records(request).get, request.path_params["record"], arm)
    return json_answer(found.document, headers=_FOR_EVER)


async def _listed(request: Request, arm: str | None) -> Response:
    filters = FILTER_PARAMETERS.keys() - ({"arm"} if arm is not None else set())
    parameters = known_parameters(request, {*filters, *paging.PAGE_PARAMETERS, "format"})
    which = filter_of(parameters, arm)
    if which.arm is not None:
        said: Location = "query" if arm is None else "path"
        await run_in_threadpool(check_was_stored, request.app.state.arms, which.arm, said)
    if answer_format(parameters, request.headers.get("accept", ""), "json", _FORMATS) == "csv":
        return await _exported(request, which)
    size, before = paging.page_size(parameters), paging.after_token(parameters, ID)
    found, more = await run_in_threadpool(_records(request).page, which, before, size)
    token = paging.token_of(found[-1].id) if more else None
    headers = _NO_CACHE | paging.next_link(request, parameters, token)
    return json_answer(record_list_answer(_documents(found), token), headers=headers)


async def _exported(request: Request, which: Filter) -> Response:
    kept = _records(request)
    newest, widths = await run_in_threadpool(_bounds, kept, which)
    page = partial(_lines, kept, which, newest, widths)
    # Whoever asks for the head alone gets no lines read for it.
    first = Part(b"", None) if request.method == "HEAD" else await run_in_threadpool(page, "")
    whole = Part(lines_head(widths) + first.content, first.last)
    name = {"content-disposition": 'attachment; filename="records.csv"'}
    return PagedAnswer(whole, page, media_type=MEDIA_TYPE, headers=_NO_CACHE | name)


def _bounds(kept: Records, which: Filter) -> tuple[str, Widths]:
    """Return the newest record's id and how many columns all up to it take.

    One that is kept while lines are read may have more joints than there are columns.
    """
    newest, _ = kept.page(which, "", 1)
    return newest[0].id if newest else "", kept.widths(which)


def _lines(kept: Records, which: Filter, newest: str, widths: Widths, after: str) -> Part:
    read = kept.oldest(which, after, _PAGE_OF_LINES)
    found = [record for record in read if record.id <= newest]
    last = found[-1].id if len(found) == _PAGE_OF_LINES else None
    return Part(lines_of(_documents(found), widths), last)


def _live(request: Request, arm: str) -> Live:
    arms: LiveArms = request.app.state.live
    arms.look_at(arm)
    try:
        return measured_live(arms, arm)
    except NoLivePose as error:
        return error


def _documents(records: Sequence[Record]) -> list[Mapping[str, Any]]:
    return [record.document for record in records]


def _records(request: Request) -> Records:
    found: Records = request.app.state.records
    return found


router.routes.extend(keeping.routes)
