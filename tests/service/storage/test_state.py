"""The state of the store changes with every write, by this process or another, and never else."""

import time
from pathlib import Path
from types import SimpleNamespace

import pytest

from service.operations.arms import Arms
from service.operations.heads import LOOKED_FOR_S
from service.storage.opening import open_storage
from service.wire.arms import read_arm

ARM = {
    "name": "one",
    "convention": "standard",
    "units": "m-rad",
    "rows": [{"joint": "revolute", "a": 0.4, "alpha": 0, "d": 0, "theta": 0}],
}


def test_what_another_process_writes_is_seen_once_the_last_look_has_aged(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    settings = SimpleNamespace(database=str(tmp_path / "arms.db"))
    here, there = open_storage(settings), open_storage(settings, serving=False)
    try:
        ours, theirs = Arms(here.arms, read_arm), Arms(there.arms, read_arm)
        ours.create(ARM)
        assert ours.get("one").record.revision == 1
        settled = here.arms.state()
        assert settled is not None
        assert ours.answers_at_once
        with monkeypatch.context() as patched:
            # Nothing was written in between: the database is not asked again.
            patched.setattr(here.arms, "head_number", None)
            assert ours.get("one").record.revision == 1
        assert here.arms.state() == settled
        theirs.replace("one", ARM | {"title": "moved"}, [f"1-{ours.get('one').record.digest}"])
        assert here.arms.state() != settled
        time.sleep(LOOKED_FOR_S)
        assert ours.get("one").record.revision == 2
    finally:
        here.close()
        there.close()


def test_a_store_in_memory_tells_no_state() -> None:
    opened = open_storage(SimpleNamespace(database=":memory:"))
    try:
        assert opened.arms.state() is None
        assert not Arms(opened.arms, read_arm).answers_at_once
    finally:
        opened.close()
