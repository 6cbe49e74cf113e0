"""The body of a request, read within its limits: type, size, time, JSON that says one thing only.

Left out: what the JSON means (models check that) and tables of binary numbers.
"""

import asyncio
import gc
import json
import re
from collections.abc import Sequence
from io import BytesIO
from time import monotonic
from typing import Any

import orjson
from starlette.requests import ClientDisconnect, Request

from service.errors import DuplicateKey, RequestTimeout, TooLarge, Unparseable, WrongMediaType
from service.settings import Settings

MOST_PARSED = 1_000_000
"""Bytes of a body that is parsed in one go, which holds up everybody else, for 0.1 s if it is all
keys. Documents have some kilobytes; what may be longer has ways of its own (bulk)."""

# A body may take its stall limit and then as long as a slow plant link needs: whoever sends one
# byte at a time would otherwise hold a connection for days.
_SLOWEST_BYTES_PER_S = 16 * 1024
# Of an integer that does not fit 64 bits, some 19 digits, the quick parser makes a double.
_ZEROS_FOR_DIGITS = bytes.maketrans(b"123456789", b"0" * 9)
_LONG = b"0" * 19
# An escaped half of a surrogate pair; alone it is no character and cannot be printed again.
_SURROGATE = re.compile(rb"\\u[dD][89a-fA-F]")


async def read_json(request: Request, *, empty_ok: bool = False) -> object:
    """Return the parsed JSON body of ``request``; an empty one is None if ``empty_ok``.

    ``NaN`` and ``Infinity`` pass here as floats, and ``1e999`` as infinity, so that the check of
    the field refuses them with a pointer. The body is kept as ``request.state.json_body``: the
    handler of errors checks pointers against it.

    Raises
    ------
    WrongMediaType : a body that is not ``application/json``.
    TooLarge : more bytes than ``MOST_PARSED`` or ``settings.body_limit``, said or counted.
    RequestTimeout : nothing arrived for ``settings.body_timeout_s``.
    Unparseable : not UTF-8, no JSON, nested too deeply, empty; says the position.
    DuplicateKey : a key twice in one object, at any level.
    """
    raw = await read_bytes(request, "application/json", most=MOST_PARSED)
    if not raw and empty_ok:
        return None
    body = parse_json(raw)
    request.state.json_body = body
    return body


async def read_bytes(request: Request, *media_types: str, most: int | None = None) -> bytes:
    """Return the raw body, checked for type and size and read within the time allowed.

    Parameters
    ----------
    most : bytes at most, where that is less than ``settings.body_limit``.

    An empty body may be of any type; which one a request says is ``media_type_of``'s to tell.
    """
    settings: Settings = request.app.state.settings
    length = _length_said(request)
    has_body = length != 0 if length is not None else "transfer-encoding" in request.headers
    if has_body:
        _check_media_type(request.headers.get("content-type"), media_types)
    limit = settings.body_limit if most is None else min(most, settings.body_limit)
    if length is not None and length > limit:
        raise _too_large(limit, length)
    begun, stall_s = monotonic(), settings.body_timeout_s
    # Gathered while more is under way, in one place that grows: joined at the end, ten million
    # bytes would be copied once more, and stand in memory twice.
    gathered, received, more = BytesIO(), 0, True
    while more:
        allowed = begun + stall_s + received / _SLOWEST_BYTES_PER_S - monotonic()
        chunk, more = await _chunk(request, min(stall_s, allowed), received)
        gathered.write(chunk)
        received += len(chunk)
        if received > limit:
            raise _too_large(limit, None)
    if length is not None and received < length:
        # The sender has gone before the end; nobody is left to read an answer.
        raise ClientDisconnect
    return gathered.getvalue()


def media_type_of(request: Request) -> str:
    """Return the media type a request says its body has, without parameters; may be empty.

    Examples
    --------
    >>> from starlette.requests import Request
    >>> said = (b"content-type", b"Text/CSV; header=present")
    >>> media_type_of(Request({"type": "http", "headers": [said]}))
    'text/csv'
    """
    return _plain(request.headers.get("content-type", ""))


