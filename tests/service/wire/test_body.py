"""The body: every way in which it can be wrong, at the limits and on the way."""

import asyncio
import json
import math
from collections.abc import AsyncIterator

import httpx
import pytest
from fastapi import FastAPI
from hypothesis import given
from hypothesis import strategies as st
from starlette.requests import ClientDisconnect, Request

from service.errors import DuplicateKey, RequestTimeout, ServiceError, TooLarge, Unparseable
from service.settings import Settings
from service.wire.body import parse_json, read_json

pytestmark = pytest.mark.anyio
JSON = {"content-type": "application/json"}


def incoming(
    *chunks: bytes | float, headers: dict[str, str] | None = None, **settings: object
) -> Request:
    """A request whose body comes in ``chunks``; a number is a wait, the end may be missing."""
    app = FastAPI()
    app.state.settings = Settings(**settings)  # type: ignore[arg-type]
    left = list(chunks)

    async def receive() -> dict[str, object]:
        while left and isinstance(left[0], float):
            await asyncio.sleep(left.pop(0))  # type: ignore[arg-type]
        if not left:
            return {"type": "http.disconnect"}
        chunk = left.pop(0)
        return {"type": "http.request", "body": chunk, "more_body": chunk != b""}

    raw = [(k.encode(), v.encode()) for k, v in (JSON if headers is None else headers).items()]
    scope = {"type": "http", "method": "POST", "headers": raw, "app": app}
    return Request(scope, receive)  # type: ignore[arg-type]


async def test_a_body_is_read_and_kept_for_pointers() -> None:
    request = incoming(b'{"a": [1', b", 2.5]}", b"")
    assert await read_json(request) == {"a": [1, 2.5]}
    assert request.state.json_body == {"a": [1, 2.5]}


async def test_an_empty_body_may_be_allowed() -> None:
    assert await read_json(incoming(b"", headers={}), empty_ok=True) is None
    with pytest.raises(Unparseable):
        await read_json(incoming(b"", headers={"content-length": "0"}))


@pytest.mark.parametrize(
    "said", ["application/json", "APPLICATION/JSON; charset=utf-8", "application/json;v=1"]
)
async def test_parameters_of_the_type_do_not_matter(said: str) -> None:
    request = incoming(b"[]", b"", headers={"content-type": said, "content-length": "2"})
    assert await read_json(request) == []


@pytest.mark.parametrize("said", [None, "text/plain", "application/jsonx", ""])
async def test_another_type_is_refused(said: str | None) -> None:
    headers = {"content-length": "2"} | ({} if said is None else {"content-type": said})
    with pytest.raises(ServiceError) as caught:
        await read_json(incoming(b"[]", b"", headers=headers))
    assert (caught.value.code, caught.value.location) == ("wrong-media-type", "header")


async def test_a_length_over_the_limit_is_refused_before_reading() -> None:
    request = incoming(headers=JSON | {"content-length": "101"}, body_limit=100)
    with pytest.raises(TooLarge):
        await read_json(request)


async def test_chunks_are_counted() -> None:
    chunked = JSON | {"transfer-encoding": "chunked"}
    within = incoming(b"[" + b" " * 98, b"]", b"", headers=chunked, body_limit=100)
    assert await read_json(within) == []
    beyond = incoming(b"[" + b" " * 98, b" ]", b"", headers=chunked, body_limit=100)
    with pytest.raises(TooLarge):
        await read_json(beyond)


async def test_a_stalled_body_times_out() -> None:
    with pytest.raises(RequestTimeout, match="after 1 bytes"):
        await read_json(incoming(b"[", 5.0, b"]", b"", body_timeout_s=0.05))


async def test_a_body_that_drips_times_out() -> None:
    drips: list[bytes | float] = [part for _ in range(50) for part in (0.03, b" ")]
    with pytest.raises(RequestTimeout):
        await read_json(incoming(*drips, b"[]", b"", body_timeout_s=0.1))


async def test_a_body_that_ends_early_is_a_client_that_left() -> None:
    with pytest.raises(ClientDisconnect):
        await read_json(incoming(b"[1,", headers=JSON | {"content-length": "100"}))


