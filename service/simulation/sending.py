"""What ``armspan simulate`` does: arms of a running service move, as seen through its interface.

Idea: each stored arm wanders (motion.py) and its joint values are sent as a controller's would be,
marked as simulated; an arm that real values have come of is left alone from then on. More than
some fifty values a second go several in one request. Left out: the command line itself.
"""

import asyncio
import math
import time
from dataclasses import dataclass
from typing import TextIO

import httpx

from kinematics.errors import KinematicsError
from kinematics.wandering import SHARE_OF_TOP_SPEED, Wandering
from service.convert import joint_row_out
from service.errors import ServiceError, UnusableValue
from service.live.samples import SUPERSEDED
from service.simulation.motion import SOURCE, USUAL_SEED, wandering_of
from service.wire.arms import ReadArm, read_arm

MOST_HZ = 10_000.0
_REQUESTS_HZ = 50.0
_TIMEOUT_S = 10.0
_AGAIN_S = 1.0
"""Between tries where the service does not answer: it may be starting."""

_DECIMALS = {"mm-deg": 4, "in-deg": 5, "m-rad": 7}
"""Of joint values, some ten micrometres at a metre: as controllers print them."""

_OF_THE_TABLE = ("name", "convention", "units", "rows", "combined_travel")


@dataclass(frozen=True, slots=True)
class Simulation:
    """What is to be simulated.

    Attributes
    ----------
    url : of the service.
    arms : their names; empty: all that are stored.
    rate_hz : values a second of each arm.
    seed : the same one gives the same motion.
    speed : share of top speed.
    duration_s : how long; infinite: until it is interrupted.
    """

    url: str
    arms: tuple[str, ...] = ()
    rate_hz: float = 20.0
    seed: int = USUAL_SEED
    speed: float = SHARE_OF_TOP_SPEED
    duration_s: float = math.inf


async def simulate(
    asked: Simulation, out: TextIO, *, transport: httpx.AsyncBaseTransport | None = None
) -> int:
    """Send joint values until all is over; a line to ``out`` for each arm.

    Returns
    -------
    0 : what was asked was done. 1 : the service could not be asked, or no arm can be simulated.
    """
    async with httpx.AsyncClient(
        base_url=asked.url, timeout=_TIMEOUT_S, transport=transport
    ) as client:
        try:
            names = asked.arms or await _stored_names(client)
            arms = [await _arm(client, name) for name in names]
        except (httpx.HTTPError, httpx.InvalidURL) as error:
            print(f"armspan: {asked.url} does not answer: {error}", file=out)
            return 1
        except (ServiceError, KinematicsError) as error:
            print(f"armspan: {error.say}", file=out)
            return 1
        senders = [_Sender(client, arm, asked, out) for arm in arms]
        await asyncio.gather(*(sender.run() for sender in senders))
    return 0 if any(sender.taken for sender in senders) else 1


async def _stored_names(client: httpx.AsyncClient) -> list[str]:
    names: list[str] = []
    path = "/v1/arms?page_size=200"
    while path:
        answer = _checked(await client.get(path))
        names += [arm["name"] for arm in answer.json()["arms"]]
        path = answer.links.get("next", {}).get("url", "")
    if not names:
        raise UnusableValue("no arms are stored there", way_out="armspan serve --demo has some")
    return names


async def _arm(client: httpx.AsyncClient, name: str) -> ReadArm:
    """Return an arm by its table: where it stands, and with what tool, is nothing to its joints."""
    document = _checked(await client.get(f"/v1/arms/{name}")).json()["arm"]
    return read_arm({key: document[key] for key in _OF_THE_TABLE if key in document})


class _Sender:
    """Sends the values of one arm."""

    def __init__(
        self, client: httpx.AsyncClient, read: ReadArm, asked: Simulation, out: TextIO
    ) -> None:
        self._client, self._read, self._asked, self._out = client, read, asked, out
        self._name = read.arm.name
        self._begun_s, self._begun_ms = time.monotonic(), time.time_ns() / 1e6
        self._count = 0
        # Numbers go on where those of an earlier simulation cannot have been.
        self._first = time.time_ns() // 1_000_000
        self._ended = ""
        self._is_away = False
        self.sent = self.taken = 0

    async def run(self) -> None:
        """Send until it is over, and say how it went."""
        try:
            wandering = wandering_of(self._read.arm, self._asked.seed, share=self._asked.speed)
            while not self._ended and (samples := await self._samples(wandering)):
                await self._send(samples)
        except KinematicsError as error:
            self._ended = error.say
        ended = f"; {self._ended}" if self._ended else ""
        print(f"{self._name}: {self.sent} sent, {self.taken} taken{ended}", file=self._out)

    async def _samples(self, wandering: Wandering) -> list[dict[str, object]]:
        """Return what is measured next, as soon as it is; nothing when the time is over."""
        samples: list[dict[str, object]] = []
        rate_hz, units = self._asked.rate_hz, self._read.units
        for _ in range(math.ceil(rate_hz / _REQUESTS_HZ)):
            late_s = time.monotonic() - self._begun_s - self._count / rate_hz
            if late_s > _AGAIN_S:
                # The service was away: what was not sent was never measured.
                self._count += math.floor(late_s * rate_hz)
            at_s = self._count / rate_hz
            if at_s >= self._asked.duration_s:
                break
            await asyncio.sleep(max(self._begun_s + at_s - time.monotonic(), 0.0))
            joints = joint_row_out(self._read.arm, units, wandering.at(at_s).tolist())
            samples.append(
                {
                    "joints": [round(value, _DECIMALS[units.name]) for value in joints],
                    # When it was meant for, however late this process woke up: speeds are right.
                    "sampled_ms": round(self._begun_ms + 1000.0 * at_s, 3),
                    "sequence": self._first + self._count,
                }
            )
            self._count += 1
        return samples

    async def _send(self, samples: list[dict[str, object]]) -> None:
        body = {
            "samples": samples,
            "source": SOURCE,
            "simulated": True,
            "units": self._read.units.name,
            # Of what arrives together, which counts as one arrival.
            "period_ms": 1000.0 * max(1.0 / self._asked.rate_hz, 1.0 / _REQUESTS_HZ),
        }
        try:
            answer = await self._client.put(f"/v1/arms/{self._name}/joints", json=body)
        except httpx.TransportError as error:
            await self._away(str(error) or "no answer")
            return
        if answer.status_code >= 500:
            await self._away(_said(answer))
            return
        if answer.status_code >= 400:
            self._ended = _said(answer)
            return
        self._is_away = False
        told = answer.json()
        self.sent += len(samples)
        self.taken += told["good"]
        if told["reason"] == SUPERSEDED:
            self._ended = "real values have come, and nothing more is simulated"

    async def _away(self, why: str) -> None:
        if not self._is_away:
            print(f"{self._name}: not taken, trying again: {why}", file=self._out, flush=True)
        self._is_away = True
        await asyncio.sleep(_AGAIN_S)


def _checked(answer: httpx.Response) -> httpx.Response:
    """Return an answer that is no refusal.

    Raises
    ------
    UnusableValue : it is one.
    """
    if answer.is_success:
        return answer
    raise UnusableValue(_said(answer))


def _said(answer: httpx.Response) -> str:
    """Return what a refusal says; something else than this service may have answered."""
    try:
        return str(answer.json()["detail"])
    except (ValueError, KeyError, TypeError):
        return f"it answered {answer.status_code}"
