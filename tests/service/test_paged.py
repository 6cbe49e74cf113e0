"""A long list goes out page by page: whole, and no further than somebody reads."""

import asyncio
from typing import Any

import pytest

from service.bulk.paged import PagedAnswer, Part

pytestmark = pytest.mark.anyio


class Connection:
    """What the server gives an answer; the reader leaves after so many parts."""

    def __init__(self, leaves_after: int = 10**9) -> None:
        self.sent: list[dict[str, Any]] = []
        self._left = asyncio.Event()
        self._leaves_after = leaves_after

    async def receive(self) -> dict[str, Any]:
        await self._left.wait()
        return {"type": "http.disconnect"}

    async def send(self, message: Any) -> None:
        self.sent.append(message)
        if len(self.sent) > self._leaves_after:
            self._left.set()
            await asyncio.sleep(0)


def page(read: list[str]) -> Any:
    def after(last: str) -> Part:
        read.append(last)
        number = int(last) + 1
        return Part(b"%d;" % number, None if number == 50 else str(number))

    return after


async def test_all_pages_are_sent_in_their_order() -> None:
    connection, read = Connection(), list[str]()
    answer = PagedAnswer(Part(b"head;0;", "0"), page(read), media_type="text/csv")
    await answer({"type": "http"}, connection.receive, connection.send)
    start, *parts = connection.sent
    assert b"content-length" not in dict(start["headers"])
    assert b"".join(part["body"] for part in parts).split(b";")[:-1] == [
        *(b"head", *(b"%d" % number for number in range(51))),
    ]
    assert [part["more_body"] for part in parts] == [True] * 50 + [False]
    assert read == [str(number) for number in range(50)]


async def test_nothing_is_read_for_who_has_left() -> None:
    connection, read = Connection(leaves_after=3), list[str]()
    answer = PagedAnswer(Part(b"0;", "0"), page(read), media_type="text/csv")
    await answer({"type": "http"}, connection.receive, connection.send)
    assert len(read) <= 4


async def test_one_page_is_a_whole_answer() -> None:
    connection, read = Connection(), list[str]()
    answer = PagedAnswer(Part(b"all", None), page(read), media_type="text/csv")
    await answer({"type": "http"}, connection.receive, connection.send)
    assert [part["body"] for part in connection.sent[1:]] == [b"all"]
    assert read == []
