"""Threads that take turns: a piece that fails, and who has ended when that is told."""

import asyncio
import threading
import time

import pytest

from service.bulk.threads import TURN_S, Threads


def test_pieces_come_in_order() -> None:
    threads = Threads()
    found = asyncio.run(threads.pieces(lambda begin, end: list(range(begin, end)), 23, 5))
    assert [number for piece in found for number in piece] == list(range(23))
    threads.stop()


def test_a_failure_is_told_when_nobody_works_on_it_any_more() -> None:
    threads, fails, at_work = Threads(), threading.Event(), threading.Semaphore(2)
    made: list[int] = []

    def piece(begin: int, _end: int) -> int:
        assert at_work.acquire(blocking=False)
        try:
            if begin == 3:
                fails.set()
                raise ValueError("piece 3")
            time.sleep(2 * TURN_S)
            if begin == 2:
                assert fails.wait(5.0)
                time.sleep(0.1)
            made.append(begin)
        finally:
            at_work.release()
        return begin

    async def asked() -> list[int]:
        with pytest.raises(ValueError, match="piece 3"):
            await threads.pieces(piece, 500, 1)
        return list(made)

    told = asyncio.run(asked())
    time.sleep(0.1)
    assert made == told
    assert 2 in made
    assert len(made) < 10
    threads.stop()
