"""Routes that hand their request straight on: another method is refused as anywhere."""

import re

import httpx
import pytest
from fastapi import FastAPI

from service.routes.direct import DirectRoute
from service.settings import Settings

pytestmark = pytest.mark.anyio
VERBS = ("GET", "HEAD", "POST", "PUT", "PATCH", "DELETE", "OPTIONS")


@pytest.fixture
def settings() -> Settings:
    """Settings of a service with the demonstration cell."""
    return Settings(database=":memory:", demo=True)


def direct(app: FastAPI) -> dict[str, set[str]]:
    """Return the methods of each address that has direct routes."""
    found: dict[str, set[str]] = {}
    for route in app.routes:
        if isinstance(route, DirectRoute):
            found.setdefault(route.path, set()).update(route.methods or ())
    return found


async def test_the_addresses_of_postures_and_arms_are_direct(app: FastAPI) -> None:
    found = direct(app)
    assert {"/v1/arms/{arm}/pose", "/v1/arms/{arm}/jacobian"} <= set(found)
    assert {"/v1/poses", "/v1/jacobians", "/v1/arms"} <= set(found)


async def test_another_method_is_refused_and_told_what_there_is(
    app: FastAPI, client: httpx.AsyncClient
) -> None:
    for path, methods in direct(app).items():
        address = re.sub(r"\{\w+\}", "1", path)
        for verb in set(VERBS) - methods:
            answer = await client.request(verb, address)
            assert answer.status_code == 405, (verb, path)
            allowed = set(re.split(r", *", answer.headers["allow"]))
            assert allowed == methods, (verb, path)
            if verb != "HEAD":
                told = answer.json()
                assert (told["code"], told["status"]) == ("method-not-allowed", 405)
                assert answer.headers["content-type"] == "application/problem+json"


async def test_head_is_get_without_its_body(client: httpx.AsyncClient) -> None:
    path = "/v1/arms/wash-arm/pose?q=0,0,0,0,0,0&tool=0&format=txt"
    whole, head = await client.get(path), await client.head(path)
    assert (whole.status_code, head.status_code) == (200, 200)
    assert head.headers["content-type"] == whole.headers["content-type"]
    assert abs(int(head.headers["content-length"]) - len(whole.content)) <= 1
    assert head.headers["cache-control"] == "no-store"


async def test_what_a_handler_refuses_is_answered_as_ever(client: httpx.AsyncClient) -> None:
    answer = await client.get("/v1/arms/no-such-arm/pose?q=1")
    assert (answer.status_code, answer.json()["code"]) == (404, "unknown-arm")
    assert answer.headers["x-request-id"]
    answer = await client.get("/v1/arms/wash-arm/pose?q=1&colour=red")
    assert (answer.status_code, answer.json()["code"]) == (422, "unknown-field")
