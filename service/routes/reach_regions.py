"""How far an arm reaches at all: sampled tool positions.

Left out: single targets (reach.py), what the answers say (operations) and who works on them (bulk).
"""

from fastapi import APIRouter
from starlette.requests import Request
from starlette.responses import Response

from service.bulk.samples import answer_samples
from service.routes.direct import PostureRoute
from service.web.document import documented
from service.wire import csv_rows, npy
from service.wire.formats import JSON
from service.wire.question_parameters import FORMAT_OF_ANSWERS
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
