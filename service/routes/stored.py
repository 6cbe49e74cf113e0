"""Stored documents of a kind over HTTP: list, create, get, replace, remove, and every revision.

Left out: what a document means, and how revisions are kept.
"""

import re
from collections.abc import Mapping
from typing import Any

from fastapi import APIRouter
from starlette.concurrency import run_in_threadpool
from starlette.requests import Request
from starlette.responses import Response

from service.errors import PreconditionRequired, UnknownRevision, UnusableValue
from service.operations.stored import NAME, Stored, StoredDocument
from service.operations.stored_refusals import version_of
from service.routes.direct import DirectRoute
from service.routes.stored_words import LONGEST_SAID, StoredKind
from service.storage.ports import Head
from service.wire import paging
from service.wire.answers import json_answer
from service.wire.body import read_json
from service.wire.preconditions import Tags, entity_tag, if_match, if_none_match
from service.wire.query import known_parameters
from service.wire.stored import revision_list_answer

_NO_CACHE = {"cache-control": "no-cache"}
_FOR_EVER = {"cache-control": "public, max-age=31536000, immutable"}
_NUMBER = re.compile(r"[1-9][0-9]{0,9}", re.ASCII)
_WHO_AND_WHY = frozenset({"author", "reason"})


class StoredRoutes:
    """The seven routes of one kind; ``app.state`` holds its documents under its plural."""

    def __init__(self, kind: StoredKind) -> None:
        self._kind = kind
        self._name = kind.kind

    def router(self) -> APIRouter:
        """Return the routes."""
        router, kind, name = APIRouter(route_class=DirectRoute), self._kind, self._name
        every, one = f"/v1/{name}s", f"/v1/{name}s/{{{name}}}"
        reading = ["GET", "HEAD"]
        for path, methods, handler, called, said in (
            (every, reading, self.list_all, f"{name}s", kind.listing()),
            (every, ["POST"], self.create, f"{name}s", kind.creating()),
            (one, reading, self.get, name, kind.getting()),
            (one, ["PUT"], self.put, name, kind.replacing()),
            (one, ["DELETE"], self.delete, name, kind.removing()),
            (
                f"{one}/revisions",
                reading,
                self.list_revisions,
                f"{name}-revisions",
                kind.listing_revisions(),
            ),
            (
                f"{one}/revisions/{{n}}",
                reading,
                self.get_revision,
                f"{name}-revision",
                kind.getting_revision(),
            ),
        ):
            router.add_api_route(path, handler, methods=methods, name=called, openapi_extra=said)
        return router

    async def list_all(self, request: Request) -> Response:
        """Answer a page of stored documents."""
        parameters = known_parameters(request, paging.PAGE_PARAMETERS)
        size, after = paging.page_size(parameters), paging.after_token(parameters, NAME)
        page = await run_in_threadpool(self._stored(request).page, after, size)
        token = paging.token_of(page.records[-1].name) if page.more else None
        headers = _NO_CACHE | paging.next_link(request, parameters, token)
        return json_answer(self._kind.listed(page.records, token), headers=headers)

    async def create(self, request: Request) -> Response:
        """Store a new document."""
        author, reason = _said(known_parameters(request, _WHO_AND_WHY))
        document = await read_json(request)
        stored = await run_in_threadpool(
            self._stored(request).create, document, author=author, reason=reason
        )
        return self._created(stored)

    async def get(self, request: Request) -> Response:
        """Answer the newest revision."""
        known_parameters(request, ())
        stored = await run_in_threadpool(self._stored(request).get, self._asked(request))
        return self._tagged(request, stored, _NO_CACHE)

    async def put(self, request: Request) -> Response:
        """Store the next revision."""
        author, reason = _said(known_parameters(request, _WHO_AND_WHY))
        # Before the body: whoever left it out is told so, whatever the body is.
        expected = self._expected(request)
        document = await read_json(request)
        stored = await run_in_threadpool(
            self._stored(request).replace,
            self._asked(request),
            document,
            expected,
            author=author,
            reason=reason,
        )
        if expected is Head.ABSENT:
            return self._created(stored)
        return json_answer(self._kind.shown(stored.record, stored.read), headers=_tag(stored))

    async def delete(self, request: Request) -> Response:
        """Remove a document from the list; its revisions stay."""
        author, reason = _said(known_parameters(request, _WHO_AND_WHY))
        tags = if_match(request)
        await run_in_threadpool(
            self._stored(request).remove,
            self._asked(request),
            Head.ANY if tags is None else _head(tags),
            author=author,
            reason=reason,
        )
        return Response(status_code=204)

    async def list_revisions(self, request: Request) -> Response:
        """Answer a page of the revisions of a name."""
        parameters = known_parameters(request, paging.PAGE_PARAMETERS)
        size, after = paging.page_size(parameters), paging.after_token(parameters, _NUMBER) or "0"
        name = self._asked(request)
        page = await run_in_threadpool(self._stored(request).revisions_page, name, int(after), size)
        token = paging.token_of(str(page.records[-1].revision)) if page.more else None
        headers = _NO_CACHE | paging.next_link(request, parameters, token)
        return json_answer(revision_list_answer(name, page.records, token), headers=headers)

    async def get_revision(self, request: Request) -> Response:
        """Answer one revision, of a removed name too."""
        known_parameters(request, ())
        text = request.path_params["n"]
        if not _NUMBER.fullmatch(text):
            raise UnknownRevision(
                f"{text!r} is no revision number", where=("n",), location="path", value=text
            )
        stored = await run_in_threadpool(self._stored(request).get, self._asked(request), int(text))
        return self._tagged(request, stored, _FOR_EVER)

    def _stored(self, request: Request) -> Stored[Any]:
        stored: Stored[Any] = getattr(request.app.state, f"{self._name}s")
        return stored

    def _asked(self, request: Request) -> str:
        return str(request.path_params[self._name])

    def _expected(self, request: Request) -> Head | frozenset[str]:
        tags, absent = if_match(request), if_none_match(request)
        if tags is None and absent == "*":
            return Head.ABSENT
        if tags is None:
            raise PreconditionRequired(
                "a write must say which revision it replaces",
                where=("if-match",),
                location="header",
                way_out=f"send If-Match with the ETag of the {self._name}, or If-None-Match: * "
                "to create it",
            )
        if absent is None:
            return _head(tags)
        # "It is there" and "it is not there" at once: no state satisfies both.
        return frozenset()

    def _created(self, stored: StoredDocument[Any]) -> Response:
        headers = _tag(stored) | {"location": f"/v1/{self._name}s/{stored.record.name}"}
        return json_answer(self._kind.shown(stored.record, stored.read), 201, headers)

    def _tagged(
        self, request: Request, stored: StoredDocument[Any], caching: dict[str, str]
    ) -> Response:
        headers = caching | _tag(stored)
        has = if_none_match(request)
        if has is not None and (has == "*" or version_of(stored.record) in has):
            return Response(status_code=304, headers=headers)
        return json_answer(self._kind.shown(stored.record, stored.read), headers=headers)


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


def _head(tags: Tags) -> Head | frozenset[str]:
    return tags if isinstance(tags, frozenset) else Head.ANY


def _tag(stored: StoredDocument[Any]) -> dict[str, str]:
    return {"etag": entity_tag(version_of(stored.record))}
