"""Which revision is the newest: told at once of this process's writing, soon of another one's."""

import subprocess
import sys
import time
from collections.abc import Iterator
from concurrent.futures import ThreadPoolExecutor
from contextlib import closing
from pathlib import Path
from types import SimpleNamespace
from typing import Any

import pytest

from kinematics.errors import KinematicsError
from service.errors import UnknownArm
from service.operations import heads
from service.operations.arms import Arms
from service.operations.heads import LOOKED_FOR_S, Heads
from service.storage.opening import open_storage
from service.storage.ports import Head
from service.wire.arms import ReadArm, read_arm

ROOT = Path(__file__).resolve().parents[3]
ARM = {
    "name": "one",
    "convention": "standard",
    "units": "m-rad",
    "rows": [{"joint": "revolute", "a": 0.4, "alpha": 0, "d": 0, "theta": 0}],
}


class Store:
    """A store that counts what it is asked, and a clock that somebody else turns."""

    def __init__(self) -> None:
        self.now = 100.0
        self.current: int | None = 1
        self.newest: dict[str, int | None] = {"one": 1}
        self.states = 0
        self.lookups = 0

    def state(self) -> int | None:
        self.states += 1
        return self.current

    def head_number(self, name: str) -> int | None:
        self.lookups += 1
        return self.newest.get(name)

    def write(self, number: int | None) -> None:
        assert self.current is not None
        self.current += 1
        self.newest["one"] = number

    def asked(self) -> tuple[int, int]:
        found = self.states, self.lookups
        self.states = self.lookups = 0
        return found


@pytest.fixture
def store(monkeypatch: pytest.MonkeyPatch) -> Store:
    made = Store()
    monkeypatch.setattr(heads, "monotonic", lambda: made.now)
    return made


def test_the_store_is_asked_once_in_a_while(store: Store) -> None:
    told = Heads(store)  # type: ignore[arg-type]
    assert [told.number("one") for _ in range(50)] == [1] * 50
    assert store.asked() == (1, 1)
    store.now += LOOKED_FOR_S
    assert told.number("one") == 1
    # Looked whether anything was written; nothing was, so the number is still known.
    assert store.asked() == (1, 0)


def test_what_another_process_writes_is_seen_when_the_look_has_aged(store: Store) -> None:
    told = Heads(store)  # type: ignore[arg-type]
    assert told.number("one") == 1
    for number in (2, 3, None, 4):
        store.write(number)
        store.now += LOOKED_FOR_S
        assert told.number("one") == number
    assert LOOKED_FOR_S <= 0.005


def test_what_this_process_writes_is_seen_at_once(store: Store) -> None:
    told = Heads(store)  # type: ignore[arg-type]
    assert told.number("one") == 1
    for number in (2, None, 3):
        store.write(number)
        told.forget()
        assert told.number("one") == number


def test_what_is_not_there_is_looked_for_again(store: Store) -> None:
    told = Heads(store)  # type: ignore[arg-type]
    assert [told.number("two"), told.number("two")] == [None, None]
    assert store.asked() == (1, 2)


def test_a_store_without_a_state_is_asked_every_time(store: Store) -> None:
    told = Heads(store)  # type: ignore[arg-type]
    store.current = None
    for number in (1, 2, None):
        store.newest["one"] = number
        assert told.number("one") == number
    assert store.asked()[1] == 3
    assert not told.at_once
    # A file that answers again is believed again, one that does not is not.
    store.current = 7
    assert (told.number("one"), told.at_once) == (None, True)
    store.now += LOOKED_FOR_S
    store.current = None
    assert (told.number("one"), told.at_once) == (None, False)


# --- with a real file ----------------------------------------------------------------------


@pytest.fixture
def file(tmp_path: Path) -> SimpleNamespace:
    return SimpleNamespace(database=str(tmp_path / "arms.db"))


@pytest.fixture
def arms(file: SimpleNamespace) -> Iterator[Arms[ReadArm]]:
    with closing(open_storage(file)) as opened:
        yield Arms(opened.arms, read_arm)


def test_own_writing_is_seen_at_once(arms: Arms[ReadArm], monkeypatch: pytest.MonkeyPatch) -> None:
    # No time goes by: what was looked up stays good but for what this process tells.
    monkeypatch.setattr(heads, "monotonic", lambda: 100.0)
    with pytest.raises(UnknownArm):
        arms.get("one")
    assert arms.create(ARM).record.revision == arms.get("one").record.revision == 1
    for number in range(2, 30):
        arms.replace("one", ARM | {"title": str(number)}, Head.ANY)
        assert arms.get("one").record.revision == number
        if number % 5 == 0:
            arms.remove("one")
            with pytest.raises(UnknownArm):
                arms.get("one")
            arms.create(ARM)
            assert arms.get("one").record.revision == number + 1
            break
    before = arms.get("one").record
    with pytest.raises(KinematicsError):
        arms.replace("one", ARM | {"default_tool": "saw"}, Head.ANY)
    assert arms.get("one").record == before


def test_own_writing_is_seen_while_others_read(arms: Arms[ReadArm]) -> None:
    """Reading threads look at any moment around a write; none of them brings the old head back."""
    arms.create(ARM)
    writing = [True]

    def read(_: int) -> bool:
        newest = 0
        while writing:
            seen = arms.get("one").record.revision
            if seen < newest:
                return False
            newest = seen
        return True

    with ThreadPoolExecutor(3) as pool:
        readers = [pool.submit(read, index) for index in range(3)]
        try:
            for number in range(2, 60):
                arms.replace("one", ARM | {"title": str(number)}, Head.ANY)
                assert arms.get("one").record.revision == number
        finally:
            writing.clear()
        assert all(reader.result() for reader in readers)


WRITE = """
import sys
from types import SimpleNamespace
from service.operations.arms import Arms
from service.storage.opening import open_storage
from service.storage.ports import Head
from service.wire.arms import read_arm
opened = open_storage(SimpleNamespace(database=sys.argv[1]), serving=False)
arms = Arms(opened.arms, read_arm)
document = dict(arms.get("one").record.document)
sys.stdin.readline()
for number in (2, 3):
    arms.replace("one", {**document, "title": str(number)}, Head.ANY)
    print("written", flush=True)
    sys.stdin.readline()
arms.remove("one")
print("written", flush=True)
opened.close()
"""


def test_what_another_process_writes_is_seen_within_milliseconds(
    arms: Arms[ReadArm], file: SimpleNamespace
) -> None:
    arms.create(ARM)
    other: Any = subprocess.Popen(
        [sys.executable, "-c", WRITE, file.database],
        cwd=ROOT,
        stdin=subprocess.PIPE,
        stdout=subprocess.PIPE,
        text=True,
    )
    try:
        for number in (2, 3, None):
            assert arms.get("one").record.revision == (number or 4) - 1
            other.stdin.write("go\n")
            other.stdin.flush()
            assert other.stdout.readline() == "written\n"
            time.sleep(LOOKED_FOR_S)
            if number is None:
                with pytest.raises(UnknownArm):
                    arms.get("one")
            else:
                assert arms.get("one").record.revision == number
        assert other.wait(30) == 0
    finally:
        other.kill()
        other.wait(10)
        other.stdin.close()
        other.stdout.close()
