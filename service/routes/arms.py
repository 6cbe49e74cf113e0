"""Stored arms over HTTP: list, create, get, replace, remove, and every revision there was.

Left out: what an arm means, and how revisions are kept.
"""

import re
from collections.abc import Mapping

from fastapi import APIRouter
from starlette.concurrency import run_in_threadpool
from starlette.requests import Request
from starlette.responses import Response

from service.errors import PreconditionRequired, UnknownRevision, UnusableValue
from service.operations.arms import NAME, Arms, StoredArm, version_of
from service.routes.direct import DirectRoute
from service.storage.ports import Head
from service.web.document import documented, parameter
from service.wire import paging
from service.wire.answers import json_answer
from service.wire.arms import ReadArm
from service.wire.body import read_json
from service.wire.models import Arm
from service.wire.preconditions import Tags, entity_tag, if_match, if_none_match
from service.wire.query import known_parameters
from service.wire.stored_arms import (
    ArmListAnswer,
    RevisionListAnswer,
    StoredArmAnswer,
    arm_list_answer,
    revision_list_answer,
    stored_arm_answer,
)

router = APIRouter(route_class=DirectRoute)

LONGEST_SAID = 200
_NO_CACHE = {"cache-control": "no-cache"}
_FOR_EVER = {"cache-control": "public, max-age=31536000, immutable"}
_NUMBER = re.compile(r"[1-9][0-9]{0,9}", re.ASCII)

_SIZE = {
    "type": "integer",
    "minimum": 1,
    "maximum": paging.LARGEST_SIZE,
    "default": paging.DEFAULT_SIZE,
}
_PAGES = (
    parameter("page_size", "How many to list at most.", _SIZE),
    parameter("page_token", "The next_page_token of the page before."),
)
_SAID = tuple(
    parameter(name, meaning, {"type": "string", "maxLength": LONGEST_SAID})
    for name, meaning in (("author", "Who does this."), ("reason", "Why; kept with the revision."))
)
_IF_NONE_MATCH = parameter("If-None-Match", "ETags the caller has; 304.", where="header")
_IF_MATCH = parameter("If-Match", "The ETag of the revision this is for, or *.", where="header")
_IF_ABSENT = parameter("If-None-Match", "* stores only a name not in use.", where="header")
_NUMBER_PARAMETER = parameter(
    "n", "Number of the revision.", {"type": "integer", "minimum": 1}, where="path"
)
_TAGGED = {"ETag": "Strong; revision and digest."}
_LINKED = {"Link": "The next page, if there is one."}


@router.api_route(
    "/v1/arms",
    methods=["GET", "HEAD"],
    name="arms",
    openapi_extra=documented(
        "List stored arms",
        "Stored arms by name, a page at a time.",
        examples="arms",
        answer=ArmListAnswer,
        parameters=_PAGES,
        statuses=(503,),
        headers=_LINKED,
    ),
)
async def list_arms(request: Request) -> Response:
    """Answer a page of stored arms."""
    parameters = known_parameters(request, paging.PAGE_PARAMETERS)
    size, after = paging.page_size(parameters), paging.after_token(parameters, NAME)
    page = await run_in_threadpool(_arms(request).page, after, size)
    token = paging.token_of(page.records[-1].name) if page.more else None
    headers = _NO_CACHE | paging.next_link(request, parameters, token)
    return json_answer(arm_list_answer(page.records, token), headers=headers)


@router.post(
    "/v1/arms",
    name="arms",
    openapi_extra=documented(
        "Store a new arm",
        "Stores the arm under its name as the first revision, or the next after a removal.",
        request=Arm,
        examples="arms-create",
        answer=StoredArmAnswer,
        parameters=_SAID,
        statuses=(409, 503),
        success=201,
        headers={"Location": "Where the arm is now.", **_TAGGED},
    ),
)
async def create_arm(request: Request) -> Response:
    """Store a new arm."""
    author, reason = _said(known_parameters(request, _WHO_AND_WHY))
    document = await read_json(request)
    stored = await run_in_threadpool(_arms(request).create, document, author=author, reason=reason)
    return _created(stored)


@router.api_route(
    "/v1/arms/{arm}",
    methods=["GET", "HEAD"],
    name="arm",
    openapi_extra=documented(
        "Get an arm",
        "The newest revision. With If-None-Match an unchanged one is not sent again.",
        examples="arm",
        answer=StoredArmAnswer,
        parameters=(_IF_NONE_MATCH,),
        statuses=(304, 404, 422, 503),
        headers=_TAGGED,
    ),
)
async def get_arm(request: Request) -> Response:
    """Answer the newest revision of an arm."""
    known_parameters(request, ())
    stored = await run_in_threadpool(_arms(request).get, request.path_params["arm"])
    return _tagged(request, stored, _NO_CACHE)


