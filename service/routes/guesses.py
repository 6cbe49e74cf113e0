"""What the numbers on a screen mean.

Left out: the search (the core's).
"""

from fastapi import APIRouter
from starlette.concurrency import run_in_threadpool
from starlette.requests import Request
from starlette.responses import Response

from service.operations.guesses import guesses_answer
from service.routes.direct import RelationRoute
from service.web.document import documented
from service.wire.answers import json_answer
from service.wire.body import read_json
from service.wire.guess_answers import GuessesAnswer
from service.wire.guesses import GuessesRequest, read_guesses
from service.wire.query import known_parameters

router = APIRouter(route_class=RelationRoute)


@router.post(
    "/v1/rotations/guesses",
    openapi_extra=documented(
        "Which form a screen shows",
        "From readouts of a screen and what they are known to mean (an orientation, or where one "
        "direction of the tool points): every form, order, sign, handedness and unit that fits, "
        "ranked by what it leaves unexplained, readings that are the same together; and the "
        "numbers to bring onto the screen next, so that the rest is told apart.",
        request=GuessesRequest,
        answer=GuessesAnswer,
        examples="rotations-guesses",
    ),
)
async def guesses(request: Request) -> Response:
    """Answer what the numbers can mean."""
    known_parameters(request, ())
    body = await read_json(request)
    return json_answer(await run_in_threadpool(lambda: guesses_answer(read_guesses(body))))
