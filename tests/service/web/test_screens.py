"""The pages on screens: their status, policy and names; what they show is asked in a browser."""

import httpx
import pytest
from fastapi import FastAPI

from service.app import create_app
from service.settings import Settings

pytestmark = pytest.mark.anyio

ROW = {"joint": "revolute", "a": 100, "alpha": 0, "d": 0, "theta": 0}
ARM = {"name": "press-arm", "convention": "standard", "units": "mm-deg", "rows": [ROW]}


@pytest.fixture
async def stored(client: httpx.AsyncClient) -> httpx.AsyncClient:
    assert (await client.post("/v1/arms", json=ARM)).status_code == 201
    return client


@pytest.mark.parametrize("path", ["/", "/arms/press-arm", "/arms/press-arm/reach"])
async def test_pages(stored: httpx.AsyncClient, path: str) -> None:
    answer = await stored.get(path, params={"frame": "world", "anything": "may be theirs"})
    assert answer.status_code == 200
    assert answer.headers["content-type"] == "text/html; charset=utf-8"
    policy = answer.headers["content-security-policy"]
    assert policy.startswith("default-src 'none'; script-src 'self'; style-src 'self'; ")
    assert "frame-ancestors 'none'" in policy
    assert "unsafe" not in policy
    head = await stored.head(path)
    assert head.status_code == 200
    assert "data-bare" not in answer.text
    assert "<html data-bare " in (await stored.get(f"{path}?bare")).text


@pytest.mark.parametrize("page", ["/arms/press-arm", "/arms/press-arm/reach"])
async def test_a_stroke_at_the_end_leads_to_the_page(stored: httpx.AsyncClient, page: str) -> None:
    answer = await stored.get(f"{page}/?frame=a%26b&bare")
    assert answer.status_code == 308
    assert answer.headers["location"] == f"{page}?frame=a%26b&bare"


@pytest.mark.parametrize("page", ["/arms/reach", "/arms/reach/reach"])
async def test_an_arm_may_be_called_as_its_page(client: httpx.AsyncClient, page: str) -> None:
    assert (await client.get(f"{page}/")).headers["location"] == page


async def test_a_stroke_leads_to_no_other_host(client: httpx.AsyncClient) -> None:
    answer = await client.get("/arms/%5C%0D%0Aelse.example/")
    assert answer.headers["location"] == "/arms/%5C%0D%0Aelse.example"


@pytest.mark.parametrize("page", ["", "/reach"])
@pytest.mark.parametrize(
    ("name", "like"), [("pres-arm", "press-arm"), ("PRESS-ARM", None), ("zzz", None)]
)
async def test_a_wrong_name_is_a_page(
    stored: httpx.AsyncClient, name: str, like: str | None, page: str
) -> None:
    answer = await stored.get(f"/arms/{name}{page}")
    assert answer.status_code == 404
    assert answer.headers["content-type"] == "text/html; charset=utf-8"
    assert name in answer.text
    assert ('<a href="/arms/press-arm">' in answer.text) == (like is not None)


BROWSER = "text/html,application/xhtml+xml,application/xml;q=0.9,*/*;q=0.8"


@pytest.mark.parametrize("path", ["/arms", "/arms/press-arm/reach/more", "/board", "/%3Cb%3E"])
async def test_a_wrong_page_is_a_page_for_people(client: httpx.AsyncClient, path: str) -> None:
    answer = await client.get(path, headers={"Accept": BROWSER})
    assert answer.status_code == 404
    assert answer.headers["content-type"] == "text/html; charset=utf-8"
    assert answer.headers["content-security-policy"].startswith("default-src 'none'; ")
    assert "There is no page at" in answer.text
    assert "<b>" not in answer.text
    assert '<a href="/">' in answer.text
    assert "Accept" in answer.headers["vary"].split(", ")


@pytest.mark.parametrize(
    ("path", "accept"),
    [("/arms", "*/*"), ("/arms", "application/json"), ("/v1/armz", BROWSER), ("/v2", "")],
)
async def test_programs_are_told_of_a_wrong_address_as_of_all_else(
    client: httpx.AsyncClient, path: str, accept: str
) -> None:
    answer = await client.get(path, headers={"Accept": accept})
    assert answer.status_code == 404
    assert answer.headers["content-type"] == "application/problem+json"
    assert answer.json()["code"] == "unknown-path"
    assert answer.headers["vary"] == "Accept"
    posted = await client.post(path, headers={"Accept": BROWSER})
    assert posted.headers["content-type"] == "application/problem+json"


async def test_a_wrong_name_is_never_markup(stored: httpx.AsyncClient) -> None:
    answer = await stored.get("/arms/%3Cimg src=x onerror=alert(1)%3E%7B%7Bshell.name%7D%7D")
    assert answer.status_code == 404
    assert "&lt;img src=x onerror=alert(1)&gt;{{shell.name}}" in answer.text
    assert "<img" not in answer.text
    long = await stored.get(f"/arms/{'z' * 4000}")
    assert long.status_code == 404
    assert len(long.content) < 5000


@pytest.mark.parametrize("name", ["board.html", "__init__.py", "..%2fdocs.js", "nothing.js", "x"])
async def test_no_other_file_is_given_out(client: httpx.AsyncClient, name: str) -> None:
    assert (await client.get(f"/pages/{name}")).status_code == 404


async def test_parts_take_no_parameters(client: httpx.AsyncClient) -> None:
    assert (await client.get("/pages/pages.css")).status_code == 200
    assert (await client.get("/pages/pages.css?x=1")).status_code == 422


@pytest.fixture
def framed_app() -> FastAPI:
    return create_app(Settings(database=":memory:", frame_ancestors="'self' https://hmi.plant"))


async def test_the_operator_says_who_may_frame_the_pages(framed_app: FastAPI) -> None:
    async with framed_app.router.lifespan_context(framed_app):
        transport = httpx.ASGITransport(framed_app)
        async with httpx.AsyncClient(transport=transport, base_url="http://armspan.test") as asking:
            for path in ("/", "/docs", "/docs/problems", "/docs/controllers", "/arms/none"):
                policy = (await asking.get(path)).headers["content-security-policy"]
                assert policy.endswith("frame-ancestors 'self' https://hmi.plant")
