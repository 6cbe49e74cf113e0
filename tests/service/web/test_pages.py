"""The pages: everything from this process, nothing inline, every code with an anchor."""

import re

import httpx
import pytest

from service.cautions import CAUTIONS
from service.problems import ANSWERS, KINDS

pytestmark = pytest.mark.anyio
PAGES = ["/docs", "/docs/problems", "/docs/controllers"]


@pytest.mark.parametrize("page", PAGES)
async def test_a_page_takes_nothing_from_elsewhere(client: httpx.AsyncClient, page: str) -> None:
    answer = await client.get(page)
    assert answer.headers["content-type"] == "text/html; charset=utf-8"
    links = re.findall(r'(?:src|href)="([^"]*)"', answer.text)
    assert len(links) >= 2
    for link in links:
        assert link.startswith(("/", "#"))
        assert not link.startswith("//")
        assert (await client.get(link)).status_code == 200
    assert re.findall(r"<script>|<style|style=|\son\w+=", answer.text) == []


@pytest.mark.parametrize("page", PAGES)
async def test_a_page_bears_the_cautions(client: httpx.AsyncClient, page: str) -> None:
    text = (await client.get(page)).text.replace("&quot;", '"')
    assert [line for line in CAUTIONS if line not in text] == []
    assert len(CAUTIONS) == 7


async def test_every_code_has_its_anchor(client: httpx.AsyncClient) -> None:
    text = (await client.get("/docs/problems")).text
    anchors = re.findall(r'<tr id="([^"]*)"', text)
    assert sorted(anchors) == sorted([*KINDS, *(f"code-{number}" for number in ANSWERS)])


async def test_the_script_is_served_as_a_script_and_kept(client: httpx.AsyncClient) -> None:
    first = await client.get("/docs/files/swagger-ui-bundle.js")
    assert first.headers["content-type"].startswith("text/javascript")
    assert len(first.content) > 100_000
    again = await client.get(
        "/docs/files/swagger-ui-bundle.js", headers={"if-none-match": first.headers["etag"]}
    )
    assert (again.status_code, again.content) == (304, b"")


@pytest.mark.parametrize("name", ["nothing.js", "__init__.py", "..%2fpages.py", "docs.html"])
async def test_no_other_file_is_served(client: httpx.AsyncClient, name: str) -> None:
    assert (await client.get(f"/docs/files/{name}")).status_code == 404
