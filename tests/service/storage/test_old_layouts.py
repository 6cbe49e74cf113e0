"""A database written by an earlier version opens and keeps every arm; a newer one is refused.

The rows are those that 0.1.0 wrote through its own operations (``data/layout_0001.json`` says so).
Left out: newer and damaged files (test_refused_files).
"""

import json
import os
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
import sqlalchemy as sa
from alembic.config import Config
from alembic.runtime.environment import EnvironmentContext
from alembic.runtime.migration import MigrationStep

from service.errors import StorageUnusable
from service.operations.arms import Arms
from service.operations.cells import Cells
from service.settings import Settings
from service.storage import layouts, migrate
from service.storage.engines import on_file
from service.storage.inspection import APPLICATION_ID
from service.storage.opening import open_storage
from service.storage.ports import Head
from service.storage.store import writing
from service.wire.arms import read_arm
from tests.conftest import POSTGRES
from tests.service.storage.conftest import wipe

WRITTEN = json.loads((Path(__file__).parent / "data" / "layout_0001.json").read_text("utf-8"))


def lay_out(connection: sa.Connection, layout: str) -> None:
    """Run the steps up to a layout, as an earlier version did, and put its rows in."""
    steps = migrate._steps()

    def first_steps(present: Any, _context: object) -> list[MigrationStep]:
        between = reversed(list(steps.iterate_revisions(layout, present or None)))
        return [MigrationStep.upgrade_from_script(steps.revision_map, step) for step in between]

    with EnvironmentContext(Config(), steps, fn=first_steps) as environment:
        environment.configure(connection=connection, transactional_ddl=True)
        environment.run_migrations()
    tables = sa.MetaData()
    tables.reflect(connection)
    for name in ("arm_revisions", "arm_heads"):
        connection.execute(tables.tables[name].insert(), WRITTEN[name])
    assert layouts.layout_of(connection) == layout


@pytest.fixture(params=["sqlite", "postgresql"])
def database(request: pytest.FixtureRequest, tmp_path: Path) -> Iterator[str]:
    """A database as 0.1.0 left it."""
    if request.param == "sqlite":
        path = tmp_path / "arms.db"
        path.touch()
        engine = on_file(path, "rw")
        with writing(engine) as connection:
            connection.exec_driver_sql(f"PRAGMA application_id = {APPLICATION_ID}")
            lay_out(connection, "0001")
        engine.dispose()
        yield str(path)
        return
    url = os.environ.get(POSTGRES, "")
    if not url:
        pytest.skip(f"{POSTGRES} names no PostgreSQL database to test on")
    engine = sa.create_engine(sa.make_url(url).set(drivername="postgresql+psycopg"))
    with engine.begin() as connection:
        wipe(connection)
        lay_out(connection, "0001")
    yield url
    # No other test is to take a half-way layout for its own.
    with engine.begin() as connection:
        wipe(connection)
    engine.dispose()


def test_every_revision_is_kept_as_it_was(database: str) -> None:
    opened = open_storage(Settings(database=database))
    try:
        assert opened.writable
        kept = [r for name in ("gone-arm", "old-arm", "press-arm")
                for r in opened.arms.revisions(name, 0, 10)]  # fmt: skip
        assert len(kept) == len(WRITTEN["arm_revisions"]) == 5
        for record, row in zip(kept, WRITTEN["arm_revisions"], strict=True):
            assert (record.name, record.revision) == (row["name"], row["revision"])
            assert record.document == json.loads(row["document"])
            digests = {key: row[key] for key in ("table_digest", "setup_digest")}
            assert (record.digests, record.digest) == (digests, row["digest"])
            assert (record.author, record.reason) == (row["author"], row["reason"])
            assert round(record.created_at.timestamp() * 1000) == row["created_at_ms"]
            hidden = record.hidden
            assert (None if hidden is None else hidden.reason) == row["hidden_reason"]
            assert record.cell is None
        heads = {head.name: head.revision for head in opened.arms.heads("", 10)}
        assert heads == {"old-arm": 2, "press-arm": 2}
        assert opened.cells.count() == 0
    finally:
        opened.close()


def test_its_arms_are_read_with_the_digests_they_had_and_can_move_into_a_cell(
    database: str,
) -> None:
    opened = open_storage(Settings(database=database))
    try:
        cells = Cells(opened.cells, opened.arms, read_arm)
        arms = Arms(opened.arms, read_arm, cells)
        for name in ("press-arm", "old-arm"):
            stored = arms.get(name)
            assert stored.read.digests._asdict() == {
                **stored.record.digests,
                "digest": stored.record.digest,
            }
        cells.create({"name": "press-cell", "units": "mm-deg"})
        moved = {**arms.get("press-arm").record.document, "cell": "press-cell"}
        assert arms.replace("press-arm", moved, Head.ANY).record.revision == 3
        assert arms.create({**moved, "name": "gone-arm"}).record.revision == 2
    finally:
        opened.close()


def test_a_second_opening_changes_nothing(database: str) -> None:
    open_storage(Settings(database=database)).close()
    opened = open_storage(Settings(database=database))
    try:
        assert opened.arms.count() == 2
        with opened.arms._engine.connect() as connection:
            assert layouts.layout_of(connection) == migrate.known_layouts()[0] == "0004"
    finally:
        opened.close()


def test_a_newer_layout_is_refused_on_a_server() -> None:
    url = os.environ.get(POSTGRES, "")
    if not url:
        pytest.skip(f"{POSTGRES} names no PostgreSQL database to test on")
    open_storage(Settings(database=url)).close()
    engine = sa.create_engine(sa.make_url(url).set(drivername="postgresql+psycopg"))
    set_layout = sa.text("UPDATE alembic_version SET version_num = :layout")
    with engine.begin() as connection:
        connection.execute(set_layout, {"layout": "9999"})
    try:
        with pytest.raises(StorageUnusable, match="newer version of armspan"):
            open_storage(Settings(database=url))
    finally:
        with engine.begin() as connection:
            connection.execute(set_layout, {"layout": migrate.known_layouts()[0]})
        engine.dispose()
