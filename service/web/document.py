"""The OpenAPI document, built from the routes as registered and what each says of itself.

Left out: FastAPI's own document, which sees only handlers that take a request and return bytes.
"""

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from fastapi.routing import APIRoute
from pydantic import BaseModel
from pydantic.json_schema import JsonSchemaMode, models_json_schema

from service.cautions import NOT_A_SAFETY_FUNCTION
from service.problems import KINDS, MEDIA_TYPE
from service.web.examples import Example, examples_of
from service.web.schemas import BYTES, NAME, PROBLEM, TEXT

Schema = dict[str, Any]
Model = type[BaseModel]
Shape = Model | Schema
References = Mapping[tuple[Any, JsonSchemaMode], Schema]

# The one key under which a route carries what it says of itself.
KEY = "x-documented"
_CONTROLLER = "For controllers: one fixed length, never chunked."
_NOT_CONTROLLER = "Not for controllers: nested JSON of any length."
_BODY_STATUSES = (400, 408, 413, 415, 422)
_QUERY_STATUSES = (400, 422)


@dataclass(frozen=True, slots=True)
class Documented:
    """What a route says of itself; the arguments of ``documented``."""

    summary: str
    description: str
    request: Shape | None
    answer: Shape | None
    parameters: tuple[Schema, ...]
    statuses: tuple[int, ...]
    controller: bool
    examples: str
    success: int
    answer_media: tuple[str, ...]
    request_media: str
    other_requests: Mapping[str, Schema]
    request_required: bool
    headers: Mapping[str, str]
    flat_refusal: Model | None
    may_create: bool


def documented(
    summary: str,
    description: str,
    *,
    request: Shape | None = None,
    answer: Shape | None = None,
    parameters: Sequence[Schema] = (),
    statuses: Sequence[int] = (),
    controller: bool = False,
    examples: str = "",
    success: int = 200,
    answer_media: Sequence[str] = ("application/json",),
    request_media: str = "application/json",
    other_requests: Mapping[str, Schema] | None = None,
    request_required: bool = True,
    headers: Mapping[str, str] | None = None,
    flat_refusal: Model | None = None,
    may_create: bool = False,
) -> dict[str, Any]:
    """Return the ``openapi_extra`` of a route.

    Parameters
    ----------
    request, answer : a pydantic model, a JSON Schema as a dict, or None for no body.
    parameters : of ``parameter``; path parameters not among them are added as names.
    statuses : of refusals, beyond 500 and those any body (400, 408, 413, 415, 422) or any query
        (400, 422) can meet.
    controller : whether a controller may call it.
    examples : folder below ``openapi_examples``.
    success : status of the answer that is no refusal.
    answer_media : media types of that answer; all but JSON are documented as text, or as
        bytes where the type does not begin with ``text/``.
    other_requests : media types, with their schemas, that the body may have instead.
    headers : name and meaning of further headers of that answer.
    flat_refusal : what a refusal is where a flat answer was asked for.
    may_create : whether the same answer also comes with status 201.
    """
    return {
        KEY: Documented(
            summary,
            description,
            request,
            answer,
            tuple(parameters),
            tuple(statuses),
            controller,
            examples,
            success,
            tuple(answer_media),
            request_media,
            dict(other_requests or {}),
            request_required,
            dict(headers or {}),
            flat_refusal,
            may_create,
        )
    }


def parameter(
    name: str,
    description: str,
    schema: Schema | None = None,
    *,
    where: str = "query",
    required: bool = False,
    example: object = None,
) -> Schema:
    """Return one parameter of an operation; ``schema`` is text when left out.

    Examples
    --------
    >>> parameter("tag", "Sent back as it came.", {"type": "integer"})["in"]
    'query'
    """
    found: Schema = {
        "name": name,
        "in": where,
        "description": description,
        "required": required or where == "path",
        "schema": schema or {"type": "string"},
    }
    if example is not None:
        found["example"] = example
    return found


def openapi_document(routes: Iterable[APIRoute], *, version: str) -> Schema:
    """Return the OpenAPI 3.1 document of ``routes``; a route that says nothing is an error.

    Raises
    ------
    LookupError : a route is not documented, or names examples that are not there.
    """
    shown = [route for route in routes if route.include_in_schema]
    said = [(route, _said_by(route)) for route in shown]
    references, schemas = _schemas([entry for _, entry in said])
    paths: dict[str, Schema] = {}
    for route, entry in said:
        operations = paths.setdefault(route.path, {})
        for method in sorted(route.methods or ()):
            operations[method.lower()] = _operation(route, method, entry, references)
    return {
        "openapi": "3.1.0",
        "info": {
            "title": "Armspan",
            "version": version,
            "description": "Where the tool of a serial arm is, and whether it can get there. "
            + NOT_A_SAFETY_FUNCTION,
            "license": {"name": "Apache-2.0", "identifier": "Apache-2.0"},
        },
        "paths": paths,
        "components": {"schemas": {"Problem": PROBLEM, **schemas}},
    }


def _said_by(route: APIRoute) -> Documented:
    entry = (route.openapi_extra or {}).get(KEY)
    if not isinstance(entry, Documented):
        raise LookupError(f"{route.name} at {route.path} is not documented")
    return entry


