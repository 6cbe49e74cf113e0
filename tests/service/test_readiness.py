"""Whether questions may be asked: kernels made ready, what fails, what is ended at a stop."""

import asyncio
import logging
from collections.abc import Sequence

import pytest

from service import readiness
from service.readiness import Readiness

pytestmark = pytest.mark.anyio


async def test_without_preparing_nobody_waits() -> None:
    made = Readiness()
    await asyncio.wait_for(made.postures.wait(), 10)
    await asyncio.wait_for(made.relations.wait(), 10)


async def test_what_fails_is_told_and_keeps_nobody_waiting(
    monkeypatch: pytest.MonkeyPatch, caplog: pytest.LogCaptureFixture
) -> None:
    tried: list[Sequence[str]] = []

    def no_memory(parts: Sequence[str]) -> None:
        tried.append(parts)
        raise MemoryError

    monkeypatch.setattr(readiness, "to_be_compiled", lambda parts: [])
    monkeypatch.setattr(readiness, "warm_up", no_memory)
    made = Readiness()
    with caplog.at_level(logging.ERROR):
        made.prepare()
        assert not made.relations.are_ready
        await asyncio.wait_for(made.postures.wait(), 10)
        await asyncio.wait_for(made.relations.wait(), 10)
    assert len(tried) == 2
    assert [record.levelname for record in caplog.records] == ["ERROR", "ERROR"]


async def test_after_a_stop_nothing_is_begun(monkeypatch: pytest.MonkeyPatch) -> None:
    begun: list[object] = []
    monkeypatch.setattr(readiness, "to_be_compiled", lambda parts: parts)
    monkeypatch.setattr(readiness, "warm_up", begun.append)
    monkeypatch.setattr(readiness.subprocess, "Popen", lambda *args, **more: begun.append(args))
    made = Readiness()
    made.stop()
    made.prepare()
    await asyncio.wait_for(made.postures.wait(), 10)
    assert begun == []
