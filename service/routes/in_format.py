"""What a controller asks with one GET, answered in the format it asks for, refusals too.

Left out: what an address answers and how it says no; its handlers bring both.
"""

from collections.abc import Awaitable, Callable, Collection, Mapping, Sequence
from time import time_ns
from typing import NamedTuple

from pydantic import ValidationError
from starlette.requests import Request
from starlette.responses import Response

from kinematics.errors import KinematicsError
from service.errors import ServiceError
from service.problems import Problem
from service.refusals import problem_at
from service.wire import one_answer
from service.wire.answers import FreshAnswer
from service.wire.controller import FORMATS, Format, errors_inline, wanted_format, wanted_tag
from service.wire.one_answer import Content, Stamp
from service.wire.query import known_ones, query_pairs

MEDIA_TYPES = ("application/json", "text/plain", "text/csv")


class Asked(NamedTuple):
    """One question: its query as it stands, the format of the answer, and what begins it."""

    request: Request
    said: Mapping[str, str]
    wanted: Format
    stamp: Stamp


Answer = Callable[[Asked], Awaitable[Content]]
Refusal = Callable[[Asked, Problem], Awaitable[Content]]


async def answered_in_format(
    request: Request,
    known: Collection[str],
    answer: Answer,
    refusal: Refusal,
    in_body: Sequence[tuple[str, str]] = (),
) -> Response:
    """Return what ``answer`` says, or a refusal in the same format.

    Parameters
    ----------
    known : names of the query's parameters.
    answer : called once the query has no other names, and each of its own once.
    refusal : what says no where the answer would be flat, CSV or text.
    in_body : names and texts of a form that came as the body; they count as the query's.

    Raises
    ------
    ServiceError, KinematicsError, ValidationError : refused in JSON with a status that says so,
        as at every other address.
    """
    # Read by hand before anything is refused, so that a refusal comes in the format asked for.
    pairs = [*query_pairs(request), *in_body]
    said = dict(pairs)
    given = said.get("format")
    wanted: Format = given if given in FORMATS else "json"
    asked = Asked(
        request,
        said,
        wanted,
        {
            "seq": next(request.app.state.sequence),
            "tag": _readable_tag(said) if "tag" in said else 0,
            "t_ms": time_ns() // 1_000_000,
        },
    )
    try:
        known_ones(pairs, known)
        wanted_tag(said)
        errors_inline(said)
        wanted_format(said)
        content = await answer(asked)
    except (ServiceError, KinematicsError, ValidationError) as error:
        inline = said.get("errors") == "inline"
        if wanted == "json" and not inline:
            raise
        problem = problem_at(request, error)
        if wanted == "json":
            content = one_answer.refused_inline(problem, request.state.request_id, asked.stamp)
        else:
            content = await refusal(asked, problem)
        return Response(
            content.body,
            200 if inline else problem.status,
            headers={"Cache-Control": "no-store", **problem.headers},
            media_type=content.media_type,
        )
    return FreshAnswer(*content)


async def refused_pose(asked: Asked, problem: Problem) -> Content:
    """Return a refusal with the keys of a pose, at the addresses that answer with them."""
    return one_answer.refused_pose(problem, asked.wanted, asked.stamp)


def _readable_tag(said: Mapping[str, str]) -> int:
    try:
        return wanted_tag(said)
    except ServiceError:
        return 0
