"""Every way a controller's query cannot be used, and bodies that cannot even be read.

Left out: refusals as flat lines (test_controller).
"""

from typing import Any

import httpx
import pytest
from fastapi import FastAPI

from service.problems import KINDS
from service.settings import Settings
from tests.contract.refusals import ARM, Body, arm, only_entry

pytestmark = pytest.mark.anyio

# query: (code, pointer, value, words of the way out)
# fmt: off
QUERIES: dict[str, tuple[str, str, Any, str]] = {
    "q=0": ("wrong-joint-count", "/q", 1, "give 2 values"),
    "": ("wrong-joint-count", "/q", 0, "give 2 values"),
    "q1=0&q2=0&q3=0": ("wrong-joint-count", "/q", 3, "give 2 values"),
    "q=a,0": ("unparseable", "/q", "a", "write it like"),
    "q=0,": ("unparseable", "/q", "", "leave it out"),
    "q1=0&q2=1,5": ("unparseable", "/q2", "1,5", "decimal point"),
    "q=nan,0": ("not-finite", "/q", "nan", "finite"),
    "q1=0&q2=inf": ("not-finite", "/q2", "inf", "finite"),
    "q=1e999,0": ("not-finite", "/q", "1e999", "finite"),
    "q=0,1e308": ("out-of-range", "/q", 1e308, "units"),
    "q1=0&q2=1e308": ("out-of-range", "/q2", 1e308, "units"),
    "q=0,0&q1=0": ("unusable-value", "/q1", "0", "not both"),
    "q1=0&q3=0": ("missing-field", "/q2", None, "without a gap"),
    "q=0,0&q=1,1": ("unusable-value", "/q", "1,1", "leave one"),
    "q=0,0&tool=saw": ("unknown-tool", "/tool", "saw", "gripper (3), pen, flange"),
    "q=0,0&tool=4": ("unknown-tool", "/tool", 4, "gripper (3), pen, flange"),
    "q=0,0&frame=table": ("unknown-frame", "/frame", "table", "base, world, tray (5)"),
    "q=0,0&frame=6": ("unknown-frame", "/frame", 6, "base, world, tray (5)"),
    "q=0,0&form=xyz": ("unusable-value", "/form", "xyz", "xyz-fixed"),
    "q=0,0&units=cm": ("unusable-value", "/units", "cm", "mm-deg, m-rad, in-deg"),
    "q=0,0&format=xml": ("unusable-value", "/format", "xml", "json, flat, txt, csv"),
    "q=0,0&scale=0": ("unusable-value", "/scale", "0", "1 to 1000000"),
    "q=0,0&scale=1000001": ("unusable-value", "/scale", "1000001", "1 to 1000000"),
    "q=0,0&scale=1e3": ("unparseable", "/scale", "1e3", "write it like"),
    "q=0,1.5&scale=10": ("unparseable", "/q", "1.5", "write it like 12"),
    "q1=0&q2=5.0&scale=10": ("unparseable", "/q2", "5.0", "write it like 12"),
    "q=0,0&tz=0.5&scale=10": ("unparseable", "/tz", "0.5", "write it like 12"),
    "q=0,0&task=drill": ("unusable-value", "/task", "drill", "pose, position, orientation"),
    "q=0,0&task=vx,q": ("unusable-value", "/task", "q", "vx vy vz"),
    "q=0,0&revision=2": ("unknown-revision", "/revision", 2, "/v1/arms/two-turns/revisions"),
    "q=0,0&revision=one": ("unparseable", "/revision", "one", "write it like"),
    "q=0,0&tag=1.5": ("unparseable", "/tag", "1.5", "write it like"),
    "q=0,0&tag=1234567890123456789": ("unusable-value", "/tag", "1234567890123456789", "18 digits"),
    "q=0,0&errors=yes": ("unusable-value", "/errors", "yes", "errors=inline"),
    "q=0,0&tx=1&tool=pen": ("unusable-value", "/tool", "pen", "not both"),
    "q=0,0&tx=1e308": ("out-of-range", "/tx", 1e308, "units"),
    "q=0,0&tr2=1e308": ("out-of-range", "/tr2", 1e308, "units"),
    "q=0,0&tz=nan": ("not-finite", "/tz", "nan", "finite"),
    "q=0,0&farme=base": ("unknown-field", "/farme", "base", 'did you mean "frame"?'),
}
# fmt: on


