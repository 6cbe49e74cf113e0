"""Which layouts of the database this version knows, and how one comes to the newest.

A new database is laid out as it is to be; only an older one takes the steps, and only then is the
package for them imported, which takes time and memory at every start. Left out: the steps
(migrate.py).
"""

import sqlalchemy as sa

from service.storage.schema import METADATA

LAYOUTS = ("0004", "0003", "0002", "0001")
"""Layouts this version can start from, newest first; a test holds them to the steps."""

_LAYOUT = sa.Table(
    "alembic_version",
    sa.MetaData(),
    sa.Column("version_num", sa.String(32), nullable=False),
    sa.PrimaryKeyConstraint("version_num", name="alembic_version_pkc"),
)


def layout_of(connection: sa.Connection) -> str | None:
    """Return the layout of the database, or None when it has none yet."""
    if not sa.inspect(connection).has_table(_LAYOUT.name):
        return None
    name = connection.execute(sa.select(_LAYOUT.c.version_num)).scalar()
    return None if name is None else str(name)


def lay_out(connection: sa.Connection) -> None:
    """Bring the database to the newest layout, in the transaction of ``connection``."""
    present = layout_of(connection)
    if present is None:
        METADATA.create_all(connection, checkfirst=False)
        _LAYOUT.create(connection, checkfirst=True)
        connection.execute(_LAYOUT.insert().values(version_num=LAYOUTS[0]))
    elif present != LAYOUTS[0]:
        from service.storage.migrate import migrate

        migrate(connection)
