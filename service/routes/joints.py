"""Joint values of an arm over HTTP: what a controller or a gateway sends, and what became of it.

Left out: sockets for high rates (joints_socket.py), and the weighing of values (service/live).
"""

from urllib.parse import parse_qsl

from fastapi import APIRouter
from starlette.concurrency import run_in_threadpool
from starlette.requests import Request
from starlette.responses import Response

from service.errors import Unparseable, UnusableValue
from service.live.live_arms import LiveArms
from service.operations.arms import Arms, StoredArm
from service.operations.meant_arms import MeantArm
from service.operations.single import check_expected
from service.problems import Problem
from service.routes.direct import PostureRoute
from service.routes.in_format import MEDIA_TYPES, Asked, answered_in_format
from service.web.document import documented
from service.wire.arms import ReadArm
from service.wire.body import media_type_of, parse_json, read_bytes
from service.wire.formats import JSON
from service.wire.joint_samples import (
    BESIDE_JSON,
    JOINTS_PARAMETERS,
    JOINTS_SHOWN,
    JointsRequest,
    joints_request,
    request_of_parameters,
    samples_of,
)
from service.wire.joints_answers import (
    FlatJointsTaken,
    JointsReply,
    refused_joints,
    taken_answer,
)
from service.wire.one_answer import Content
from service.wire.origins import refuse_foreign

router = APIRouter(route_class=PostureRoute)

_FORM = "application/x-www-form-urlencoded"
_MOST_BYTES = 512 * 1024
"""A thousand samples of six joints take some 300 kB."""

_FORM_SCHEMA = {
    "type": "object",
    "description": "The parameters of the query, as a form.",
    "additionalProperties": {"type": "string"},
}


@router.api_route(
    "/v1/arms/{arm}/joints",
    methods=["PUT", "POST"],
    openapi_extra=documented(
        "Joint values of an arm",
        "What its controller shows now: as JSON, one sample or several of `samples`, as a form, or "
        "in the query alone. With the time they were measured by the source's own clock, whose "
        "offset is estimated and told, and a `sequence` that rises. Repeated and older ones are "
        "dropped and counted. Values outside travel, faster than top speed, not finite, or of a "
        "time that cannot be right make the quality `uncertain` with the reason; the last good "
        "pose stays. The newest source wins. An input that stops is `bad` (`stale`) after three "
        "of its own periods. For high rates: a WebSocket at `/v1/arms/{arm}/joints/socket`, whose "
        "text messages are the same JSON; it tells now and then how many were taken. "
        "`format=flat`, `txt` and `csv` answer as for controllers.",
        request=JointsRequest,
        request_required=False,
        other_requests={_FORM: _FORM_SCHEMA},
        answer=JointsReply,
        answer_media=MEDIA_TYPES,
        flat_refusal=FlatJointsTaken,
        parameters=JOINTS_SHOWN,
        statuses=(404, 409, 503),
        controller=True,
        examples="joints",
    ),
)
async def joints(request: Request) -> Response:
    """Take joint values in."""
    raw = await read_bytes(request, JSON, _FORM, most=_MOST_BYTES)
    if raw and media_type_of(request) == JSON:
        return await answered_in_format(request, BESIDE_JSON, _Taking(raw), _refused)
    refuse_foreign(request.headers)
    form = _form(raw)
    return await answered_in_format(request, JOINTS_PARAMETERS, _Taking(b""), _refused, form)


class _Taking:
    """Takes in what a request says; ``raw`` is its JSON, empty where its parameters say all."""

    def __init__(self, raw: bytes) -> None:
        self._raw = raw

    async def __call__(self, asked: Asked) -> Content:
        """Take it in and return what became of it."""
        request = asked.request
        stored = await stored_arm(request.app.state.arms, request.path_params["arm"])
        live: LiveArms = request.app.state.live
        stored = live.newer(stored)
        check_expected(stored.read.digests.digest, asked.said.get("expect"))
        if self._raw:
            request.state.json_body = parse_json(self._raw)
            given = joints_request(request.state.json_body)
        else:
            given = request_of_parameters(asked.said)
        sender = request.client.host if request.client is not None else "unknown"
        read = stored.read
        taken = live.feed(stored, samples_of(given, read.arm, read.units, sender, live.clock))
        if not taken:
            raise UnusableValue(
                "there are no samples", where=("samples",), value=[], way_out="give at least one"
            )
        stamp = asked.stamp
        if "tag" not in asked.said:
            last = given.samples[-1] if given.samples else given
            stamp = {**stamp, "tag": last.tag}
        return taken_answer(live.of(stored), taken, identity_of(stored), asked.wanted, stamp)


async def stored_arm(arms: Arms[ReadArm], name: str) -> StoredArm[ReadArm]:
    """Return the newest revision of an arm.

    Raises
    ------
    UnknownArm
    """
    if arms.answers_at_once:
        return arms.get(name)
    return await run_in_threadpool(arms.get, name)


def identity_of(stored: StoredArm[ReadArm]) -> dict[str, object]:
    """Return what leads from an answer to the exact numbers of the arm."""
    return MeantArm(stored.read, stored.record.revision).identity()


async def _refused(asked: Asked, problem: Problem) -> Content:
    return refused_joints(problem, asked.wanted, asked.stamp)


def _form(raw: bytes) -> list[tuple[str, str]]:
    try:
        return parse_qsl(raw.decode("ascii"), keep_blank_values=True, strict_parsing=bool(raw))
    except ValueError:
        raise Unparseable(
            "the body is no form", way_out="write it like q=1,2,3&sequence=7, in ASCII"
        ) from None
