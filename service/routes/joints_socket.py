"""Joint values by WebSocket (RFC 6455), for sources too fast for a request each.

Idea: each text message is what `PUT .../joints` takes as JSON. Of more than a thousand a second
the newest win: reading costs little, weighing ten times as much, and nobody is to wait for it.
What became of them is told in few words, ten times a second at most: who reads none of it is not
held up by it, and one who sends rubbish is told why and then cut off. Left out: the weighing
(service/live).
"""

import asyncio
from collections import Counter
from contextlib import suppress
from time import time_ns

from pydantic import ValidationError
from starlette.routing import WebSocketRoute
from starlette.websockets import WebSocket, WebSocketDisconnect

from kinematics.errors import KinematicsError
from service.envelope import new_request_id
from service.errors import NotAvailable, ServiceError, UnknownPath
from service.live.live_arms import LiveArms
from service.operations.arms import StoredArm
from service.problems import Problem, problem_of
from service.routes.joints import stored_arm
from service.slots import Slot
from service.wire.answers import json_bytes, json_problem
from service.wire.arms import ReadArm
from service.wire.body import parse_json
from service.wire.joint_samples import JointsRequest, joints_request, samples_of
from service.wire.joints_answers import counts_of, input_of
from service.wire.origins import refuse_foreign
from service.wire.query import known_ones, query_pairs

MOST_MESSAGE_BYTES = 512 * 1024
"""As of a body of joint values; what is longer is refused by its head (close code 1009)."""

MOST_SOCKETS = 100
_MOST_REFUSED = 20
"""So many messages in a row that cannot be read come from a program that is not meant for this."""

_TOLD_EVERY_S = 0.1
_TAKEN_EVERY_S = 0.001
_IN_A_ROW = 64
"""Messages that are there already are read in such numbers, then others get their turn."""

# RFC 6455, 7.4.1
_UNSUPPORTED, _POLICY = 1003, 1008
_open: set["_Session"] = set()


async def joints_socket(socket: WebSocket) -> None:
    """Take joint values in until the sender leaves."""
    name = socket.path_params["arm"]
    try:
        known_ones(query_pairs(socket), ())
        refuse_foreign(socket.headers)
        stored = await stored_arm(socket.app.state.arms, name)
        _check_room()
    except ServiceError as error:
        await _refuse(socket, problem_of(error))
        return
    kernels = socket.app.state.readiness.postures
    if not kernels.are_ready:
        await kernels.wait()
    await socket.accept()
    session = _Session(socket, stored)
    _open.add(session)
    taking, telling = (asyncio.ensure_future(one) for one in (session.take(), session.tell()))
    try:
        await session.read()
        # What came last stands, also where the sender went at once.
        await taking
    finally:
        _open.discard(session)
        for task in (taking, telling):
            task.cancel()
            # The sender may have gone while it was being told something.
            with suppress(asyncio.CancelledError, WebSocketDisconnect, RuntimeError):
                await task


class _Session:
    """One sender and what it was told."""

    def __init__(self, socket: WebSocket, stored: StoredArm[ReadArm]) -> None:
        self._socket, self._stored = socket, stored
        self._live: LiveArms = socket.app.state.live
        self._sender = socket.client.host if socket.client is not None else "unknown"
        self._come, self._say = Slot(), Slot()
        self._counts: Counter[str] = Counter(good=0, doubted=0, dropped=0, refused=0, passed_over=0)
        self._last: JointsRequest | None = None
        self._problem: Problem | None = None
        self._passed_over = self._refused_in_a_row = 0

    async def read(self) -> None:
        """Read messages until the sender leaves or is cut off."""
        number = 0
        while True:
            message = await self._socket.receive()
            if message["type"] != "websocket.receive":
                self._come.end()
                return
            text = message.get("text")
            if text is None:
                self._come.end()
                await self._close(_UNSUPPORTED, "joint values come as text: JSON")
                return
            self._passed_over += self._come.is_filled
            self._come.put("", text.encode)
            number += 1
            if number % _IN_A_ROW == 0:
                await asyncio.sleep(0)

    async def take(self) -> None:
        """Take messages in, the newest of those that came meanwhile."""
        name = self._stored.read.arm.name
        while await self._come.filled():
            passed_over, self._passed_over = self._passed_over, 0
            self._counts["passed_over"] += passed_over
            live = self._live.get(name)
            if live is not None:
                # As it is stored now: revisions are looked for twice a second.
                self._stored = live.standing.stored
            elif self._last is not None:
                await self._close(_POLICY, "the arm is stored no more")
                return
            if self._take_one(self._come.taken()):
                self._refused_in_a_row = 0
            else:
                self._refused_in_a_row += 1 + passed_over
            if self._refused_in_a_row >= _MOST_REFUSED:
                say = f"{_MOST_REFUSED} messages in a row that cannot be used"
                await self._close(_POLICY, say)
                return
            self._say.put("", self._told)
            await asyncio.sleep(_TAKEN_EVERY_S)

    async def tell(self) -> None:
        """Tell now and then what became of what was sent."""
        while await self._say.filled():
            await self._socket.send_text(self._say.taken().decode())
            await asyncio.sleep(_TOLD_EVERY_S)

    def _take_one(self, raw: bytes) -> bool:
        """Take one message in; return whether it could be used."""
        body: object = ...
        try:
            body = parse_json(raw)
            asked = joints_request(body)
            read = self._stored.read
            samples = samples_of(asked, read.arm, read.units, self._sender, self._live.clock)
        except (ServiceError, KinematicsError, ValidationError) as error:
            self._counts["refused"] += 1
            self._problem = problem_of(error, body=body)
            return False
        self._counts.update(counts_of(self._live.feed(self._stored, samples)))
        self._last = asked
        return True

    def _told(self) -> bytes:
        problem, self._problem = self._problem, None
        live, last = self._live.get(self._stored.read.arm.name), self._last
        told: dict[str, object] = {"ok": problem is None, "t_ms": time_ns() // 1_000_000}
        told |= self._counts
        if last is not None:
            newest = last.samples[-1] if last.samples else last
            told |= {"sequence": newest.sequence, "tag": newest.tag}
        if live is not None:
            standing = live.standing
            told |= {
                "quality": standing.quality,
                "reason": standing.reason,
                "say": standing.say,
                "change": standing.change,
                **input_of(live),
            }
        if problem is not None:
            told["problem"] = problem.document(new_request_id())
        return json_bytes(told)

    async def _close(self, code: int, reason: str) -> None:
        self._say.end()
        # The sender may have gone by itself.
        with suppress(WebSocketDisconnect, RuntimeError):
            if self._problem is not None:
                # Why, at length; there is no room for it in the reason.
                await self._socket.send_text(self._told().decode())
            await self._socket.close(code, reason)


def _check_room() -> None:
    if len(_open) >= MOST_SOCKETS:
        raise NotAvailable(
            f"{MOST_SOCKETS} sockets are open",
            way_out="send several samples in one message, or by PUT",
            headers={"Retry-After": "10"},
        )


async def _refuse(socket: WebSocket, problem: Problem) -> None:
    await socket.send_denial_response(json_problem(problem, new_request_id()))


async def no_socket(socket: WebSocket) -> None:
    """Refuse a socket at any other address."""
    path = socket.url.path
    error = UnknownPath(
        "no such address for a socket", location="path", value=path, way_out=f"use {_ADDRESS}"
    )
    await _refuse(socket, problem_of(error))


_ADDRESS = "/v1/arms/{arm}/joints/socket"
routes = (WebSocketRoute(_ADDRESS, joints_socket), WebSocketRoute("/{path:path}", no_socket))