@router.put(
    "/v1/arms/{arm}",
    name="arm",
    openapi_extra=documented(
        "Store the next revision of an arm",
        "With If-Match the arm must be as the caller knows it; with If-None-Match: * it must not "
        "be there yet (then the answer is 201). One of the two is required.",
        request=Arm,
        examples="arm-replace",
        answer=StoredArmAnswer,
        parameters=(*_SAID, _IF_MATCH, _IF_ABSENT),
        statuses=(412, 428, 503),
        headers=_TAGGED,
        may_create=True,
    ),
)
async def put_arm(request: Request) -> Response:
    """Store the next revision of an arm."""
    author, reason = _said(known_parameters(request, _WHO_AND_WHY))
    # Before the body: whoever left it out is told so, whatever the body is.
    expected = _expected(request)
    document = await read_json(request)
    stored = await run_in_threadpool(
        _arms(request).replace,
        request.path_params["arm"],
        document,
        expected,
        author=author,
        reason=reason,
    )
    if expected is Head.ABSENT:
        return _created(stored)
    return json_answer(stored_arm_answer(stored.record, stored.read), headers=_tag(stored))


@router.delete(
    "/v1/arms/{arm}",
    name="arm",
    openapi_extra=documented(
        "Remove an arm",
        "The name is free again and its revisions stay; their numbers are not used again.",
        parameters=(*_SAID, _IF_MATCH),
        statuses=(404, 412, 503),
        success=204,
    ),
)
async def delete_arm(request: Request) -> Response:
    """Remove an arm from the list; its revisions stay."""
    author, reason = _said(known_parameters(request, _WHO_AND_WHY))
    tags = if_match(request)
    await run_in_threadpool(
        _arms(request).remove,
        request.path_params["arm"],
        Head.ANY if tags is None else _head(tags),
        author=author,
        reason=reason,
    )
    return Response(status_code=204)


@router.api_route(
    "/v1/arms/{arm}/revisions",
    methods=["GET", "HEAD"],
    name="arm-revisions",
    openapi_extra=documented(
        "List the revisions of an arm",
        "Every revision of the name, oldest first, those before a removal too.",
        examples="arm-revisions",
        answer=RevisionListAnswer,
        parameters=_PAGES,
        statuses=(404, 503),
        headers=_LINKED,
    ),
)
async def list_revisions(request: Request) -> Response:
    """Answer a page of the revisions of an arm."""
    parameters = known_parameters(request, paging.PAGE_PARAMETERS)
    size, after = paging.page_size(parameters), paging.after_token(parameters, _NUMBER) or "0"
    name = request.path_params["arm"]
    page = await run_in_threadpool(_arms(request).revisions_page, name, int(after), size)
    token = paging.token_of(str(page.records[-1].revision)) if page.more else None
    headers = _NO_CACHE | paging.next_link(request, parameters, token)
    return json_answer(revision_list_answer(name, page.records, token), headers=headers)


@router.api_route(
    "/v1/arms/{arm}/revisions/{n}",
    methods=["GET", "HEAD"],
    name="arm-revision",
    openapi_extra=documented(
        "Get one revision of an arm",
        "A revision never changes, so this answer may be kept for ever.",
        examples="arm-revision",
        answer=StoredArmAnswer,
        parameters=(_NUMBER_PARAMETER, _IF_NONE_MATCH),
        statuses=(304, 404, 422, 503),
        headers=_TAGGED,
    ),
)
async def get_revision(request: Request) -> Response:
    """Answer one revision of an arm, of a removed one too."""
    known_parameters(request, ())
    name, text = request.path_params["arm"], request.path_params["n"]
    if not _NUMBER.fullmatch(text):
        raise UnknownRevision(
            f"{text!r} is no revision number", where=("n",), location="path", value=text
        )
    stored = await run_in_threadpool(_arms(request).get, name, int(text))
    return _tagged(request, stored, _FOR_EVER)


_WHO_AND_WHY = frozenset({"author", "reason"})


def _arms(request: Request) -> Arms[ReadArm]:
    arms: Arms[ReadArm] = request.app.state.arms
    return arms


def _said(parameters: Mapping[str, str]) -> tuple[str, str]:
    for name, text in parameters.items():
        if len(text) > LONGEST_SAID or not text.isprintable():
            raise UnusableValue(
                f"{name} must be at most {LONGEST_SAID} printable characters",
                where=(name,),
                location="query",
                value=text,
            )
    return parameters.get("author", ""), parameters.get("reason", "")


def _expected(request: Request) -> Head | frozenset[str]:
    tags, absent = if_match(request), if_none_match(request)
    if tags is None and absent == "*":
        return Head.ABSENT
    if tags is None:
        raise PreconditionRequired(
            "a write must say which revision it replaces",
            where=("if-match",),
            location="header",
            way_out="send If-Match with the ETag of the arm, or If-None-Match: * to create it",
        )
    if absent is None:
        return _head(tags)
    # "It is there" and "it is not there" at once: no state satisfies both.
    return frozenset()


def _head(tags: Tags) -> Head | frozenset[str]:
    return tags if isinstance(tags, frozenset) else Head.ANY


def _tag(stored: StoredArm[ReadArm]) -> dict[str, str]:
    return {"etag": entity_tag(version_of(stored.record))}


def _created(stored: StoredArm[ReadArm]) -> Response:
    headers = _tag(stored) | {"location": f"/v1/arms/{stored.record.name}"}
    return json_answer(stored_arm_answer(stored.record, stored.read), 201, headers)


def _tagged(request: Request, stored: StoredArm[ReadArm], caching: dict[str, str]) -> Response:
    headers = caching | _tag(stored)
    has = if_none_match(request)
    if has is not None and (has == "*" or version_of(stored.record) in has):
        return Response(status_code=304, headers=headers)
    return json_answer(stored_arm_answer(stored.record, stored.read), headers=headers)
