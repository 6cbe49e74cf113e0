"""Bad questions about travels: what is refused, with which code, pointing where.

Left out: single travels that fail no others (service/wire/test_travel_reading, test_travels).
"""

import asyncio
from typing import Any

import httpx
import pytest

from service.bulk import limited
from service.settings import Settings
from tests.contract.refusals import AT_ORIGIN, arm, only_entry, refusal, sent

pytestmark = pytest.mark.anyio
TRAVELS = "/v1/reach/travels"
POSE = {"pose": AT_ORIGIN}
LEG: dict[str, Any] = {"end": {"joints": [10, 20]}, "move": "joints"}
MOVE: dict[str, Any] = {"start": {"joints": [0, 0]}, "legs": [LEG]}
TO_TARGET: dict[str, Any] = {"target": POSE, "approach": {"distance": 9, "along": "tool-z"}}
GOOD: dict[str, Any] = {"arm": arm(), "travels": [MOVE]}


@pytest.fixture
def settings() -> Settings:
    """The demonstration cell."""
    return Settings(database=":memory:", demo=True)


def asked(**changes: Any) -> dict[str, Any]:
    """Return the good question with fields changed; None takes one out."""
    return {key: value for key, value in {**GOOD, **changes}.items() if value is not None}


def leg(**changes: Any) -> dict[str, Any]:
    """Return the good question with its leg changed."""
    return asked(travels=[{**MOVE, "legs": [{**LEG, **changes}]}])


def to_target(**changes: Any) -> dict[str, Any]:
    """Return the question about a target with its approach changed."""
    return asked(travels=[{**TO_TARGET, "approach": {**TO_TARGET["approach"], **changes}}])


async def test_the_good_question_is_answered(client: httpx.AsyncClient) -> None:
    answer = await sent(client, TRAVELS, GOOD)
    assert answer.status_code == 200, answer.text
    assert answer.json()["travels"][0]["verdict"] == "reachable"


BODIES: list[tuple[dict[str, Any], str, str]] = [
    (asked(arm=None), "missing-field", "/arm"),
    (asked(travels=None), "missing-field", "/travels"),
    (asked(arm="no-such-arm"), "unknown-arm", "/arm"),
    (asked(arm=arm(default_tool=None)), "tool-not-said", "/tool"),
    (asked(tool="saw"), "unknown-tool", "/tool"),
    (asked(frame="tool"), "unknown-frame", "/frame"),
    (asked(form="xyz"), "unusable-value", "/form"),
    (asked(units="mm"), "unusable-value", "/units"),
    (asked(solutions="some"), "unusable-value", "/solutions"),
    (asked(near=[0]), "wrong-joint-count", "/near"),
    (asked(near=[0, float("inf")]), "not-finite", "/near/1"),
    (asked(points=-1), "unusable-value", "/points"),
    (asked(points=1001), "unusable-value", "/points"),
    (asked(points=1000, travels=[{**MOVE, "legs": [LEG] * 21}]), "too-large", "/points"),
    (asked(targets=[]), "unknown-field", "/targets"),
    (asked(travels=[]), "unusable-value", "/travels"),
    (asked(travels=5), "unusable-value", "/travels"),
    (asked(travels=[MOVE] * 1001), "too-large", "/travels"),
    (asked(travels=[{}]), "missing-field", "/travels/0/start"),
    (asked(travels=[{**MOVE, "seed": 1}]), "unknown-field", "/travels/0/seed"),
    (asked(travels=[{**MOVE, "legs": [LEG] * 101}]), "unusable-value", "/travels/0/legs"),
    (asked(travels=[{**MOVE, "start": {"joints": [0]}}]),
     "wrong-joint-count", "/travels/0/start/joints"),
    (leg(end={}), "missing-field", "/travels/0/legs/0/end/pose"),
    (leg(speed=0), "unusable-value", "/travels/0/legs/0/speed"),
    (leg(speed=float("nan")), "not-finite", "/travels/0/legs/0/speed"),
    (leg(move="curved"), "unusable-value", "/travels/0/legs/0/move"),
    (to_target(distance=0), "unusable-value", "/travels/0/approach/distance"),
    (to_target(distance=-5), "unusable-value", "/travels/0/approach/distance"),
    (to_target(speed=0), "unusable-value", "/travels/0/approach/speed"),
    (to_target(along=[0, 0, 0]), "unusable-value", "/travels/0/approach/along"),
    (to_target(along="tool-x"), "unusable-value", "/travels/0/approach/along"),
    (asked(travels=[{"target": {"joints": [0, 0]}, "approach": {"distance": 5}}]),
     "unusable-value", "/travels/0/target/joints"),
    (asked(arm=arm(rows=[]), travels=[{"start": {"joints": []}, "legs": [{"end": POSE}]}]),
     "unusable-value", "/arm"),
]  # fmt: skip