def _schemas(said: Sequence[Documented]) -> tuple[References, Schema]:
    wanted: dict[tuple[Any, JsonSchemaMode], None] = {}
    for entry in said:
        if isinstance(entry.request, type):
            wanted[entry.request, "validation"] = None
        if isinstance(entry.answer, type):
            wanted[entry.answer, "serialization"] = None
        if entry.flat_refusal is not None:
            wanted[entry.flat_refusal, "serialization"] = None
    references, definitions = models_json_schema(
        list(wanted), ref_template="#/components/schemas/{model}"
    )
    return dict(references), dict(definitions.get("$defs", {}))


def _operation(route: APIRoute, method: str, entry: Documented, references: References) -> Schema:
    cases = examples_of(entry.examples) if entry.examples else {}
    kind = _CONTROLLER if entry.controller else _NOT_CONTROLLER
    operation: Schema = {
        "operationId": f"{method.lower()}-{route.name.replace('_', '-')}",
        "summary": entry.summary,
        "description": f"{entry.description}\n\n{kind}",
        "tags": [_tag(route.path)],
        "x-for-controllers": entry.controller,
        "responses": _responses(entry, method, references, cases),
    }
    parameters = _parameters(route, entry, cases)
    if parameters:
        operation["parameters"] = parameters
    if entry.request is not None:
        content: Schema = {"schema": _reference(entry.request, "validation", references)}
        if cases:
            content["examples"] = {
                name: {"summary": case.title, "value": case.request} for name, case in cases.items()
            }
        operation["requestBody"] = {
            "required": entry.request_required,
            "content": {
                entry.request_media: content,
                **{media: {"schema": schema} for media, schema in entry.other_requests.items()},
            },
        }
    return operation


def _reference(shape: Shape, mode: JsonSchemaMode, references: References) -> Schema:
    return references[shape, mode] if isinstance(shape, type) else shape


def _parameters(route: APIRoute, entry: Documented, cases: Mapping[str, Example]) -> list[Schema]:
    names = {given["name"] for given in entry.parameters if given["in"] == "path"}
    found = [
        parameter(name, f"Name of the {name}.", NAME, where="path")
        for name in route.param_convertors
        if name not in names
    ]
    for given in entry.parameters:
        shown = {
            name: {"summary": case.title, "value": case.query[given["name"]]}
            for name, case in cases.items()
            if given["in"] == "query" and given["name"] in case.query
        }
        plain = {key: value for key, value in given.items() if key != "example"}
        found.append({**plain, "examples": shown} if shown else given)
    return found


def _responses(
    entry: Documented,
    method: str,
    references: References,
    cases: Mapping[str, Example],
) -> Schema:
    success: Schema = {"description": "The answer."}
    if entry.headers:
        success["headers"] = {
            name: {"description": meaning, "schema": {"type": "string"}}
            for name, meaning in entry.headers.items()
        }
    if method != "HEAD":
        content = {
            media: _answer_content(entry.answer, media, references, cases)
            for media in entry.answer_media
            if entry.answer is not None or media != "application/json"
        }
        if content:
            success["content"] = content
    successes = {entry.success, 201} if entry.may_create else {entry.success}
    # Any address can fail, and refuse while the service is full or stopping.
    statuses = {500, 503, *entry.statuses}
    if entry.request is not None:
        statuses.update(_BODY_STATUSES)
    if any(given["in"] == "query" for given in entry.parameters):
        statuses.update(_QUERY_STATUSES)
    return {
        **{str(status): success for status in sorted(successes)},
        **{str(status): _refusal(status, entry, references) for status in sorted(statuses)},
    }


def _answer_content(
    answer: Shape | None,
    media: str,
    references: References,
    cases: Mapping[str, Example],
) -> Schema:
    as_json = media == "application/json" and answer is not None
    content: Schema = {
        "schema": _reference(answer, "serialization", references)  # type: ignore[arg-type]
        if as_json
        else (TEXT if media.startswith("text/") else BYTES)
    }
    shown = {
        name: {"summary": case.title, "value": case.answer}
        for name, case in cases.items()
        if case.media == media
    }
    if shown:
        content["examples"] = shown
    return content


def _refusal(status: int, entry: Documented, references: References) -> Schema:
    if status == 304:
        return {"description": "Not changed."}
    codes = [code for code, kind in KINDS.items() if kind.status == status]
    content: Schema = {MEDIA_TYPE: {"schema": {"$ref": "#/components/schemas/Problem"}}}
    # Failures that nobody foresaw, and a service that is full, know of no formats.
    if entry.flat_refusal is not None and status != 500:
        flat = references[entry.flat_refusal, "serialization"]
        content["application/json"] = {"schema": flat}
        content |= {
            media: {"schema": TEXT} for media in entry.answer_media if media.startswith("text/")
        }
    return {
        "description": f"Refused: {', '.join(codes)}." if codes else "Refused.",
        "content": content,
    }


def _tag(path: str) -> str:
    parts = [part for part in path.split("/") if part not in ("", "v1")]
    return parts[0] if parts else "pages"
