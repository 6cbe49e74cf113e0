"""The places that the page tells, against lines as they are answered."""

import re

import httpx
import pytest

from service.live.samples import DROPS, REASONS
from service.web.live_lines import live_section
from tests.service.live.made import ARM

pytestmark = pytest.mark.anyio


def told_places(name: str) -> dict[str, tuple[int, int]]:
    found = re.findall(rf'<tr id="{name}-(\w+)"><td>\1</td><td>(\d+)</td><td>(\d+)', live_section())
    return {key: (int(first), int(width)) for key, first, width in found}


async def test_each_field_stands_where_the_page_says(client: httpx.AsyncClient) -> None:
    await client.post("/v1/arms", json=ARM)
    said = {"q": "171,0", "format": "txt"}
    refused = (await client.post("/v1/arms/two/joints", params=said)).text
    await client.post("/v1/arms/two/joints", params={**said, "q": "1,0", "period_ms": "600000"})
    live = (await client.get("/v1/arms/two/live", params={"format": "txt"})).text
    flat = (await client.get("/v1/arms/two/live", params={"format": "flat"})).json()

    def field(line: str, name: str, key: str) -> str:
        first, width = told_places(name)[key]
        assert line[first + width - 1] in ";\r"
        return line[first - 1 : first - 1 + width].rstrip()

    assert field(refused, "joints-place", "reason") == "outside-travel"
    assert field(refused, "joints-place", "accepted") == "0"
    assert field(refused, "joints-place", "quality") == "uncertain"
    assert field(live, "live-place", "quality") == "good"
    assert field(live, "live-place", "age_ms").isdigit()
    for key in ("revision", "digest"):
        assert field(live, "live-place", key) == str(flat[key])
        assert field(refused, "joints-place", key) == str(flat[key])
    assert len(told_places("live-place")) == 4
    assert len(told_places("joints-place")) == 5


def test_each_reason_is_told() -> None:
    for reason in (*REASONS, *DROPS):
        assert reason in live_section()
