"""How far an arm reaches at all: sampled tool positions, and the envelope around them.

Left out: single targets (reach.py), what the answers say (operations) and who works on them (bulk).
"""

from fastapi import APIRouter
from starlette.requests import Request
from starlette.responses import Response

from service.bulk.envelopes import FORMATS, answer_envelope
from service.bulk.samples import answer_samples
from service.routes.direct import PostureRoute
from service.web.document import documented, parameter
from service.wire import csv_rows, npy
from service.wire.envelopes import EnvelopeAnswer, EnvelopeRequest
from service.wire.formats import JSON, SVG
from service.wire.question_parameters import FORMAT_OF_ANSWERS, one_of
from service.wire.samples import SamplesAnswer, SamplesRequest

router = APIRouter(route_class=PostureRoute)


@router.post(
    "/v1/reach/samples",
    openapi_extra=documented(
        "Where the tool gets to: samples",
        "Postures spread evenly over all that travel allows, combined travel included (a scrambled "
        "Sobol sequence: the same `seed`, the same samples), and where each brings the tool. A "
        "revolute joint without travel takes one turn; a prismatic one is refused. The summary "
        "tells the farthest of them in each direction and about axis 1, with joint values, and "
        "which share is near singular, judged on the first 16 384. Samples come a little short of "
        "the true extremes.\n\n"
        "`format`, or `Accept`, may also ask for NPY or CSV: a table of what is told of each "
        "sample, in the order `x,y,z`, orientation, `q1..qn`, made while it is sent; its columns "
        "are in `X-Columns`. NPY tells orientations as quaternions, scalar first, CSV as angles. "
        "At most 1 000 000 samples, 100 000 where JSON lists them.",
        request=SamplesRequest,
        answer=SamplesAnswer,
        parameters=(FORMAT_OF_ANSWERS,),
        statuses=(503,),
        answer_media=(JSON, npy.MEDIA_TYPE, csv_rows.MEDIA_TYPE),
        headers={"X-Columns": "Names of the columns of an NPY or CSV answer."},
        examples="reach-samples",
    ),
)
async def reach_samples(request: Request) -> Response:
    """Answer samples of reach."""
    return await answer_samples(request)


@router.post(
    "/v1/reach/envelope",
    openapi_extra=documented(
        "How far the arm gets: section and plan",
        "The section through axis 1 (radius and height) and the plan, as closed curves with area, "
        "volume and how far off these may be, and the farthest of each measure with joint values; "
        "within travel and, where the arm has it, within working travel. All in the arm's base. "
        "The curves are exact where the arm's structure allows it; else places are asked for one "
        "by one, as far apart as `resolution` says, and what is narrower may be missed; finer ones "
        "are long work, see `/v1/surveys`. Orientations at the places are not looked at.\n\n"
        "`format=svg`, or `Accept: image/svg+xml`, gives a drawing to scale on A4, first-angle "
        "projection, dimensioned, for print in black and white.",
        request=EnvelopeRequest,
        answer=EnvelopeAnswer,
        parameters=(
            parameter("format", "Format of the answer, if not as Accept says.", one_of(*FORMATS)),
        ),
        statuses=(503,),
        answer_media=(JSON, SVG),
        examples="reach-envelope",
    ),
)
async def reach_envelope(request: Request) -> Response:
    """Answer an envelope."""
    return await answer_envelope(request)
