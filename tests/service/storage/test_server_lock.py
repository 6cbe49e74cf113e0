"""One server process to a SQLite file; commands beside it; the lock dies with its process."""

import signal
import subprocess
import sys
from collections.abc import Callable, Iterator
from concurrent.futures import ThreadPoolExecutor
from contextlib import closing, contextmanager
from pathlib import Path

import pytest

from service.errors import StorageUnusable
from service.settings import Settings
from service.storage.opening import OpenStorage, open_storage
from service.storage.ports import Draft, Head

Drafts = Callable[..., Draft]

OTHER_SERVER = """
import sys, time
from service.settings import Settings
from service.storage.opening import open_storage
opened = open_storage(Settings(database=sys.argv[1]))
print("open", flush=True)
time.sleep(60)
"""


@contextmanager
def server_on(path: Path) -> Iterator[subprocess.Popen[str]]:
    process = subprocess.Popen(
        [sys.executable, "-c", OTHER_SERVER, str(path)], stdout=subprocess.PIPE, text=True
    )
    try:
        assert process.stdout is not None
        assert process.stdout.readline() == "open\n"
        yield process
    finally:
        process.kill()
        process.communicate()


def test_a_second_server_process_is_refused_until_the_first_is_gone(
    tmp_path: Path, draft: Drafts
) -> None:
    path = tmp_path / "arms.db"
    settings = Settings(database=str(path))
    with server_on(path) as process:
        with pytest.raises(StorageUnusable, match="another armspan server") as caught:
            open_storage(settings)
        assert "PostgreSQL" in caught.value.way_out
        process.send_signal(signal.SIGKILL)
        process.wait()
        with closing(open_storage(settings)) as opened:
            assert opened.writable


def test_a_command_writes_beside_a_running_server(tmp_path: Path, draft: Drafts) -> None:
    settings = Settings(database=str(tmp_path / "arms.db"))
    with closing(open_storage(settings)) as server:
        with closing(open_storage(settings, serving=False)) as command:
            assert command.writable
            written = command.arms.write(draft(), Head.ABSENT)
        assert server.arms.head("press-arm") == written
        assert server.arms.write(draft(), 1).revision == 2


def test_two_servers_in_one_process_are_refused_too(tmp_path: Path) -> None:
    settings = Settings(database=str(tmp_path / "arms.db"))
    with closing(open_storage(settings)), pytest.raises(StorageUnusable):
        open_storage(settings)


def test_another_name_of_the_same_file_is_the_same_file(tmp_path: Path) -> None:
    path, other = tmp_path / "arms.db", tmp_path / "link.db"
    with closing(open_storage(Settings(database=str(path)))):
        other.symlink_to(path)
        with pytest.raises(StorageUnusable, match="another armspan server"):
            open_storage(Settings(database=str(other)))


def test_of_servers_started_at_once_one_stays(tmp_path: Path) -> None:
    settings = Settings(database=str(tmp_path / "arms.db"))

    def start(_: int) -> OpenStorage | None:
        try:
            return open_storage(settings)
        except StorageUnusable:
            return None

    with ThreadPoolExecutor(4) as pool:
        opened = [one for one in pool.map(start, range(4)) if one is not None]
    assert len(opened) == 1
    opened[0].close()


def test_commands_that_make_the_database_at_once_all_get_it(tmp_path: Path, draft: Drafts) -> None:
    settings = Settings(database=str(tmp_path / "arms.db"))

    def add(number: int) -> None:
        with closing(open_storage(settings, serving=False)) as opened:
            opened.arms.write(draft(f"arm-{number}"), Head.ABSENT)

    with ThreadPoolExecutor(4) as pool:
        list(pool.map(add, range(4)))
    with closing(open_storage(settings)) as opened:
        assert opened.arms.count() == 4