@pytest.mark.parametrize(("body", "code", "pointer"), BODIES)
async def test_a_bad_body(
    client: httpx.AsyncClient, body: dict[str, Any], code: str, pointer: str
) -> None:
    answer = await sent(client, TRAVELS, body)
    assert refusal(answer, code, answer.status_code)["errors"][0]["pointer"] == pointer
    assert answer.status_code == 422


@pytest.mark.parametrize(
    ("raw", "media", "code", "status"),
    [
        (b"", "application/json", "unparseable", 400),
        (b'{"arm": "a", "arm": "b"}', "application/json", "duplicate-key", 400),
        (b"q1,q2", "text/csv", "wrong-media-type", 415),
        (b"[]", "application/json", "unusable-value", 422),
        (b" " * 4_000_001, "application/json", "too-large", 413),
    ],
)
async def test_a_bad_request(
    client: httpx.AsyncClient, raw: bytes, media: str, code: str, status: int
) -> None:
    answer = await client.post(TRAVELS, content=raw, headers={"content-type": media})
    refusal(answer, code, status)


async def test_an_unknown_parameter(client: httpx.AsyncClient) -> None:
    answer = await client.post(f"{TRAVELS}?arm=housing-loader", json=GOOD)
    assert only_entry(answer, "unknown-field")["pointer"] == "/arm"
    answer = await client.post(f"{TRAVELS}?format=npy", json=GOOD)
    assert only_entry(answer, "unusable-value")["pointer"] == "/format"


async def test_more_work_than_one_answer_may_take(client: httpx.AsyncClient) -> None:
    pose = {**AT_ORIGIN, "position": [3000, 0, 900]}
    travel = {"target": {"pose": pose}, "approach": {"distance": 50}}
    body = {"arm": "line-runner", "travels": [travel] * 1000}
    entry = only_entry(await sent(client, TRAVELS, body), "too-large", 422)
    assert entry["pointer"] == "/travels"
    assert "at most" in entry["way_out"]


async def test_work_that_was_not_foreseen_ends(
    client: httpx.AsyncClient, monkeypatch: pytest.MonkeyPatch
) -> None:
    body = asked(travels=[MOVE] * 100)
    assert (await sent(client, TRAVELS, body)).status_code == 200
    monkeypatch.setattr(limited, "LONGEST_S", 0.0)
    entry = only_entry(await sent(client, TRAVELS, body), "too-large", 422)
    assert entry["pointer"] == "/travels"
    assert "fewer than" in entry["way_out"]


async def test_an_endless_slide_of_a_redundant_arm_is_refused(client: httpx.AsyncClient) -> None:
    turn = {"joint": "revolute", "a": 200, "alpha": 70, "d": 50, "theta": 0}
    slide = {"joint": "prismatic", "a": 100, "alpha": 50, "d": 0, "theta": 0}
    endless = arm(rows=[slide, turn, turn, turn, turn, turn, turn])
    answer = await sent(client, TRAVELS, asked(arm=endless, travels=[TO_TARGET]))
    problem = refusal(answer, "unusable-value", 422)
    assert "travel" in problem["errors"][0]["way_out"]
    assert problem["errors"][0]["pointer"].startswith("/arm")


async def test_nobody_waits_for_long_travels(client: httpx.AsyncClient) -> None:
    """What is worked on is worked on beside the event loop, in pieces."""
    turn = {"form": "xyz-fixed", "values": [-74.763, -46.542, -95.258]}
    pose = {"position": [914.57, 340.65, 753.03], "orientation": turn}
    travel = {"target": {"pose": pose}, "approach": {"distance": 100}}
    body = {"arm": "housing-loader", "travels": [travel] * 300, "solutions": "all"}
    assert (await sent(client, TRAVELS, {**body, "travels": [travel]})).status_code == 200
    asking = asyncio.ensure_future(sent(client, TRAVELS, body))
    await asyncio.sleep(0)
    answered_before = 0
    while not asking.done() and answered_before < 50:
        assert (await client.get("/v1/ping")).status_code == 200
        answered_before += not asking.done()
    assert (await asking).status_code == 200
    # None would have been, had it been worked on in the loop's own thread.
    assert answered_before >= 3
