"""A store of each kind, a small disk, and drafts to write; nothing is taken from the machine."""

import os
import subprocess
from collections.abc import Callable, Iterator
from dataclasses import replace
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

import pytest
import sqlalchemy as sa

from service.settings import Settings
from service.storage.layouts import LAYOUTS, layout_of
from service.storage.opening import OpenStorage, open_storage
from service.storage.ports import Draft
from service.storage.schema import METADATA
from tests.conftest import POSTGRES

Drafts = Callable[..., Draft]


@pytest.fixture
def draft() -> Drafts:
    """Return a maker of drafts; keyword arguments replace its fields."""

    def make(name: str = "press-arm", **changes: Any) -> Draft:
        made = Draft(
            name=name,
            document={"name": name, "title": "Größe 0.1", "d": 0.1, "rows": []},
            digests={"table_digest": "a" * 64, "setup_digest": "b" * 64},
            digest="0123abcd",
            author="Ada",
            reason="first measurement",
            at=datetime(2026, 3, 4, 5, 6, 7, 891_234, tzinfo=UTC),
        )
        return replace(made, **changes)

    return make


@pytest.fixture(params=["sqlite-file", "sqlite-memory", "postgresql"])
def opened(request: pytest.FixtureRequest, tmp_path: Path) -> Iterator[OpenStorage]:
    """An empty, writable store on each database the service promises."""
    database = {
        "sqlite-file": str(tmp_path / "arms.db"),
        "sqlite-memory": ":memory:",
        "postgresql": os.environ.get(POSTGRES, ""),
    }[request.param]
    if not database:
        pytest.skip(f"{POSTGRES} names no PostgreSQL database to test on")
    if request.param == "postgresql":
        _empty(database)
    storage = open_storage(Settings(database=database))
    yield storage
    storage.close()


def _empty(url: str) -> None:
    engine = sa.create_engine(sa.make_url(url).set(drivername="postgresql+psycopg"))
    with engine.begin() as connection:
        if layout_of(connection) == LAYOUTS[0]:
            # Quicker than to lay the tables out anew for each test.
            for table in reversed(METADATA.sorted_tables):
                connection.execute(table.delete())
        else:
            wipe(connection)
    engine.dispose()


def wipe(connection: sa.Connection) -> None:
    """Drop all tables, of whatever layout."""
    present = sa.MetaData()
    present.reflect(connection)
    present.drop_all(connection)


class SmallDisk:
    """A file system of its own, which can be filled and turned read-only."""

    def __init__(self, folder: Path) -> None:
        self.folder = folder

    def fill(self, leave: int) -> None:
        """Take all space but ``leave`` bytes."""
        state = os.statvfs(self.folder)
        taken = state.f_bavail * state.f_frsize - leave
        try:
            (self.folder / "filler").write_bytes(b"x" * taken)
        except OSError:
            # A service that writes meanwhile leaves less than there was: it is full all the same.
            if leave:
                raise

    def free(self) -> None:
        """Give the space back."""
        (self.folder / "filler").unlink()

    def turn_read_only(self) -> None:
        """Remount read-only; no file may be open for writing."""
        _run("mount", "-o", "remount,ro", str(self.folder))


@pytest.fixture
def small_disk(tmp_path: Path) -> Iterator[SmallDisk]:
    """A real file system of 1 MiB; skipped where the tests may not mount one."""
    folder = tmp_path / "disk"
    folder.mkdir()
    try:
        _run("mount", "-t", "tmpfs", "-o", "size=1m", "tmpfs", str(folder))
    except (OSError, subprocess.CalledProcessError) as error:
        pytest.skip(f"a small file system cannot be mounted here: {error}")
    yield SmallDisk(folder)
    _run("umount", "--lazy", str(folder))


def _run(*command: str) -> None:
    subprocess.run(command, check=True, capture_output=True)