@pytest.mark.parametrize(
    ("raw", "say"),
    [
        (b"", "empty"),
        (b"{", "line 1, column 2"),
        (b'{"a":\n 1,}', "line 2"),
        (b"\xff", "not UTF-8 at byte 0"),
        (b"\xef\xbb\xbf{}", "byte order mark"),
        (b"[" * 100_000, "nested too deeply"),
        (b"[" * 100_000 + b"]" * 100_000, "nested too deeply"),
        (b"1" * 5000, "too many digits"),
        (rb'"\ud800"', "surrogate"),
        (rb'{"\udc00": 1}', "surrogate"),
        (b"'a'", "line 1"),
        (b"{} {}", "line 1"),
    ],
)
def test_what_cannot_be_read(raw: bytes, say: str) -> None:
    with pytest.raises(Unparseable, match=say) as caught:
        parse_json(raw)
    assert caught.value.code == "unparseable"


@pytest.mark.parametrize("depth", [200, 300, 500])
def test_what_is_nested_within_reason_is_read(depth: int) -> None:
    raw = b"[" * depth + b"]" * depth
    assert parse_json(raw) == json.loads(raw)


def test_numbers_beyond_doubles_pass_to_the_check_of_the_field() -> None:
    assert parse_json(b"[1e999, -Infinity]") == [math.inf, -math.inf]
    assert math.isnan(parse_json(b"NaN"))  # type: ignore[arg-type]


def test_a_whole_surrogate_pair_is_a_character() -> None:
    assert parse_json(rb'"\ud83e\uddbe"') == "\U0001f9be"


@pytest.mark.parametrize(
    ("raw", "where"),
    [
        (b'{"a": 1, "a": 1}', ("a",)),
        (b'{"b": [0, {"c": {"d": 1, "e": 2, "d": 3}}]}', ("b", 1, "c", "d")),
        (b'{"a": {"x": 1, "x": 2}, "a": 3}', ("x",)),
    ],
)
def test_a_key_that_stands_twice(raw: bytes, where: tuple[str | int, ...]) -> None:
    with pytest.raises(DuplicateKey) as caught:
        parse_json(raw)
    assert caught.value.where == where


LEAVES = st.none() | st.booleans() | st.integers() | st.floats(allow_nan=False) | st.text()
DOCUMENTS = st.recursive(
    LEAVES, lambda inner: st.lists(inner) | st.dictionaries(st.text(), inner), max_leaves=20
)


@given(DOCUMENTS, st.booleans(), st.sampled_from([None, 1]))
def test_any_document_is_read_as_the_standard_library_reads_it(
    document: object, ascii_only: bool, indent: int | None
) -> None:
    text = json.dumps(document, ensure_ascii=ascii_only, indent=indent)
    try:
        raw = text.encode()
    except UnicodeEncodeError:  # half of a surrogate pair
        raw = json.dumps(document).encode()
        with pytest.raises(Unparseable):
            parse_json(raw)
        return
    # As text: 1, 1.0 and true are equal, and so are 0.0 and -0.0.
    assert repr(parse_json(raw)) == repr(json.loads(raw))


@given(st.dictionaries(st.text(), DOCUMENTS, min_size=1), DOCUMENTS, st.data())
def test_any_key_that_stands_twice_is_found(
    document: dict[str, object], again: object, data: st.DataObject
) -> None:
    twice = data.draw(st.sampled_from(sorted(document)))
    parts = [*document.items(), (twice, again)]
    raw = ",".join(f"{json.dumps(key)}:{json.dumps(value)}" for key, value in parts)
    with pytest.raises((DuplicateKey, Unparseable)) as caught:
        parse_json(f'[{{"b": {{{raw}}}}}]'.encode())
    if isinstance(caught.value, DuplicateKey):
        assert caught.value.where == (0, "b", twice)
    else:
        assert "surrogate" in str(caught.value)


async def test_refusals_of_bodies_over_http(client: httpx.AsyncClient) -> None:
    async def halves() -> AsyncIterator[bytes]:
        yield b'{"rows": ['
        yield b'{"a": 1, "a": 2}]}'

    answer = await client.post("/v1/arms", content=halves(), headers=JSON)
    assert (answer.status_code, answer.json()["code"]) == (400, "duplicate-key")
    assert answer.json()["errors"][0]["pointer"] == "/rows/0/a"
    deep = await client.post("/v1/arms", content=b"[" * 200_000, headers=JSON)
    assert (deep.status_code, deep.json()["number"]) == (400, 100)
    body = {"name": "x", "rows": [{"a": math.inf}]}
    infinite = await client.post("/v1/arms", content=json.dumps(body), headers=JSON)
    entries = infinite.json()["errors"]
    assert ("/rows/0/a", "Infinity") in [(entry["pointer"], entry["value"]) for entry in entries]
