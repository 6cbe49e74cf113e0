"""Whether questions may be asked: kernels made ready, what fails, what is ended at a stop."""

import asyncio
import logging
import threading
from collections.abc import Sequence

import pytest

from service import readiness
from service.readiness import Readiness

pytestmark = pytest.mark.anyio


async def test_without_preparing_nobody_waits() -> None:
    made = Readiness()
    await asyncio.wait_for(made.postures.wait(), 10)
    await asyncio.wait_for(made.relations.wait(), 10)
    await asyncio.wait_for(made.reach.wait(), 10)


async def test_what_fails_is_told_and_keeps_nobody_waiting(
    monkeypatch: pytest.MonkeyPatch, caplog: pytest.LogCaptureFixture
) -> None:
    tried: list[Sequence[str]] = []
    seen = threading.Event()

    def no_memory(parts: Sequence[str]) -> None:
        seen.wait(10)
        tried.append(parts)
        raise MemoryError

    monkeypatch.setattr(readiness, "to_be_compiled", lambda parts: [])
    monkeypatch.setattr(readiness, "warm_up", no_memory)
    made = Readiness()
    with caplog.at_level(logging.ERROR):
        made.prepare()
        assert not made.relations.are_ready
        seen.set()
        for kernels in (made.postures, made.relations, made.reach):
            await asyncio.wait_for(kernels.wait(), 10)
    assert len(tried) == 3
    assert [record.levelname for record in caplog.records] == ["ERROR"] * 3


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


async def test_what_is_wanted_late_is_compiled_early_and_loaded_late(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    compiled: list[Sequence[str]] = []
    loaded: list[Sequence[str]] = []

    def to_be_compiled(parts: Sequence[str]) -> list[str]:
        compiled.append(parts)
        return []

    monkeypatch.setattr(readiness, "to_be_compiled", to_be_compiled)
    monkeypatch.setattr(readiness, "warm_up", loaded.append)
    made = Readiness()
    made.prepare()
    await asyncio.wait_for(made.relations.wait(), 10)
    for _ in range(200):
        if len(compiled) == 3:
            break
        await asyncio.sleep(0.01)
    assert compiled == [readiness.POSTURES, readiness.RELATIONS, readiness.REACH]
    assert loaded == [readiness.POSTURES, readiness.RELATIONS]
    assert not made.reach.are_ready
    await asyncio.wait_for(made.reach.wait(), 10)
    assert loaded[2:] == [readiness.REACH]
