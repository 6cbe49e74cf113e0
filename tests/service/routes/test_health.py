"""Alive, ready, counted."""

import httpx
import pytest
from fastapi import FastAPI

from service.app import create_app
from service.settings import Settings

pytestmark = pytest.mark.anyio


async def test_a_ping_needs_no_database() -> None:
    bare = httpx.ASGITransport(create_app(Settings()))
    async with httpx.AsyncClient(transport=bare, base_url="http://armspan.test") as client:
        answer = await client.get("/v1/ping")
    assert answer.text == "1;1;0"


async def test_head_has_the_length_of_get(client: httpx.AsyncClient) -> None:
    answer = await client.head("/v1/ping")
    assert answer.headers["content-length"] == "5"


async def test_answers_are_counted_by_template(client: httpx.AsyncClient) -> None:
    for name in ("no-such-arm", "nor-this"):
        await client.get(f"/v1/arms/{name}")
    await client.get("/nowhere")
    text = (await client.get("/metrics")).text
    template = 'armspan_requests_total{method="GET",route="/v1/arms/{arm}",status="404"} 2.0'
    assert template in text
    assert 'route="none",status="404"} 1.0' in text
    assert 'armspan_request_seconds_count{method="GET",route="/v1/arms/{arm}"} 2.0' in text
    assert "no-such-arm" not in text


async def test_made_up_methods_make_no_series(client: httpx.AsyncClient) -> None:
    for number in range(3):
        await client.request(f"MADE{number}", "/v1/ping")
    text = (await client.get("/metrics")).text
    assert 'method="other",route="/v1/ping",status="405"} 3.0' in text
    assert "MADE" not in text


async def test_two_apps_do_not_add_up(app: FastAPI, client: httpx.AsyncClient) -> None:
    await client.get("/livez")
    other = create_app(Settings(database=":memory:"))
    assert b"/livez" in app.state.metrics.text()
    assert b"/livez" not in other.state.metrics.text()
