"""The steps lead to the tables the code asks, and run again without doing anything."""

import subprocess
import sys

import sqlalchemy as sa
from alembic.autogenerate import compare_metadata
from alembic.migration import MigrationContext
from sqlalchemy.dialects.postgresql.base import PGDialect
from sqlalchemy.schema import CreateTable

from service.storage import statements
from service.storage.engines import in_memory
from service.storage.layouts import LAYOUTS, lay_out, layout_of
from service.storage.migrate import known_layouts, migrate
from service.storage.schema import HEADS, METADATA, REVISIONS
from service.storage.store import writing


def test_the_steps_lead_to_the_tables_of_the_schema() -> None:
    with writing(in_memory()) as connection:
        migrate(connection)
        assert compare_metadata(MigrationContext.configure(connection), METADATA) == []
        tables = set(sa.inspect(connection).get_table_names())
    assert tables == {*METADATA.tables, "alembic_version"}


def test_the_steps_and_the_schema_make_the_same_columns_and_keys() -> None:
    """Compared as SQLite keeps them, since ``compare_metadata`` looks at neither keys nor order."""
    with writing(in_memory()) as migrated:
        migrate(migrated)
        by_steps = _columns(migrated)
    with writing(in_memory()) as created:
        lay_out(created)
        by_schema = _columns(created)
        assert layout_of(created) == LAYOUTS[0]
    assert by_steps == by_schema
    assert len(by_steps["document_revisions"]) == 14
    assert len(by_steps["document_heads"]) == 4 + 3


def test_the_layouts_are_those_that_the_steps_lead_through() -> None:
    assert known_layouts() == LAYOUTS


def test_a_new_database_needs_no_steps() -> None:
    script = (
        "import sys; from service.storage.engines import in_memory;"
        "from service.storage.layouts import lay_out; from service.storage.store import writing\n"
        "with writing(in_memory()) as connection: lay_out(connection); lay_out(connection)\n"
        "assert 'alembic' not in sys.modules"
    )
    subprocess.run([sys.executable, "-c", script], check=True)


def test_a_second_run_changes_nothing() -> None:
    with writing(in_memory()) as connection:
        assert layout_of(connection) is None
        migrate(connection)
        changes = connection.exec_driver_sql("SELECT total_changes()").scalar()
        migrate(connection)
        assert connection.exec_driver_sql("SELECT total_changes()").scalar() == changes
        assert layout_of(connection) == known_layouts()[0]


def test_what_fails_half_way_leaves_nothing() -> None:
    engine = in_memory()
    try:
        with writing(engine) as connection:
            migrate(connection)
            raise RuntimeError("power cut")
    except RuntimeError:
        pass
    with engine.connect() as connection:
        assert sa.inspect(connection).get_table_names() == []


def test_postgresql_sorts_names_by_their_bytes_and_locks_the_head_it_reads() -> None:
    """No server is asked here: this holds what the SQL for it says."""
    dialect = PGDialect()  # type: ignore[no-untyped-call]
    for table in (REVISIONS, HEADS):
        assert 'name VARCHAR(48) COLLATE "C"' in str(CreateTable(table).compile(dialect=dialect))
    assert "FOR UPDATE" in str(statements.LAST_NUMBER.compile(dialect=dialect))
    assert "FOR SHARE" in str(statements.HELD_NUMBER.compile(dialect=dialect))
    assert " FOR " not in str(statements.HEAD_NUMBER.compile(dialect=dialect))


def _columns(connection: sa.Connection) -> dict[str, list[tuple[object, ...]]]:
    return {
        table: [
            *map(tuple, connection.exec_driver_sql(f"PRAGMA table_info({table})")),
            *map(tuple, connection.exec_driver_sql(f"PRAGMA foreign_key_list({table})")),
        ]
        for table in METADATA.tables
    }