@pytest.mark.parametrize("what", ["pose", "jacobian"])
@pytest.mark.parametrize("query", QUERIES)
async def test_a_query_that_cannot_be_used(
    client: httpx.AsyncClient, query: str, what: str
) -> None:
    code, pointer, value, way_out = QUERIES[query]
    await client.post("/v1/arms", json=ARM)
    answer = await client.get(f"/v1/arms/two-turns/{what}?{query}")
    entry = only_entry(answer, code)
    assert (entry["pointer"], entry["in"]) == (pointer, "query")
    assert entry["value"] == value
    assert way_out in entry["way_out"]


async def test_a_tool_that_is_not_said(client: httpx.AsyncClient) -> None:
    given = arm(default_tool=None)
    await client.post("/v1/arms", json=given)
    body = {"arm": given, "joints": [[0, 0]]}
    answers = [
        (await client.post("/v1/poses", json=body), "body"),
        (await client.post("/v1/jacobians", json=body), "body"),
        (await client.get("/v1/arms/two-turns/pose?q=0,0"), "query"),
    ]
    for answer, place in answers:
        entry = only_entry(answer, "tool-not-said")
        assert (entry["pointer"], entry["in"], entry["value"]) == ("/tool", place, None)
        assert entry["way_out"] == "say one of: gripper, pen, flange"


@pytest.mark.parametrize("path", ["/v1/arms", "/v1/poses", "/v1/jacobians"])
async def test_a_body_that_cannot_be_read(client: httpx.AsyncClient, path: str) -> None:
    typed = {"content-type": "application/json"}
    for content, headers, code, pointer in [
        (b"{}", {"content-type": "text/html"}, "wrong-media-type", "/content-type"),
        (b"{}", {}, "wrong-media-type", "/content-type"),
        (b'{"arm": ', typed, "unparseable", ""),
        (b"", typed, "unparseable", ""),
        (b"\xff\xfe", typed, "unparseable", ""),
        (b'{"name": "a", "name": "b"}', typed, "duplicate-key", "/name"),
        (b'{"rows": [{}, {"a": 1, "d": 2, "a": 1}]}', typed, "duplicate-key", "/rows/1/a"),
    ]:
        answer = await client.post(path, content=content, headers=headers)
        problem: Body = answer.json()
        assert (problem["code"], problem["number"]) == (code, 100)
        assert answer.status_code == KINDS[code].status
        assert problem["errors"][0]["pointer"] == pointer
        assert problem["errors"][0]["say"]


async def test_a_body_of_a_hundred_megabytes(
    app: FastAPI, client: httpx.AsyncClient, monkeypatch: pytest.MonkeyPatch
) -> None:
    content = b" " * 100_000_000
    for path in ("/v1/arms", "/v1/poses", "/v1/jacobians", "/v1/tables/conversions"):
        headers = {"content-type": "application/json"}
        entry = only_entry(await client.post(path, content=content, headers=headers), "too-large")
        assert (entry["value"], entry["way_out"]) == (100_000_000, "send it in several requests")
    monkeypatch.setattr(app.state, "settings", Settings(database=":memory:", body_limit=100))
    answer = await client.post("/v1/poses", json={"arm": ARM, "joints": [[0, 0]]})
    assert only_entry(answer, "too-large")["say"] == "the body is larger than 100 bytes"


def test_the_list_is_whole() -> None:
    assert len(QUERIES) == 39