def parse_json(raw: bytes) -> object:
    """Return what ``raw`` says, if it is JSON that can be read in one way only.

    Examples
    --------
    >>> parse_json(b'{"a": [1, 2.5]}')
    {'a': [1, 2.5]}
    >>> parse_json(b'{"rows": [{"a": 1, "a": 2}]}')
    Traceback (most recent call last):
    service.errors.DuplicateKey: the key "a" stands twice in one object
    """
    if not raw:
        raise Unparseable("the body is empty", way_out="send a JSON object")
    plain = _plain_document(raw)
    if plain is not None:
        return plain
    text = _text(raw)
    try:
        return _decoded(raw, text, _STRICT)
    except _Twice:
        # Where it is can only be told when the whole has been read.
        twice: list[tuple[dict[str, Any], str]] = []

        def object_of(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
            found = dict(pairs)
            if len(found) != len(pairs):
                twice.append((found, _first_repeated(pairs)))
            return found

        body = _decoded(raw, text, json.JSONDecoder(object_pairs_hook=object_of))
        node, key = twice[0]
        where = (*(_path_to(node, body) or ()), key)
        raise DuplicateKey(
            f'the key "{key}" stands twice in one object', where=where, way_out="leave one of them"
        ) from None


def _plain_document(raw: bytes) -> object:
    """Return what ``raw`` says if it is plainly right, and None where that takes a closer look.

    The quick parser keeps the last of two equal keys. Then fewer texts come out than went in.
    """
    # An escaped quote would be counted like one that ends a text.
    if b"\\" in raw or _LONG in raw.translate(_ZEROS_FOR_DIGITS):
        return None
    # A parser makes no cycles, and to look for some amid a million small lists takes four times
    # as long as to read them, while everybody else waits for the interpreter.
    looks_for_cycles = len(raw) > MOST_PARSED and gc.isenabled()
    if looks_for_cycles:
        gc.disable()
    try:
        document = orjson.loads(raw)
        is_whole = raw.count(b'"') == orjson.dumps(document).count(b'"')
    except (orjson.JSONDecodeError, orjson.JSONEncodeError):
        return None  # the latter of what is nested more deeply than it prints
    finally:
        if looks_for_cycles:
            gc.enable()
    return document if is_whole else None


class _Twice(Exception):
    """A key stands twice in one object."""


def _object_of(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    found = dict(pairs)
    if len(found) != len(pairs):
        raise _Twice
    return found


_STRICT = json.JSONDecoder(object_pairs_hook=_object_of)


def _decoded(raw: bytes, text: str, decoder: json.JSONDecoder) -> object:
    try:
        body: object = decoder.decode(text)
        if b"\\u" in raw and _SURROGATE.search(raw):
            json.dumps(body, ensure_ascii=False).encode("utf-8")
    except json.JSONDecodeError as error:
        say = f"not JSON at line {error.lineno}, column {error.colno}: {error.msg}"
        raise Unparseable(
            say, value=text[error.pos : error.pos + 20], way_out="mend the JSON at this place"
        ) from None
    except RecursionError:
        raise Unparseable(
            "not JSON that can be read: nested too deeply", way_out="send fewer levels"
        ) from None
    except UnicodeEncodeError:
        raise Unparseable(
            "a string holds half of a surrogate pair, which is no character",
            way_out="send the character itself, in UTF-8",
        ) from None
    except ValueError:
        # The interpreter refuses integers of more than some thousand digits.
        raise Unparseable("an integer has too many digits", way_out="write it as 1e99") from None
    return body


def _length_said(request: Request) -> int | None:
    said = request.headers.get("content-length", "")
    return int(said) if said.isascii() and said.isdigit() else None


def _check_media_type(said: str | None, wanted: Sequence[str]) -> None:
    if said is not None and _plain(said) in wanted:
        return
    raise WrongMediaType(
        "the body has no content type" if said is None else "the body is of the wrong content type",
        where=("content-type",),
        location="header",
        value=said,
        way_out=f"send Content-Type: {' or '.join(wanted)}",
    )


def _plain(said: str) -> str:
    return said.split(";", 1)[0].strip().lower()


def _too_large(limit: int, length: int | None) -> TooLarge:
    return TooLarge(
        f"the body is larger than {limit} bytes",
        value=length,
        way_out="send it in several requests",
    )


async def _chunk(request: Request, allowed_s: float, received: int) -> tuple[bytes, bool]:
    """Return what comes next of a body, and whether more will follow."""
    try:
        async with asyncio.timeout(allowed_s):
            message = await request.receive()
    except TimeoutError:
        say = f"the body stopped after {received} bytes"
        raise RequestTimeout(say, way_out="send the request again") from None
    if message["type"] == "http.disconnect":
        raise ClientDisconnect
    return message.get("body", b""), message.get("more_body", False)


def _text(raw: bytes) -> str:
    try:
        text = raw.decode("utf-8")
    except UnicodeDecodeError as error:
        raise Unparseable(f"not UTF-8 at byte {error.start}", way_out="send UTF-8") from None
    if text.startswith("\ufeff"):
        raise Unparseable("the body begins with a byte order mark", way_out="send UTF-8 without it")
    return text


def _first_repeated(pairs: list[tuple[str, Any]]) -> str:
    seen: set[str] = set()
    for key, _ in pairs:
        if key in seen:
            break
        seen.add(key)
    return key


def _path_to(wanted: object, body: object) -> tuple[str | int, ...] | None:
    """Return the path of keys and indices to the very object ``wanted``, None if it is gone."""
    open_ends: list[tuple[tuple[str | int, ...], object]] = [((), body)]
    while open_ends:
        path, node = open_ends.pop()
        if node is wanted:
            return path
        if isinstance(node, dict):
            open_ends += [((*path, key), item) for key, item in node.items()]
        elif isinstance(node, list):
            open_ends += [((*path, index), item) for index, item in enumerate(node)]
    return None
