"""From a request for a survey to the survey: which body it has, and who reads it.

Short bodies are read in a thread; what is long, and would hold the interpreter for longer than
others should wait, by the worker process. Left out: the address (routes/surveys.py).
"""

from functools import partial
from typing import Any

from starlette.requests import Request

from service.bulk.answering import LONG_BYTES, SHORT_BYTES, Bulk
from service.bulk.process import ReadThere
from service.bulk.target_rows import REQUEST
from service.problems import Problem
from service.storage.ports import Survey
from service.surveys.desk import Surveys
from service.surveys.kinds import SentTargets
from service.surveys.reach_checks import ReachChecks
from service.surveys.targets_sent import MOST_TARGETS, Rows, TableOfDoubles
from service.wire import csv_rows, npy
from service.wire.body import media_type_of, parse_json, read_bytes
from service.wire.formats import JSON
from service.wire.npy import read_npy
from service.wire.query import known_parameters
from service.wire.reach_csv_rows import csv_rows as rows_of_csv
from service.wire.reach_gathered import FIELD
from service.wire.senders_key import senders_key
from service.wire.surveys import (
    CSV_PARAMETERS,
    TABLE_PARAMETERS,
    SurveyRequest,
    angles_of_csv,
    request_beside_table,
)


async def survey_of_request(request: Request) -> Survey | Problem:
    """Return the survey that a request asks for, or why its body cannot be read.

    Raises
    ------
    ServiceError, KinematicsError, pydantic.ValidationError : it is refused.
    """
    known = _PARAMETERS.get(media_type_of(request), ())
    parameters = known_parameters(request, known)
    key = senders_key(request)
    raw = await read_bytes(request, JSON, npy.MEDIA_TYPE, csv_rows.MEDIA_TYPE)
    bulk: Bulk = request.app.state.bulk
    surveys: Surveys = request.app.state.surveys
    beside = request_beside_table(parameters) if known else None
    # Of a table the query says what a body would: the same again is the same in both.
    sent_bytes = raw + request.url.query.encode() if known else raw

    async def created(asked: SurveyRequest, targets: SentTargets | None) -> Survey:
        create = partial(surveys.create, asked, key, sent_bytes, targets)
        return (await bulk.threads.run(create))[0]

    if media_type_of(request) == npy.MEDIA_TYPE:
        assert beside is not None
        return await created(beside, TableOfDoubles(read_npy(raw)))
    form = None if beside is None else angles_of_csv(parameters)
    if len(raw) <= LONG_BYTES:
        if beside is not None and form is not None:
            read = partial(rows_of_csv, raw, form, MOST_TARGETS)
            return await created(beside, Rows(await bulk.threads.run(read)))
        body = await _body(bulk, raw)
        request.state.json_body = body
        return await created(SurveyRequest.model_validate(body), None)

    async def go_on(read: ReadThere) -> Survey:
        if beside is not None:
            return await created(beside, read)
        if read.count:
            # Those that are looked at, so that what is wrong with them is told as it came.
            read.document[REQUEST][FIELD] = await bulk.threads.run(read.looked_at)
        request.state.json_body = read.document
        asked = SurveyRequest.model_validate(read.document)
        takes_some = asked.kind == ReachChecks.name
        return await created(asked, read if read.count and takes_some else None)

    return await bulk.worker.targets(raw, form, go_on)


_PARAMETERS: dict[str, Any] = {
    npy.MEDIA_TYPE: TABLE_PARAMETERS,
    csv_rows.MEDIA_TYPE: CSV_PARAMETERS,
}


async def _body(bulk: Bulk, raw: bytes) -> object:
    if len(raw) <= SHORT_BYTES:
        return parse_json(raw)
    return await bulk.threads.run(partial(parse_json, raw))
