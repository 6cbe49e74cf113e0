"""Brings a database to the present layout, over a connection that is already open.

Left out: the steps themselves (``migrations/versions``); going back to an earlier layout.
"""

from pathlib import Path
from typing import Any

import sqlalchemy as sa
from alembic.config import Config
from alembic.runtime.environment import EnvironmentContext
from alembic.runtime.migration import MigrationStep
from alembic.script import ScriptDirectory

from service.storage.schema import METADATA

_FOLDER = Path(__file__).parent / "migrations"


def known_layouts() -> tuple[str, ...]:
    """Return the names of all layouts this version can start from, newest first.

    Examples
    --------
    >>> known_layouts()[-1]
    '0001'
    """
    return tuple(step.revision for step in _steps().walk_revisions())


def migrate(connection: sa.Connection) -> None:
    """Run the missing steps in the transaction of ``connection``; the caller commits."""
    steps = _steps()
    (newest,) = steps.get_heads()

    def missing(present: Any, _context: object) -> list[MigrationStep]:
        between = steps.iterate_revisions(newest, present or None)
        return [
            MigrationStep.upgrade_from_script(steps.revision_map, step)
            for step in reversed(list(between))
        ]

    with EnvironmentContext(Config(), steps, fn=missing) as environment:
        environment.configure(
            connection=connection, target_metadata=METADATA, transactional_ddl=True
        )
        environment.run_migrations()


def _steps() -> ScriptDirectory:
    return ScriptDirectory(_FOLDER)
