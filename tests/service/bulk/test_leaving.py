"""Work for a client that may leave: answered, failed, or given up."""

import asyncio
from collections.abc import Awaitable, Callable
from typing import Any

import pytest
from starlette.requests import ClientDisconnect, Request

from service.bulk.leaving import unless_left

pytestmark = pytest.mark.anyio


def asked(receive: Callable[[], Awaitable[Any]]) -> Request:
    return Request({"type": "http", "method": "POST", "path": "/", "headers": []}, receive)


async def stays() -> Any:
    await asyncio.Event().wait()


async def leaves() -> Any:
    return {"type": "http.disconnect"}


async def test_work_is_returned_while_the_client_waits() -> None:
    async def work() -> int:
        await asyncio.sleep(0)
        return 42

    assert await unless_left(asked(stays), work()) == 42


async def test_a_failure_stays_what_it_is() -> None:
    async def work() -> None:
        raise ValueError("no such arm")

    with pytest.raises(ValueError, match="no such arm"):
        await unless_left(asked(stays), work())


async def test_work_is_given_up_when_the_client_leaves() -> None:
    ended = []

    async def work() -> None:
        try:
            await asyncio.Event().wait()
        finally:
            ended.append(True)

    with pytest.raises(ClientDisconnect):
        await unless_left(asked(leaves), work())
    assert ended == [True]
